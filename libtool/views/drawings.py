"""Structures as SVG, with the atoms that matter marked."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

from rdkit import Chem
from rdkit.Chem.Draw import rdMolDraw2D

from libtool.errors import ChemistryError
from libtool.reaction.products import join

if TYPE_CHECKING:
    from libtool.records import BuildingBlock, Product

__all__ = ["block_svg", "product_svg"]

_Colour = tuple[float, float, float]
_REACTING: _Colour = (0.70, 0.82, 0.96)
_FLAGGED: _Colour = (0.99, 0.80, 0.55)


def block_svg(
    block: BuildingBlock, *, reacting: Iterable[int], flagged: Iterable[int] = (), width: int = 150, height: int = 105
) -> str:
    """Drawing of a block.

    Parameters
    ----------
    block : BuildingBlock
    reacting, flagged : iterable of int
        Atoms (zero-based) to put on blue or orange ground; orange wins.
    width, height : int
        Pixels.

    Returns
    -------
    str
        One <svg> element, on white; marked atoms carry their number, from 1.
    """
    colours = dict.fromkeys(reacting, _REACTING) | dict.fromkeys(flagged, _FLAGGED)
    mol = Chem.Mol(block.mol)
    # Sentences and pictures name atoms by these numbers.
    for index in colours:
        mol.GetAtomWithIdx(index).SetProp("atomNote", str(index + 1))
    return _svg(mol, colours, width, height)


def product_svg(product: Product, *, width: int = 200, height: int = 105) -> str:
    """Drawing of a product with the new bond on blue ground, see `block_svg`."""
    try:
        mol = join(product.nucleophile, product.electrophile)
    except ChemistryError:
        return _svg(Chem.MolFromSmiles(product.smiles), {}, width, height)
    ends = {("nucleophile", product.nucleophile.atom), ("electrophile", product.electrophile.carbon)}
    new = [a.GetIdx() for a in mol.GetAtoms() if (a.GetProp("libtool_role"), a.GetIntProp("libtool_atom")) in ends]
    return _svg(mol, dict.fromkeys(new, _REACTING), width, height)


def _svg(mol: Chem.Mol, colours: dict[int, _Colour], width: int, height: int) -> str:
    drawer = rdMolDraw2D.MolDraw2DSVG(width, height)
    options = drawer.drawOptions()
    # The stubs of RDKit 2026.9 give the settings the type of their owner.
    options.fixedBondLength = 22  # type: ignore[assignment]
    options.padding = 0.08  # type: ignore[assignment]
    options.annotationFontScale = 0.9  # type: ignore[assignment]
    drawn = rdMolDraw2D.PrepareMolForDrawing(Chem.Mol(mol), kekulize=True)
    marked = sorted(colours)
    bonds = [b.GetIdx() for b in drawn.GetBonds() if b.GetBeginAtomIdx() in colours and b.GetEndAtomIdx() in colours]
    drawer.DrawMolecule(
        drawn,
        highlightAtoms=marked,
        highlightAtomColors={i: colours[i] for i in marked},
        highlightBonds=bonds,
        highlightBondColors={b: colours[drawn.GetBondWithIdx(b).GetBeginAtomIdx()] for b in bonds},
    )
    drawer.FinishDrawing()
    text = str(drawer.GetDrawingText())
    return text[text.index("<svg") :]
