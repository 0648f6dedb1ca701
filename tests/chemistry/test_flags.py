"""Flags against the examples of their own rows, recorded successes, and measured yields.

The examples in `flags.csv` and the pattern tables are statements of the trade
about one structure each; the recorded alkylations worked, so a hard flag on
one of them is a false alarm; the deoxyfluorination yields (37 alcohols, open
data, see tests/data/README.md) are displacements at carbon that nobody of us
measured.
"""

from __future__ import annotations

from functools import cache
from statistics import mean

import pytest

from libtool.blocks.clean import Parent, parent_structure
from libtool.rate import estimate_rate
from libtool.reaction import electrophile_sites, nucleophile_sites
from libtool.records import BuildingBlock, Conditions, Flag, Level, RateEstimate, Role
from libtool.reference.tables import cite, number, row, table
from libtool.triage.flags import electrophile_flags, nucleophile_flags, pair_flags
from tests.chemistry.build import block, rows

FLAG_ROWS = list(table("flags"))


def cleaned(smiles: str) -> BuildingBlock:
    """Block as a reader would make it, salts split off."""
    parent = parent_structure(smiles)
    assert isinstance(parent, Parent), smiles
    return BuildingBlock(
        id="X", smiles=parent.smiles, row=2, received=smiles, mol=parent.mol, counterions=parent.counterions
    )


def on_electrophile(smiles: str) -> tuple[Flag, ...]:
    reagent = cleaned(smiles)
    sites = electrophile_sites(reagent)
    return electrophile_flags(reagent, sites[0] if sites else None)


def on_nucleophile(smiles: str) -> tuple[Flag, ...]:
    reagent = cleaned(smiles)
    return nucleophile_flags(reagent, nucleophile_sites(reagent))


def on_pair(nucleophile: str, electrophile: str) -> tuple[Flag, ...]:
    n, e = nucleophile_sites(cleaned(nucleophile))[0], electrophile_sites(cleaned(electrophile))[0]
    rate = estimate_rate(n, e, Conditions())
    return pair_flags(n, e, rate if isinstance(rate, RateEstimate) else None)


@cache
def flags(scope: str, example: str) -> tuple[Flag, ...]:
    if scope == "electrophile":
        return on_electrophile(example)
    if scope == "nucleophile":
        return on_nucleophile(example)
    nucleophile, _, electrophile = example.partition(" + ")
    return on_pair(nucleophile, electrophile)


def ids(found: tuple[Flag, ...]) -> list[str]:
    return [f.id for f in found]


@pytest.mark.parametrize("entry", FLAG_ROWS, ids=lambda r: r["key"])
def test_example_raises_the_flag_and_counter_example_does_not(entry: dict[str, str]) -> None:
    assert entry["key"] in ids(flags(entry["scope"], entry["example"]))
    assert entry["key"] not in ids(flags(entry["scope"], entry["counter_example"]))


@pytest.mark.parametrize("entry", FLAG_ROWS, ids=lambda r: r["key"])
def test_flag_is_complete(entry: dict[str, str]) -> None:
    flag = next(f for f in flags(entry["scope"], entry["example"]) if f.id == entry["key"])
    assert flag.level.value == entry["level"]
    for sentence in (flag.sentence, flag.remedy.sentence):
        assert sentence[0].isupper() or sentence[0].isdigit()
        assert sentence.endswith(".")
        assert "{" not in sentence
        assert ".." not in sentence
    assert cite(flag.source)
    nucleophile, _, electrophile = entry["example"].partition(" + ")
    drawn = nucleophile if flag.role is Role.NUCLEOPHILE or not electrophile else electrophile
    size = cleaned(drawn).mol.GetNumAtoms()
    assert all(0 <= atom < size for atom in flag.atoms)
    assert len(set(flag.atoms)) == len(flag.atoms)
    # A whole molecule can be at fault only where nothing was found, or for what came with it.
    assert flag.atoms or flag.id in {"no_electrophilic_site", "no_nucleophilic_site", "salt", "electrophile_salt"}


@pytest.mark.parametrize(
    ("smiles", "flag_id", "branches"),
    [
        ("CC(C)CBr", "isobutyl_type", 1),
        ("CC(C)(C)CBr", "neopentyl_type", 2),
        ("CCC(CC)CBr", "isobutyl_type", 1),
        ("BrCC1CCCCC1", "isobutyl_type", 1),
        ("BrCC12CC3CC(CC(C3)C1)C2", "neopentyl_type", 2),
        ("CC(O)CBr", "isobutyl_type", 1),
    ],
)
def test_branches_on_the_beta_carbon_are_counted(smiles: str, flag_id: str, branches: int) -> None:
    found = next(f for f in on_electrophile(smiles) if f.id == flag_id)
    word = "branch" if branches == 1 else "branches"
    assert f"carries {branches} {word} " in found.sentence


@pytest.mark.parametrize("smiles", ["CCBr", "CCCBr", "CC(C)CCBr", "CBr", "BrCc1ccccc1", "CC(C)Br"])
def test_unbranched_beta_carbons_have_no_branch_flag(smiles: str) -> None:
    assert not {"isobutyl_type", "neopentyl_type"} & set(ids(on_electrophile(smiles)))


@pytest.mark.parametrize(
    ("smiles", "group"),
    [("CCCO", "OH"), ("CCCF", "F"), ("CCOC(C)=O", "OAc"), ("CCOC", "OR"), ("CC[N+](C)(C)C", "NR3")],
)
def test_poor_leaving_group_is_told_with_the_acidity_of_its_conjugate_acid(smiles: str, group: str) -> None:
    found = next(f for f in on_electrophile(smiles) if f.id == "poor_leaving_group")
    acid = row("pka", row("leaving_group_patterns", group)["conjugate_acid"])
    assert f"pKa {acid['value']} ({acid['compound']})" in found.sentence
    assert row("pka", "hydrogen_bromide_water")["value"] in found.sentence
    assert found.level is Level.FAIL
    # The acid of a poor leaving group is far weaker than that of bromide: eight pK units or more.
    assert number(acid) - number(row("pka", "hydrogen_bromide_water")) > 8


@pytest.mark.parametrize(
    ("smiles", "why"),
    [
        ("CC(C)(Br)C(=O)OC", "2-bromoisobutyrates alkylate NH, OH and SH in the record"),
        ("ClC(c1ccccc1)(c1ccccc1)c1ccccc1", "trityl chloride is protecting-group chemistry"),
        ("O=S(=O)(OCC(F)(F)F)C(F)(F)F", "the remedy of the flag itself is to use the triflate"),
    ],
)
def test_reagents_that_work_are_warned_about_but_not_failed(smiles: str, why: str) -> None:
    found = on_electrophile(smiles)
    assert [f.id for f in found if f.level is Level.FAIL] == [], why
    assert any(f.level is Level.WARN for f in found)


# --- outside evidence ------------------------------------------------------


def hard_flags(nucleophile: str, electrophile: str) -> list[str]:
    n, e = block(nucleophile, "N"), block(electrophile, "E")
    n_sites, e_sites = nucleophile_sites(n), electrophile_sites(e)
    found = [*electrophile_flags(e, e_sites[0] if e_sites else None), *nucleophile_flags(n, n_sites)]
    if n_sites and e_sites:
        rate = estimate_rate(n_sites[0], e_sites[0], Conditions())
        found += pair_flags(n_sites[0], e_sites[0], rate if isinstance(rate, RateEstimate) else None)
    return [f.id for f in found if f.level is Level.FAIL]


def test_hard_flags_on_recorded_successes_are_rare() -> None:
    """600 random rows; what a hard flag says is "do not", and these reactions were done.

    The aim is 1 %. It is not met: 1.8 % of all 11,768 rows carry a hard flag
    (neopentyl type 0.5 %, CF2 or CF3 next to the carbon 0.3 %, nucleophiles of
    unlisted classes 0.3 %, chlorodifluoromethane and its like 0.2 %, tertiary
    0.1 %), here 1.2 %. On the 360 rows spread over classes it is 6 %, because
    rare reagents are as frequent there as common ones. The ceiling is the 12
    rows (2 %) that a random 600 of such a collection exceeds in one case of
    four (binomial, standard deviation 3.2 rows); failing activated tertiary or
    trityl reagents again would give 15.
    """
    flagged = [r["id"] for r in rows("recorded_random.csv") if hard_flags(r["nucleophile"], r["electrophile"])]
    assert len(flagged) <= 0.02 * 600, flagged


def alcohol_group(smiles: str) -> str:
    """How our flags call the carbon of an alcohol that is to be displaced."""
    reagent = block(smiles)
    carbinols = [s for s in electrophile_sites(reagent) if s.leaving_group == "OH"]
    if not carbinols:
        return "not covered"
    raised = set(ids(electrophile_flags(reagent, carbinols[0])))
    for group in ("tertiary", "neopentyl_type", "isobutyl_type", "secondary"):
        if group in raised:
            return group
    return "unflagged"


def test_measured_yields_fall_as_the_flags_say() -> None:
    """Deoxyfluorination of 37 alcohols, mean of 20 wells each.

    Measured here: unflagged 54 %, secondary 32 %, isobutyl type 20 %, tertiary
    3 %. The reaction is SN2 at an activated alcohol with fluoride; it shows the
    order of the classes, not our rates. The standard error of a class mean is
    4 to 7 percentage points (spread 12 to 20 over 3 to 18 alcohols), hence the
    margin of 8.
    """
    yields: dict[str, list[float]] = {}
    for r in rows("deoxyfluorination_means.csv"):
        yields.setdefault(alcohol_group(r["alcohol"]), []).append(float(r["mean_yield_percent"]))
    assert len(yields["unflagged"]) >= 10
    assert len(yields["secondary"]) >= 10
    assert len(yields["tertiary"]) >= 2
    assert mean(yields["unflagged"]) > mean(yields["secondary"]) + 8
    assert mean(yields["secondary"]) > mean(yields["tertiary"]) + 8
    assert mean(yields["unflagged"]) > mean(yields["isobutyl_type"]) + 8
    assert sum(map(len, yields.values())) == 37
    assert len(yields.get("not covered", [])) <= 1
