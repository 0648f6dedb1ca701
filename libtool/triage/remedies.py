"""Remedies that look at what else is in the store.

Two electrophiles that differ only in the leaving group give one product. When
the better of the two is in the set, it is the remedy for the worse one.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

from libtool.records import ElectrophileSite, Flag, HazardLevel, Remedy
from libtool.reference.tables import number, row

__all__ = ["Twin", "better_twins", "with_twin"]

# Faster by less than this, a swap is not worth a new bottle: bromide and
# sulfonates change places from one series to the next.
_WORTH_SWAPPING_LOG10 = 1.0
# Flags that a better leaving group answers.
_ANSWERED = frozenset({"poor_leaving_group", "unactivated_chloride", "isobutyl_type", "secondary", "cyclohexyl"})


@dataclass(frozen=True, slots=True, kw_only=True)
class Twin:
    """Another electrophile of the set that gives the same products faster."""

    block_id: str
    leaving_group: str
    gain_log10: float


def better_twins(sites: Iterable[ElectrophileSite], levels: Mapping[str, HazardLevel | None]) -> dict[str, Twin]:
    """Best twin of every electrophile that has one, by block id.

    Parameters
    ----------
    sites : iterable of ElectrophileSite
        The best site of every electrophile of the set.
    levels : mapping of str to HazardLevel or None
        Strictest caution about each block, by id: a swap must not be to
        something more dangerous.

    Returns
    -------
    dict
        Only blocks for which another one is at least ten times faster.
    """
    by_key: dict[str, list[ElectrophileSite]] = {}
    for site in sites:
        by_key.setdefault(site.key, []).append(site)
    twins: dict[str, Twin] = {}
    for family in by_key.values():
        for site in family:
            limit = _strictness(levels.get(site.block.id))
            best = max((s for s in family if _strictness(levels.get(s.block.id)) <= limit), key=_leaving_log10)
            gain = _leaving_log10(best) - _leaving_log10(site)
            if gain >= _WORTH_SWAPPING_LOG10:
                twins[site.block.id] = Twin(
                    block_id=best.block.id,
                    leaving_group=row("leaving_group_patterns", best.leaving_group)["label"],
                    gain_log10=gain,
                )
    return twins


def _strictness(level: HazardLevel | None) -> int:
    """Rank of a caution, 0 for none; alerts that only inform count as none."""
    order = (HazardLevel.WARN, HazardLevel.HIGH, HazardLevel.COMPLIANCE, HazardLevel.STOP)
    return order.index(level) + 1 if level in order else 0


def _leaving_log10(site: ElectrophileSite) -> float:
    return number(row("rate_terms", f"leaving_group_{site.leaving_group.lower()}"), "log10")


def with_twin(flags: tuple[Flag, ...], twin: Twin | None) -> tuple[Flag, ...]:
    """Flags whose remedy names the twin, where a better leaving group is the remedy."""
    if twin is None:
        return flags
    remedy = Remedy(
        sentence=f"Use {twin.block_id}, the {twin.leaving_group} of the same group: same product, "
        f"about {float(f'{10**twin.gain_log10:.0e}'):,.0f} times faster.",
        block_id=twin.block_id,
    )
    return tuple(replace(f, remedy=remedy) if f.id in _ANSWERED else f for f in flags)
