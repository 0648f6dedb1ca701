"""Rows of the literature tables, read once and never altered.

A table is a CSV file of this folder: UTF-8, sorted by `key`, one fact per row.
A row with a number says what the source prints (`as_printed`, with trailing
zeros dropped) and how the product's `value` follows from it (`conversion`);
tables without numbers hold patterns, names or cautions. Every row names its
source, where it was read (`seen_at`, `memory` when it was not) and how the
number came about (`origin`: measured, compiled, derived, estimated or
judgement). Nothing is read before the first question is asked.
"""

from __future__ import annotations

import csv
import hashlib
import io
import math
import re
from collections.abc import Mapping
from functools import cache
from importlib.resources import files
from types import MappingProxyType
from typing import TypeAlias

from libtool.errors import TableError

__all__ = ["Row", "cite", "fingerprint", "number", "provenance_counts", "row", "table"]

Row: TypeAlias = Mapping[str, str]
"""One row, read-only: column name to cell, an empty cell is an empty string."""

_SUFFIX = ".csv"
_UNCERTAIN_ORIGINS = ("judgement", "estimated")


def table(name: str) -> tuple[Row, ...]:
    """Rows of one table, sorted by key.

    Parameters
    ----------
    name : str
        File name without ".csv", for instance "pka".

    Returns
    -------
    tuple of Row
        Read-only; the same object at every call.

    Raises
    ------
    TableError
        There is no such table, or its file is damaged.

    Examples
    --------
    >>> table("plate_formats")[0]["source"]
    'ansi_slas_4_2004'
    """
    return tuple(_indexed(name).values())


def row(name: str, key: str) -> Row:
    """Row of a table with this key.

    Parameters
    ----------
    name : str
        Table, as for `table`.
    key : str
        Cell of the first column.

    Returns
    -------
    Row

    Raises
    ------
    TableError
        The table is missing or has no such row.

    Examples
    --------
    >>> row("pka", "hydrogen_bromide_water")["compound"]
    'hydrogen bromide'
    """
    found = _indexed(name).get(key)
    if found is None:
        raise TableError(
            f"{name}{_SUFFIX}: received the key {key!r}, which no row carries. Use a key of the first "
            "column, or add the row with its source."
        )
    return found


def number(row: Row, column: str = "value") -> float:
    """Number in one cell of a row, in the unit that the row states.

    Parameters
    ----------
    row : Row
    column : str
        Column to read.

    Returns
    -------
    float
        Finite.

    Raises
    ------
    TableError
        The cell is missing, empty or not a finite number.

    Examples
    --------
    >>> number(row("plate_formats", "well_pitch_96"))
    9.0
    """
    if column not in row:
        raise TableError(f"{_place(row)}: no column {column!r}. Columns are {', '.join(row)}.")
    text, place = row[column], f"{_place(row)}, column {column!r}"
    if not text:
        raise TableError(f"{place}: empty where a number is needed. Fill the cell from the source.")
    try:
        value = float(text)
    except ValueError as error:
        raise TableError(f"{place}: received {text!r}, which is not a number. Correct the cell.") from error
    if not math.isfinite(value):
        raise TableError(f"{place}: received {text!r}, which is not finite. Correct the cell.")
    return value


def cite(key: str) -> str:
    """Citation in one line, for screens and exports.

    Parameters
    ----------
    key : str
        Cell of a `source` column: one key of `sources.csv`, or several
        joined by ";".

    Returns
    -------
    str
        Authors, title, journal, year, volume and pages as far as known;
        several citations are joined by "; ".

    Raises
    ------
    TableError
        A key is not in `sources.csv`.

    Examples
    --------
    >>> cite("swain_1953_jacs;common_practice")
    'C. G. Swain, C. B. Scott, J. Am. Chem. Soc. 1953, 75, 141-147; common practice, no source'
    """
    return "; ".join(_citation(row("sources", part)) for part in key.split(";"))


@cache
def fingerprint() -> str:
    """SHA-256 of all tables, 64 hexadecimal digits; exports show the first 12.

    Two installations with the same fingerprint give the same numbers. Line
    ends do not count, file names do.

    Returns
    -------
    str
    """
    digest = hashlib.sha256()
    for name in _names():
        # Lengths keep the end of one file apart from the start of the next.
        content = _text(name).encode()
        digest.update(f"{name} {len(content)}\n".encode())
        digest.update(content)
    return digest.hexdigest()


def provenance_counts() -> Mapping[str, Mapping[str, int]]:
    """How many rows of each table rest on memory, judgement or an estimate.

    Returns
    -------
    mapping of str to mapping of str to int
        Table name to "memory" (`seen_at` mentions memory, also in part),
        "judgement" and "estimated" (`origin`). A row can count twice. Tables
        without these columns are left out.
    """
    counts: dict[str, Mapping[str, int]] = {}
    for name in _names():
        rows = table(name)
        if not rows or not {"seen_at", "origin"} <= rows[0].keys():
            continue
        count = {"memory": sum(re.search(r"\bmemory\b", r["seen_at"]) is not None for r in rows)}
        count |= {origin: sum(r["origin"] == origin for r in rows) for origin in _UNCERTAIN_ORIGINS}
        counts[name] = MappingProxyType(count)
    return MappingProxyType(counts)


def _citation(source: Row) -> str:
    volume = ", ".join(part for part in (source["volume"], source["pages"]) if part)
    printed = " ".join(part for part in (source["journal"], source["year"]) if part)
    return ", ".join(part for part in (source["authors"], source["title"], printed, volume) if part)


@cache
def _names() -> tuple[str, ...]:
    here = files("libtool.reference")
    return tuple(sorted(f.name.removesuffix(_SUFFIX) for f in here.iterdir() if f.name.endswith(_SUFFIX)))


def _place(row: Row) -> str:
    """File and row for a message; a row that somebody made by hand has no file."""
    key = row.get("key", "")
    name = next((name for name in _names() if _indexed(name).get(key) is row), None)
    return f"row {key!r}" if name is None else f"{name}{_SUFFIX}, row {key!r}"


def _text(name: str) -> str:
    raw = files("libtool.reference").joinpath(name + _SUFFIX).read_bytes()
    try:
        text = raw.decode("utf-8")
    except UnicodeDecodeError as error:
        raise TableError(f"{name}{_SUFFIX}: byte {error.start} is not UTF-8. Save it as UTF-8.") from error
    return text.replace("\r\n", "\n")


@cache
def _indexed(name: str) -> Mapping[str, Row]:
    if name not in _names():
        raise TableError(f"table: received {name!r}, which does not exist. Tables are {', '.join(_names())}.")
    return _parsed(f"{name}{_SUFFIX}", _text(name))


def _parsed(file: str, text: str) -> Mapping[str, Row]:
    try:
        header, *lines = csv.reader(io.StringIO(text, newline=""), strict=True)
    except (csv.Error, ValueError) as error:
        raise TableError(f"{file}: not a CSV file with a header ({error}). Restore the file.") from error
    if header[:1] != ["key"]:
        raise TableError(f"{file}: the first column is {header[:1]}, it must be 'key'. Restore the header.")
    rows: dict[str, Row] = {}
    for line in lines:
        if len(line) != len(header):
            raise TableError(
                f"{file}, row {line[:1]}: {len(line)} cells under {len(header)} columns. Quote cells that hold a comma."
            )
        if line[0] in rows:
            raise TableError(f"{file}: two rows have the key {line[0]!r}. Give each row a key of its own.")
        rows[line[0]] = MappingProxyType(dict(zip(header, line, strict=True)))
    return MappingProxyType(rows)
