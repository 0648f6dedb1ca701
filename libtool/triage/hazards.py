"""The usual cautions: what a list, a law or common sense says about a structure.

Each row of `hazards.csv` is a pattern on a reagent, a product, a solvent, or a
pair of things that must not meet. `stop` means that the tool gives no
conditions and no plate position; `compliance` that a recorded approval is
needed first. Absence of a hazard is not safety: the SDS, local rules and
licensed practice come first, always.
"""

from __future__ import annotations

from collections.abc import Iterable
from functools import cache

from rdkit import Chem

from libtool.records import Hazard, HazardLevel
from libtool.reference.tables import Row, table

__all__ = ["CAUTION", "condition_hazards", "strictest", "structure_hazards"]

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


def condition_hazards(things: Iterable[Chem.Mol]) -> tuple[Hazard, ...]:
    """Cautions about things that share a well: two reagents, the solvent.

    Parameters
    ----------
    things : iterable of rdkit.Chem.Mol

    Returns
    -------
    tuple of Hazard
        One per rule for which one thing matches the pattern and another the
        partner pattern.
    """
    mols = tuple(things)
    found: list[Hazard] = []
    for entry, pattern, partner in _patterns():
        if partner is None:
            continue
        first = [i for i, mol in enumerate(mols) if mol.HasSubstructMatch(pattern)]
        second = [i for i, mol in enumerate(mols) if mol.HasSubstructMatch(partner)]
        if any(i != j for i in first for j in second):
            found.append(_hazard(entry))
    return _strictest_first(found)


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
