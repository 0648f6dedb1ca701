"""Files that arrive whole or not at all, and CSV that survives a spreadsheet.

A set of files is first written beside its final names and then moved into
place, so a run that is killed or fails leaves the files of the run before, not
halves. No time of writing stands in any file: the same input gives the same
bytes.

Two things damage a CSV file on its way through a spreadsheet. A cell that
begins like a formula is run as one; such text gets an apostrophe in front,
numbers stay numbers. And a file with letters beyond ASCII is taken for the
code page of the country unless it starts with a byte order mark; it gets one
then, while plain ASCII goes without, because pipetting robots stumble over it.
"""

from __future__ import annotations

import csv
import errno
import io
import os
import re
import uuid
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path

__all__ = ["csv_text", "guarded", "write_together"]

Cell = str | int | float

# What a spreadsheet takes for the start of a formula; tab and return are
# skipped by it and the next character counts.
_FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")
_NUMBER = re.compile(r"[+-]?\d+(?:[.,]\d+)?(?:[eE][+-]?\d+)?")
_MARK = "\ufeff"


def guarded(cell: Cell) -> Cell:
    """Cell that no spreadsheet takes for a formula.

    Parameters
    ----------
    cell : str, int or float

    Returns
    -------
    str, int or float
        The same, but text that begins like a formula and is no number has an
        apostrophe in front.

    Examples
    --------
    >>> guarded("=1+1"), guarded("-1.5"), guarded("007"), guarded(-1.5)
    ("'=1+1", '-1.5', '007', -1.5)
    """
    if isinstance(cell, str) and cell.startswith(_FORMULA_STARTS) and not _NUMBER.fullmatch(cell):
        return f"'{cell}"
    return cell


def csv_text(header: Sequence[str], rows: Iterable[Sequence[Cell]]) -> str:
    """Text of a CSV file: comma, quotes where needed, every cell `guarded`.

    Parameters
    ----------
    header : sequence of str
    rows : iterable of sequences
        As many cells as the header.

    Returns
    -------
    str
        Starts with a byte order mark if it holds letters beyond ASCII.
    """
    held = io.StringIO(newline="")
    writer = csv.writer(held)
    writer.writerow([guarded(name) for name in header])
    writer.writerows([guarded(cell) for cell in row] for row in rows)
    text = held.getvalue()
    return text if text.isascii() else _MARK + text


def write_together(folder: Path, contents: Mapping[str, str]) -> tuple[Path, ...]:
    """Write several files of one folder; all of them are on the disk before the first takes its name.

    Parameters
    ----------
    folder : path
        Made when missing.
    contents : mapping of str to str
        Text by file name; written as UTF-8, line ends as they are.

    Returns
    -------
    tuple of Path
        In the order of `contents`.

    Raises
    ------
    OSError
        The folder or disk does not take them. No name in the folder then
        shows a file that is half written.
    """
    folder.mkdir(parents=True, exist_ok=True)
    # Not tempfile: its files are closed to the colleagues who share the folder.
    run = uuid.uuid4().hex[:8]
    waiting = {folder / name: folder / f".{name}.{run}.part" for name in contents}
    try:
        for (path, part), text in zip(waiting.items(), contents.values(), strict=True):
            with part.open("xb") as stream:
                stream.write(text.encode("utf-8", errors="replace"))
                stream.flush()
                # A rename may reach the disk before the bytes do.
                os.fsync(stream.fileno())
            if path.is_dir():
                raise IsADirectoryError(errno.EISDIR, "a folder has the name of the file to be written", str(path))
        for path, part in waiting.items():
            part.replace(path)
    finally:
        for part in waiting.values():
            part.unlink(missing_ok=True)
    return tuple(waiting)
