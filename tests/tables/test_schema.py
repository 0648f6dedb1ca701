"""Shape of the files: encoding, columns, keys, cells."""

from __future__ import annotations

import re

import pytest

from libtool.records import HazardLevel
from tests.tables.files import (
    ALL,
    FACTS,
    FOLDER,
    ORIGIN_COLUMNS,
    SOURCE_COLUMNS,
    VALUE_COLUMNS,
    cells,
    header,
    rows,
    with_column,
)

ORIGINS = {"measured", "compiled", "derived", "estimated", "judgement"}
# Leaving groups are keyed by the symbol chemists write, such as OTs.
KEYED_BY_SYMBOL = {"leaving_group_patterns"}
SNAKE = re.compile(r"[a-z0-9]+(_[a-z0-9]+)*")
SYMBOL = re.compile(r"[A-Za-z0-9]+(_[a-z0-9]+)*")
SUBJECTS = {"reagent", "product", "solvent", "condition pair"}


@pytest.mark.parametrize("name", ALL)
def test_file_is_plain_utf8_with_unix_line_ends(name: str) -> None:
    raw = FOLDER.joinpath(f"{name}.csv").read_bytes()
    raw.decode("utf-8")
    assert not raw.startswith(b"\xef\xbb\xbf")
    assert b"\r" not in raw
    assert raw.endswith(b"\n")
    assert not raw.endswith(b"\n\n")


@pytest.mark.parametrize("name", ALL)
def test_every_row_has_one_cell_per_column(name: str) -> None:
    first, *rest = cells(FOLDER / f"{name}.csv")
    assert rest
    assert len(set(first)) == len(first)
    assert [line for line in rest if len(line) != len(first)] == []


@pytest.mark.parametrize("name", ALL)
def test_cells_have_no_blanks_around_them_and_no_line_break(name: str) -> None:
    wrong = [c for line in cells(FOLDER / f"{name}.csv") for c in line if c != c.strip() or "\n" in c]
    assert wrong == []


@pytest.mark.parametrize("name", ALL)
def test_keys_come_first_and_are_unique_sorted_and_snake_case(name: str) -> None:
    assert header(name)[0] == "key"
    keys = [r["key"] for r in rows(name)]
    assert keys == sorted(keys)
    assert len(set(keys)) == len(keys)
    form = SYMBOL if name in KEYED_BY_SYMBOL else SNAKE
    assert [key for key in keys if not form.fullmatch(key)] == []


@pytest.mark.parametrize("name", FACTS)
def test_table_ends_with_the_columns_of_provenance(name: str) -> None:
    expected = ORIGIN_COLUMNS
    if "value" in header(name):
        expected = VALUE_COLUMNS + ORIGIN_COLUMNS
    assert tuple(header(name)[-len(expected) :]) == expected


def test_sources_have_the_columns_of_a_bibliography() -> None:
    assert tuple(header("sources")) == SOURCE_COLUMNS


@pytest.mark.parametrize("name", FACTS)
def test_origin_is_one_of_the_five_words(name: str) -> None:
    assert {r["key"]: r["origin"] for r in rows(name) if r["origin"] not in ORIGINS} == {}


@pytest.mark.parametrize("name", FACTS)
def test_every_row_says_where_it_was_read_and_in_which_publication(name: str) -> None:
    assert [r["key"] for r in rows(name) if not r["seen_at"] or not r["source"]] == []


def test_hazards_use_the_words_that_the_product_knows() -> None:
    levels = {level.value for level in HazardLevel}
    for r in rows("hazards"):
        assert r["severity"] in levels, r["key"]
        assert set(r["applies_to"].split(";")) <= SUBJECTS, r["key"]
        assert all(r[column] for column in ("what", "smarts", "action", "reason", "pos", "neg")), r["key"]


def test_a_hazard_of_two_things_has_a_pattern_for_each() -> None:
    for r in rows("hazards"):
        pair = r["applies_to"] == "condition pair"
        assert [bool(r[c]) for c in ("partner_smarts", "partner_pos", "partner_neg")] == [pair] * 3, r["key"]


def test_qualifiers_are_comparison_signs() -> None:
    found = {r["qualifier"] for name in with_column("qualifier") for r in rows(name)}
    assert found <= {"=", "~", "<", "<<", ">"}
