"""What the store holds: one container per usable row, with its amounts.

A compound that is there in three bottles is one block and three containers.
Numbers are read with their units; what cannot be read becomes a remark on the
row, the container stays.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from rdkit import Chem

from libtool.blocks.columns import Columns
from libtool.blocks.quantities import Quantity, Unclear, decimal_mark, header_unit, parse_quantity
from libtool.blocks.rows import Rows
from libtool.records import RowIssue

__all__ = ["Container", "Shelf"]

_KINDS: Mapping[str, tuple[str, ...]] = {
    "amount": ("mass", "amount", "volume"),
    "purity": ("fraction",),
    "density": ("density",),
    "boiling_point": ("temperature",),
    "concentration": ("molarity", "fraction"),
    "molecular_weight": ("molecular_weight",),
}
# Units that are meant when a list gives a bare number; anything else would be
# a guess that changes what is weighed.
_PLAIN_UNIT = {"molecular_weight": "g/mol"}
_TEXTS = ("place", "barcode", "price", "supplier", "hazard", "state", "cas", "salt")

MOLECULAR_WEIGHT_TOLERANCE = 0.5
"""Largest difference, g/mol, between a printed and a computed molecular weight.

Lists print one decimal or none, and use atomic weights of different years.
"""


@dataclass(frozen=True, slots=True, kw_only=True)
class Container:
    """One bottle, vial or solution of a block.

    Parameters
    ----------
    block_id : str
        Id of the block (the first row with this parent structure).
    id : str
        Id of this row as it stood in the file.
    row : int
    counterions : tuple of str
        SMILES of the salt and solvent components of this row.
    amount : Quantity or None
        Mass (mg), amount of substance (mmol) or volume (mL).
    purity : Quantity or None
        Percent by mass.
    concentration : Quantity or None
        Of a solution, mol/L or percent; `solvent` as written.
    density : Quantity or None
        g/mL.
    boiling_point : Quantity or None
        Degrees Celsius.
    weight_fits : str
        What the printed molecular weight belongs to: "parent", "salt",
        "neither", or empty without one.
    texts : tuple of (str, str)
        Place, barcode, price, supplier, hazard, state, CAS number and salt as
        written, by role.
    """

    block_id: str
    id: str
    row: int
    counterions: tuple[str, ...]
    amount: Quantity | None = None
    purity: Quantity | None = None
    concentration: Quantity | None = None
    density: Quantity | None = None
    boiling_point: Quantity | None = None
    weight_fits: str = ""
    texts: tuple[tuple[str, str], ...] = ()


class Shelf:
    """Reads the containers of one list; the units and decimal marks are those of its columns."""

    def __init__(self, rows: Rows, columns: Columns) -> None:
        self._columns = {role: column for role, column in columns.others.items() if role in _KINDS}
        self._texts = {role: column for role, column in columns.others.items() if role in _TEXTS}
        self._solvent = columns.others.get("solvent", "")
        self._units = {r: header_unit(c) or _PLAIN_UNIT.get(r, "") for r, c in self._columns.items()}
        self._marks = {r: decimal_mark(cells[c] for _, cells in rows.rows) for r, c in self._columns.items()}

    def container(
        self, row: int, cells: Mapping[str, str], block_id: str, own_id: str, parent: Chem.Mol, ions: tuple[str, ...]
    ) -> tuple[Container, list[RowIssue]]:
        """Container of one row, and a remark for each cell that could not be read."""
        remarks: list[RowIssue] = []
        found: dict[str, Quantity] = {}
        for role, column in self._columns.items():
            if not cells[column].strip():
                continue
            read = parse_quantity(cells[column], _KINDS[role], unit=self._units[role], mark=self._marks[role])
            read = _plausible(role, read)
            if isinstance(read, Unclear):
                remarks.append(_remark(row, column, cells[column], read))
            else:
                found[role] = read
        if self._solvent and "concentration" in found and not found["concentration"].solvent:
            found["concentration"] = replace(found["concentration"], solvent=cells[self._solvent].strip())
        weight = found.pop("molecular_weight", None)
        fits = _weight_fits(weight.value, parent, ions) if weight else ""
        if weight and fits == "neither":
            with_salt = f", and {_salt_weight(parent, ions):.1f} with its salt" if ions else ""
            unclear = Unclear(
                f"the structure weighs {_weight(parent):.1f} g/mol{with_salt}",
                "Check structure and salt against the label",
            )
            remarks.append(_remark(row, self._columns["molecular_weight"], f"{weight.value:g}", unclear))
        container = Container(
            block_id=block_id,
            id=own_id,
            row=row,
            counterions=ions,
            weight_fits=fits,
            texts=tuple((r, cells[c].strip()) for r, c in self._texts.items() if cells[c].strip()),
            **found,
        )
        return container, remarks


def _plausible(role: str, read: Quantity | Unclear) -> Quantity | Unclear:
    """Refuse what no bottle holds."""
    if isinstance(read, Unclear):
        return read
    if role == "purity" and not 0 < read.value <= 100:
        return Unclear(f"a purity of {read.value:g} % does not exist", "Write it in percent, above 0 and up to 100")
    if role in {"amount", "density", "molecular_weight", "concentration"} and read.value < 0:
        return Unclear(f"{read.value:g} {read.unit} is less than nothing", "Write what is in the bottle")
    return read


def _weight_fits(printed: float, parent: Chem.Mol, ions: tuple[str, ...]) -> str:
    if abs(printed - _weight(parent)) <= MOLECULAR_WEIGHT_TOLERANCE:
        return "parent"
    if ions and abs(printed - _salt_weight(parent, ions)) <= MOLECULAR_WEIGHT_TOLERANCE:
        return "salt"
    return "neither"


def _weight(mol: Chem.Mol) -> float:
    """Molecular weight, g/mol; labelled atoms count with the mass of their isotope."""
    hydrogen = Chem.GetPeriodicTable().GetAtomicWeight(1)
    return float(sum(atom.GetMass() + atom.GetTotalNumHs() * hydrogen for atom in mol.GetAtoms()))


def _salt_weight(parent: Chem.Mol, ions: tuple[str, ...]) -> float:
    """Molecular weight with every component that was drawn, g/mol.

    Ions drawn as such carry their charge; the parent was neutralised, so the
    proton that went with the charge is put back or taken off.
    """
    parts = [Chem.MolFromSmiles(ion) for ion in ions]
    charge = sum(Chem.GetFormalCharge(part) for part in parts)
    return _weight(parent) + sum(map(_weight, parts)) - charge * Chem.GetPeriodicTable().GetAtomicWeight(1)


def _remark(row: int, column: str, received: str, unclear: Unclear) -> RowIssue:
    return RowIssue(row=row, column=column, received=received, reason=unclear.reason, remedy=unclear.remedy)
