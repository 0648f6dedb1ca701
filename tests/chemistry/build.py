"""Blocks made from SMILES, and rows of the files in tests/data, for the chemistry tests."""

from __future__ import annotations

import csv
from pathlib import Path

from rdkit import Chem

from libtool.reaction import electrophile_sites, make_products, nucleophile_sites
from libtool.records import BuildingBlock, ElectrophileSite, NucleophileSite

DATA = Path(__file__).resolve().parents[1] / "data"


def rows(name: str) -> list[dict[str, str]]:
    """Rows of a file in tests/data."""
    with (DATA / name).open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def block(smiles: str, block_id: str = "X") -> BuildingBlock:
    """Block in the atom order of the SMILES, without the clean-up of a reader."""
    mol = Chem.MolFromSmiles(smiles)
    assert mol is not None, smiles
    return BuildingBlock(id=block_id, smiles=Chem.MolToSmiles(mol), row=2, received=smiles, mol=mol)


def best_nucleophile(smiles: str) -> NucleophileSite:
    return nucleophile_sites(block(smiles, "N"))[0]


def best_electrophile(smiles: str) -> ElectrophileSite:
    return electrophile_sites(block(smiles, "E"))[0]


def products(nucleophile: str, electrophile: str) -> list[str]:
    """Product SMILES of a pair, the likeliest first."""
    return [p.smiles for p in make_products(block(nucleophile, "N"), block(electrophile, "E"))]


def shuffled(smiles: str, seed: int) -> str:
    """Same molecule, another spelling: atoms renumbered, another start and other branches."""
    spellings: list[str] = Chem.MolToRandomSmilesVect(Chem.MolFromSmiles(smiles), 1, randomSeed=seed + 1)
    return spellings[0]


def flat(smiles: str) -> str:
    """Canonical SMILES without stereochemistry."""
    mol = Chem.MolFromSmiles(smiles)
    Chem.RemoveStereochemistry(mol)
    return str(Chem.MolToSmiles(mol))
