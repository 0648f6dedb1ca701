"""Relative SN2 rates as a sum of sourced terms."""

from libtool.rate.estimate import (
    REFERENCE,
    band,
    electrophile_terms,
    estimate_rate,
    find_solvent,
    nucleophile_terms,
    solvents,
    temperature_term,
)

__all__ = [
    "REFERENCE",
    "band",
    "electrophile_terms",
    "estimate_rate",
    "find_solvent",
    "nucleophile_terms",
    "solvents",
    "temperature_term",
]
