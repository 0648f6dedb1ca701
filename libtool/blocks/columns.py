"""Which column holds the structure, which the id, the amount, the purity and so on.

Names decide first (several languages, `column_names.csv`), content second: a
column called "Structure" that holds catalogue numbers loses to one whose cells
parse. The guess is returned, so that a person can see it, and every part of it
can be overridden.
"""

from __future__ import annotations

import csv
import io
import re
import unicodedata
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import cache
from importlib import resources
from types import MappingProxyType

from rdkit import Chem, rdBase

from libtool.blocks.quantities import header_unit
from libtool.blocks.rows import MOLBLOCK_COLUMN, Rows
from libtool.errors import InputError

__all__ = ["ROLES", "Columns", "find_columns"]

ROLES = (
    "structure", "id", "name", "cas", "salt", "molecular_weight", "purity", "density", "state", "boiling_point",
    "amount", "concentration", "solvent", "place", "barcode", "price", "supplier", "hazard",
)  # fmt: skip
"""What a column can be taken for."""

_SAMPLE = 50


@dataclass(frozen=True, slots=True)
class Columns:
    """The columns in use; an empty text means there is none.

    `others` maps the remaining `ROLES` to column names.
    """

    structure: str
    id: str
    name: str
    others: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))


def find_columns(rows: Rows, mapping: Mapping[str, str] | None = None) -> Columns:
    """Columns of an input by role.

    Parameters
    ----------
    rows : Rows
    mapping : mapping, optional
        Overrides: keys among `ROLES`, values column names. An empty value
        says that there is no such column, whatever a name suggests.

    Returns
    -------
    Columns

    Raises
    ------
    InputError
        No column holds structures, or an override names a column that is not
        there.
    """
    chosen = dict(mapping or {})
    for role, column in chosen.items():
        if role not in ROLES:
            raise InputError(f"column mapping: {role!r} is not known; use one of {', '.join(ROLES)}.")
        if column and column not in rows.columns:
            raise InputError(
                f"{rows.name}: column {column!r} was asked for as the {role}, but the file has "
                f"{', '.join(map(repr, rows.columns))}. Give one of these."
            )
    structure = chosen.get("structure") or _structure_column(rows)
    taken = {structure, *chosen.values()}
    found = {"structure": structure}
    for role in ROLES[1:]:
        free = [c for c in rows.columns if c not in taken]
        found[role] = chosen[role] if role in chosen else _named(free, role, rows)
        taken.add(found[role])
    if not found["id"] and "id" not in chosen:
        # A barcode or a CAS number tells bottles or compounds apart as well.
        found["id"] = found["barcode"] or found["cas"]
    return Columns(
        structure=structure,
        id=found["id"],
        name=found["name"],
        others=MappingProxyType({role: column for role, column in found.items() if column and role not in _FIRST}),
    )


_FIRST = frozenset({"structure", "id", "name"})


@cache
def _names(role: str) -> tuple[str, ...]:
    """Plain column names of a role, the most telling first."""
    text = resources.files("libtool.blocks").joinpath("column_names.csv").read_text("utf-8")
    return tuple(_plain(row["name"]) for row in csv.DictReader(io.StringIO(text)) if row["role"] == role)


def _plain(name: str) -> str:
    """Lower-case letters and digits of a name, accents taken off."""
    letters = unicodedata.normalize("NFKD", name.casefold().replace("ß", "ss"))
    return re.sub(r"[^a-z0-9]", "", letters)


def _spellings(column: str) -> tuple[str, ...]:
    """A column name as it stands, and without the unit it carries."""
    if not header_unit(column):
        return (_plain(column),)
    bare = re.sub(r"[(\[][^)\]]*[)\]]", "", column).replace("%", "")
    shorter = re.sub(r"[\s_]+[^\s_]+$", "", column.strip())
    return tuple(dict.fromkeys(map(_plain, (column, bare, shorter))))


def _named(columns: Sequence[str], role: str, rows: Rows) -> str:
    filled = {c: _spellings(c) for c in columns if any(row[c].strip() for _, row in rows.rows)}
    for name in _names(role):
        for column, spellings in filled.items():
            if name in spellings:
                return column
    return ""


def _structure_column(rows: Rows) -> str:
    if MOLBLOCK_COLUMN in rows.columns:
        return MOLBLOCK_COLUMN
    shares = {column: _parsing_share(rows, column) for column in rows.columns}
    by_name = _named(rows.columns, "structure", rows) or next((c for c in rows.columns if "smiles" in _plain(c)), "")
    best = max(shares, key=lambda c: shares[c])
    # Half of the cells must parse before content may overrule a telling name.
    if by_name and (shares[by_name] > 0 or shares[best] < 0.5):
        return by_name
    if shares[best] >= 0.5:
        return best
    raise InputError(
        f"{rows.name}: no column holds structures (columns: {', '.join(map(repr, rows.columns))}). "
        "Name the SMILES column 'smiles', or pass mapping={'structure': <column>}."
    )


def _parsing_share(rows: Rows, column: str) -> float:
    """Share of sampled cells that are SMILES of more than one atom."""
    cells = [row[column].strip() for _, row in rows.rows[:_SAMPLE]]
    filled = [cell for cell in cells if cell]
    if not filled:
        return 0.0
    with rdBase.BlockLogs():
        good = sum(1 for cell in filled if _looks_like_structure(cell))
    return good / len(filled)


def _looks_like_structure(cell: str) -> bool:
    if cell.startswith("InChI="):
        return True
    # Plain numbers and words such as "no" or "CN1" must not count.
    if len(cell) > 500 or " " in cell or not re.search(r"[A-Za-z]", cell):
        return False
    mol = Chem.MolFromSmiles(cell, sanitize=False)
    return bool(mol) and mol.GetNumAtoms() > 1
