"""Products as SDF, with flat coordinates and wedged bonds.

A structure is written so that reading it back gives the same molecule,
stereochemistry included: a double bond without drawn geometry is marked as
such, because its coordinates would otherwise give it one.
"""

from __future__ import annotations

from collections.abc import Callable

from rdkit import Chem
from rdkit.Chem import rdDepictor

from libtool.export.lists import PRODUCT_FIELDS, Place, product_cells, wells_of
from libtool.plate import PlateMap
from libtool.records import Product
from libtool.triage import Pair, Session

__all__ = ["products_sdf"]

# The first line of a record is a name; the format gives it 80 characters.
_LONGEST_NAME = 80


def products_sdf(session: Session, plate_map: PlateMap, *, progress: Callable[[int, int], None] | None = None) -> str:
    """SDF of every product that the pairs to make can give, in the order of products.csv.

    Parameters
    ----------
    session : Session
    plate_map : PlateMap
        Wells of `session.to_make()`.
    progress : callable, optional
        Called with (records done, records in all); a record takes about 1 ms.

    Returns
    -------
    str
        One record a product; its properties are those of products.csv.
    """
    places = wells_of(plate_map)
    made = [(pair, product) for pair in session.to_make() for product in pair.products]
    records: list[str] = []
    for pair, product in made:
        records.append(_record(pair, product, places[pair.key]))
        if progress:
            progress(len(records), len(made))
    return "".join(records)


def _record(pair: Pair, product: Product, place: Place) -> str:
    mol = Chem.MolFromSmiles(product.smiles)
    rdDepictor.Compute2DCoords(mol)
    name = _one_line(f"{pair.key[0]} + {pair.key[1]}, product {product.rank}")
    mol.SetProp("_Name", name[:_LONGEST_NAME])
    cells = zip(PRODUCT_FIELDS, product_cells(pair, product, place), strict=True)
    properties = "".join(f">  <{field}>\n{_one_line(str(cell))}\n\n" for field, cell in cells)
    return f"{Chem.MolToMolBlock(mol)}{properties}$$$$\n"


def _one_line(text: str) -> str:
    """Text that cannot end a property or a record: one line, not starting like a mark of the format."""
    line = " ".join(text.split())
    return f"'{line}" if line.startswith(("$$$$", ">")) else line
