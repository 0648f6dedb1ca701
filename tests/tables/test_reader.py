"""The reader: same rows as on disk, read-only, late, and clear about what is wrong."""

from __future__ import annotations

import hashlib
import math
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from libtool.errors import LibtoolError, TableError
from libtool.reference import tables
from tests.tables.files import ALL, FOLDER, rows

CACHED = (tables._names, tables._indexed, tables.fingerprint)


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Path]:
    """An empty folder that the reader takes for its own."""
    for cached in CACHED:
        cached.cache_clear()
    monkeypatch.setattr(tables, "files", lambda _: tmp_path)
    yield tmp_path
    for cached in CACHED:
        cached.cache_clear()


@pytest.mark.parametrize("name", ALL)
def test_rows_are_those_of_the_file_in_its_order(name: str) -> None:
    assert [dict(r) for r in tables.table(name)] == rows(name)


def test_a_table_is_read_once() -> None:
    first, second = tables.table("pka"), tables.table("pka")
    assert all(a is b for a, b in zip(first, second, strict=True))
    assert tables.row("pka", first[0]["key"]) is first[0]


def test_a_row_cannot_be_changed() -> None:
    with pytest.raises(TypeError):
        tables.table("pka")[0]["value"] = "0"  # type: ignore[index]


def test_importing_the_reader_opens_no_table() -> None:
    code = (
        "import sys; opened = []; "
        "sys.addaudithook(lambda event, args: opened.append(str(args[0])) if event == 'open' else None); "
        "import libtool.reference.tables as t; assert not [p for p in opened if p.endswith('.csv')], opened; "
        "t.table('pka'); assert [p for p in opened if p.endswith('pka.csv')]"
    )
    subprocess.run([sys.executable, "-c", code], check=True, cwd=FOLDER.parents[1])


def test_number_reads_the_cell() -> None:
    well = tables.row("plate_formats", "well_pitch_96")
    assert tables.number(well) == 9.0
    assert tables.number(well, "format") == 96.0


@pytest.mark.parametrize(
    ("act", "words"),
    [
        (lambda: tables.table("unheard_of"), ["unheard_of", "pka"]),
        (lambda: tables.table("../reference/pka"), ["../reference/pka"]),
        (lambda: tables.row("pka", "unheard_of"), ["pka.csv", "unheard_of", "add"]),
        (
            lambda: tables.number(tables.row("pka", "water_dmso"), "uncertainty"),
            ["pka.csv", "water_dmso", "empty"],
        ),
        (
            lambda: tables.number(tables.row("pka", "water_dmso"), "role"),
            ["pka.csv", "'role'", "not a number"],
        ),
        (
            lambda: tables.number(tables.row("pka", "water_dmso"), "colour"),
            ["pka.csv", "colour", "as_printed"],
        ),
        (lambda: tables.number({"key": "own", "value": "nan"}), ["own", "not finite"]),
        (lambda: tables.cite("unheard_of_1900"), ["sources.csv", "unheard_of_1900"]),
        (lambda: tables.cite("swain_1953_jacs;"), ["sources.csv", "''"]),
    ],
)
def test_an_error_says_which_file_row_and_column(act: Callable[[], object], words: list[str]) -> None:
    with pytest.raises(TableError) as caught:
        act()
    assert isinstance(caught.value, LibtoolError)
    for word in words:
        assert word in str(caught.value)


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"key,value\na,1\na,2\n", ["broken.csv", "'a'", "two rows"]),
        (b"key,value\na,1,2\n", ["broken.csv", "3 cells", "2 columns"]),
        (b"name,value\na,1\n", ["broken.csv", "'key'"]),
        (b"", ["broken.csv", "header"]),
        (b'key,value\n"a,1\n', ["broken.csv", "CSV"]),
        (b"key,value\n\xff,1\n", ["broken.csv", "UTF-8"]),
    ],
)
def test_a_damaged_file_is_refused(folder: Path, content: bytes, words: list[str]) -> None:
    folder.joinpath("broken.csv").write_bytes(content)
    with pytest.raises(TableError) as caught:
        tables.table("broken")
    for word in words:
        assert word in str(caught.value)


def test_a_citation_holds_what_is_known() -> None:
    # From the title page of the paper.
    expected = "C. G. Swain, C. B. Scott, J. Am. Chem. Soc. 1953, 75, 141-147"
    assert tables.cite("swain_1953_jacs") == expected
    assert tables.cite("common_practice") == "common practice, no source"
    assert tables.cite("swain_1953_jacs;common_practice") == f"{expected}; common practice, no source"


def test_the_fingerprint_covers_every_file_by_name() -> None:
    digest = hashlib.sha256()
    for path in sorted(FOLDER.glob("*.csv"), key=lambda p: p.stem):
        content = path.read_bytes()
        digest.update(f"{path.stem} {len(content)}\n".encode() + content)
    assert tables.fingerprint() == digest.hexdigest()


def fingerprint_of(folder: Path, **contents: bytes) -> str:
    for path in folder.iterdir():
        path.unlink()
    for name, content in contents.items():
        folder.joinpath(f"{name}.csv").write_bytes(content)
    for cached in CACHED:
        cached.cache_clear()
    return tables.fingerprint()


def test_the_fingerprint_ignores_line_ends_and_nothing_else(folder: Path) -> None:
    base = fingerprint_of(folder, a=b"key\nx\n", b=b"key\ny\n")
    assert fingerprint_of(folder, b=b"key\r\ny\r\n", a=b"key\r\nx\r\n") == base
    assert fingerprint_of(folder, a=b"key\nx\n", b=b"key\nz\n") != base
    assert fingerprint_of(folder, a=b"key\nx\n", c=b"key\ny\n") != base
    assert fingerprint_of(folder, a=b"key\nx\n") != base


def test_numbers_of_the_tables_are_finite() -> None:
    for name in ALL:
        for r in tables.table(name):
            if "value" in r:
                assert math.isfinite(tables.number(r))
