"""Pattern tables seen from outside: what each row says of its example is what the sites say."""

from __future__ import annotations

import pytest
from rdkit import Chem

from libtool.reaction import electrophile_sites, make_products, nucleophile_sites
from libtool.reference.tables import row, table
from tests.chemistry.build import block, products


@pytest.mark.parametrize("entry", table("site_patterns"), ids=lambda r: r["key"])
def test_site_pattern_example_is_a_site_and_counter_example_is_none(entry: dict[str, str]) -> None:
    assert entry["key"] in {s.kind for s in nucleophile_sites(block(entry["example"]))}
    assert entry["key"] not in {s.kind for s in nucleophile_sites(block(entry["counter_example"]))}


@pytest.mark.parametrize("entry", table("leaving_group_patterns"), ids=lambda r: r["key"])
def test_leaving_group_example_leaves_and_counter_example_does_not(entry: dict[str, str]) -> None:
    assert entry["key"] in {s.leaving_group for s in electrophile_sites(block(entry["example"]))}
    assert entry["key"] not in {s.leaving_group for s in electrophile_sites(block(entry["counter_example"]))}


CARBON_ROWS = [r for r in table("carbon_patterns") if r["key"] != "other"]


@pytest.mark.parametrize("entry", CARBON_ROWS, ids=lambda r: r["key"])
def test_carbon_pattern_matches_its_example_at_the_dummy_only(entry: dict[str, str]) -> None:
    query = Chem.MolFromSmarts(entry["smarts"])
    assert Chem.MolFromSmiles(entry["example"]).HasSubstructMatch(query)
    assert not Chem.MolFromSmiles(entry["counter_example"]).HasSubstructMatch(query)


@pytest.mark.parametrize(
    "entry", [r for r in CARBON_ROWS if r["kind"] != "modifier" and r["key"] != "acyl"], ids=lambda r: r["key"]
)
def test_carbon_class_of_the_example_with_bromine_for_the_dummy(entry: dict[str, str]) -> None:
    """`acyl` is left out: acyl halides are no leaving groups on carbon here, they have a flag."""
    site = electrophile_sites(block(entry["example"].replace("*", "Br")))[0]
    assert site.carbon_class == entry["key"]
    others = electrophile_sites(block(entry["counter_example"].replace("*", "Br")))
    assert all(s.carbon_class != entry["key"] for s in others)


@pytest.mark.parametrize(
    ("key", "nucleophile", "favoured", "disfavoured"),
    [
        ("azole_substituted_neighbour", "Cc1cc[nH]n1", "Cc1ccn(CC)n1", "CCn1nccc1C"),
        ("azole_away_from_fusion", "c1ccc2[nH]ncc2c1", "CCn1ncc2ccccc21", "CCn1cc2ccccc2n1"),
        ("azole_flanked_by_carbons", "c1nc[nH]n1", "CCn1cncn1", "CCn1cnnc1"),
        ("purine_n7", "c1ncc2nc[nH]c2n1", "CCn1cnc2cncnc21", "CCn1cnc2ncncc21"),
        ("xanthine_n9", "Cn1c(=O)c2[nH]cnc2n(C)c1=O", "CCn1cnc2c1c(=O)n(C)c(=O)n2C", "CCn1cnc2c(=O)n(C)c(=O)n(C)c21"),
        ("azinone_oxygen", "O=c1cccc[nH]1", "CCn1ccccc1=O", "CCOc1ccccn1"),
        ("azinone_away_from_carbonyl", "O=c1cc[nH]cn1", "CCn1cnccc1=O", "CCn1ccc(=O)nc1"),
    ],
)
def test_regiochemistry_counts_set_the_order(key: str, nucleophile: str, favoured: str, disfavoured: str) -> None:
    products = {p.smiles: p for p in make_products(block(nucleophile), block("CCBr"))}
    first, second = products[Chem.CanonSmiles(favoured)], products[Chem.CanonSmiles(disfavoured)]
    assert first.rank < second.rank
    counts = row("regiochemistry", key)["counts"]
    if key == "purine_n7":
        more, fewer = map(int, counts.split(":"))
        assert first.probability / second.probability == pytest.approx(more / fewer, rel=0.05)


def test_every_regiochemistry_row_is_exercised_above() -> None:
    marks = test_regiochemistry_counts_set_the_order.pytestmark  # type: ignore[attr-defined]
    assert {case[0] for case in marks[0].args[1]} == {r["key"] for r in table("regiochemistry")}


@pytest.mark.parametrize(
    ("nucleophile", "expected"),
    [
        ("CNC(=O)NCC", {"CCNC(=O)N(C)C", "CCN(C)C(=O)NC"}),
        ("NC(=O)NC", {"CNC(=O)NC", "CN(C)C(N)=O"}),
        ("CNN", {"CNNC", "CN(C)N"}),
    ],
)
def test_both_ends_of_a_pattern_that_reads_the_same_backwards_are_sites(nucleophile: str, expected: set[str]) -> None:
    """A urea or a hydrazine is matched from either nitrogen; both are alkylated in practice."""
    methylated = set(products(nucleophile, "CI"))
    assert {Chem.CanonSmiles(s) for s in expected} <= methylated


def test_a_formamide_is_an_amide() -> None:
    """Its carbonyl carbon carries a hydrogen that no drawing shows."""
    assert products("O=CNc1ccccc1", "CI") == [Chem.CanonSmiles("O=CN(C)c1ccccc1")]


def test_a_chloride_on_an_amidomethyl_carbon_goes_before_one_next_to_a_carbonyl() -> None:
    """Like chloromethyl ethers, such chlorides leave with the help of the heteroatom; recorded so in the patents."""
    assert products("CO", "O=C(CCl)N(C)CCl")[0] == Chem.CanonSmiles("O=C(CCl)N(C)COC")
