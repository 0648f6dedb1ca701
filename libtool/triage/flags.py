"""From the rows of `flags.csv` to flags on a block or a pair.

A row with a pattern must match at the reacting atom: on the electrophile the
pattern starts at the leaving group (dummy) and the carbon, on the nucleophile
at the atom that reacts. A row with a fact calls the function of that name in
`facts`. A row may have both: the pattern decides, the fact fills the sentence.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache

from rdkit import Chem

from libtool.reaction.electrophiles import carbon_atoms
from libtool.records import (
    BuildingBlock,
    ElectrophileSite,
    Flag,
    Level,
    NucleophileSite,
    RateEstimate,
    Remedy,
    Role,
)
from libtool.reference.tables import Row, table
from libtool.triage.facts import ELECTROPHILE_FACTS, NUCLEOPHILE_FACTS, PAIR_FACTS, Finding

__all__ = ["electrophile_flags", "nucleophile_flags", "pair_flags"]


def electrophile_flags(block: BuildingBlock, site: ElectrophileSite | None) -> tuple[Flag, ...]:
    """Flags on an electrophile, worst first; `site` is its best site, None without one."""
    flags: list[Flag] = []
    for entry in _rows("electrophile"):
        finding: Finding | None = None
        pattern = _pattern(entry["smarts"])
        if pattern is not None:
            atoms = carbon_atoms(site, pattern) if site else None
            if atoms is None:
                continue
            finding = Finding(Role.ELECTROPHILE, atoms)
        if entry["fact"]:
            finding = ELECTROPHILE_FACTS[entry["fact"]](block, site)
        if finding:
            flags.append(_flag(entry, finding))
    return _worst_first(flags)


def nucleophile_flags(block: BuildingBlock, sites: Sequence[NucleophileSite]) -> tuple[Flag, ...]:
    """Flags on a nucleophile, worst first; `sites` are its sites, best first."""
    flags: list[Flag] = []
    for entry in _rows("nucleophile"):
        finding: Finding | None = None
        pattern = _pattern(entry["smarts"])
        if pattern is not None:
            matches = sites[0].form.GetSubstructMatches(pattern, uniquify=False) if sites else ()
            anchored = [m for m in matches if m[0] == sites[0].atom]
            finding = Finding(Role.NUCLEOPHILE, anchored[0]) if anchored else None
        elif entry["fact"]:
            finding = NUCLEOPHILE_FACTS[entry["fact"]](block, sites)
        if finding:
            flags.append(_flag(entry, finding))
    return _worst_first(flags)


def pair_flags(
    nucleophile: NucleophileSite, electrophile: ElectrophileSite, rate: RateEstimate | None
) -> tuple[Flag, ...]:
    """Flags that need both partners, worst first; `rate` is None where no number can be given."""
    flags: list[Flag] = []
    for entry in _rows("pair"):
        finding = PAIR_FACTS[entry["fact"]](nucleophile, electrophile, rate)
        if finding:
            flags.append(_flag(entry, finding))
    return _worst_first(flags)


@cache
def _rows(scope: str) -> tuple[Row, ...]:
    return tuple(r for r in table("flags") if r["scope"] == scope)


@cache
def _pattern(smarts: str) -> Chem.Mol | None:
    return Chem.MolFromSmarts(smarts) if smarts else None


def _flag(entry: Row, finding: Finding) -> Flag:
    return Flag(
        id=entry["key"],
        level=Level(entry["level"]),
        role=finding.role,
        title=entry["title"],
        sentence=entry["sentence"].format(**finding.words) + ".",
        atoms=finding.atoms,
        source=entry["source"],
        seen_at=entry["seen_at"],
        remedy=Remedy(sentence=entry["remedy"].format(**finding.words) + "."),
    )


def _worst_first(flags: list[Flag]) -> tuple[Flag, ...]:
    order = list(Level)
    return tuple(sorted(flags, key=lambda f: (order.index(f.level), f.id)))
