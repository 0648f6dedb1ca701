"""How fast a pair reacts, relative to one reference reaction.

log10 k_rel = carbon + neighbours of the carbon + leaving group + nucleophile
+ solvent + temperature. Every addend is a row of `rate_terms.csv` with a
value, a range, and the published series behind it. The reference reaction is
ethyl bromide with piperidine in acetonitrile at 25 degrees C, which is 0 by
definition.

What the sum must not describe gives `NotAvailable` with the reason: tertiary
carbons ionise or eliminate, sp2 carbons and bridgeheads have no back side.
Terms that depend on one reagent are computed once per reagent; a pair is
their sum.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from functools import cache

from libtool.errors import InputError
from libtool.reaction.electrophiles import carbon_modifiers
from libtool.records import Conditions, ElectrophileSite, NotAvailable, NucleophileSite, RateEstimate, Term
from libtool.reference.tables import Row, number, row, table

__all__ = [
    "REFERENCE",
    "band",
    "electrophile_terms",
    "estimate_rate",
    "find_solvent",
    "nucleophile_terms",
    "solvents",
    "sum_terms",
    "temperature_term",
]

REFERENCE = "ethyl bromide + piperidine, acetonitrile, 25 °C"

_REFERENCE_CELSIUS = 25.0
_COLDEST, _HOTTEST = 0.0, 150.0

# Bands are a way of speaking, one log unit wide; the number stands beside them.
_BANDS = (
    (1.5, "more than 30x faster than the reference"),
    (0.5, "about 10x faster than the reference"),
    (-0.5, "like the reference"),
    (-1.5, "about 10x slower than the reference"),
    (-2.5, "about 100x slower than the reference"),
    (-3.5, "about 1,000x slower than the reference"),
)
_SLOWEST_BAND = "more than 3,000x slower: will hardly react"


def estimate_rate(
    nucleophile: NucleophileSite, electrophile: ElectrophileSite, conditions: Conditions
) -> RateEstimate | NotAvailable:
    """Relative SN2 rate of one pair of sites.

    Parameters
    ----------
    nucleophile : NucleophileSite
    electrophile : ElectrophileSite
    conditions : Conditions

    Returns
    -------
    RateEstimate or NotAvailable
        log10 of the rate constant relative to `REFERENCE`, dimensionless.

    Raises
    ------
    InputError
        The solvent is not in the table or the temperature is out of range.

    Notes
    -----
    The range adds the ranges of the terms in quadrature, each side on its
    own. Rate series of different authors disagree by about half a log unit,
    so a range narrower than that is not given. Sources: the rows of
    `rate_terms.csv`, shown with every estimate.
    """
    left = nucleophile_terms(nucleophile, conditions)
    right = electrophile_terms(electrophile)
    if isinstance(right, NotAvailable):
        return right
    return sum_terms((*right, *left, temperature_term(conditions)))


def sum_terms(terms: Iterable[Term]) -> RateEstimate:
    """Sum of terms with their ranges added in quadrature."""
    parts = tuple(terms)
    value = math.fsum(t.value for t in parts)
    floor = number(row("rate_terms", "spread_between_series"), "log10_high")
    below = math.sqrt(math.fsum((t.value - t.low) ** 2 for t in parts) + floor**2)
    above = math.sqrt(math.fsum((t.high - t.value) ** 2 for t in parts) + floor**2)
    return RateEstimate(
        log10_k_rel=value,
        low=value - below,
        high=value + above,
        band=band(value),
        reference=REFERENCE,
        terms=parts,
    )


def band(log10_k_rel: float) -> str:
    """Words for a relative rate."""
    return next((words for floor, words in _BANDS if log10_k_rel >= floor), _SLOWEST_BAND)


def electrophile_terms(site: ElectrophileSite) -> tuple[Term, ...] | NotAvailable:
    """Terms of the electrophile: carbon, its neighbours, leaving group."""
    class_row = row("carbon_patterns", site.carbon_class)
    if class_row["kind"] == "blocked":
        return NotAvailable(
            what="relative SN2 rate",
            reason=f"SN2 rates do not describe this carbon: {class_row['label']}",
            missing="no SN2 reaction to estimate",
        )
    terms = [_term("carbon", site.carbon_class)]
    terms += [_term("neighbour", key) for key in carbon_modifiers(site)]
    return (*terms, _term("leaving_group", site.leaving_group))


def nucleophile_terms(site: NucleophileSite, conditions: Conditions) -> tuple[Term, ...]:
    """Terms of the nucleophile: its class, and the solvent for its charge type."""
    species = row("site_patterns", site.kind)["species"]
    solvent = _terms_by_subject()[f"solvent_{species}", find_solvent(conditions.solvent)["name"]]
    return _term("nucleophile", site.kind), _term_of(solvent)


def temperature_term(conditions: Conditions) -> Term:
    """Term of the plate temperature, linear in degrees C.

    Raises
    ------
    InputError
        Outside 0 to 150 degrees C.
    """
    celsius = conditions.temperature_celsius
    if not _COLDEST <= celsius <= _HOTTEST:
        raise InputError(
            f"temperature: received {celsius} °C; a sealed plate is run between {_COLDEST:.0f} and {_HOTTEST:.0f} °C. "
            "Give the temperature in degrees Celsius."
        )
    found = row("rate_terms", "temperature_per_10_c")
    steps = (celsius - _REFERENCE_CELSIUS) / 10.0
    value, *ends = (steps * number(found, column) for column in ("log10", "log10_low", "log10_high"))
    return Term(
        block="temperature",
        key=found["key"],
        label=f"{celsius:g} °C",
        value=value,
        low=min(ends),
        high=max(ends),
        source=found["source"],
        seen_at=found["seen_at"],
        origin=found["origin"],
    )


def solvents() -> tuple[str, ...]:
    """Names of the solvents that have a term, in alphabetical order."""
    return tuple(sorted({r["subject"] for r in table("rate_terms") if r["block"] == "solvent_neutral"}, key=str.lower))


def find_solvent(name: str) -> Row:
    """Row of `solvents.csv` for a name or synonym, in any case.

    Raises
    ------
    InputError
        There is no rate term for it.
    """
    wanted = name.strip().casefold()
    for entry in table("solvents"):
        names = (entry["name"], *entry["synonyms"].split(";"))
        if wanted and wanted in map(str.casefold, names):
            return entry
    raise InputError(f"solvent: received {name!r}; there is no rate term for it. Use one of {', '.join(solvents())}.")


@cache
def _terms_by_subject() -> dict[tuple[str, str], Row]:
    return {(r["block"], r["subject"]): r for r in table("rate_terms")}


def _term(block: str, subject: str) -> Term:
    return _term_of(_terms_by_subject()[block, subject])


def _term_of(found: Row) -> Term:
    return Term(
        block=found["block"],
        key=found["key"],
        label=found["label"],
        value=number(found, "log10"),
        low=number(found, "log10_low"),
        high=number(found, "log10_high"),
        source=found["source"],
        seen_at=found["seen_at"],
        origin=found["origin"],
    )
