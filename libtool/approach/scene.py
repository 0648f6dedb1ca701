"""The picture of an approach as plain data.

A scene is a list of calls on a 3Dmol.js viewer, with arguments that survive
JSON. py3Dmol replays it for a plain cell or a report, the notebook viewer
replays the same list in the browser: one description, one picture.

The frame is always the same: the reacting carbon in the middle, the
nucleophile from the left, the leaving group out to the right, the worst
intruder on top.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from rdkit import Chem

from libtool.approach.geometry import incoming_radius_ang
from libtool.approach.result import Approach, ConformerApproach, Intruder
from libtool.errors import InputError
from libtool.reference.tables import number, row

__all__ = ["LEGEND", "Scene", "scene"]

_Argument = dict[str, object] | str | float
Call = tuple[str, tuple[_Argument, ...]]

_INCOMING = "#2b5fa8"
_IN_THE_WAY = "#d9730d"
_CARBON = "#111111"
_LEAVING = "#6b6b6b"
_FADED_BEYOND_BONDS = 4
_ARRIVES_FROM_ANG = 4.6
_LEAVES_BY_ANG = 2.0
_LABEL_HEIGHT_ANG = 1.1

LEGEND = (
    (_INCOMING, "incoming nucleophile (nitrogen), arriving along the dashed line"),
    (_IN_THE_WAY, "atoms in its way, at their van der Waals size"),
    (_CARBON, "carbon under attack"),
    (_LEAVING, "leaving group, departing along the arrow"),
)
"""Colours of the picture and what they mean."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Scene:
    """Calls on a viewer, and the same picture in one sentence."""

    calls: tuple[Call, ...]
    sentence: str


def scene(approach: Approach, *, conformer: int | None = None, marked: Iterable[int] = ()) -> Scene:
    """Scene of one conformer of an approach.

    Parameters
    ----------
    approach : Approach
    conformer : int, optional
        Position in `approach.conformers`; the reactive shape without it.
    marked : iterable of int
        Atoms of the block (zero-based) that a flag names; drawn thicker.

    Returns
    -------
    Scene

    Raises
    ------
    InputError
        There is no such conformer.
    """
    shown = _conformer(approach, approach.reactive if conformer is None else conformer)
    positions = _in_frame(approach, shown)
    mol = _placed(approach.mol, shown.conformer, positions)
    carbon, leaving = approach.site.carbon, approach.site.leaving_atoms[0]
    near = _near_atoms(mol, carbon)
    calls: list[Call] = [("addModel", (Chem.MolToMolBlock(mol), "sdf"))]
    calls += _sticks(mol, near, set(marked))
    calls += _spheres(shown, carbon)
    calls += _path(positions, leaving)
    calls += _labels(mol, shown, positions)
    calls += [("zoomTo", ({"index": sorted(near)},)), ("zoom", (1.1,))]
    return Scene(calls=tuple(calls), sentence=describe(approach, shown))


def _conformer(approach: Approach, position: int) -> ConformerApproach:
    if not 0 <= position < len(approach.conformers):
        raise InputError(
            f"conformer: received {position}; {approach.site.block.id} has {len(approach.conformers)} of them. "
            "Give a position from 0 upwards."
        )
    return approach.conformers[position]


def describe(approach: Approach, shown: ConformerApproach) -> str:
    """What the picture shows, in two sentences."""
    label = row("carbon_patterns", approach.site.carbon_class)["label"]
    start = f"Back side of {approach.site.block.id}, carbon C{approach.site.carbon + 1} ({label}): "
    reference = f"{approach.reference_open_fraction:.0%}"
    share = f"{shown.open_fraction:.0%} of the approach cone is open (ethyl bromide {reference})."
    if not shown.intruders:
        return f"{start}nothing stands in the nucleophile's way. {share}"
    groups = [f"{name} ({overlap:.1f} Å)" for name, overlap in _groups(shown.intruders)]
    verb = "reaches" if len(groups) == 1 else "reach"
    return f"{start}{', '.join(groups)} {verb} into the nucleophile's place. {share}"


def _groups(intruders: Iterable[Intruder]) -> list[tuple[str, float]]:
    """Worst overlap per heavy atom that bears the intruders, worst first."""
    worst: dict[str, float] = {}
    for intruder in intruders:
        bearer = intruder.label.rpartition(" on ")[2]
        worst[bearer] = max(worst.get(bearer, 0.0), intruder.overlap_ang)
    return sorted(worst.items(), key=lambda item: -item[1])


_FloatArray = np.ndarray[tuple[int, ...], np.dtype[np.float64]]


def _in_frame(approach: Approach, shown: ConformerApproach) -> _FloatArray:
    """Positions with the carbon at the origin, the leaving group along +x, the worst intruder along +y."""
    positions = approach.mol.GetConformer(shown.conformer).GetPositions()
    centred = positions - positions[approach.site.carbon]
    x = -np.array(shown.axis)
    up = centred[shown.intruders[0].atom] if shown.intruders else centred[np.argmax(np.linalg.norm(centred, axis=1))]
    y = up - (up @ x) * x
    if np.linalg.norm(y) < 1e-6:
        y = np.eye(3)[int(np.argmin(np.abs(x)))] - x[int(np.argmin(np.abs(x)))] * x
    y = y / np.linalg.norm(y)
    turned: _FloatArray = centred @ np.array([x, y, np.cross(x, y)]).T
    return turned


def _placed(mol: Chem.Mol, conformer: int, positions: _FloatArray) -> Chem.Mol:
    copy = Chem.Mol(mol, confId=conformer)
    shape = copy.GetConformer(conformer)
    for index, xyz in enumerate(positions):
        shape.SetAtomPosition(index, [float(v) for v in xyz])
    return copy


def _near_atoms(mol: Chem.Mol, carbon: int) -> set[int]:
    distances = Chem.GetDistanceMatrix(mol)[carbon]
    return {i for i, bonds in enumerate(distances) if bonds <= _FADED_BEYOND_BONDS}


def _sticks(mol: Chem.Mol, near: set[int], marked: set[int]) -> list[Call]:
    far = sorted(set(range(mol.GetNumAtoms())) - near)
    calls: list[Call] = [
        ("setStyle", ({"index": sorted(near)}, {"stick": {"radius": 0.11, "colorscheme": "Jmol"}})),
    ]
    if far:
        calls.append(
            (
                "setStyle",
                ({"index": far}, {"stick": {"radius": 0.06, "colorscheme": "Jmol"}}),
            )
        )
    thick = sorted(marked & near)
    if thick:
        calls.append(("setStyle", ({"index": thick}, {"stick": {"radius": 0.2, "colorscheme": "Jmol"}})))
    return calls


def _spheres(shown: ConformerApproach, carbon: int) -> list[Call]:
    incoming = {
        "center": {"x": -number(row("approach_terms", "nucleophile_distance")), "y": 0.0, "z": 0.0},
        "radius": incoming_radius_ang(),
        "color": _INCOMING,
        "opacity": 0.45,
    }
    calls: list[Call] = [("addSphere", (incoming,))]
    calls.append(("addStyle", ({"index": [carbon]}, {"sphere": {"radius": 0.32, "color": _CARBON}})))
    if shown.intruders:
        atoms = [i.atom for i in shown.intruders]
        calls.append(("addStyle", ({"index": atoms}, {"sphere": {"scale": 1.0, "color": _IN_THE_WAY}})))
    return calls


def _path(positions: _FloatArray, leaving: int) -> list[Call]:
    out = float(positions[leaving][0])
    return [
        (
            "addCylinder",
            (
                {
                    "start": {"x": -_ARRIVES_FROM_ANG, "y": 0.0, "z": 0.0},
                    "end": {"x": 0.0, "y": 0.0, "z": 0.0},
                    "radius": 0.05,
                    "color": _INCOMING,
                    "dashed": True,
                },
            ),
        ),
        (
            "addArrow",
            (
                {
                    "start": {"x": out + 0.5, "y": 0.0, "z": 0.0},
                    "end": {"x": out + _LEAVES_BY_ANG, "y": 0.0, "z": 0.0},
                    "radius": 0.08,
                    "radiusRatio": 2.5,
                    "color": _LEAVING,
                },
            ),
        ),
    ]


def _labels(mol: Chem.Mol, shown: ConformerApproach, positions: _FloatArray) -> list[Call]:
    """One label per group in the way, spread over height so that they do not cover each other."""
    calls: list[Call] = []
    bearers = {f"{a.GetSymbol()}{a.GetIdx() + 1}": a.GetIdx() for a in mol.GetAtoms()}
    placed: list[float] = []
    for name, overlap in _groups(shown.intruders):
        x, y, z = (float(v) for v in positions[bearers[name]])
        side = 1.0 if y >= 0 else -1.0
        height = y + side * 1.2
        while any(abs(height - other) < _LABEL_HEIGHT_ANG for other in placed):
            height += side * _LABEL_HEIGHT_ANG
        placed.append(height)
        calls.append(
            (
                "addLabel",
                (
                    f"{name}: {overlap:.1f} Å",
                    {
                        "position": {"x": x, "y": height, "z": z},
                        "fontSize": 13,
                        "fontColor": "#111111",
                        "backgroundColor": "#ffffff",
                        "backgroundOpacity": 0.85,
                        "borderColor": _IN_THE_WAY,
                        "borderThickness": 1.0,
                        "inFront": True,
                        "alignment": "center",
                    },
                ),
            )
        )
    return calls
