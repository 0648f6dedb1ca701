"""Formats that are not plain text: workbooks, Parquet, gzip, lists; and what their damage looks like.

The files are written by openpyxl, pyarrow and gzip, not by the product.
"""

from __future__ import annotations

import gzip
from datetime import date
from pathlib import Path

import openpyxl
import pandas
import pytest

from libtool.blocks import read_blocks
from libtool.errors import InputError


@pytest.fixture
def workbook(tmp_path: Path) -> Path:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = "Store"
    sheet.append(["Cat No", "SMILES", "opened"])
    sheet.append([47, "CCCBr", date(2024, 1, 2)])
    sheet["A2"].number_format = "0000"
    sheet.append(["007", "C1CCNCC1"])
    sheet.append([])
    sheet.append([3.0, "NCc1ccccc1"])
    book.create_sheet("notes")
    path = tmp_path / "store.xlsx"
    book.save(path)
    return path


def test_a_workbook_gives_ids_as_they_are_shown_and_rows_as_they_are_numbered(workbook: Path) -> None:
    blocks = read_blocks(workbook)
    assert [(b.id, b.row) for b in blocks] == [("0047", 2), ("007", 3), ("3", 5)]
    assert dict(blocks["0047"].columns)["opened"] == "2024-01-02"


def test_two_filled_sheets_ask_which_one(workbook: Path) -> None:
    book = openpyxl.load_workbook(workbook)
    book["notes"].append(["smiles"])
    book["notes"].append(["CCI"])
    book.save(workbook)
    with pytest.raises(InputError, match="'Store', 'notes'"):
        read_blocks(workbook)
    assert [b.smiles for b in read_blocks(workbook, sheet="notes")] == ["CCI"]
    with pytest.raises(InputError, match="there is no sheet 'Lager'"):
        read_blocks(workbook, sheet="Lager")


def test_parquet_keeps_text_and_blanks(tmp_path: Path) -> None:
    frame = pandas.DataFrame({"id": ["001", "002"], "smiles": ["CCBr", "CCI"], "amount (mg)": [1.5, None]})
    frame.to_parquet(tmp_path / "list.parquet")
    blocks = read_blocks(tmp_path / "list.parquet")
    assert [b.id for b in blocks] == ["001", "002"]
    assert [c.amount.value if c.amount else None for c in blocks.containers] == [1.5, None]


@pytest.mark.parametrize("name", ["list.csv.gz", "list.CSV.GZ"])
def test_gzipped_text(tmp_path: Path, name: str) -> None:
    tmp_path.joinpath(name).write_bytes(gzip.compress(b"id,smiles\n1,CCBr\n"))
    assert len(read_blocks(tmp_path / name)) == 1


def test_a_plain_list_is_numbered_from_one() -> None:
    blocks = read_blocks(["CCBr", "C1CC", "CCI"])
    assert [b.row for b in blocks] == [1, 3]
    assert [i.row for i in blocks.rejected] == [2]


@pytest.mark.parametrize(
    ("name", "content", "sentence"),
    [
        ("a.csv.gz", b"id,smiles\n1,CCBr\n", "not a gzip file"),
        ("b.csv.gz", gzip.compress(b"id,smiles\n1,CCBr\n" * 50)[:-12], "ends too early"),
        ("c.xlsx", b"PK\x03\x04 and no more", "not an .xlsx workbook"),
        ("d.xlsx", b"id,smiles\n1,CCBr\n", "not an .xlsx workbook"),
        ("e.parquet", b"PAR1 and no more", "not a readable Parquet file"),
        ("f.docx", b"anything", "is not known"),
    ],
)
def test_a_damaged_or_foreign_file_gets_a_sentence(tmp_path: Path, name: str, content: bytes, sentence: str) -> None:
    tmp_path.joinpath(name).write_bytes(content)
    with pytest.raises(InputError, match=sentence):
        read_blocks(tmp_path / name)
