"""Tables, SMILES lists and SDF as text, cut into numbered rows of cells."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator, Mapping, Sequence

from libtool.errors import InputError

__all__ = ["MOLBLOCK_COLUMN", "NumberedRow", "sdf_rows", "smi_rows", "table_rows", "unique_names"]

NumberedRow = tuple[int, Mapping[str, str]]

MOLBLOCK_COLUMN = "molblock"
"""Name under which an SDF record's structure travels."""

_TITLE_COLUMN = "title"
_DELIMITERS = ",;\t|"
# A cell longer than this is no structure and no note a person wrote.
_LONGEST_CELL = 1_000_000


def table_rows(text: str, name: str, delimiter: str) -> tuple[tuple[str, ...], list[NumberedRow]]:
    """Columns and rows of a delimited table; the header is row 1, an empty delimiter is looked for."""
    # Null bytes come from damaged exports; the csv module refuses them.
    lines = text.replace("\x00", "").replace("\r\n", "\n").replace("\r", "\n")
    header_line = lines.lstrip("\n").split("\n", 1)[0]
    delimiter = delimiter or max(_DELIMITERS, key=header_line.count)
    csv.field_size_limit(_LONGEST_CELL)
    reader = csv.reader(io.StringIO(lines), delimiter=delimiter)
    columns: tuple[str, ...] = ()
    rows: list[NumberedRow] = []
    number = 0
    try:
        for number, cells in enumerate(reader, start=1):
            if not any(cell.strip() for cell in cells):
                continue
            if not columns:
                columns = unique_names(cells)
                continue
            extra = len(cells) - len(columns)
            if extra > 0:
                columns += tuple(f"unnamed {len(columns) + i + 1}" for i in range(extra))
            rows.append((number, dict(zip(columns, cells, strict=False))))
    except csv.Error as error:
        raise InputError(
            f"{name}: row {number + 1} cannot be split into cells ({error}). "
            "Look for an unclosed quotation mark and save the file again."
        ) from error
    return columns, [(n, {c: row.get(c, "") for c in columns}) for n, row in rows]


def unique_names(cells: Sequence[str]) -> tuple[str, ...]:
    """Column names, blanks and repeats made distinct so that no cell is lost."""
    names: list[str] = []
    for position, cell in enumerate(cells, start=1):
        name = cell.strip() or f"unnamed {position}"
        base, copy = name, 2
        while name in names:
            name = f"{base} ({copy})"
            copy += 1
        names.append(name)
    return tuple(names)


def smi_rows(text: str) -> tuple[tuple[str, ...], list[NumberedRow]]:
    """Rows of a list of structures, each followed by a blank and its id."""
    rows: list[NumberedRow] = []
    for number, line in enumerate(text.splitlines(), start=1):
        if not line.strip():
            continue
        structure, *rest = line.strip().split(None, 1)
        if number == 1 and structure.lower() in {"smiles", "structure"}:
            continue
        rows.append((number, {"smiles": structure, "id": rest[0].strip() if rest else ""}))
    return ("smiles", "id"), rows


def sdf_rows(text: str) -> tuple[tuple[str, ...], list[NumberedRow]]:
    """Records of an SDF file, numbered from 1; data fields become columns."""
    columns: list[str] = [_TITLE_COLUMN, MOLBLOCK_COLUMN]
    rows: list[NumberedRow] = []
    for number, record in enumerate(_sdf_records(text), start=1):
        cells = dict(_sdf_cells(record))
        columns.extend(name for name in cells if name not in columns)
        rows.append((number, cells))
    return tuple(columns), [(n, {c: row.get(c, "") for c in columns}) for n, row in rows]


def _sdf_records(text: str) -> Iterator[list[str]]:
    record: list[str] = []
    for line in text.splitlines():
        if line.startswith("$$$$"):
            yield record
            record = []
        else:
            record.append(line)
    if any(line.strip() for line in record):
        yield record


def _sdf_cells(record: list[str]) -> Iterator[tuple[str, str]]:
    yield _TITLE_COLUMN, record[0].strip() if record else ""
    end = next((i for i, line in enumerate(record) if line.startswith("M  END")), len(record) - 1)
    yield MOLBLOCK_COLUMN, "\n".join(record[: end + 1])
    name, values = "", list[str]()
    for line in record[end + 1 :]:
        if line.startswith(">"):
            if name:
                yield name, "\n".join(values).strip()
            name = line[line.find("<") + 1 : line.rfind(">")] if "<" in line else line.strip("> ")
            values = []
        else:
            values.append(line)
    if name:
        yield name, "\n".join(values).strip()
