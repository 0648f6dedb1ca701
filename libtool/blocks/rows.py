"""Numbered rows from every format a list comes in.

Nothing here knows chemistry. A reader yields every record it finds, also the
ones that look useless: deciding is the business of the files that follow. Row
numbers are those a spreadsheet shows (the header of a table is row 1); records
of an SDF and entries of a Python list are numbered from 1.
"""

from __future__ import annotations

import hashlib
import zlib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, TypeAlias

from libtool.blocks.binary_formats import frame_rows, parquet_rows, workbook_rows
from libtool.blocks.text_formats import MOLBLOCK_COLUMN, NumberedRow, sdf_rows, smi_rows, table_rows
from libtool.errors import InputError

if TYPE_CHECKING:
    import pandas

__all__ = ["MOLBLOCK_COLUMN", "Rows", "Source", "read_rows"]

Source: TypeAlias = "str | Path | pandas.DataFrame | Sequence[str]"
"""A path, a DataFrame, or a plain list of SMILES. A single text is a path."""

# A list of a million reagents is 100 MB of text; what unpacks to ten times as
# much is damaged or hostile.
_LARGEST_UNPACKED = 1_000_000_000
_DELIMITED = {".csv": "", ".tsv": "\t", ".tab": "\t", ".txt": ""}
_SDF = frozenset({".sdf", ".sd", ".mol"})
_SMI = frozenset({".smi", ".smiles"})


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
        Hash of the bytes that were read (of the cells, for a DataFrame or a
        list).
    """

    name: str
    columns: tuple[str, ...]
    rows: tuple[tuple[int, Mapping[str, str]], ...]
    sha256: str


def read_rows(source: Source, *, sheet: str | None = None) -> Rows:
    """Rows of a file, a DataFrame or a list of SMILES.

    Parameters
    ----------
    source : path, pandas.DataFrame or sequence of str
        Formats by file ending: .csv, .tsv, .tab, .txt (delimiter is found),
        .xlsx, .parquet, .smi/.smiles (structure, blank, id), .sdf/.sd/.mol
        (V2000 and V3000). The text formats may be gzipped (.csv.gz).
    sheet : str, optional
        Sheet of a workbook; without it the one that holds rows, which must be
        the only one.

    Returns
    -------
    Rows

    Raises
    ------
    InputError
        The file is missing, empty, damaged, or of an unknown kind.
    """
    if isinstance(source, str | Path):
        return _file_rows(Path(source), sheet)
    if isinstance(source, Sequence):
        listed = [(number, {"smiles": str(text)}) for number, text in enumerate(source, start=1)]
        return _from_memory("list", ("smiles",), listed)
    columns, rows = frame_rows(source)
    return _from_memory("DataFrame", columns, rows)


def _from_memory(name: str, columns: tuple[str, ...], rows: Sequence[NumberedRow]) -> Rows:
    if not rows:
        raise InputError(f"{name}: it has no rows. Give at least one structure.")
    digest = hashlib.sha256("\x1f".join(columns).encode())
    for _, cells in rows:
        digest.update("\x1f".join(cells.values()).encode("utf-8", errors="surrogatepass"))
    return Rows(name, columns, tuple(rows), digest.hexdigest())


def _file_rows(path: Path, sheet: str | None) -> Rows:
    try:
        data = path.read_bytes()
    except FileNotFoundError as error:
        raise InputError(f"{path}: no such file. Check the path.") from error
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) else error
        raise InputError(f"{path}: cannot be read ({reason}). Check the path and its permissions.") from error
    sha256 = hashlib.sha256(data).hexdigest()
    endings = [ending.lower() for ending in path.suffixes]
    if endings[-1:] == [".gz"]:
        data = _unpacked(path.name, data)
        endings.pop()
    ending = endings[-1] if endings else ""
    columns, rows = _rows_of_kind(ending, data, path.name, sheet)
    if not rows:
        raise InputError(f"{path.name}: there is a header but no row below it. Give at least one structure.")
    return Rows(path.name, columns, tuple(rows), sha256)


def _rows_of_kind(
    ending: str, data: bytes, name: str, sheet: str | None
) -> tuple[tuple[str, ...], Sequence[NumberedRow]]:
    if not data.strip():
        raise InputError(f"{name}: the file is empty. Give a file with at least one structure.")
    if ending == ".xlsx":
        return workbook_rows(data, name, sheet)
    if ending == ".parquet":
        return parquet_rows(data, name)
    text = _decode(data)
    if not text.strip():
        raise InputError(f"{name}: the file is empty. Give a file with at least one structure.")
    if ending in _SDF:
        return sdf_rows(text)
    if ending in _SMI:
        return smi_rows(text)
    if ending in _DELIMITED:
        return table_rows(text, name, _DELIMITED[ending])
    raise InputError(
        f"{name}: the file ending {ending or '(none)'} is not known. "
        "Save the list as .csv, .tsv, .xlsx, .parquet, .smi or .sdf, or pass a pandas DataFrame."
    )


def _unpacked(name: str, data: bytes) -> bytes:
    """Content of a gzip file, refused beyond a bound that no list reaches."""
    unpacker = zlib.decompressobj(wbits=zlib.MAX_WBITS | 16)
    try:
        content = unpacker.decompress(data, _LARGEST_UNPACKED)
    except zlib.error as error:
        raise InputError(f"{name}: it is not a gzip file or is damaged ({error}). Pack it again.") from error
    if unpacker.unconsumed_tail:
        raise InputError(f"{name}: it unpacks to more than {_LARGEST_UNPACKED:,} bytes. Split the list.")
    if not unpacker.eof:
        raise InputError(f"{name}: the gzip file ends too early. Copy it again.")
    return content


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
