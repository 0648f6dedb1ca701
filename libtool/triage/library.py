"""Every pair of a design, judged.

What depends on one reagent is found once per reagent: sites, flags, hazards,
rate terms. A pair joins the two and adds what only the pair shows. The result
is a table of records, row = nucleophile, column = electrophile.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from rdkit import Chem

from libtool.errors import InputError
from libtool.rate import electrophile_terms, find_solvent, nucleophile_terms, temperature_term
from libtool.rate.estimate import sum_terms
from libtool.reaction.electrophiles import electrophile_sites
from libtool.reaction.nucleophiles import nucleophile_sites
from libtool.reaction.products import products_of_sites
from libtool.records import (
    BuildingBlock,
    Choice,
    Conditions,
    ElectrophileSite,
    Flag,
    Hazard,
    HazardLevel,
    Level,
    NotAvailable,
    NucleophileSite,
    Product,
    RateEstimate,
    Term,
    Verdict,
)
from libtool.triage.flags import electrophile_flags, nucleophile_flags, pair_flags
from libtool.triage.hazards import MeetingSides, condition_hazards, meeting_sides, strictest, structure_hazards
from libtool.triage.remedies import Twin, better_twins, with_twin

if TYPE_CHECKING:
    import pandas

    from libtool.blocks import BlockSet

__all__ = ["Library", "Pair", "Reagent", "build_library"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Reagent:
    """One block with everything that does not depend on its partner."""

    block: BuildingBlock
    sites: tuple[NucleophileSite, ...] | tuple[ElectrophileSite, ...]
    flags: tuple[Flag, ...]
    hazards: tuple[Hazard, ...]
    sides: MeetingSides
    terms: tuple[Term, ...] | NotAvailable
    twin: Twin | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Pair:
    """One nucleophile with one electrophile: products, rate, flags, hazards, verdict."""

    nucleophile: BuildingBlock
    electrophile: BuildingBlock
    products: tuple[Product, ...]
    rate: RateEstimate | NotAvailable
    flags: tuple[Flag, ...]
    hazards: tuple[Hazard, ...]
    verdict: Verdict
    suggestion: Choice
    suggestion_reason: str

    @property
    def key(self) -> tuple[str, str]:
        """Ids of the two blocks, nucleophile first."""
        return self.nucleophile.id, self.electrophile.id


@dataclass(frozen=True, slots=True, kw_only=True)
class Library:
    """All pairs of a design.

    Parameters
    ----------
    nucleophiles, electrophiles : BlockSet
    conditions : Conditions
    rows, columns : tuple of Reagent
        Nucleophiles (m) and electrophiles (n) in file order.
    pairs : tuple of tuple of Pair
        Shape (m, n).
    """

    nucleophiles: BlockSet
    electrophiles: BlockSet
    conditions: Conditions
    rows: tuple[Reagent, ...]
    columns: tuple[Reagent, ...]
    pairs: tuple[tuple[Pair, ...], ...]

    def __iter__(self) -> Iterator[Pair]:
        """Iterate over all pairs, row by row."""
        for line in self.pairs:
            yield from line

    def __len__(self) -> int:
        """Count the pairs."""
        return len(self.rows) * len(self.columns)

    def pair(self, nucleophile: str, electrophile: str) -> Pair:
        """Pair of two block ids.

        Raises
        ------
        InputError
            An id is not in the library.
        """
        i = _position(self.rows, nucleophile, "nucleophile")
        return self.pairs[i][_position(self.columns, electrophile, "electrophile")]

    def frame(self) -> pandas.DataFrame:
        """Pairs as a table, one row a pair.

        Returns
        -------
        pandas.DataFrame
            nucleophile, electrophile (ids); product (SMILES, likeliest);
            products (how many can form); confidence; stereo; log10_k_rel, low,
            high (empty where no number can be given); band (words, or the
            reason why there is no number); verdict; suggestion;
            suggestion_reason; flags (ids joined by ;); reasons (sentences);
            remedies; hazards (ids joined by ;); sources (keys joined by ;).
        """
        import pandas

        return pandas.DataFrame([_pair_row(p) for p in self], columns=list(_PAIR_COLUMNS))


_PAIR_COLUMNS = (
    "nucleophile", "electrophile", "product", "products", "confidence", "stereo", "log10_k_rel", "low", "high", "band",
    "verdict", "suggestion", "suggestion_reason", "flags", "reasons", "remedies", "hazards", "sources",
)  # fmt: skip


def build_library(
    nucleophiles: BlockSet,
    electrophiles: BlockSet,
    conditions: Conditions | None = None,
    *,
    progress: Callable[[int, int], None] | None = None,
) -> Library:
    """Judge every pair of two sets.

    Parameters
    ----------
    nucleophiles, electrophiles : BlockSet
    conditions : Conditions, optional
        DMF at 60 degrees C without it.
    progress : callable, optional
        Called with (pairs done, pairs in all).

    Returns
    -------
    Library

    Raises
    ------
    InputError
        The solvent is unknown or the temperature out of range.
    """
    conditions = conditions or Conditions()
    temperature = temperature_term(conditions)
    solvent = meeting_sides(Chem.MolFromSmiles(find_solvent(conditions.solvent)["smiles"]))
    rows = tuple(_nucleophile(block, conditions) for block in nucleophiles)
    columns = _electrophiles(electrophiles)
    total = len(rows) * len(columns)
    lines: list[tuple[Pair, ...]] = []
    for n in rows:
        line: list[Pair] = []
        for e in columns:
            line.append(_pair(n, e, temperature, solvent))
            if progress:
                progress(len(lines) * len(columns) + len(line), total)
        lines.append(tuple(line))
    return Library(
        nucleophiles=nucleophiles,
        electrophiles=electrophiles,
        conditions=conditions,
        rows=rows,
        columns=columns,
        pairs=tuple(lines),
    )


def _nucleophile(block: BuildingBlock, conditions: Conditions) -> Reagent:
    sites = nucleophile_sites(block)
    terms = nucleophile_terms(sites[0], conditions) if sites else _no_site("nucleophile", block)
    return Reagent(
        block=block,
        sites=sites,
        flags=nucleophile_flags(block, sites),
        hazards=structure_hazards(block.mol, "reagent"),
        sides=meeting_sides(block.mol),
        terms=terms,
    )


def _electrophiles(blocks: BlockSet) -> tuple[Reagent, ...]:
    sites = {block.id: electrophile_sites(block) for block in blocks}
    hazards = {block.id: structure_hazards(block.mol, "reagent") for block in blocks}
    # A reagent that is refused or needs an approval is nobody's remedy.
    usable = (found[0] for i, found in sites.items() if found and not _restricted(hazards[i]))
    twins = better_twins(usable, {i: strictest(found) for i, found in hazards.items()})
    reagents: list[Reagent] = []
    for block in blocks:
        found = sites[block.id]
        twin = twins.get(block.id)
        flags = electrophile_flags(block, found[0] if found else None)
        reagents.append(
            Reagent(
                block=block,
                sites=found,
                flags=with_twin(flags, twin),
                hazards=hazards[block.id],
                sides=meeting_sides(block.mol),
                terms=electrophile_terms(found[0]) if found else _no_site("electrophile", block),
                twin=twin,
            )
        )
    return tuple(reagents)


def _restricted(hazards: tuple[Hazard, ...]) -> bool:
    return strictest(hazards) in {HazardLevel.STOP, HazardLevel.COMPLIANCE}


def _no_site(role: str, block: BuildingBlock) -> NotAvailable:
    return NotAvailable(what="relative SN2 rate", reason=f"{block.id} has no {role} site", missing="a reactive site")


def _pair(n: Reagent, e: Reagent, temperature: Term, solvent: MeetingSides) -> Pair:
    n_sites = tuple(s for s in n.sites if isinstance(s, NucleophileSite))
    e_sites = tuple(s for s in e.sites if isinstance(s, ElectrophileSite))
    products = products_of_sites(n_sites, e_sites)
    rate = _rate(n, e, temperature)
    own = pair_flags(n_sites[0], e_sites[0], rate if isinstance(rate, RateEstimate) else None) if products else ()
    order = list(Level)
    flags = tuple(sorted((*e.flags, *n.flags, *own), key=lambda f: order.index(f.level)))
    hazards = _hazards(n, e, products, solvent)
    verdict = _verdict(flags, hazards)
    choice, reason = _suggest(verdict, flags, hazards, e)
    return Pair(
        nucleophile=n.block,
        electrophile=e.block,
        products=() if verdict is Verdict.REFUSED else products,
        rate=_refused_rate(rate) if verdict is Verdict.REFUSED else rate,
        flags=flags,
        hazards=hazards,
        verdict=verdict,
        suggestion=choice,
        suggestion_reason=reason,
    )


def _rate(n: Reagent, e: Reagent, temperature: Term) -> RateEstimate | NotAvailable:
    if isinstance(e.terms, NotAvailable):
        return e.terms
    if isinstance(n.terms, NotAvailable):
        return n.terms
    return sum_terms((*e.terms, *n.terms, temperature))


def _refused_rate(rate: RateEstimate | NotAvailable) -> NotAvailable:
    return NotAvailable(
        what="relative SN2 rate", reason="refused for safety or legal reasons", missing="see the cautions"
    )


def _hazards(n: Reagent, e: Reagent, products: tuple[Product, ...], solvent: MeetingSides) -> tuple[Hazard, ...]:
    found: dict[str, Hazard] = {h.id: h for h in (*n.hazards, *e.hazards)}
    found |= {h.id: h for h in condition_hazards([n.sides, e.sides, solvent])}
    for product in products:
        found |= {h.id: h for h in structure_hazards(Chem.MolFromSmiles(product.smiles), "product")}
    order = list(HazardLevel)
    return tuple(sorted(found.values(), key=lambda h: (order.index(h.level), h.id)))


def _verdict(flags: tuple[Flag, ...], hazards: tuple[Hazard, ...]) -> Verdict:
    level = strictest(hazards)
    if level is HazardLevel.STOP:
        return Verdict.REFUSED
    levels = {f.level for f in flags}
    if Level.FAIL in levels:
        return Verdict.STUCK
    return Verdict.WATCH if Level.WARN in levels or level is HazardLevel.COMPLIANCE else Verdict.GO


def _suggest(verdict: Verdict, flags: tuple[Flag, ...], hazards: tuple[Hazard, ...], e: Reagent) -> tuple[Choice, str]:
    """What to do with the pair until somebody decides, and the reason in a few words."""
    if verdict is Verdict.REFUSED:
        return Choice.SKIP, f"refused: {hazards[0].what}"
    if verdict is Verdict.STUCK:
        return Choice.SKIP, "; ".join(f.title for f in flags if f.level is Level.FAIL)
    if e.twin:
        return Choice.SKIP, f"same product from {e.twin.block_id} ({e.twin.leaving_group})"
    if strictest(hazards) is HazardLevel.COMPLIANCE:
        return Choice.PARK, f"approval needed: {hazards[0].what}"
    warnings = [f.title for f in flags if f.level is Level.WARN]
    return Choice.MAKE, "; ".join(warnings) or "no flag"


def _position(reagents: tuple[Reagent, ...], block_id: str, role: str) -> int:
    for position, reagent in enumerate(reagents):
        if reagent.block.id == block_id:
            return position
    raise InputError(f"{role} {block_id!r} is not in the library. Its ids are listed in the {role} table.")


def _pair_row(p: Pair) -> tuple[object, ...]:
    best = p.products[0] if p.products else None
    number = p.rate if isinstance(p.rate, RateEstimate) else None
    return (
        p.nucleophile.id,
        p.electrophile.id,
        best.smiles if best else "",
        len(p.products),
        best.confidence.value if best else "",
        best.stereo if best else "",
        round(number.log10_k_rel, 2) if number else "",
        round(number.low, 2) if number else "",
        round(number.high, 2) if number else "",
        p.rate.band if isinstance(p.rate, RateEstimate) else p.rate.reason,
        p.verdict.value,
        p.suggestion.value,
        p.suggestion_reason,
        ";".join(f.id for f in p.flags),
        " ".join(f.sentence for f in p.flags),
        " ".join(dict.fromkeys(f.remedy.sentence for f in p.flags if f.level is not Level.NOTE)) if p.products else "",
        ";".join(h.id for h in p.hazards),
        ";".join(dict.fromkeys(k for f in p.flags for k in f.source.split(";"))),
    )
