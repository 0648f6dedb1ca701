"""Plate formats: rows, columns, well names.

Rows are lettered, columns numbered, A1 is top left (ANSI/SLAS 4). Rows beyond
Z continue with AA.
"""

from __future__ import annotations

import string
from dataclasses import dataclass
from functools import cache

from libtool.errors import LayoutError
from libtool.reference.tables import number, table

__all__ = ["PlateFormat", "plate_format", "plate_formats"]


@dataclass(frozen=True, slots=True, kw_only=True)
class PlateFormat:
    """A grid of wells."""

    wells: int
    rows: int
    columns: int

    def well_name(self, row: int, column: int) -> str:
        """Name of the well at zero-based row and column: "A01", "AF48".

        Raises
        ------
        LayoutError
            Outside the plate.
        """
        if not (0 <= row < self.rows and 0 <= column < self.columns):
            raise LayoutError(
                f"well at row {row + 1}, column {column + 1}: a {self.wells}-well plate has {self.rows} rows and "
                f"{self.columns} columns."
            )
        return f"{_row_letters(row)}{column + 1:02d}"


def _row_letters(row: int) -> str:
    letters = string.ascii_uppercase
    return letters[row] if row < len(letters) else letters[row // len(letters) - 1] + letters[row % len(letters)]


@cache
def plate_formats() -> dict[int, PlateFormat]:
    """Known formats by number of wells, from `plate_formats.csv`."""
    sizes: dict[str, dict[str, int]] = {}
    for entry in table("plate_formats"):
        if entry["item"] in {"rows", "columns"}:
            sizes.setdefault(entry["format"], {})[entry["item"]] = int(number(entry))
    return {
        int(wells): PlateFormat(wells=int(wells), rows=size["rows"], columns=size["columns"])
        for wells, size in sorted(sizes.items(), key=lambda item: int(item[0]))
    }


def plate_format(wells: int) -> PlateFormat:
    """Format with this number of wells.

    Raises
    ------
    LayoutError
        There is none.
    """
    known = plate_formats()
    if wells not in known:
        raise LayoutError(f"plate format: received {wells}; known formats have {', '.join(map(str, known))} wells.")
    return known[wells]
