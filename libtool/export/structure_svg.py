"""Flat drawings for the report.

The report forbids inline styles, so what RDKit writes into style attributes
is written out as SVG attributes of the same meaning.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from html import escape

from rdkit import Chem
from rdkit.Chem.Draw import rdMolDraw2D

from libtool.records import BuildingBlock

__all__ = ["block_svg"]

_Colour = tuple[float, float, float]
_REACTING: _Colour = (0.74, 0.84, 0.95)
_FLAGGED: _Colour = (0.99, 0.79, 0.52)
_STYLE = re.compile(r"\s*style='([^']*)'")
_HEADER = re.compile(r"^.*?<!-- END OF HEADER -->\s*<rect[^>]*>\s*</rect>\s*", re.DOTALL)


def block_svg(
    block: BuildingBlock, *, reacting: Iterable[int], flagged: Iterable[int], width: int = 210, height: int = 140
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
    options.fixedBondLength = 26  # type: ignore[assignment]
    options.padding = 0.08  # type: ignore[assignment]
    options.annotationFontScale = 0.8  # type: ignore[assignment]
    drawer.DrawMolecule(
        drawn,
        highlightAtoms=marked,
        highlightAtomColors={index: colours[index] for index in marked},
        highlightBonds=list(bonds),
        highlightBondColors=bonds,
    )
    drawer.FinishDrawing()
    body = _STYLE.sub(_as_attributes, _HEADER.sub("", str(drawer.GetDrawingText()), count=1))
    title = escape(f"Structure of {block.id}")
    return f'<svg class="mol" viewBox="0 0 {width} {height}" role="img" aria-label="{title}">{body}'


def _as_attributes(style: re.Match[str]) -> str:
    pairs = (part.split(":", 1) for part in style[1].split(";") if ":" in part)
    return "".join(f' {name.strip()}="{value.strip()}"' for name, value in pairs)
