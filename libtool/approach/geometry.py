"""The back side of an electrophile, measured on its conformers.

An incoming nitrogen atom is put on the line that runs from the leaving group
through the carbon, at the distance of an SN2 transition state. Every atom
whose van der Waals sphere reaches into the incoming one is an intruder,
unless ethyl bromide, the reference of all rates, shows as much. The same is
asked for directions around the line, inside a cone: atoms that close much of
the cone are intruders too where less of it is open than in ethyl bromide.

A molecule reacts through the shape that lets the nucleophile in, not through
the most populated one (Curtin-Hammett principle), so the most open of the
low-energy conformers stands for the molecule. This is geometry of the ground
state: nothing relaxes and no energy is computed. It says which atoms are in
the way, not how fast the reaction is.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
from rdkit import Chem
from rdkit.Chem import rdMolTransforms

from libtool.approach.conformers import Shapes, low_energy_shapes
from libtool.approach.result import Approach, ConformerApproach, Intruder
from libtool.errors import ChemistryError
from libtool.records import ElectrophileSite, NotAvailable
from libtool.reference.tables import number, row, table

__all__ = ["MODEL", "SEED", "approach", "incoming_radius_ang"]

MODEL = (
    "Geometry of the ground state: an incoming nitrogen at the transition-state distance opposite the leaving "
    "group, on MMFF94s conformers; the most open one is shown. Overlaps that ethyl bromide shows as well are not "
    "counted. It says what is in the way, not how fast the reaction is."
)
SEED = 20_260_101
"""Random seed of the conformer embedding, so that a picture is the same every time."""

_FloatArray = np.ndarray[tuple[int, ...], np.dtype[np.float64]]
_SAMPLES = 400


def approach(site: ElectrophileSite, *, seed: int = SEED) -> Approach | NotAvailable:
    """Back side of an electrophilic carbon: axis, open share, atoms in the way.

    Shows at a glance why a flagged reagent is hindered. Do not read a rate
    from it: see `MODEL`.

    Parameters
    ----------
    site : ElectrophileSite
    seed : int
        Random seed of the conformer search.

    Returns
    -------
    Approach or NotAvailable
        Distances in angstrom, energies in kcal/mol. NotAvailable when no
        three-dimensional structure can be made.

    Notes
    -----
    Distances and the cone stand in `approach_terms.csv`, van der Waals radii
    [@bondi_1964_jpc; @mantina_2009_jpca] in `radii.csv`. Costs 10 to 300 ms.
    """
    shapes = low_energy_shapes(site.block.mol, seed)
    if shapes is None:
        return NotAvailable(
            what="3D approach",
            reason=f"no three-dimensional structure of {site.block.id} could be made",
            missing="conformers or force-field parameters",
        )
    reference = _ethyl_bromide(seed)
    measured = tuple(
        _measure(shapes, conformer, site.carbon, site.leaving_atoms[0], reference)
        for conformer in range(len(shapes.energies))
    )
    window = number(row("approach_terms", "reactive_window"))
    reachable = [c for c in measured if c.energy_kcal_mol <= window]
    reactive = max(reachable, key=lambda c: (c.open_fraction, -c.energy_kcal_mol))
    return Approach(
        site=site,
        model=MODEL if shapes.force_field == "MMFF94s" else MODEL.replace("MMFF94s", shapes.force_field),
        conformers=measured,
        reactive=reactive.conformer,
        reference_open_fraction=reference.open_fraction,
        anti_hydrogens=_anti_hydrogens(shapes.mol, site),
        mol=shapes.mol,
    )


def incoming_radius_ang() -> float:
    """Van der Waals radius of the incoming atom, angstrom."""
    return _radius("N")


@cache
def _radii() -> dict[str, float]:
    return {r["symbol"]: number(r) for r in table("radii")}


def _radius(symbol: str) -> float:
    # Elements without a row are metals and metalloids that hardly occur in
    # building blocks; the largest radius errs on the side of "in the way".
    return _radii().get(symbol, max(_radii().values()))


def _distance_ang() -> float:
    return number(row("approach_terms", "nucleophile_distance"))


@dataclass(frozen=True, slots=True)
class _Reference:
    """What ethyl bromide shows, and nobody is blamed for: overlap in angstrom, open share of the cone."""

    overlap_ang: float
    open_fraction: float


@cache
def _ethyl_bromide(seed: int) -> _Reference:
    shapes = low_energy_shapes(Chem.MolFromSmiles("CCBr"), seed)
    if shapes is None:
        raise ChemistryError("ethyl bromide: no conformer could be made. The RDKit installation is damaged.")
    back = _back_side(shapes.mol, shapes.mol.GetConformer(0).GetPositions(), 1, 2)
    overlap = float(back.overlaps.max())
    return _Reference(overlap, float(1.0 - (back.cone_overlaps > overlap).any(axis=1).mean()))


def _unit(vector: _FloatArray) -> _FloatArray:
    return vector / np.linalg.norm(vector)


@dataclass(frozen=True, slots=True)
class _BackSide:
    """Geometry of one conformer.

    `watched` are the atoms that can be in the way; `distances` and `overlaps`
    of each with the incoming atom on the axis have shape (watched,);
    `cone_overlaps` are those in every direction of the cone, shape
    (directions, watched). Angstrom.
    """

    axis: _FloatArray
    probe: _FloatArray
    watched: list[int]
    distances: _FloatArray
    overlaps: _FloatArray
    cone_overlaps: _FloatArray


def _back_side(mol: Chem.Mol, positions: _FloatArray, carbon: int, leaving: int) -> _BackSide:
    axis = _unit(positions[carbon] - positions[leaving])
    probe = positions[carbon] + _distance_ang() * axis
    watched = _watched(mol, carbon, leaving)
    reach = np.array([_radius(mol.GetAtomWithIdx(i).GetSymbol()) for i in watched]) + incoming_radius_ang()
    distances = np.linalg.norm(positions[watched] - probe, axis=1)
    probes = positions[carbon] + _distance_ang() * _cone(axis)
    around = np.linalg.norm(probes[:, None, :] - positions[watched][None, :, :], axis=2)
    return _BackSide(axis, probe, watched, distances, reach - distances, reach[None, :] - around)


def _watched(mol: Chem.Mol, carbon: int, leaving: int) -> list[int]:
    """Atoms that can be in the way: all but the carbon, its neighbours and the leaving atom.

    The neighbours swing away from the nucleophile as the carbon inverts, so
    their contact with it says nothing.
    """
    near = {carbon, leaving} | {a.GetIdx() for a in mol.GetAtomWithIdx(carbon).GetNeighbors()}
    return [a.GetIdx() for a in mol.GetAtoms() if a.GetIdx() not in near]


def _measure(shapes: Shapes, conformer: int, carbon: int, leaving: int, reference: _Reference) -> ConformerApproach:
    mol = shapes.mol
    back = _back_side(mol, mol.GetConformer(conformer).GetPositions(), carbon, leaving)
    closed = back.cone_overlaps > reference.overlap_ang
    open_fraction = float(1.0 - closed.any(axis=1).mean())
    crowded = open_fraction < number(row("approach_terms", "as_open_as")) * reference.open_fraction
    closing = number(row("approach_terms", "closing_share"))
    deeper = reference.overlap_ang + number(row("approach_terms", "overlap_tolerance"))
    intruders = [
        Intruder(
            atom=atom,
            label=_atom_label(mol, atom),
            distance_ang=float(back.distances[k]),
            overlap_ang=float(back.overlaps[k]),
            cone_share=float(closed[:, k].mean()),
        )
        for k, atom in enumerate(back.watched)
        if back.overlaps[k] > deeper or (crowded and closed[:, k].mean() >= closing)
    ]
    return ConformerApproach(
        conformer=conformer,
        energy_kcal_mol=shapes.energies[conformer],
        population=shapes.populations[conformer],
        axis=(float(back.axis[0]), float(back.axis[1]), float(back.axis[2])),
        probe=(float(back.probe[0]), float(back.probe[1]), float(back.probe[2])),
        open_fraction=open_fraction,
        intruders=tuple(sorted(intruders, key=lambda i: (-i.cone_share, -i.overlap_ang, i.atom))),
    )


def _cone(axis: _FloatArray) -> _FloatArray:
    """Unit vectors spread evenly over the cap around an axis, shape (samples, 3)."""
    half_angle = np.radians(number(row("approach_terms", "cone_half_angle")))
    # Equal steps of the height give equal areas; the golden angle spreads them.
    heights = 1.0 - (np.arange(_SAMPLES) + 0.5) / _SAMPLES * (1.0 - np.cos(half_angle))
    turns = np.pi * (3.0 - np.sqrt(5.0)) * np.arange(_SAMPLES)
    ring = np.sqrt(1.0 - heights**2)
    first = _unit(np.cross(axis, np.eye(3)[int(np.argmin(np.abs(axis)))]))
    second = np.cross(axis, first)
    cap: _FloatArray = (
        heights[:, None] * axis + (ring * np.cos(turns))[:, None] * first + (ring * np.sin(turns))[:, None] * second
    )
    return cap


def _atom_label(mol: Chem.Mol, index: int) -> str:
    """Words for one atom, counted from 1: "H on C5", "C5"."""
    atom = mol.GetAtomWithIdx(index)
    if atom.GetAtomicNum() == 1:
        bearer = atom.GetNeighbors()[0]
        return f"H on {bearer.GetSymbol()}{bearer.GetIdx() + 1}"
    return f"{atom.GetSymbol()}{index + 1}"


def _anti_hydrogens(mol: Chem.Mol, site: ElectrophileSite) -> int:
    """Beta hydrogens within 30 degrees of antiperiplanar in the lowest conformer."""
    conformer = mol.GetConformer(0)
    tolerance = number(row("approach_terms", "antiperiplanar_tolerance"))
    count = 0
    for beta in mol.GetAtomWithIdx(site.carbon).GetNeighbors():
        if beta.GetIdx() == site.leaving_atoms[0] or beta.GetAtomicNum() != 6:
            continue
        for hydrogen in beta.GetNeighbors():
            if hydrogen.GetAtomicNum() == 1:
                angle = rdMolTransforms.GetDihedralDeg(
                    conformer, site.leaving_atoms[0], site.carbon, beta.GetIdx(), hydrogen.GetIdx()
                )
                count += abs(abs(angle) - 180.0) <= tolerance
    return count
