"""Numbered rows from CSV, TSV, SMI, SDF and pandas.

Nothing here knows chemistry. A reader yields every record it finds, also the
ones that look useless: deciding is the business of the rooms to the right.
Row numbers are those a spreadsheet shows (the header of a table is row 1);
SDF records are numbered from 1.
"""

from __future__ import annotations

import csv
import hashlib
import io
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from libtool.errors import InputError

if TYPE_CHECKING:
    import pandas

__all__ = ["MOLBLOCK_COLUMN", "Rows", "read_rows"]

MOLBLOCK_COLUMN = "molblock"
"""Name under which an SDF record's structure travels."""

_TITLE_COLUMN = "title"
_DELIMITERS = ",;\t|"
# A cell longer than this is no structure and no note a person wrote.
_LONGEST_CELL = 1_000_000


@dataclass(frozen=True, slots=True)
class Rows:
    """All rows of one input, as text.

    Parameters
    ----------
    name : str
        What to call the input in messages.
    columns : tuple of str
        Column names in the order of the file.
    rows : tuple of (int, mapping)
        Row number and cells by column; missing cells are empty text.
    sha256 : str
        Hash of the bytes that were read (of the cells, for a DataFrame).
    """

    name: str
    columns: tuple[str, ...]
    rows: tuple[tuple[int, Mapping[str, str]], ...]
    sha256: str


def read_rows(source: str | Path | pandas.DataFrame) -> Rows:
    """Rows of a file or DataFrame.

    Parameters
    ----------
    source : path or pandas.DataFrame
        Formats by file ending: .csv, .tsv, .tab, .txt (delimiter is found),
        .smi/.smiles (structure, blank, id), .sdf/.sd/.mol.

    Returns
    -------
    Rows

    Raises
    ------
    InputError
        The file is missing, empty, or of an unknown kind.
    """
    if not isinstance(source, str | Path):
        return _frame_rows(source)
    path = Path(source)
    try:
        data = path.read_bytes()
    except FileNotFoundError as error:
        raise InputError(f"{path}: no such file. Check the path.") from error
    except OSError as error:
        raise InputError(f"{path}: cannot be read ({error.strerror}). Check the path and its permissions.") from error
    sha256 = hashlib.sha256(data).hexdigest()
    text = _decode(data)
    if not text.strip():
        raise InputError(f"{path.name}: the file is empty. Give a file with at least one structure.")
    ending = path.suffix.lower()
    if ending in {".sdf", ".sd", ".mol"}:
        columns, rows = _sdf_rows(text)
    elif ending in {".smi", ".smiles"}:
        columns, rows = _smi_rows(text)
    elif ending in {".csv", ".tsv", ".tab", ".txt"}:
        columns, rows = _table_rows(text, path.name, "\t" if ending in {".tsv", ".tab"} else "")
    else:
        raise InputError(
            f"{path.name}: the file ending {ending or '(none)'} is not known. "
            "Save the list as .csv, .tsv, .smi or .sdf, or pass a pandas DataFrame."
        )
    if not rows:
        raise InputError(f"{path.name}: there is a header but no row below it. Give at least one structure.")
    return Rows(path.name, columns, tuple(rows), sha256)


def _decode(data: bytes) -> str:
    """Text of a file in one of the encodings that spreadsheets write."""
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        return data.decode("utf-16", errors="replace")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        # Western Windows and Latin-1 differ in 27 code points; the five that
        # Windows leaves undefined become the replacement character.
        return data.decode("cp1252", errors="replace")


def _table_rows(text: str, name: str, delimiter: str) -> tuple[tuple[str, ...], list[tuple[int, Mapping[str, str]]]]:
    # Null bytes come from damaged exports; the csv module refuses them.
    lines = text.replace("\x00", "").replace("\r\n", "\n").replace("\r", "\n")
    header_line = lines.lstrip("\n").split("\n", 1)[0]
    delimiter = delimiter or max(_DELIMITERS, key=header_line.count)
    csv.field_size_limit(_LONGEST_CELL)
    reader = csv.reader(io.StringIO(lines), delimiter=delimiter)
    columns: tuple[str, ...] = ()
    rows: list[tuple[int, Mapping[str, str]]] = []
    number = 0
    try:
        for number, cells in enumerate(reader, start=1):
            if not any(cell.strip() for cell in cells):
                continue
            if not columns:
                columns = _unique(cells)
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


def _unique(cells: list[str]) -> tuple[str, ...]:
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


def _smi_rows(text: str) -> tuple[tuple[str, ...], list[tuple[int, Mapping[str, str]]]]:
    rows: list[tuple[int, Mapping[str, str]]] = []
    for number, line in enumerate(text.splitlines(), start=1):
        if not line.strip():
            continue
        structure, *rest = line.strip().split(None, 1)
        if number == 1 and structure.lower() in {"smiles", "structure"}:
            continue
        rows.append((number, {"smiles": structure, "id": rest[0].strip() if rest else ""}))
    return ("smiles", "id"), rows


def _sdf_rows(text: str) -> tuple[tuple[str, ...], list[tuple[int, Mapping[str, str]]]]:
    columns: list[str] = [_TITLE_COLUMN, MOLBLOCK_COLUMN]
    rows: list[tuple[int, Mapping[str, str]]] = []
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


def _frame_rows(frame: pandas.DataFrame) -> Rows:
    columns = _unique([str(c) for c in frame.columns])
    rows: list[tuple[int, Mapping[str, str]]] = []
    digest = hashlib.sha256("\x1f".join(columns).encode())
    for number, cells in enumerate(frame.itertuples(index=False, name=None), start=2):
        # Missing values of any pandas kind differ from themselves or are None.
        texts = ["" if cell is None or cell != cell else str(cell) for cell in cells]
        digest.update("\x1f".join(texts).encode())
        rows.append((number, dict(zip(columns, texts, strict=True))))
    if not rows:
        raise InputError("DataFrame: it has no rows. Give at least one structure.")
    return Rows("DataFrame", columns, tuple(rows), digest.hexdigest())
