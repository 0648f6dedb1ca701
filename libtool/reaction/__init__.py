"""Reactive sites of a block, and the products of a pair.

`tautomers` moves hydrogens so that the drawing does not matter, `nucleophiles`
and `electrophiles` find the sites, `products` joins two blocks with inversion
at the attacked carbon and ranks what can form.
"""

from libtool.reaction.electrophiles import electrophile_sites
from libtool.reaction.nucleophiles import nucleophile_sites
from libtool.reaction.products import make_products

__all__ = ["electrophile_sites", "make_products", "nucleophile_sites"]
