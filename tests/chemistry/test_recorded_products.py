"""Products against recorded alkylations.

360 rows of recorded intermolecular alkylations (origin, licence and selection
in tests/data/README.md), spread evenly over nucleophile classes and leaving
groups: rare classes weigh as much as common ones, so the shares here are lower
than on the whole collection. On all 11,768 rows in scope (epoxide openings are
not) the recorded product is among those built in 97.9 %, first in 91.4 %, and
first in 80.0 % of the 4,239 rows where several products can form.

How far this is a test: a few counts of `regiochemistry.csv` and the order of
bromide and chloride were taken from the same collection, so the ranking shares
show consistency there. Building, inversion and class order were not fitted to
it.

Every known miss stands in recorded_misses.csv with its reason. A new miss, or
a miss that is gone, fails.
"""

from __future__ import annotations

from collections import Counter
from functools import cache

import pytest
from rdkit import Chem

from libtool.reaction import make_products
from libtool.records import Confidence, Product
from tests.chemistry.build import block, flat, rows

RECORDS = rows("recorded_alkylations.csv")
MISSES = {r["id"]: r for r in rows("recorded_misses.csv")}
RECORD_FAULT = "record:"

# Measured shares and floors. The floors lie under one percentage point (three
# rows) below: a change of RDKit's canonical forms may move a border case, a
# change of the chemistry moves more and must be looked at.
MEASURED_BUILT, FLOOR_BUILT = 0.908, 0.90
MEASURED_FIRST, FLOOR_FIRST = 0.847, 0.84
MEASURED_FIRST_OF_SEVERAL, FLOOR_FIRST_OF_SEVERAL = 0.778, 0.77


@cache
def built(row_id: str) -> tuple[Product, ...]:
    record = next(r for r in RECORDS if r["id"] == row_id)
    return make_products(block(record["nucleophile"], "N"), block(record["electrophile"], "E"))


def recorded(record: dict[str, str]) -> str:
    return str(Chem.CanonSmiles(record["product"]))


def outcome(record: dict[str, str]) -> str:
    smiles = [p.smiles for p in built(record["id"])]
    if recorded(record) not in smiles:
        return "not_built"
    return "first" if smiles[0] == recorded(record) else "not_first"


def share(good: int, everything: int) -> float:
    return good / everything


def test_the_rows_cover_every_class_and_leaving_group() -> None:
    assert len(RECORDS) == len({r["id"] for r in RECORDS}) == 360
    assert len({r["nuc_class"] for r in RECORDS}) == 30
    assert len({r["leaving_group"] for r in RECORDS}) == 13
    assert sum(r["stereo_outcome"] != "na" for r in RECORDS) == 60


def test_recorded_product_is_among_those_built() -> None:
    found = sum(outcome(r) != "not_built" for r in RECORDS)
    assert share(found, len(RECORDS)) >= FLOOR_BUILT, f"measured {MEASURED_BUILT} before"


def test_recorded_product_comes_first() -> None:
    first = sum(outcome(r) == "first" for r in RECORDS)
    assert share(first, len(RECORDS)) >= FLOOR_FIRST, f"measured {MEASURED_FIRST} before"


def test_recorded_product_comes_first_where_several_can_form() -> None:
    several = [r for r in RECORDS if len(built(r["id"])) > 1]
    assert len(several) > 100
    first = sum(outcome(r) == "first" for r in several)
    assert share(first, len(several)) >= FLOOR_FIRST_OF_SEVERAL, f"measured {MEASURED_FIRST_OF_SEVERAL} before"


def test_misses_are_the_known_ones() -> None:
    missed = {r["id"]: outcome(r) for r in RECORDS if outcome(r) != "first"}
    assert missed == {row_id: r["outcome"] for row_id, r in MISSES.items()}


def test_every_known_miss_has_a_reason() -> None:
    assert all(r["reason"] for r in MISSES.values())


def test_confidence_tells_how_often_the_first_product_is_the_recorded_one() -> None:
    """600 random rows, those with several products of which one is recorded.

    On the whole collection: clear 0.90 (3,019 rows), ambiguous 0.73 (663),
    unresolved 0.39 (472). Clear promises 9:1. Measured here: clear 0.94 of 139,
    the others together 0.71 of 48. The sampling error is 0.025 for 139 rows at
    0.90 and 0.07 for 48 rows at 0.6; the floor for clear lies two of them
    below 0.90, and the others must be worse by two of theirs.
    """
    right: Counter[bool] = Counter()
    total: Counter[bool] = Counter()
    for record in rows("recorded_random.csv"):
        products = make_products(block(record["nucleophile"], "N"), block(record["electrophile"], "E"))
        smiles = [p.smiles for p in products]
        if len(products) > 1 and recorded(record) in smiles:
            clear = products[0].confidence is Confidence.CLEAR
            total[clear] += 1
            right[clear] += smiles[0] == recorded(record)
    assert total[True] >= 120
    assert share(right[True], total[True]) >= 0.85
    assert share(right[True], total[True]) > share(right[False], total[False]) + 0.14


@pytest.mark.parametrize("record", [r for r in RECORDS if r["stereo_outcome"] == "inverted"], ids=lambda r: r["id"])
def test_inversion_is_exact(record: dict[str, str]) -> None:
    """The recorded isomer is built, and none of its stereoisomers is."""
    if MISSES.get(record["id"], {}).get("outcome") == "not_built":
        assert built(record["id"]) == ()
        return
    same_constitution = [p for p in built(record["id"]) if flat(p.smiles) == flat(recorded(record))]
    assert [p.smiles for p in same_constitution] == [recorded(record)]
    assert same_constitution[0].stereo == "inverted"


STEREO_FAULTS = [r for r in RECORDS if MISSES.get(r["id"], {}).get("reason", "").startswith(RECORD_FAULT)]


@pytest.mark.parametrize("record", STEREO_FAULTS, ids=lambda r: r["id"])
def test_record_errors_are_errors_of_stereochemistry_only(record: dict[str, str]) -> None:
    """What is blamed on the record has the constitution that we build."""
    isomers = [p.smiles for p in built(record["id"]) if flat(p.smiles) == flat(recorded(record))]
    assert len(isomers) == 1
    assert isomers[0] != recorded(record)


def test_rows_without_a_stereocentre_report_none() -> None:
    wrong = [
        r["id"]
        for r in RECORDS
        if r["stereo_outcome"] == "na" and any(p.stereo == "inverted" for p in built(r["id"])[:1])
    ]
    assert wrong == []
