"""Amounts, units and weights of what the store holds.

Molecular weights are those printed by handbooks and suppliers for these
compounds (g/mol): ethylamine 45.08, its hydrochloride 81.54; sodium phenolate
116.09; morpholine 87.12.
"""

from __future__ import annotations

import pandas
import pytest

from libtool.blocks import read_blocks
from libtool.blocks.inventory import Container


def containers(**columns: list[str]) -> tuple[Container, ...]:
    return read_blocks(pandas.DataFrame(columns)).containers


def test_one_compound_in_three_bottles_is_one_block_and_three_containers() -> None:
    blocks = read_blocks(
        pandas.DataFrame({"id": ["a", "b", "c"], "smiles": ["CCN", "CCN.Cl", "CC[NH3+].[Br-]"], "place": "123"})
    )
    assert [b.id for b in blocks] == ["a"]
    assert [(c.block_id, c.id, c.counterions) for c in blocks.containers] == [
        ("a", "a", ()),
        ("a", "b", ("Cl",)),
        ("a", "c", ("[Br-]",)),
    ]


@pytest.mark.parametrize(
    ("cell", "value", "unit"),
    [
        ("250 mg", 250, "mg"),
        ("0,5 g", 500, "mg"),
        ("1.2 kg", 1_200_000, "mg"),
        ("250 µL", 0.25, "mL"),
        ("1 L", 1000, "mL"),
        ("5 mmol", 5, "mmol"),
        ("300 umol", 0.3, "mmol"),
        ("~ 10 g", 10_000, "mg"),
        ("1.200,5 mg", 1200.5, "mg"),
    ],
)
def test_amounts_with_units(cell: str, value: float, unit: str) -> None:
    (found,) = containers(id=["a"], smiles=["CCN"], amount=[cell])
    assert found.amount is not None
    # Units are powers of ten: only the last bits of the arithmetic may differ.
    assert found.amount.value == pytest.approx(value, rel=1e-12)
    assert found.amount.unit == unit


@pytest.mark.parametrize("cell", ["20", "1,200 mg", "some", "5 m", "5 parsec", "-3 mg"])
def test_an_amount_that_could_mean_two_things_is_a_remark_and_the_row_stays(cell: str) -> None:
    blocks = read_blocks(pandas.DataFrame({"id": ["a"], "smiles": ["CCN"], "amount": [cell]}))
    assert len(blocks) == 1
    assert blocks.containers[0].amount is None
    assert [(r.column, r.received) for r in blocks.remarks] == [("amount", cell)]
    assert list(blocks.issues.outcome) == ["remark"]


def test_the_unit_of_the_column_counts_where_the_cell_has_none() -> None:
    one, other = containers(id=["a", "b"], smiles=["CCN", "CCCN"], **{"Menge [g]": ["1,5", "20 mg"]})
    assert one.amount is not None and one.amount.value == pytest.approx(1500, rel=1e-12)
    assert other.amount is not None and other.amount.value == pytest.approx(20, rel=1e-12)


def test_the_decimal_mark_is_that_of_the_column() -> None:
    found = containers(id=["a", "b"], smiles=["CCN", "CCCN"], amount=["1,200 g", "0,25 g"])
    assert [c.amount.value if c.amount else None for c in found] == pytest.approx([1200, 250], rel=1e-12)


@pytest.mark.parametrize(
    ("cell", "value", "unit", "solvent"),
    [
        ("0.5 M in THF", 0.5, "mol/L", "THF"),
        ("80 wt% in toluene", 80, "percent", "toluene"),
        ("10 mM in DMSO", 0.01, "mol/L", "DMSO"),
        ("2.0 M solution in 2-MeTHF", 2, "mol/L", "2-MeTHF"),
    ],
)
def test_solutions(cell: str, value: float, unit: str, solvent: str) -> None:
    (found,) = containers(id=["a"], smiles=["CCN"], concentration=[cell])
    assert found.concentration is not None
    assert (found.concentration.unit, found.concentration.solvent) == (unit, solvent)
    assert found.concentration.value == pytest.approx(value, rel=1e-12)


def test_a_purity_above_all_is_refused() -> None:
    blocks = read_blocks(pandas.DataFrame({"id": ["a"], "smiles": ["CCN"], "purity": ["120 %"]}))
    assert blocks.containers[0].purity is None
    assert "does not exist" in blocks.remarks[0].reason


@pytest.mark.parametrize(
    ("smiles", "printed", "fits"),
    [
        ("CCN", "45.08", "parent"),
        ("CCN.Cl", "81.54", "salt"),
        ("CCN.Cl", "45.1", "parent"),
        ("CC[NH3+].[Cl-]", "81.54", "salt"),
        ("[Na+].[O-]c1ccccc1", "116.09", "salt"),
        ("C1COCCN1", "87.12", "parent"),
        ("C1COCCN1", "123.58", "neither"),
    ],
)
def test_the_printed_weight_is_told_apart(smiles: str, printed: str, fits: str) -> None:
    blocks = read_blocks(pandas.DataFrame({"id": ["a"], "smiles": [smiles], "MW": [printed]}))
    assert blocks.containers[0].weight_fits == fits
    assert bool(blocks.remarks) == (fits == "neither")


def test_two_drawings_of_one_compound_are_one_block() -> None:
    blocks = read_blocks(["Cc1cc[nH]n1", "Cc1ccn[nH]1", "O=c1cccc[nH]1", "Oc1ccccn1"])
    assert [b.row for b in blocks] == [1, 3]
    assert all("drawn as another tautomer" in i.reason for i in blocks.duplicates)


def test_stereoisomers_stay_apart() -> None:
    assert len(read_blocks(["C[C@H](Br)C(=O)OC", "C[C@@H](Br)C(=O)OC", "CC(Br)C(=O)OC"])) == 3


def test_a_block_set_shows_itself_with_every_row_accounted_for() -> None:
    hostile = '<img src=x onerror="alert(1)">'
    blocks = read_blocks(
        pandas.DataFrame(
            {"id": ["a", hostile, "c"], "smiles": ["CCN.Cl", "CCCN", "bad("], "amount": ["5 g", "5", "1 g"]}
        )
    )
    text = blocks._repr_html_()
    assert blocks.summary() in text
    assert "5000 mg" in text
    assert text.count("<svg") == 2
    assert "1 rejected, 0 duplicates, 1 remarks" in text
    assert "<img" not in text
