"""How much of the tables rests on memory, judgement and estimates, and that it does not grow unnoticed.

Whoever checks a row against its source lowers the ceiling; whoever adds an
unchecked row raises it on purpose, in `provenance_ceiling.csv`.
"""

from __future__ import annotations

import sys

import pytest

from libtool.reference.tables import provenance_counts
from tests.tables.files import CEILING, FACTS, cells, rows

KINDS = ("memory", "judgement", "estimated")


def counted(name: str) -> dict[str, int]:
    found = rows(name)
    return {
        "memory": sum("memory" in r["seen_at"].replace(",", " ").replace(";", " ").split() for r in found),
        "judgement": sum(r["origin"] == "judgement" for r in found),
        "estimated": sum(r["origin"] == "estimated" for r in found),
    }


def ceiling() -> dict[str, dict[str, int]]:
    first, *rest = cells(CEILING)
    assert first == ["table", *KINDS]
    return {line[0]: dict(zip(KINDS, map(int, line[1:]), strict=True)) for line in rest}


def test_the_product_counts_like_this_file() -> None:
    reported = {name: dict(count) for name, count in provenance_counts().items()}
    assert reported == {name: counted(name) for name in FACTS}


def test_every_table_has_a_ceiling_and_every_ceiling_a_table() -> None:
    assert ceiling().keys() == set(FACTS), "add or remove the row of the table in provenance_ceiling.csv"


def test_unchecked_rows_do_not_grow(capsys: pytest.CaptureFixture[str]) -> None:
    counts, most = {name: counted(name) for name in FACTS}, ceiling()
    with capsys.disabled():
        for name, count in counts.items():
            sys.stdout.write(f"\n{name}: " + ", ".join(f"{count[kind]} {kind}" for kind in KINDS))
        sys.stdout.write("\n")
    grown = {
        (name, kind): (count[kind], most[name][kind])
        for name, count in counts.items()
        for kind in KINDS
        if count[kind] > most[name][kind]
    }
    assert grown == {}
