"""The back side of an electrophile, as geometry.

What is asked of it: the same answer for the same molecule, the order that
every textbook gives for methyl to tert-butyl, the right atoms named, and a
picture whose frame is what the legend says. It is not a rate model: the rank
correlation with published rates is stated and has a floor, no more.
"""

from __future__ import annotations

import json
import math
from functools import cache
from itertools import pairwise

import numpy as np
import pandas
import pytest
from rdkit import Chem

from libtool.approach import Approach, approach
from libtool.approach.scene import scene
from libtool.reference.tables import number, row, table
from tests.chemistry.build import best_electrophile, shuffled

# Two spellings put the molecule in the frame in another orientation, and the
# 400 sampled directions fall differently on the edge of a shadow. The edge
# holds about 4 * sqrt(400) = 80 directions, half a spacing each way: a standard
# deviation of sqrt(80) / 2 / 400 = 0.011. Two of them:
RIGID_TOLERANCE = 0.022
# Flexible chains have more low-energy shapes than the six that are kept, and
# which of two mirror images is kept depends on the atom order. n-Butyl bromide
# differs by 0.07 between spellings; readers make the order canonical, so one
# block has one number.
FLEXIBLE_TOLERANCE = 0.10


@cache
def back_side(smiles: str) -> Approach:
    found = approach(best_electrophile(smiles))
    assert isinstance(found, Approach)
    return found


@pytest.mark.parametrize(
    ("smiles", "tolerance"),
    [
        ("CBr", RIGID_TOLERANCE),
        ("CCBr", RIGID_TOLERANCE),
        ("CC(C)Br", RIGID_TOLERANCE),
        ("CC(C)CBr", RIGID_TOLERANCE),
        ("CC(C)(C)CBr", RIGID_TOLERANCE),
        ("BrCc1ccccc1", RIGID_TOLERANCE),
        ("BrC1CCCCC1", RIGID_TOLERANCE),
        ("C[C@H](Br)C(=O)OC", RIGID_TOLERANCE),
        ("CCCCBr", FLEXIBLE_TOLERANCE),
        ("COCCOCCBr", FLEXIBLE_TOLERANCE),
    ],
)
def test_open_share_does_not_depend_on_atom_order_or_orientation(smiles: str, tolerance: float) -> None:
    shares = [back_side(shuffled(smiles, seed)).open_fraction for seed in (1, 5, 9)]
    shares.append(back_side(smiles).open_fraction)
    assert max(shares) - min(shares) <= tolerance


@pytest.mark.parametrize("smiles", ["CCBr", "CC(C)Br", "CC(C)(C)CBr"])
def test_open_share_does_not_depend_on_the_seed(smiles: str) -> None:
    site = best_electrophile(smiles)
    found = [approach(site, seed=seed) for seed in (1, 2, 3)]
    shares = [a.open_fraction for a in found if isinstance(a, Approach)]
    assert len(shares) == 3
    assert max(shares) - min(shares) <= RIGID_TOLERANCE


def test_two_runs_are_identical() -> None:
    site = best_electrophile("COCCOCCBr")
    assert approach(site) == approach(site)


def test_mirror_images_have_the_same_back_side() -> None:
    left, right = back_side("C[C@H](Br)C(=O)OC"), back_side("C[C@@H](Br)C(=O)OC")
    assert left.open_fraction == pytest.approx(right.open_fraction, abs=RIGID_TOLERANCE)


def test_open_share_falls_from_methyl_to_tert_butyl() -> None:
    shares = [back_side(s).open_fraction for s in ("CBr", "CCBr", "CC(C)Br", "CC(C)(C)Br")]
    # Every step is wider than the noise of the sampling.
    assert all(a - b > RIGID_TOLERANCE for a, b in pairwise(shares))
    assert shares[0] == 1.0
    assert shares[-1] < 0.05


def test_open_share_falls_with_branches_on_the_beta_carbon() -> None:
    shares = [back_side(s).open_fraction for s in ("CCBr", "CC(C)CBr", "CC(C)(C)CBr")]
    assert all(a - b > RIGID_TOLERANCE for a, b in pairwise(shares))


def test_neopentyl_is_closed_by_a_methyl_group_in_every_conformer() -> None:
    found = back_side("CC(C)(C)CBr")
    assert all(c.open_fraction < 0.05 for c in found.conformers)
    worst = found.mol.GetAtomWithIdx(found.intruders[0].atom)
    bearer = worst if worst.GetAtomicNum() == 6 else worst.GetNeighbors()[0]
    assert bearer.GetSymbol() == "C"
    assert len(Chem.GetShortestPath(found.mol, found.site.carbon, bearer.GetIdx())) == 3


@pytest.mark.parametrize("smiles", ["CBr", "CCBr", "CCCBr", "BrCc1ccccc1", "C=CCBr"])
def test_nothing_is_blamed_in_unhindered_reagents(smiles: str) -> None:
    assert back_side(smiles).intruders == ()


@pytest.mark.parametrize("smiles", ["Brc1ccccc1", "C#CBr", "BrC12CCC(CC1)CC2", "BrC12CC3CC(CC(C3)C1)C2"])
def test_behind_an_aryl_alkynyl_or_bridgehead_carbon_there_is_no_way_in(smiles: str) -> None:
    found = back_side(smiles)
    # The ring or the triple bond lies on the line itself; 0.01 is four directions of 400 on the rim.
    assert found.open_fraction <= 0.01
    assert found.intruders


SIMPLE_ALKYL = {"CBr", "CCBr", "CCCBr", "CCCCBr", "CC(C)CBr", "CC(C)Br", "CC(C)(C)CBr"}


@pytest.mark.parametrize(("series", "substrates", "floor"), [("STREIT_AVG", 7, 0.85), ("OPENSTAX_CL_RBR", 4, 0.95)])
def test_rank_correlation_with_published_rates_of_simple_alkyl_bromides(
    series: str, substrates: int, floor: float
) -> None:
    """Spearman's coefficient: 0.94 for seven acyclic alkyls, 1.0 for four of them with chloride.

    Seven substrates that every textbook orders by bulk are no proof of a model.
    Among secondary rings (CYCLO_I_RBR: isopropyl, cyclobutyl, cyclopentyl,
    cyclohexyl) the same figure is 0.0: ring strain is not geometry of the
    ground state. The floors allow one exchange of neighbours for seven (0.89
    and ties of propyl and butyl), none for four.
    """
    rates = {r["substrate_smiles"]: number(r) for r in table("substrate_rates") if r["series"] == series}
    rates = {smiles: rate for smiles, rate in rates.items() if smiles in SIMPLE_ALKYL}
    assert len(rates) == substrates
    ranks = pandas.DataFrame({"rate": rates, "open": {s: back_side(s).open_fraction for s in rates}}).rank()
    assert float(ranks["rate"].corr(ranks["open"])) >= floor


# --- numbers inside the answer -------------------------------------------------

MEASURED = ["CCBr", "CC(C)CBr", "CC(C)(C)CBr", "CC(C)Br", "BrC1CCCCC1", "COC(=O)CCCBr", "CS(=O)(=O)OCC(C)C"]


@pytest.mark.parametrize("smiles", MEASURED)
def test_populations_and_energies(smiles: str) -> None:
    conformers = back_side(smiles).conformers
    # Rounding of six terms in double precision.
    assert sum(c.population for c in conformers) == pytest.approx(1.0, abs=1e-12)
    energies = [c.energy_kcal_mol for c in conformers]
    assert energies[0] == 0.0
    assert energies == sorted(energies)
    for c in conformers:
        boltzmann = math.exp(-c.energy_kcal_mol / (0.0019872 * 298.15))
        # The gas constant is typed here with five digits.
        assert c.population / conformers[0].population == pytest.approx(boltzmann, rel=1e-3)


@pytest.mark.parametrize("smiles", MEASURED)
def test_axis_probe_and_overlaps_agree_with_the_coordinates(smiles: str) -> None:
    found = back_side(smiles)
    radii = {r["symbol"]: number(r) for r in table("radii")}
    distance = number(row("approach_terms", "nucleophile_distance"))
    for c in found.conformers:
        xyz = found.mol.GetConformer(c.conformer).GetPositions()
        carbon, leaving = xyz[found.site.carbon], xyz[found.site.leaving_atoms[0]]
        probe = np.array(c.probe)
        # Same double-precision coordinates, other formulas: 1e-9.
        assert np.linalg.norm(probe - carbon) == pytest.approx(distance, abs=1e-9)
        cosine = (probe - carbon) @ (leaving - carbon) / np.linalg.norm(leaving - carbon) / distance
        assert cosine == pytest.approx(-1.0, abs=1e-9)
        for intruder in c.intruders:
            symbol = found.mol.GetAtomWithIdx(intruder.atom).GetSymbol()
            gap = np.linalg.norm(xyz[intruder.atom] - probe)
            assert intruder.distance_ang == pytest.approx(gap, abs=1e-9)
            assert intruder.overlap_ang == pytest.approx(radii["N"] + radii[symbol] - gap, abs=1e-9)
            assert 0.0 <= intruder.cone_share <= 1.0 - c.open_fraction + 1e-9


@pytest.mark.parametrize("smiles", MEASURED)
def test_scene_survives_json_and_keeps_its_frame(smiles: str) -> None:
    found = back_side(smiles)
    for position in range(len(found.conformers)):
        picture = scene(found, conformer=position)
        calls = json.loads(json.dumps([[name, list(arguments)] for name, arguments in picture.calls]))
        assert [name for name, _ in calls] == [name for name, _ in picture.calls]
        block = next(arguments[0] for name, arguments in calls if name == "addModel")
        drawn = Chem.MolFromMolBlock(block, removeHs=False)
        xyz = drawn.GetConformer().GetPositions()
        carbon, leaving = xyz[found.site.carbon], xyz[found.site.leaving_atoms[0]]
        # A mol block has four decimals.
        assert carbon == pytest.approx([0.0, 0.0, 0.0], abs=1e-3)
        assert leaving[0] > 1.0
        assert leaving[1:] == pytest.approx([0.0, 0.0], abs=1e-3)
        worst = found.conformers[position].intruders
        if worst:
            assert xyz[worst[0].atom][1] >= 0.0
            assert xyz[worst[0].atom][2] == pytest.approx(0.0, abs=1e-3)
        drawn_distances = np.linalg.norm(xyz[:, None] - xyz[None, :], axis=2)
        original = found.mol.GetConformer(found.conformers[position].conformer).GetPositions()
        distances = np.linalg.norm(original[:, None] - original[None, :], axis=2)
        assert np.abs(drawn_distances - distances).max() < 1e-3


def test_sentence_of_the_picture_tells_the_same_number_as_the_answer() -> None:
    found = back_side("CC(C)(C)CBr")
    sentence = scene(found).sentence
    assert f"{found.open_fraction:.0%} of the approach cone is open" in sentence
    assert f"({found.intruders[0].overlap_ang:.1f} Å)" in sentence
    assert "nothing stands in the nucleophile's way" in scene(back_side("CCBr")).sentence


def test_antiperiplanar_hydrogens() -> None:
    """Isopropyl bromide: each methyl group has exactly one hydrogen opposite the leaving group."""
    assert back_side("CC(C)Br").anti_hydrogens == 2
    assert back_side("CCBr").anti_hydrogens == 1
    assert back_side("CBr").anti_hydrogens == 0
    assert back_side("CC(C)(C)CBr").anti_hydrogens == 0
