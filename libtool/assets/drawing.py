"""A structure as SVG, on the page of a notebook and in a report.

The report forbids inline styles, so what RDKit writes into style attributes
is written out as SVG attributes of the same meaning.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from html import escape

from rdkit import Chem
from rdkit.Chem.Draw import rdMolDraw2D

__all__ = ["Colour", "structure_svg"]

Colour = tuple[float, float, float]
"""Red, green and blue, 0 to 1."""

_STYLE = re.compile(r"\s*style='([^']*)'")
_HEADER = re.compile(r"^.*?<!-- END OF HEADER -->\s*<rect[^>]*>\s*</rect>\s*", re.DOTALL)


def structure_svg(mol: Chem.Mol, colours: Mapping[int, Colour], title: str, width: int, height: int) -> str:
    """Drawing of a molecule as one <svg> element without style attributes.

    Parameters
    ----------
    mol : rdkit.Chem.Mol
        Not changed; the atom property ``atomNote`` is written beside the atom.
    colours : mapping of int to Colour
        Ground of atoms (zero-based) and of the bonds between them.
    title : str
        Read out in place of the drawing.
    width, height : int
        Pixels.

    Returns
    -------
    str
        Without a ground of its own; drawn in dark colours, for a light one.
    """
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
