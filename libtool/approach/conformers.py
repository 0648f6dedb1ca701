"""Low-energy shapes of an electrophile.

RDKit does the chemistry: ETKDGv3 embedding with a fixed random seed, then
MMFF94s (UFF where MMFF94s lacks parameters) minimisation. What is ours is
which conformers are kept.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from rdkit import Chem, rdBase
from rdkit.Chem import rdDistGeom, rdForceFieldHelpers, rdMolAlign

from libtool.reference.tables import number, row

__all__ = ["Shapes", "low_energy_shapes"]

_GAS_CONSTANT_KCAL = 0.0019872043  # kcal/(mol K), CODATA 2018 R = 8.314462618 J/(mol K)
_MOST_MINIMISER_STEPS = 2000


@dataclass(frozen=True, slots=True)
class Shapes:
    """Molecule with hydrogens, its kept conformers, and their energies.

    `energies` are relative to the lowest, kcal/mol; `populations` add up to 1.
    Conformer ids of `mol` are 0 .. n-1 in the order of the energies.
    """

    mol: Chem.Mol
    energies: tuple[float, ...]
    populations: tuple[float, ...]
    force_field: str


def low_energy_shapes(mol: Chem.Mol, seed: int) -> Shapes | None:
    """Conformers of a molecule, lowest energy first.

    Parameters
    ----------
    mol : rdkit.Chem.Mol
        Without explicit hydrogens; heavy atoms keep their indices.
    seed : int
        Random seed of the embedding.

    Returns
    -------
    Shapes or None
        None when no three-dimensional structure can be made. Costs 10 to
        300 ms for building blocks.
    """
    full = Chem.AddHs(mol)
    params = rdDistGeom.ETKDGv3()
    # The stubs of RDKit 2026.9 give the settings the type of their owner.
    params.randomSeed = seed  # type: ignore[assignment]
    wanted = int(number(row("approach_terms", "conformers_embedded")))
    with rdBase.BlockLogs():
        ids = list(rdDistGeom.EmbedMultipleConfs(full, wanted, params))
        if not ids:
            params.useRandomCoords = True  # type: ignore[assignment]
            ids = list(rdDistGeom.EmbedMultipleConfs(full, wanted, params))
        if not ids:
            return None
        force_field, results = _minimise(full)
    if not results:
        return None
    ranked = sorted((energy, conformer) for (_, energy), conformer in zip(results, ids, strict=True))
    lowest = ranked[0][0]
    window = number(row("approach_terms", "energy_window"))
    kept = [(e - lowest, c) for e, c in ranked if e - lowest <= window]
    kept = _distinct(full, kept)[: int(number(row("approach_terms", "conformers_kept")))]
    temperature = number(row("approach_terms", "population_temperature"))
    weights = [math.exp(-energy / (_GAS_CONSTANT_KCAL * temperature)) for energy, _ in kept]
    return Shapes(
        mol=_only(full, [c for _, c in kept]),
        energies=tuple(e for e, _ in kept),
        populations=tuple(w / sum(weights) for w in weights),
        force_field=force_field,
    )


def _minimise(mol: Chem.Mol) -> tuple[str, list[tuple[int, float]]]:
    if rdForceFieldHelpers.MMFFHasAllMoleculeParams(mol):
        return "MMFF94s", rdForceFieldHelpers.MMFFOptimizeMoleculeConfs(
            mol, mmffVariant="MMFF94s", maxIters=_MOST_MINIMISER_STEPS
        )
    if rdForceFieldHelpers.UFFHasAllMoleculeParams(mol):
        return "UFF", rdForceFieldHelpers.UFFOptimizeMoleculeConfs(mol, maxIters=_MOST_MINIMISER_STEPS)
    return "", []


def _distinct(mol: Chem.Mol, ranked: list[tuple[float, int]]) -> list[tuple[float, int]]:
    """Drop conformers that minimised to one already kept."""
    same_energy = number(row("approach_terms", "same_conformer_energy"))
    same_shape = number(row("approach_terms", "same_conformer_rms"))
    heavy = Chem.RemoveHs(mol)
    kept: list[tuple[float, int]] = []
    for energy, conformer in ranked:
        near = [c for e, c in kept if abs(e - energy) < same_energy]
        if not any(rdMolAlign.GetBestRMS(heavy, heavy, conformer, c) < same_shape for c in near):
            kept.append((energy, conformer))
    return kept


def _only(mol: Chem.Mol, conformers: list[int]) -> Chem.Mol:
    """Copy of the molecule with the named conformers, renumbered from 0."""
    copy = Chem.Mol(mol)
    copy.RemoveAllConformers()
    for number_, conformer in enumerate(conformers):
        kept = Chem.Conformer(mol.GetConformer(conformer))
        kept.SetId(number_)
        copy.AddConformer(kept)
    return copy
