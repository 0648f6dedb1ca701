"""Which column holds the structure, which the id, which the name.

Names decide first, content second: a column called "Structure" that holds
catalogue numbers loses to one whose cells parse. The guess is returned, so
that a person can see it, and every part of it can be overridden.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from rdkit import Chem, rdBase

from libtool.blocks.rows import MOLBLOCK_COLUMN, Rows
from libtool.errors import InputError

__all__ = ["Columns", "find_columns"]

_STRUCTURE_NAMES = ("smiles", "canonicalsmiles", "isomericsmiles", "structure", "smi", "mol", MOLBLOCK_COLUMN)
_ID_NAMES = (
    "id", "blockid", "compoundid", "reagentid", "cpdid", "catalogid", "catalognumber", "catalogno", "catno", "code",
    "identifier", "barcode", "number", "nr", "no", "cas", "title",
)  # fmt: skip
_NAME_NAMES = ("name", "compoundname", "chemicalname", "iupacname", "reagent", "description")
_SAMPLE = 50


@dataclass(frozen=True, slots=True)
class Columns:
    """The columns in use; an empty text means there is none."""

    structure: str
    id: str
    name: str


def find_columns(rows: Rows, mapping: Mapping[str, str] | None = None) -> Columns:
    """Structure, id and name columns of an input.

    Parameters
    ----------
    rows : Rows
    mapping : mapping, optional
        Overrides: keys among "structure", "id", "name", values column names.

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
    for part, column in chosen.items():
        if part not in {"structure", "id", "name"}:
            raise InputError(f"column mapping: {part!r} is not a part; use structure, id or name.")
        if column not in rows.columns:
            raise InputError(
                f"{rows.name}: column {column!r} was asked for as the {part}, but the file has "
                f"{', '.join(map(repr, rows.columns))}. Give one of these."
            )
    structure = chosen.get("structure") or _structure_column(rows)
    rest = [c for c in rows.columns if c != structure]
    return Columns(
        structure=structure,
        id=chosen.get("id") or _named(rest, _ID_NAMES, rows),
        name=chosen.get("name") or _named(rest, _NAME_NAMES, rows),
    )


def _plain(name: str) -> str:
    return re.sub(r"[^a-z0-9]", "", name.lower())


def _named(columns: Sequence[str], wanted: Sequence[str], rows: Rows) -> str:
    plain = {c: _plain(c) for c in columns if any(row[c].strip() for _, row in rows.rows)}
    for name in wanted:
        for column, text in plain.items():
            if text == name:
                return column
    return ""


def _structure_column(rows: Rows) -> str:
    if MOLBLOCK_COLUMN in rows.columns:
        return MOLBLOCK_COLUMN
    shares = {column: _parsing_share(rows, column) for column in rows.columns}
    by_name = _named(rows.columns, _STRUCTURE_NAMES, rows) or next(
        (c for c in rows.columns if "smiles" in _plain(c)), ""
    )
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
        good = sum(1 for cell in filled if _looks_like_smiles(cell))
    return good / len(filled)


def _looks_like_smiles(cell: str) -> bool:
    # Plain numbers and words such as "no" or "CN1" must not count.
    if len(cell) > 500 or " " in cell or not re.search(r"[A-Za-z]", cell):
        return False
    mol = Chem.MolFromSmiles(cell, sanitize=False)
    return bool(mol) and mol.GetNumAtoms() > 1
