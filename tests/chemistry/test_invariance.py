"""What must not depend on how a molecule was written down.

Blocks are real ones from the recorded alkylations in tests/data, spelled again
in random atom order; drawings are moved by hand between tautomers. Masses are
RDKit's on whole molecules, not ours.
"""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st
from rdkit import Chem
from rdkit.Chem import rdMolDescriptors
from rdkit.Chem.MolStandardize import rdMolStandardize

from libtool.blocks import read_blocks
from libtool.rate import estimate_rate
from libtool.reaction import electrophile_sites, make_products, nucleophile_sites
from libtool.records import Conditions, RateEstimate
from libtool.triage.flags import electrophile_flags, nucleophile_flags, pair_flags
from tests.chemistry.build import block, flat, products, rows, shuffled

RECORDS = rows("recorded_alkylations.csv")
SEEDS = st.integers(min_value=0, max_value=2**20)


@given(record=st.sampled_from(RECORDS), seed=SEEDS)
def test_products_do_not_depend_on_the_atom_order(record: dict[str, str], seed: int) -> None:
    nucleophile, electrophile = record["nucleophile"], record["electrophile"]
    before = make_products(block(nucleophile), block(electrophile))
    after = make_products(block(shuffled(nucleophile, seed)), block(shuffled(electrophile, seed)))
    # Shares are floating-point sums whose order changes: 1e-9 is far below a printed digit.
    assert [p.smiles for p in after] == [p.smiles for p in before]
    assert [p.probability for p in after] == pytest.approx([p.probability for p in before], abs=1e-9)
    assert [p.confidence for p in after] == [p.confidence for p in before]


def flag_words(nucleophile: str, electrophile: str) -> list[tuple[str, str, int]]:
    """Flags as (id, role, number of atoms): what stays when the atoms are numbered anew."""
    n, e = block(nucleophile, "N"), block(electrophile, "E")
    n_sites, e_sites = nucleophile_sites(n), electrophile_sites(e)
    found = [*electrophile_flags(e, e_sites[0] if e_sites else None), *nucleophile_flags(n, n_sites)]
    if n_sites and e_sites:
        rate = estimate_rate(n_sites[0], e_sites[0], Conditions())
        found += pair_flags(n_sites[0], e_sites[0], rate if isinstance(rate, RateEstimate) else None)
    return sorted((f.id, f.role.value, len(f.atoms)) for f in found)


@given(record=st.sampled_from(RECORDS), seed=SEEDS)
def test_flags_do_not_depend_on_the_atom_order(record: dict[str, str], seed: int) -> None:
    nucleophile, electrophile = record["nucleophile"], record["electrophile"]
    again = flag_words(shuffled(nucleophile, seed), shuffled(electrophile, seed))
    assert again == flag_words(nucleophile, electrophile)


@given(record=st.sampled_from(RECORDS), seed=SEEDS)
def test_rates_do_not_depend_on_the_atom_order(record: dict[str, str], seed: int) -> None:
    def rate(nucleophile: str, electrophile: str) -> float | str:
        n, e = nucleophile_sites(block(nucleophile)), electrophile_sites(block(electrophile))
        if not n or not e:
            return "no site"
        found = estimate_rate(n[0], e[0], Conditions())
        return round(found.log10_k_rel, 9) if isinstance(found, RateEstimate) else found.reason

    nucleophile, electrophile = record["nucleophile"], record["electrophile"]
    assert rate(shuffled(nucleophile, seed), shuffled(electrophile, seed)) == rate(nucleophile, electrophile)


@pytest.mark.parametrize(
    "drawings",
    [
        ("Cc1cc[nH]n1", "Cc1ccn[nH]1"),
        ("c1ccc2[nH]ncc2c1", "c1ccc2n[nH]cc2c1"),
        ("Cc1c[nH]cn1", "Cc1cnc[nH]1"),
        ("c1nc[nH]n1", "c1nnc[nH]1"),
        ("Cc1nn[nH]n1", "Cc1nnn[nH]1"),
        ("Cc1ccc2[nH]nnc2c1", "Cc1ccc2nn[nH]c2c1", "Cc1ccc2n[nH]nc2c1"),
        ("c1ncc2nc[nH]c2n1", "c1ncc2[nH]cnc2n1"),
        ("COc1ccc2[nH]cnc2c1", "COc1ccc2nc[nH]c2c1"),
        ("O=c1cccc[nH]1", "Oc1ccccn1"),
        ("O=c1cccn[nH]1", "Oc1cccnn1"),
        ("O=c1cc[nH]cn1", "O=c1ccnc[nH]1", "Oc1ccncn1"),
        ("S=c1cccc[nH]1", "Sc1ccccn1"),
        ("CC(N)=S", "CC(=N)S"),
        ("OC(C)=S", "CC(=O)S"),
    ],
    ids=lambda d: d[0],
)
def test_products_do_not_depend_on_the_drawn_tautomer(drawings: tuple[str, ...]) -> None:
    assert len({Chem.CanonSmiles(d) for d in drawings}) == len(drawings)
    first, *others = (products(d, "CCBr") for d in drawings)
    assert first
    for other in others:
        assert set(other) == set(first)
        assert other[0] == first[0]


@pytest.mark.parametrize(
    "drawings",
    [
        ("S=c1[nH]c2ccccc2[nH]1", "Sc1nc2ccccc2[nH]1"),
        ("O=c1cc[nH]c(=O)[nH]1", "Oc1ccnc(O)n1"),
        ("O=c1[nH][nH]c(=O)c2ccccc12", "O=c1[nH]nc(O)c2ccccc12"),
        ("Nc1nc2[nH]cnc2c(=O)[nH]1", "Nc1nc(O)c2[nH]cnc2n1"),
    ],
    ids=lambda d: d[0],
)
def test_first_product_is_one_compound_where_two_hydrogens_can_move(drawings: tuple[str, ...]) -> None:
    """The hydrogen that stays is left where it was drawn, so compounds are compared, not drawings.

    RDKit's canonical tautomer decides what is one compound.
    """
    canonical = rdMolStandardize.TautomerEnumerator().Canonicalize
    found = [
        {Chem.MolToSmiles(canonical(Chem.MolFromSmiles(smiles))) for smiles in products(d, "CCBr")[:1]}
        for d in drawings
    ]
    assert found[0]
    assert all(other == found[0] for other in found)


CENTRES = [r for r in RECORDS if r["stereo_outcome"] in {"inverted", "retained"}]


@given(record=st.sampled_from(CENTRES), seed=SEEDS)
def test_inversion_twice_gives_the_start(record: dict[str, str], seed: int) -> None:
    """Iodide to thioether, thioether read as iodide, and once more: the first molecule comes back.

    The reading back is RDKit's: the heavy atom at the end of the new bond is
    exchanged in place, which keeps the spatial arrangement.
    """
    start = iodide(shuffled(record["electrophile"], seed))
    once = displaced(start)
    assert once != start
    assert flat(once) == flat(start)
    assert displaced(once) == start


def iodide(electrophile: str) -> str:
    """Iodide of an electrophile, with the leaving group exchanged in place."""
    mol = Chem.RWMol(electrophile_sites(block(electrophile))[0].stripped)
    mol.GetAtomWithIdx(0).SetAtomicNum(53)
    return str(Chem.MolToSmiles(mol))


def displaced(electrophile: str) -> str:
    """Product with methanethiol, its methylthio group exchanged for iodine in place."""
    editable = Chem.RWMol(Chem.MolFromSmiles(products("CS", electrophile)[0]))
    ((methyl, sulfur, _),) = editable.GetSubstructMatches(Chem.MolFromSmarts("[CH3][SX2]-[CX4]"))
    editable.GetAtomWithIdx(sulfur).SetAtomicNum(53)
    editable.RemoveAtom(methyl)
    Chem.SanitizeMol(editable)
    return str(Chem.CanonSmiles(Chem.MolToSmiles(editable)))


@given(record=st.sampled_from(RECORDS))
def test_mass_of_a_product_is_that_of_its_parts(record: dict[str, str]) -> None:
    """Nucleophile + electrophile - hydrogen - leaving group, monoisotopic, on RDKit's masses.

    Tolerance 1e-6 u: RDKit prints masses to more digits, sums of thirty atoms
    lose fewer than nine.
    """
    n, e = block(record["nucleophile"], "N"), block(record["electrophile"], "E")
    table = Chem.GetPeriodicTable()
    for product in make_products(n, e):
        leaving = [e.mol.GetAtomWithIdx(i) for i in product.electrophile.leaving_atoms]
        lost = table.GetMostCommonIsotopeMass(1)
        for atom in leaving:
            lost += atom.GetTotalNumHs() * table.GetMostCommonIsotopeMass(1)
            lost += table.GetMostCommonIsotopeMass(atom.GetAtomicNum())
        whole = rdMolDescriptors.CalcExactMolWt(n.mol) + rdMolDescriptors.CalcExactMolWt(e.mol)
        assert product.exact_mass == pytest.approx(whole - lost, abs=1e-6)
        again = Chem.MolFromSmiles(product.smiles)
        assert rdMolDescriptors.CalcExactMolWt(again) == pytest.approx(product.exact_mass, abs=1e-6)
        assert rdMolDescriptors.CalcMolFormula(again) == product.formula


@given(record=st.sampled_from(RECORDS))
def test_shares_add_up_and_fall(record: dict[str, str]) -> None:
    found = make_products(block(record["nucleophile"]), block(record["electrophile"]))
    shares = [p.probability for p in found]
    assert shares == sorted(shares, reverse=True)
    assert not shares or sum(shares) == pytest.approx(1.0, abs=1e-9)
    assert [p.rank for p in found] == list(range(1, len(found) + 1))
    assert len({p.smiles for p in found}) == len(found)


@pytest.mark.parametrize("drawn", ["Cn1c(=O)c2[nH]cnc2n(C)c1=O", "Cn1c(=O)c2nc[nH]c2n(C)c1=O"])
def test_theophylline_gives_caffeine(drawn: str) -> None:
    """Caffeine is the product of methylating theophylline, in every textbook on xanthines."""
    pair = read_blocks([drawn, "CI"])
    first = make_products(pair["row 1"], pair["row 2"])[0]
    assert first.smiles == Chem.CanonSmiles("Cn1c(=O)c2c(ncn2C)n(C)c1=O")
