"""Rows of workbooks, Parquet files and DataFrames, turned into text.

A spreadsheet keeps numbers, not what a person sees: an id 0047 may lie in it
as 47 with a format of four zeros. Cells become the text that was shown as far
as the file says what was shown.
"""

from __future__ import annotations

import io
import re
import zipfile
from collections.abc import Iterable, Sequence
from datetime import date, datetime, time
from typing import TYPE_CHECKING

from libtool.blocks.text_formats import NumberedRow, unique_names
from libtool.errors import InputError

if TYPE_CHECKING:
    import pandas

__all__ = ["frame_rows", "parquet_rows", "workbook_rows"]

# A workbook is a zip file; a list of a million rows unpacks to some 500 MB.
_LARGEST_UNPACKED = 1_000_000_000
_ONLY_ZEROS = re.compile(r"^0+$")


def workbook_rows(data: bytes, name: str, sheet: str | None) -> tuple[tuple[str, ...], Sequence[NumberedRow]]:
    """Columns and rows of one sheet of an .xlsx workbook.

    Raises
    ------
    InputError
        Not a workbook, no such sheet, or several sheets with rows and none
        chosen.
    """
    import openpyxl

    _check_size(data, name)
    try:
        book = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=True, keep_links=False)
    except (zipfile.BadZipFile, KeyError, ValueError, TypeError) as error:
        raise InputError(f"{name}: it is not a readable .xlsx workbook ({error}). Save it again as .xlsx.") from error
    if sheet is not None and sheet not in book.sheetnames:
        raise InputError(f"{name}: there is no sheet {sheet!r}. Its sheets are {', '.join(book.sheetnames)}.")
    found = {
        title: rows
        for title in ([sheet] if sheet is not None else book.sheetnames)
        if len(rows := _filled_lines(book[title].iter_rows())) > 1
    }
    if len(found) > 1:
        raise InputError(
            f"{name}: the sheets {', '.join(map(repr, found))} all hold rows. Say which is the list, with sheet=..., "
            "or save it as a file of its own."
        )
    if not found:
        raise InputError(f"{name}: no sheet holds a header and a row below it. Give at least one structure.")
    lines = next(iter(found.values()))
    width = max(len(cells) for _, cells in lines)
    columns = unique_names([*lines[0][1], *[""] * (width - len(lines[0][1]))])
    return columns, [
        (number, dict(zip(columns, [*cells, *[""] * (width - len(cells))], strict=True))) for number, cells in lines[1:]
    ]


def _check_size(data: bytes, name: str) -> None:
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as packed:
            size = sum(entry.file_size for entry in packed.infolist())
    except zipfile.BadZipFile as error:
        raise InputError(f"{name}: it is not an .xlsx workbook ({error}). Save it again as .xlsx.") from error
    if size > _LARGEST_UNPACKED:
        raise InputError(f"{name}: it unpacks to {size:,} bytes (limit {_LARGEST_UNPACKED:,}). Split the list.")


def _filled_lines(rows: Iterable[Sequence[object]]) -> list[tuple[int, list[str]]]:
    """Row number and cell texts of every row that is not blank."""
    lines: list[tuple[int, list[str]]] = []
    for number, cells in enumerate(rows, start=1):
        texts = [_shown(getattr(c, "value", None), str(getattr(c, "number_format", ""))) for c in cells]
        while texts and not texts[-1].strip():
            texts.pop()
        if texts:
            lines.append((number, texts))
    return lines


def _shown(value: object, number_format: str) -> str:
    """Text of a cell, as a person saw it where the format says how."""
    if value is None:
        return ""
    if isinstance(value, bool | str):
        return str(value)
    if isinstance(value, datetime):
        # A date without a time of day is shown without one.
        return value.date().isoformat() if value.time() == time() else value.isoformat(sep=" ")
    if isinstance(value, date):
        return value.isoformat()
    if isinstance(value, float) and value.is_integer() and abs(value) < 1e15:
        value = int(value)
    if isinstance(value, int) and _ONLY_ZEROS.match(number_format):
        return f"{value:0{len(number_format)}d}"
    return str(value)


def parquet_rows(data: bytes, name: str) -> tuple[tuple[str, ...], Sequence[NumberedRow]]:
    """Columns and rows of a Parquet file.

    Raises
    ------
    InputError
        The file is damaged.
    """
    import pyarrow
    import pyarrow.parquet

    try:
        table = pyarrow.parquet.read_table(io.BytesIO(data))
    except (pyarrow.ArrowException, OSError) as error:
        raise InputError(f"{name}: it is not a readable Parquet file ({error}). Write it again.") from error
    columns = unique_names([str(c) for c in table.column_names])
    lists = [column.to_pylist() for column in table.columns]
    rows = [
        (number, dict(zip(columns, (_shown(cell, "") for cell in cells), strict=True)))
        for number, cells in enumerate(zip(*lists, strict=True), start=2)
    ]
    return columns, rows


def frame_rows(frame: pandas.DataFrame) -> tuple[tuple[str, ...], Sequence[NumberedRow]]:
    """Columns and rows of a DataFrame; its first row is row 2, as below a header."""
    columns = unique_names([str(c) for c in frame.columns])
    rows: list[NumberedRow] = []
    for number, cells in enumerate(frame.itertuples(index=False, name=None), start=2):
        # Missing values of any pandas kind differ from themselves or are None.
        texts = ["" if cell is None or cell != cell else str(cell) for cell in cells]
        rows.append((number, dict(zip(columns, texts, strict=True))))
    return columns, rows
