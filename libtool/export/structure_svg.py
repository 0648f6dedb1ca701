"""Drawings of blocks and products with the atoms that matter marked."""

from __future__ import annotations

from collections.abc import Iterable

from rdkit import Chem

from libtool.assets.drawing import Colour, structure_svg
from libtool.reaction.products import join
from libtool.records import BuildingBlock, Product

__all__ = ["block_svg", "product_svg"]

_REACTING: Colour = (0.74, 0.84, 0.95)
_FLAGGED: Colour = (0.99, 0.79, 0.52)


def block_svg(
    block: BuildingBlock, *, reacting: Iterable[int], flagged: Iterable[int] = (), width: int = 210, height: int = 140
) -> str:
    """Drawing of a block as one <svg> element without style attributes.

    Parameters
    ----------
    block : BuildingBlock
    reacting, flagged : iterable of int
        Atoms (zero-based) on blue or orange ground; orange wins. They carry
        their numbers, from 1, by which the sentences name them.
    width, height : int
        Pixels.
    """
    colours = dict.fromkeys(reacting, _REACTING) | dict.fromkeys(flagged, _FLAGGED)
    mol = Chem.Mol(block.mol)
    for index in colours:
        mol.GetAtomWithIdx(index).SetProp("atomNote", str(index + 1))
    return structure_svg(mol, colours, f"Structure of {block.id}", width, height)


def product_svg(product: Product, *, width: int = 210, height: int = 140) -> str:
    """Drawing of a product with the new bond on blue ground, see `block_svg`."""
    mol = join(product.nucleophile, product.electrophile)
    ends = {("nucleophile", product.nucleophile.atom), ("electrophile", product.electrophile.carbon)}
    new = [a.GetIdx() for a in mol.GetAtoms() if (a.GetProp("libtool_role"), a.GetIntProp("libtool_atom")) in ends]
    return structure_svg(mol, dict.fromkeys(new, _REACTING), "Structure of the product", width, height)
