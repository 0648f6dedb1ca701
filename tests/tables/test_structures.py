"""Every structure and pattern parses, and every pattern does what its examples say."""

from __future__ import annotations

import pytest
from rdkit import Chem

from tests.tables.files import FACTS, header, rows, structures, with_column

EXAMPLE_COLUMNS = {"pos", "neg", "partner_pos", "partner_neg", "example", "counter_example"}


def molecule(smiles: str) -> Chem.Mol:
    mol = Chem.MolFromSmiles(smiles)
    assert mol is not None, smiles
    return mol


def pattern(smarts: str) -> Chem.Mol:
    query = Chem.MolFromSmarts(smarts)
    assert query is not None, smarts
    return query


def patterns_with_examples() -> list[tuple[str, str, str, str, str]]:
    """Table, key, SMARTS, cells of structures that must match and that must not."""
    found = []
    for smarts, yes, no in (
        ("smarts", "pos", "neg"),
        ("partner_smarts", "partner_pos", "partner_neg"),
        ("smarts", "example", "counter_example"),
    ):
        for name in with_column(smarts, yes, no):
            found += [(name, r["key"], r[smarts], r[yes], r[no]) for r in rows(name) if r[smarts]]
    return found


def on_a_cut_molecule(smarts: str, example: str) -> bool:
    """The pattern is meant for a block whose leaving group is a dummy atom, the example is a whole block.

    The room that cuts blocks tests such patterns.
    """
    return "[#0]" in smarts and "*" not in example


PATTERNS = patterns_with_examples()


@pytest.mark.parametrize("name", FACTS)
def test_every_structure_parses(name: str) -> None:
    columns = [c for c in header(name) if c == "smiles" or c.endswith("_smiles") or c in EXAMPLE_COLUMNS]
    for r in rows(name):
        for column in columns:
            for smiles in structures(r[column]):
                molecule(smiles)


@pytest.mark.parametrize("name", FACTS)
def test_every_pattern_parses(name: str) -> None:
    for r in rows(name):
        for column in header(name):
            if (column == "smarts" or column.endswith("_smarts")) and r[column]:
                pattern(r[column])


@pytest.mark.parametrize(("name", "key", "smarts", "yes", "no"), PATTERNS)
def test_every_pattern_has_an_example_and_a_counter_example(
    name: str, key: str, smarts: str, yes: str, no: str
) -> None:
    assert structures(yes)
    assert structures(no)


@pytest.mark.parametrize(
    ("name", "key", "smarts", "yes", "no"), [p for p in PATTERNS if not on_a_cut_molecule(p[2], p[3])]
)
def test_pattern_matches_its_examples_and_spares_its_counter_examples(
    name: str, key: str, smarts: str, yes: str, no: str
) -> None:
    query = pattern(smarts)
    assert [s for s in structures(yes) if not molecule(s).HasSubstructMatch(query)] == []
    assert [s for s in structures(no) if molecule(s).HasSubstructMatch(query)] == []


def test_hazard_patterns_do_not_depend_on_the_spelling_of_their_examples() -> None:
    """Kekulé spelling without aromatic atoms must give the same answer."""
    for r in rows("hazards"):
        query = pattern(r["smarts"])
        for column, expected in (("pos", True), ("neg", False)):
            for smiles in structures(r[column]):
                kekule = molecule(smiles)
                Chem.Kekulize(kekule, clearAromaticFlags=True)
                again = molecule(Chem.MolToSmiles(kekule, kekuleSmiles=True))
                assert again.HasSubstructMatch(query) is expected, (r["key"], smiles)


def test_the_compound_that_an_acidity_belongs_to_can_lose_a_proton() -> None:
    """A row on the compound itself draws a hydrogen; one on the conjugate acid draws a base."""
    lone_pair = pattern("[#7;+0;!$(N-C=O);!$(N-S(=O)=O)]")
    for r in rows("pka"):
        mol = molecule(r["compound_smiles"])
        if r["acid"] == "conjugate acid":
            assert mol.HasSubstructMatch(lone_pair), r["key"]
        else:
            assert r["acid"] == "compound", r["key"]
            hydrogens = [a.GetTotalNumHs() or a.GetAtomicNum() == 1 for a in mol.GetAtoms()]
            assert any(hydrogens), r["key"]
