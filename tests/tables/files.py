"""The reference files as they lie on disk, read without the product's own reader."""

from __future__ import annotations

import csv
from pathlib import Path

FOLDER = Path(__file__).resolve().parents[2] / "libtool" / "reference"
CEILING = Path(__file__).with_name("provenance_ceiling.csv")

VALUE_COLUMNS = ("value", "unit", "uncertainty", "as_printed", "unit_printed", "conversion", "conditions")
ORIGIN_COLUMNS = ("source", "locator", "seen_at", "origin", "note")
SOURCE_COLUMNS = (
    "key", "authors", "title", "journal", "year", "volume", "pages", "doi",
    "entered_by", "checked_by", "checked_on", "note",
)  # fmt: skip

ALL = tuple(sorted(path.stem for path in FOLDER.glob("*.csv")))
FACTS = tuple(name for name in ALL if name != "sources")
"""Every table but the list of sources."""


def cells(path: Path) -> list[list[str]]:
    """Header and rows, cell by cell."""
    with path.open(encoding="utf-8", newline="") as stream:
        return list(csv.reader(stream, strict=True))


def header(name: str) -> list[str]:
    return cells(FOLDER / f"{name}.csv")[0]


def rows(name: str) -> list[dict[str, str]]:
    first, *rest = cells(FOLDER / f"{name}.csv")
    return [dict(zip(first, line, strict=True)) for line in rest]


def with_column(*columns: str) -> list[str]:
    """Tables of facts that have all these columns."""
    return [name for name in FACTS if set(columns) <= set(header(name))]


def structures(cell: str) -> list[str]:
    """SMILES of a cell: alternatives are joined by "|", the partners of a pair by " + "."""
    return [text for part in cell.split("|") for text in part.split(" + ") if text]
