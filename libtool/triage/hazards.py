"""The usual cautions: what a list, a law or common sense says about a structure.

Each row of `hazards.csv` is a pattern on a reagent, a product, a solvent, or a
pair of things that must not meet. `stop` means that the tool gives no
conditions and no plate position; `compliance` that a recorded approval is
needed first. Absence of a hazard is not safety: the SDS, local rules and
licensed practice come first, always.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cache

from rdkit import Chem

from libtool.records import Hazard, HazardLevel
from libtool.reference.tables import Row, row, table

__all__ = ["CAUTION", "MeetingSides", "condition_hazards", "meeting_sides", "strictest", "structure_hazards"]

CAUTION = (
    "Alkylating agents are toxic and many are mutagens or carcinogens. Read the SDS of every reagent first; local "
    "rules and licensed practice take precedence over anything shown here. Absence of a caution is not safety."
)


def structure_hazards(mol: Chem.Mol, subject: str) -> tuple[Hazard, ...]:
    """Cautions about one structure, strictest first.

    Parameters
    ----------
    mol : rdkit.Chem.Mol
    subject : {"reagent", "product", "solvent"}
        As what the structure is used.

    Returns
    -------
    tuple of Hazard
    """
    found = [
        _hazard(entry)
        for entry, pattern, _ in _patterns()
        if subject in entry["applies_to"].split(";") and mol.HasSubstructMatch(pattern)
    ]
    return _strictest_first(found)


@dataclass(frozen=True, slots=True)
class MeetingSides:
    """Rules on what must not meet, by key: those whose one or other side a structure is."""

    pattern: frozenset[str]
    partner: frozenset[str]


def meeting_sides(mol: Chem.Mol) -> MeetingSides:
    """Sides of the rules on what must not meet that a structure takes; once per reagent."""
    rules = [(entry["key"], pattern, partner) for entry, pattern, partner in _patterns() if partner is not None]
    return MeetingSides(
        pattern=frozenset(key for key, pattern, _ in rules if mol.HasSubstructMatch(pattern)),
        partner=frozenset(key for key, _, partner in rules if mol.HasSubstructMatch(partner)),
    )


def condition_hazards(things: Sequence[MeetingSides]) -> tuple[Hazard, ...]:
    """Cautions about things that share a well: two reagents, the solvent.

    Parameters
    ----------
    things : sequence of MeetingSides
        Of everything in the well.

    Returns
    -------
    tuple of Hazard
        One per rule for which one thing takes one side and another thing the
        other.
    """
    keys = {
        key
        for i, one in enumerate(things)
        for j, other in enumerate(things)
        if i != j
        for key in one.pattern & other.partner
    }
    return _strictest_first([_hazard(row("hazards", key)) for key in keys])


def strictest(hazards: Iterable[Hazard]) -> HazardLevel | None:
    """Strictest level among hazards, None for none."""
    levels = [h.level for h in hazards]
    return min(levels, key=list(HazardLevel).index) if levels else None


@cache
def _patterns() -> tuple[tuple[Row, Chem.Mol, Chem.Mol | None], ...]:
    return tuple(
        (
            r,
            Chem.MolFromSmarts(r["smarts"]),
            Chem.MolFromSmarts(r["partner_smarts"]) if r["partner_smarts"] else None,
        )
        for r in table("hazards")
    )


def _hazard(entry: Row) -> Hazard:
    return Hazard(
        id=entry["key"],
        level=HazardLevel(entry["severity"]),
        what=entry["what"],
        action=entry["action"],
        reason=entry["reason"],
        source=entry["source"],
        seen_at=entry["seen_at"],
    )


def _strictest_first(found: list[Hazard]) -> tuple[Hazard, ...]:
    order = list(HazardLevel)
    return tuple(sorted(found, key=lambda h: (order.index(h.level), h.id)))
