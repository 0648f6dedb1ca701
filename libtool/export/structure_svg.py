"""Flat drawings of structures, for the page and the report.

The report forbids inline styles, so what RDKit writes into style attributes
is written out as SVG attributes of the same meaning.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from html import escape

from rdkit import Chem
from rdkit.Chem.Draw import rdMolDraw2D

from libtool.reaction.products import join
from libtool.records import BuildingBlock, Product

__all__ = ["block_svg", "product_svg"]

_Colour = tuple[float, float, float]
_REACTING: _Colour = (0.74, 0.84, 0.95)
_FLAGGED: _Colour = (0.99, 0.79, 0.52)
_STYLE = re.compile(r"\s*style='([^']*)'")
_HEADER = re.compile(r"^.*?<!-- END OF HEADER -->\s*<rect[^>]*>\s*</rect>\s*", re.DOTALL)


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
    return _drawing(mol, colours, f"Structure of {block.id}", width, height)


def product_svg(product: Product, *, width: int = 210, height: int = 140) -> str:
    """Drawing of a product with the new bond on blue ground, see `block_svg`."""
    mol = join(product.nucleophile, product.electrophile)
    ends = {("nucleophile", product.nucleophile.atom), ("electrophile", product.electrophile.carbon)}
    new = [a.GetIdx() for a in mol.GetAtoms() if (a.GetProp("libtool_role"), a.GetIntProp("libtool_atom")) in ends]
    return _drawing(mol, dict.fromkeys(new, _REACTING), "Structure of the product", width, height)


def _drawing(mol: Chem.Mol, colours: dict[int, _Colour], title: str, width: int, height: int) -> str:
    drawn = rdMolDraw2D.PrepareMolForDrawing(mol, kekulize=True)
    marked = sorted(colours)
    bonds = {
        bond.GetIdx(): colours[bond.GetBeginAtomIdx()]
        for bond in drawn.GetBonds()
        if bond.GetBeginAtomIdx() in colours and bond.GetEndAtomIdx() in colours
    }
    drawer = rdMolDraw2D.MolDraw2DSVG(width, height)
    options = drawer.drawOptions()
    # The stubs of RDKit 2026.9 give the settings the type of their owner.
    options.fixedBondLength = 24  # type: ignore[assignment]
    options.padding = 0.08  # type: ignore[assignment]
    options.annotationFontScale = 0.9  # type: ignore[assignment]
    drawer.DrawMolecule(
        drawn,
        highlightAtoms=marked,
        highlightAtomColors={index: colours[index] for index in marked},
        highlightBonds=list(bonds),
        highlightBondColors=bonds,
    )
    drawer.FinishDrawing()
    body = _STYLE.sub(_as_attributes, _HEADER.sub("", str(drawer.GetDrawingText()), count=1))
    size = f'width="{width}" height="{height}" viewBox="0 0 {width} {height}"'
    return f'<svg class="mol" {size} role="img" aria-label="{escape(title)}">{body}'


def _as_attributes(style: re.Match[str]) -> str:
    pairs = (part.split(":", 1) for part in style[1].split(";") if ":" in part)
    return "".join(f' {name.strip()}="{value.strip()}"' for name, value in pairs)
