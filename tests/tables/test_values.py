"""Every number follows from what its source prints."""

from __future__ import annotations

import math
from collections.abc import Callable
from decimal import Decimal

import pytest

from tests.tables.files import rows, with_column


def first_of_pair(printed: str, _: str) -> float:
    return float(printed.split(" x ")[0])


def second_of_pair(printed: str, _: str) -> float:
    return float(printed.split(" x ")[1])


def percent_first(printed: str, _: str) -> float:
    first, second = map(float, printed.split(":"))
    return 100 * first / (first + second)


# What a word of the column `conversion` does to the printed text; what follows
# its colon is the second argument.
CONVERSIONS: dict[str, Callable[[str, str], float]] = {
    "identity": lambda printed, _: float(printed),
    "log10": lambda printed, _: math.log10(float(printed)),
    "log10_ratio": lambda printed, reference: math.log10(float(printed) / float(reference)),
    # For print that is no number, or a misprint; the note says how it was read.
    "read_as": lambda _, read: float(read),
    "log10_read_as": lambda _, read: math.log10(float(read)),
    "first_of_pair": first_of_pair,
    "second_of_pair": second_of_pair,
    "percent_first": percent_first,
}


def half_of_last_place(text: str) -> float:
    """A value rounded to its last place lies within half a unit of it."""
    exponent = Decimal(text).as_tuple().exponent
    assert isinstance(exponent, int)
    return 0.5 * 10.0**exponent


def recomputed(r: dict[str, str]) -> float:
    word, _, argument = r["conversion"].partition(":")
    return CONVERSIONS[word](r["as_printed"], argument)


@pytest.mark.parametrize(
    ("conversion", "printed", "expected"),
    [
        ("identity", "5.23", 5.23),
        ("log10", "1000", 3.0),
        ("log10_ratio:2", "200", 2.0),
        ("log10_read_as:0.01", "about 0", -2.0),
        ("read_as:0", "no elimination", 0.0),
        ("first_of_pair", "8 x 12", 8.0),
        ("second_of_pair", "8 x 12", 12.0),
        ("percent_first", "1:3", 25.0),
    ],
)
def test_each_conversion_does_what_its_name_says(conversion: str, printed: str, expected: float) -> None:
    # Exact but for the last bits of the logarithm.
    assert recomputed({"conversion": conversion, "as_printed": printed}) == pytest.approx(expected, abs=1e-12)


@pytest.mark.parametrize("name", with_column("value"))
def test_every_value_recomputes_from_what_is_printed(name: str) -> None:
    wrong = {}
    for r in rows(name):
        # The last bits of a logarithm must not decide a value that ends in 5.
        if abs(recomputed(r) - float(r["value"])) > half_of_last_place(r["value"]) + 1e-12:
            wrong[r["key"]] = (r["as_printed"], r["conversion"], r["value"])
    assert wrong == {}


@pytest.mark.parametrize("name", with_column("value"))
def test_a_value_taken_as_printed_keeps_its_number(name: str) -> None:
    wrong = [
        r["key"]
        for r in rows(name)
        if r["conversion"] == "identity" and Decimal(r["value"]) != Decimal(r["as_printed"])
    ]
    assert wrong == []


@pytest.mark.parametrize("name", with_column("value"))
def test_every_value_has_a_unit_and_says_what_unit_was_printed(name: str) -> None:
    assert [r["key"] for r in rows(name) if not r["unit"] or not r["unit_printed"]] == []


@pytest.mark.parametrize("name", with_column("value"))
def test_an_uncertainty_is_positive_and_not_part_of_the_value(name: str) -> None:
    for r in rows(name):
        assert not r["uncertainty"] or float(r["uncertainty"]) > 0, r["key"]
        assert not set("()±") & set(r["value"]), r["key"]


@pytest.mark.parametrize("name", with_column("value"))
def test_print_that_is_read_differently_has_a_note(name: str) -> None:
    assert [r["key"] for r in rows(name) if "read_as" in r["conversion"] and not r["note"]] == []


@pytest.mark.parametrize("name", with_column("temperature_c"))
def test_temperatures_lie_in_the_range_of_laboratory_work(name: str) -> None:
    # -100 to 250 C: outside it a temperature in kelvin or fahrenheit has slipped in.
    wrong = [r["key"] for r in rows(name) if r["temperature_c"] and not -100 < float(r["temperature_c"]) < 250]
    assert wrong == []


@pytest.mark.parametrize(
    ("name", "reference", "member"),
    [
        ("leaving_group_rates", "reference_leaving_group", "leaving_group"),
        ("nucleophiles_n", "reference_nucleophile", "nucleophile"),
        ("solvent_rates", "reference_solvent", "solvent"),
    ],
)
def test_the_reference_of_a_series_is_zero(name: str, reference: str, member: str) -> None:
    own = [r for r in rows(name) if r[member] == r[reference]]
    assert own
    assert {r["key"]: r["value"] for r in own if float(r["value"]) != 0} == {}


def test_substitution_and_elimination_add_up_to_all_product() -> None:
    for r in rows("sn2_e2_ratios"):
        assert float(r["percent_sn2"]) + float(r["percent_e2"]) == 100, r["key"]
        assert r["value"] == r["percent_e2"], r["key"]


def test_two_readings_of_pearsons_table_agree() -> None:
    """A book of 2014 rounds the n of the paper to one decimal."""
    by_series = {
        series: {r["nucleophile"]: float(r["value"]) for r in rows("nucleophiles_n") if r["series"] == series}
        for series in ("PEARSON_SEEN", "PEARSON_FULL")
    }
    rounded, full = by_series["PEARSON_SEEN"], by_series["PEARSON_FULL"]
    common = rounded.keys() & full.keys()
    assert len(common) >= 7
    # Half of the last decimal of the book, and the last bits of a subtraction.
    assert {n: (rounded[n], full[n]) for n in common if abs(rounded[n] - full[n]) > 0.05 + 1e-9} == {}


@pytest.mark.parametrize("wells", ["96", "384", "1536"])
@pytest.mark.parametrize(("edge", "count", "side"), [("left", "columns", "length"), ("top", "rows", "width")])
def test_the_grid_of_wells_is_centred_on_the_plate(wells: str, edge: str, count: str, side: str) -> None:
    sizes = {r["key"]: Decimal(r["value"]) for r in rows("plate_formats")}
    span = (sizes[f"{count}_{wells}"] - 1) * sizes[f"well_pitch_{wells}"]
    assert 2 * sizes[f"a1_from_{edge}_{wells}"] + span == sizes[f"footprint_{side}"]


def test_rows_times_columns_is_the_name_of_the_format() -> None:
    sizes = {r["key"]: int(r["value"]) for r in rows("plate_formats") if r["unit"] == "count"}
    formats = {key.removeprefix("rows_") for key in sizes if key.startswith("rows_")}
    assert formats == {"24", "48", "96", "384", "1536"}
    for wells in formats:
        assert sizes[f"rows_{wells}"] * sizes[f"columns_{wells}"] == int(wells)
