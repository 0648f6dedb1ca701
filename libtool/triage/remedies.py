"""Remedies that look at what else is in the store.

Two electrophiles that differ only in the leaving group give one product. When
the better of the two is in the set, it is the remedy for the worse one.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

from libtool.records import ElectrophileSite, Flag, Remedy
from libtool.reference.tables import number, row

__all__ = ["Twin", "better_twins", "with_twin"]

# Faster by less than this, a swap is not worth a new bottle: series disagree
# by as much.
_WORTH_SWAPPING_LOG10 = 0.5
# Flags that a better leaving group answers.
_ANSWERED = frozenset({"poor_leaving_group", "unactivated_chloride", "isobutyl_type", "secondary", "cyclohexyl"})


@dataclass(frozen=True, slots=True, kw_only=True)
class Twin:
    """Another electrophile of the set that gives the same products faster."""

    block_id: str
    leaving_group: str
    gain_log10: float


def better_twins(sites: Iterable[ElectrophileSite]) -> dict[str, Twin]:
    """Best twin of every electrophile that has one, by block id.

    Parameters
    ----------
    sites : iterable of ElectrophileSite
        The best site of every electrophile of the set.

    Returns
    -------
    dict
        Only blocks for which another one is at least half a log unit faster.
    """
    by_key: dict[str, list[ElectrophileSite]] = {}
    for site in sites:
        by_key.setdefault(site.key, []).append(site)
    twins: dict[str, Twin] = {}
    for family in by_key.values():
        best = max(family, key=_leaving_log10)
        for site in family:
            gain = _leaving_log10(best) - _leaving_log10(site)
            if gain >= _WORTH_SWAPPING_LOG10:
                twins[site.block.id] = Twin(
                    block_id=best.block.id,
                    leaving_group=row("leaving_group_patterns", best.leaving_group)["label"],
                    gain_log10=gain,
                )
    return twins


def _leaving_log10(site: ElectrophileSite) -> float:
    return number(row("rate_terms", f"leaving_group_{site.leaving_group.lower()}"), "log10")


def with_twin(flags: tuple[Flag, ...], twin: Twin | None) -> tuple[Flag, ...]:
    """Flags whose remedy names the twin, where a better leaving group is the remedy."""
    if twin is None:
        return flags
    remedy = Remedy(
        sentence=f"Use {twin.block_id}, the {twin.leaving_group} of the same group: same product, "
        f"about {10**twin.gain_log10:,.0f} times faster.",
        block_id=twin.block_id,
    )
    return tuple(replace(f, remedy=remedy) if f.id in _ANSWERED else f for f in flags)
