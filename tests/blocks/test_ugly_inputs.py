"""86 awkward structures, each with what a careful colleague would do with it.

Origin in tests/data/README.md. A question mark in a column means that the row
asks nothing there.
"""

from __future__ import annotations

import csv
import time
from functools import cache
from pathlib import Path

import pandas
import pytest
from rdkit import Chem

from libtool.blocks import BlockSet, read_blocks
from libtool.reaction import electrophile_sites, nucleophile_sites
from libtool.records import BuildingBlock
from libtool.triage.flags import electrophile_flags

DATA = Path(__file__).resolve().parents[1] / "data" / "ugly_inputs.csv"
with DATA.open(encoding="utf-8", newline="") as file:
    INPUTS = list(csv.DictReader(file))


@cache
def found() -> BlockSet:
    return read_blocks(
        pandas.DataFrame([(r["id"], r["smiles"]) for r in INPUTS], columns=["id", "smiles"]),
        mapping={"structure": "smiles", "id": "id"},
    )


def alone(entry: dict[str, str]) -> BuildingBlock:
    """Block of one input read by itself, so that no other row is its duplicate."""
    return next(iter(read_blocks(pandas.DataFrame([entry]), mapping={"structure": "smiles", "id": "id"})))


def test_books_balance_over_all_of_them() -> None:
    assert len(INPUTS) == found().rows_in == 86


@pytest.mark.parametrize("entry", INPUTS, ids=lambda r: r["id"])
def test_fate_of_the_row(entry: dict[str, str]) -> None:
    row = INPUTS.index(entry) + 2
    fates = {
        "block": [b.row for b in found()],
        "duplicate": [i.row for i in found().duplicates],
        "rejected": [i.row for i in found().rejected],
    }
    assert [fate for fate, rows in fates.items() if row in rows] == [entry["outcome"]]


@pytest.mark.parametrize("entry", [r for r in INPUTS if r["parent"] != "?"], ids=lambda r: r["id"])
def test_parent_and_counterions(entry: dict[str, str]) -> None:
    block = alone(entry)
    assert block.smiles == Chem.CanonSmiles(entry["parent"])
    assert list(block.counterions) == [c for c in entry["counterions"].split(".") if c]
    assert block.received == entry["smiles"]


@pytest.mark.parametrize("entry", [r for r in INPUTS if r["nucleophile_kind"] != "?"], ids=lambda r: r["id"])
def test_nucleophilic_site(entry: dict[str, str]) -> None:
    kinds = [s.kind for s in nucleophile_sites(alone(entry))]
    assert kinds[:1] == [k for k in [entry["nucleophile_kind"]] if k]


@pytest.mark.parametrize("entry", [r for r in INPUTS if r["leaving_group"] != "?"], ids=lambda r: r["id"])
def test_leaving_group(entry: dict[str, str]) -> None:
    groups = [s.leaving_group for s in electrophile_sites(alone(entry))]
    assert groups[:1] == [g for g in [entry["leaving_group"]] if g]


@pytest.mark.parametrize(
    ("row_id", "flag"),
    [
        ("U14", "self_reactive"),
        ("U15", "neighbouring_group"),
        ("U31", "no_electrophilic_site"),
        ("U44", "stereo_inversion"),
        ("U51", "self_reactive"),
        ("U52", "several_leaving_groups"),
        ("U53", "several_leaving_groups"),
        ("U54", "alkoxymethyl"),
        ("U57", "gem_halide"),
        ("U59", "fluoroalkyl_methyl"),
        ("U60", "neopentyl_type"),
        ("U61", "bridgehead"),
        ("U62", "tertiary"),
        ("U63", "sp2_carbon"),
        ("U64", "sp2_carbon"),
        ("U65", "acylating_group"),
        ("U68", "no_electrophilic_site"),
    ],
)
def test_what_is_odd_is_said(row_id: str, flag: str) -> None:
    block = alone(next(r for r in INPUTS if r["id"] == row_id))
    sites = electrophile_sites(block)
    assert flag in {f.id for f in electrophile_flags(block, sites[0] if sites else None)}


def test_two_leaving_groups_on_one_carbon_are_said() -> None:
    """Dichloromethane alkylates twice at its one carbon; which of the two flags says so is a matter of taste."""
    block = alone(next(r for r in INPUTS if r["id"] == "U58"))
    raised = {f.id for f in electrophile_flags(block, electrophile_sites(block)[0])}
    assert raised & {"gem_halide", "several_leaving_groups"}


def test_reasons_are_sentences_for_people() -> None:
    for issue in found().rejected:
        assert len(issue.reason) > 15
        assert issue.remedy
        assert not {"Traceback", "RDKit ERROR"} & set(str(issue).split())


@pytest.mark.parametrize("row_id", ["U33", "U69", "U70"])
def test_huge_molecules_take_less_than_a_second(row_id: str) -> None:
    """Each takes 20 to 140 ms; a list of a hundred of them must not look like a hung notebook."""
    entry = next(r for r in INPUTS if r["id"] == row_id)
    start = time.perf_counter()
    block = alone(entry)
    nucleophile_sites(block)
    electrophile_sites(block)
    assert time.perf_counter() - start < 1.0
