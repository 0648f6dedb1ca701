"""Rate estimates against the published relative rates in `libtool/reference`.

What this shows. Many terms were derived from some of these series, so for them
agreement is consistency of the sum with its sources, not prediction:

- carbon terms from STREIT_AVG and FINK_NAI_RCL (methyl also OPENSTAX_CL_RBR),
  ring terms from CYCLO_I_RBR, neighbours from FINK, CONANT, BB64, DOLBIER_N3;
- leaving groups from OPENSTAX_LG and ASU_LG, iodide also MEX_HO;
- nucleophiles from PEARSON_FULL and PEARSON_SEEN; solvents from OPENSTAX_N3 and
  MENSCHUTKIN_ETI.

Independent of the terms: OPENSTAX_CL_RBR but for methyl, MEX_HO for bromide and
chloride, SWAIN_SCOTT and OPENSTAX_NU; PARKER_CL gave only the direction in
which small anions differ from azide.

Left out: MUNI_ME1 and SOLO_T64 (repeat STREIT_AVG), HAYAMI_CL (its own table
calls it an order of magnitude with an inferred reference; it has aryloxymethyl
above arylthiomethyl, we the reverse), BC51 (one number is a bound), NOYCE_SOLV
(solvolysis, not SN2), SOLO_NU (repeats OPENSTAX_NU). Tertiary, gem-dihalide and
three-ring rows have no number here by design; a test holds that. Rows that the
source gives as a bound are never compared, rows given as approximate count for
the order only.

Why 0.5: series of different authors for one substrate disagree by about half a
log unit (isopropyl -1.6 to -3.1), so pairs closer than that have no safe order,
and an RMSE under 0.5 is as good as the data.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import combinations

import pytest
from rdkit import Chem
from rdkit.Chem.MolStandardize import rdMolStandardize

from libtool.errors import InputError
from libtool.rate import electrophile_terms, estimate_rate, nucleophile_terms
from libtool.reaction import nucleophile_sites
from libtool.records import Conditions, NotAvailable, RateEstimate, Term
from libtool.reference.tables import Row, number, row, table
from tests.chemistry.build import best_electrophile, best_nucleophile, block

SAFE_GAP = 0.5


@dataclass(frozen=True)
class Point:
    """One published value and ours, log10."""

    name: str
    published: float
    ours: float
    exact: bool


def order(points: list[Point]) -> tuple[int, int]:
    """Pairs further apart than the safe gap that we put in the published order, and all such pairs."""
    pairs = [(a, b) for a, b in combinations(points, 2) if abs(a.published - b.published) > SAFE_GAP]
    return sum((a.published - b.published) * (a.ours - b.ours) > 0 for a, b in pairs), len(pairs)


def rmse(points: list[Point], reference: str) -> float:
    """Root mean square difference after both columns are set to 0 at the reference of the series."""
    zero = next(p for p in points if p.name == reference)
    errors = [(p.ours - zero.ours) - (p.published - zero.published) for p in points if p.exact and p is not zero]
    return math.sqrt(sum(e * e for e in errors) / len(errors))


def compared(rows: list[Row], ours: dict[str, float], name: str) -> list[Point]:
    return [
        Point(r[name], number(r), ours[r["key"]], r["qualifier"] == "=")
        for r in rows
        if r["key"] in ours and r["qualifier"] in {"=", "~"}
    ]


def series(table_name: str, wanted: str) -> list[Row]:
    return [r for r in table(table_name) if r["series"] == wanted]


# --- substrates --------------------------------------------------------------


def substrate_points(wanted: str) -> list[Point]:
    piperidine = best_nucleophile("C1CCNCC1")
    ours: dict[str, float] = {}
    for r in series("substrate_rates", wanted):
        found = estimate_rate(piperidine, best_electrophile(r["substrate_smiles"]), Conditions())
        if isinstance(found, RateEstimate):
            ours[r["key"]] = found.log10_k_rel
    return compared(series("substrate_rates", wanted), ours, "substrate_smiles")


SUBSTRATES = [
    # series, reference, fewest pairs with a safe order, RMSE when this was written
    ("STREIT_AVG", "CCBr", 30, 0.13),
    ("FINK_NAI_RCL", "CCCCCl", 25, 0.16),
    ("CONANT_KI_RCL", "CCCCCl", 18, 0.05),
    ("BB64_KI_RCL", "CCCCCl", 9, 0.03),
    ("CYCLO_I_RBR", "CC(C)Br", 11, 0.29),
    ("OPENSTAX_CL_RBR", "CC(C)(C)CBr", 6, 0.39),
    ("DOLBIER_N3", "CCCCCCCCBr", 5, 0.00),
]


@pytest.mark.parametrize(("wanted", "reference", "pairs", "measured"), SUBSTRATES, ids=lambda v: str(v))
def test_substrates_keep_the_published_order(wanted: str, reference: str, pairs: int, measured: float) -> None:
    """Every pair with a safe order; none of these series has an exception."""
    right, all_pairs = order(substrate_points(wanted))
    assert all_pairs == pairs
    assert right == all_pairs


@pytest.mark.parametrize(("wanted", "reference", "pairs", "measured"), SUBSTRATES, ids=lambda v: str(v))
def test_substrates_are_as_close_as_the_series_are_to_each_other(
    wanted: str, reference: str, pairs: int, measured: float
) -> None:
    assert rmse(substrate_points(wanted), reference) <= SAFE_GAP, f"{measured} when last measured"


def test_isopropyl_lies_between_the_two_series_that_disagree() -> None:
    """STREIT_AVG says -1.6, FINK and OPENSTAX -1.8 and -1.9 against ethyl, MUNI -3.1 against methyl."""
    found = electrophile_terms(best_electrophile("CC(C)Br"))
    assert not isinstance(found, NotAvailable)
    carbon = found[0]
    assert carbon.low <= -1.602 <= carbon.high
    assert carbon.low <= -1.836 + (-0.398) <= carbon.high


@pytest.mark.parametrize(
    "smiles",
    ["CC(C)(C)Br", "BrC1CC1", "CCCCCCCC(F)(F)Br", "BrC12CCC(CC1)CC2", "Brc1ccccc1", "C=CBr", "C#CBr"],
)
def test_what_the_sum_must_not_describe_has_no_number(smiles: str) -> None:
    found = estimate_rate(best_nucleophile("C1CCNCC1"), best_electrophile(smiles), Conditions())
    assert isinstance(found, NotAvailable)
    assert found.reason


# --- leaving groups ----------------------------------------------------------


def leaving_term(smiles: str) -> Term:
    found = electrophile_terms(best_electrophile(smiles))
    assert not isinstance(found, NotAvailable)
    return found[-1]


def leaving_points(wanted: str, groups: set[str]) -> list[Point]:
    rows = [r for r in series("leaving_group_rates", wanted) if r["leaving_group"] in groups]
    ours = {r["key"]: leaving_term(r["substrate_smiles"]).value for r in rows}
    return compared(rows, ours, "leaving_group")


HALIDES = {"F", "Cl", "Br", "I"}


@pytest.mark.parametrize(
    ("wanted", "groups", "right", "pairs"),
    [
        ("OPENSTAX_LG", HALIDES | {"OTs"}, 8, 8),
        ("ASU_LG", HALIDES | {"OTs", "OTf"}, 15, 15),
        ("MEX_HO", HALIDES, 5, 5),
        # Brosylate has no row of its own and stands as "other sulfonate" just under tosylate.
        ("SULFONATE_REL", {"OBs", "OMs", "ONs", "OTf", "OTs"}, 6, 8),
    ],
)
def test_leaving_groups_keep_the_published_order(wanted: str, groups: set[str], right: int, pairs: int) -> None:
    found = order(leaving_points(wanted, groups))
    assert found[1] == pairs
    assert found[0] >= right


@pytest.mark.parametrize("wanted", ["OPENSTAX_LG", "ASU_LG"])
def test_published_leaving_group_ratios_lie_within_the_range_of_the_term(wanted: str) -> None:
    """Against bromide. Figures in books are rounded to one digit, so 0.05 is allowed at the ends."""
    rows = {r["leaving_group"]: r for r in series("leaving_group_rates", wanted) if r["qualifier"] == "="}
    for group in {*HALIDES, "OTs", "OTf"} & rows.keys():
        term = leaving_term(rows[group]["substrate_smiles"])
        ratio = number(rows[group]) - number(rows["Br"])
        assert term.low - 0.05 <= ratio <= term.high + 0.05, group


def test_tosylate_term_spans_what_nucleophiles_make_of_it() -> None:
    """k(OTs)/k(Br) runs from 0.4 with thiolate to 4,000 in solvolysis (KOTS_KBR)."""
    term = leaving_term("CCOS(=O)(=O)c1ccc(C)cc1")
    assert all(term.low <= number(r) <= term.high for r in series("leaving_group_rates", "KOTS_KBR"))


# --- nucleophiles ------------------------------------------------------------


def nucleophile_points(wanted: str, solvent: str) -> list[Point]:
    """Sum of nucleophile and solvent term of the conjugate acid of each nucleophile, where it has a class."""
    ours: dict[str, float] = {}
    for r in series("nucleophiles_n", wanted):
        neutral = rdMolStandardize.Uncharger().uncharge(Chem.MolFromSmiles(r["nucleophile_smiles"]))
        sites = nucleophile_sites(block(Chem.MolToSmiles(neutral)))
        # Methanol is neutral there and an alkoxide here.
        if sites and r["nucleophile"] != "methanol":
            ours[r["key"]] = sum(t.value for t in nucleophile_terms(sites[0], Conditions(solvent=solvent)))
    return compared(series("nucleophiles_n", wanted), ours, "nucleophile")


@pytest.mark.parametrize(
    ("wanted", "solvent", "fewest"),
    [
        ("PEARSON_FULL", "methanol", 38),
        ("PEARSON_SEEN", "methanol", 10),
        ("OPENSTAX_NU", "ethanol", 2),
        ("SWAIN_SCOTT", "water", 1),
    ],
)
def test_nucleophiles_keep_the_published_order(wanted: str, solvent: str, fewest: int) -> None:
    """Against methyl iodide in methanol (Pearson) or methyl bromide in aqueous ethanol.

    Nine of ten pairs: classes are wider than single compounds (aniline and
    phenoxide differ by 0.05 in the source, and each class has one value).
    """
    right, pairs = order(nucleophile_points(wanted, solvent))
    assert pairs >= fewest
    assert right >= 0.9 * pairs


def pearson() -> list[Point]:
    """Without imidazole, which is neutral in the source and an azolide here."""
    return [p for p in nucleophile_points("PEARSON_FULL", "methanol") if p.name != "imidazole"]


def test_nucleophiles_in_methanol_are_as_close_as_the_series_are_to_each_other() -> None:
    """Measured 0.11 without, 0.39 with imidazole."""
    assert rmse(pearson(), "piperidine") <= SAFE_GAP


def test_anions_and_amines_stand_on_one_scale() -> None:
    """One solvent, one substrate, one table: the charged classes must not be shifted against the neutral ones.

    0.3 is what putting several amines into one class costs (diethylamine 7.0,
    piperidine 7.3 in the source).
    """
    anions = {"acetate", "methoxide", "phenoxide", "thiophenolate"}
    shift = {p.name: p.ours - (p.published - 7.3) for p in pearson()}
    charged = [v for k, v in shift.items() if k in anions]
    neutral = [v for k, v in shift.items() if k not in anions]
    assert len(charged) == 4
    assert len(neutral) == 5
    assert abs(sum(charged) / 4 - sum(neutral) / 5) <= 0.3, shift


# --- solvents ----------------------------------------------------------------


def solvent_points(wanted: str, nucleophile: str) -> list[Point]:
    site = best_nucleophile(nucleophile)
    ours: dict[str, float] = {}
    for r in series("solvent_rates", wanted):
        try:
            ours[r["key"]] = nucleophile_terms(site, Conditions(solvent=r["solvent"]))[1].value
        except InputError:
            # Solvents that nobody alkylates in (hexane, nitromethane) have no term.
            continue
    return compared(series("solvent_rates", wanted), ours, "solvent")


@pytest.mark.parametrize(
    ("wanted", "nucleophile", "pairs"),
    [
        ("OPENSTAX_N3", "Oc1ccccc1", 13),
        ("MENSCHUTKIN_ETI", "C1CCNCC1", 3),
        ("PARKER_CL", "CCO", 9),
    ],
)
def test_solvents_keep_the_published_order(wanted: str, nucleophile: str, pairs: int) -> None:
    right, all_pairs = order(solvent_points(wanted, nucleophile))
    assert all_pairs == pairs
    # PARKER_CL is the one series the terms were not read from. Two pairs of nine are the wrong way
    # round there: acetonitrile stands above acetone and DMF for small anions, measured below both.
    assert right >= all_pairs - (2 if wanted == "PARKER_CL" else 0)


@pytest.mark.parametrize(
    ("wanted", "nucleophile", "reference"),
    [("OPENSTAX_N3", "Oc1ccccc1", "methanol"), ("MENSCHUTKIN_ETI", "C1CCNCC1", "acetonitrile")],
)
def test_solvents_are_as_close_as_the_sources(wanted: str, nucleophile: str, reference: str) -> None:
    points = [Point(p.name, p.published, p.ours, True) for p in solvent_points(wanted, nucleophile)]
    assert rmse(points, reference) <= SAFE_GAP


def test_ranges_are_never_narrower_than_the_disagreement_of_the_series() -> None:
    floor = number(row("rate_terms", "spread_between_series"), "log10_high")
    found = estimate_rate(best_nucleophile("C1CCNCC1"), best_electrophile("CCBr"), Conditions())
    assert isinstance(found, RateEstimate)
    assert floor == SAFE_GAP
    assert found.log10_k_rel - found.low >= floor
    assert found.high - found.log10_k_rel >= floor
