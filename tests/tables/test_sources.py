"""Every fact names a publication that stands in the list, and the list holds nothing else."""

from __future__ import annotations

import re
from datetime import date

import pytest

from libtool.reference.tables import cite
from tests.tables.files import FACTS, rows

LISTED = {r["key"]: r for r in rows("sources")}
# firstauthor_year_journal, "nd" for no date; a series number where a part of the key repeats.
KEY = re.compile(r"[a-z0-9]+(_[a-z0-9]+)*_(\d{4}|nd)(_[a-z0-9]+)*|[a-z]+_29cfr1910|common_practice")


def named(name: str) -> set[str]:
    """Source keys that a table uses."""
    return {key for r in rows(name) for key in r["source"].split(";")}


@pytest.mark.parametrize("name", FACTS)
def test_every_source_of_a_table_is_listed(name: str) -> None:
    assert named(name) - LISTED.keys() == set()


def test_every_listed_source_is_used() -> None:
    assert LISTED.keys() - set().union(*map(named, FACTS)) == set()


def test_source_keys_follow_author_year_journal() -> None:
    assert [key for key in LISTED if not KEY.fullmatch(key)] == []


def test_the_year_in_a_key_is_the_year_of_the_entry() -> None:
    for key, entry in LISTED.items():
        if year := re.search(r"_(\d{4})(_|$)", key):
            assert entry["year"] == year[1], key


@pytest.mark.parametrize("key", sorted(LISTED))
def test_a_source_can_be_cited_in_one_line(key: str) -> None:
    entry, line = LISTED[key], cite(key)
    assert entry["title"] or entry["journal"]
    assert "\n" not in line
    assert ", ," not in line
    for part in ("authors", "title", "journal", "year", "volume", "pages"):
        assert entry[part] in line


def test_a_doi_has_the_form_of_one() -> None:
    assert [r["doi"] for r in LISTED.values() if r["doi"] and not re.fullmatch(r"10\.\d{4,9}/\S+", r["doi"])] == []


def test_nobody_checks_an_own_entry_and_a_check_has_a_date() -> None:
    for key, entry in LISTED.items():
        assert entry["entered_by"], key
        assert bool(entry["checked_by"]) == bool(entry["checked_on"]), key
        assert entry["checked_by"] != entry["entered_by"], key
        if entry["checked_on"]:
            date.fromisoformat(entry["checked_on"])


def test_practice_says_that_it_has_no_source() -> None:
    assert LISTED["common_practice"]["title"] == "common practice, no source"


@pytest.mark.parametrize("name", FACTS)
def test_practice_alone_is_never_called_measured_or_compiled(name: str) -> None:
    wrong = [
        r["key"] for r in rows(name) if r["source"] == "common_practice" and r["origin"] in {"measured", "compiled"}
    ]
    assert wrong == []
