"""What a look at the back side of an electrophile found."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from rdkit.Chem import Mol

from libtool.records import ElectrophileSite

if TYPE_CHECKING:
    from collections.abc import Iterable

    from libtool.approach.picture import OfflineView

__all__ = ["Approach", "ConformerApproach", "Intruder"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Intruder:
    """One atom that stands in the nucleophile's place.

    `overlap_ang` is how far the van der Waals sphere of the atom and that of
    the incoming atom, on the axis, interpenetrate, in angstrom; `cone_share`
    the share of the approach cone that the atom closes, 0 to 1.
    """

    atom: int
    label: str
    distance_ang: float
    overlap_ang: float
    cone_share: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ConformerApproach:
    """The back side of one conformer.

    `axis` is the unit vector from the carbon to where the nucleophile comes
    from; `probe` the centre of the incoming atom, angstrom.
    """

    conformer: int
    energy_kcal_mol: float
    population: float
    axis: tuple[float, float, float]
    probe: tuple[float, float, float]
    open_fraction: float
    intruders: tuple[Intruder, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Approach:
    """Where the nucleophile has to come from, and what is in the way.

    Parameters
    ----------
    site : ElectrophileSite
    model : str
        What was computed, in one sentence.
    conformers : tuple of ConformerApproach
        Lowest energy first.
    reactive : int
        Position in `conformers` of the most open low-energy shape, through
        which the molecule reacts.
    reference_open_fraction : float
        Open share of the approach cone in ethyl bromide.
    anti_hydrogens : int
        Beta hydrogens antiperiplanar to the leaving group in the most
        populated conformer.
    mol : rdkit.Chem.Mol
        Block with hydrogens and the conformers named above.
    """

    site: ElectrophileSite
    model: str
    conformers: tuple[ConformerApproach, ...]
    reactive: int
    reference_open_fraction: float
    anti_hydrogens: int
    mol: Mol = field(compare=False, repr=False)

    @property
    def open_fraction(self) -> float:
        """Open share of the approach cone in the reactive shape, 0 to 1."""
        return self.conformers[self.reactive].open_fraction

    @property
    def intruders(self) -> tuple[Intruder, ...]:
        """Atoms in the way in the reactive shape, worst first."""
        return self.conformers[self.reactive].intruders

    def view(
        self, conformer: int | None = None, *, marked: Iterable[int] = (), width: int = 640, height: int = 420
    ) -> OfflineView:
        """Picture of one conformer, for the last line of a notebook cell.

        Needs the packages of the extra `notebook`; works without a network.

        Parameters
        ----------
        conformer : int, optional
            Position in `conformers`; the reactive shape without it.
        marked : iterable of int
            Atoms of the block (zero-based) to draw thicker, such as those of
            a flag.
        width, height : int
            Pixels.

        Raises
        ------
        InputError
            There is no such conformer.
        """
        from libtool.approach.picture import draw
        from libtool.approach.scene import scene

        return draw(scene(self, conformer=conformer, marked=marked), width=width, height=height)
