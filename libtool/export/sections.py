"""Sections of the report that need no three-dimensional picture.

Pure functions: records in, HTML out. Everything that stood in a file or was
typed by a person is escaped.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from html import escape

from libtool.export.citations import Citations
from libtool.export.grid_svg import Cell, grid_svg, legend
from libtool.export.lists import wells_of
from libtool.export.standing import choice_counts, choice_in_force, reagent_standings, why
from libtool.plate import PlateMap
from libtool.records import Choice, Flag, Hazard, HazardLevel, RateEstimate, Role, Verdict
from libtool.triage import Pair, Session

__all__ = ["cautions", "design", "flag_line", "made_pairs", "plates", "rows_not_used", "summary", "tag"]

# What a page can still show and a person still read; the CSV files hold the rest.
_MOST_PAIRS = 1000
_MOST_ROWS = 200
_MOST_PLATES = 8
_LARGEST_GRID = 60

_LEVEL_WORDS = {
    "fail": "will fail",
    "warn": "warning",
    "note": "note",
    "stop": "refused",
    "compliance": "approval needed",
    "high": "dangerous",
    "info": "information",
}


def tag(level: str) -> str:
    """Small label for a level of a flag or hazard."""
    return f'<span class="tag {level}">{_LEVEL_WORDS[level]}</span>'


def flag_line(flag: Flag, source: str) -> str:
    """A flag as a paragraph: level, title, sentence, remedy, source (HTML)."""
    return (
        f"<p>{tag(flag.level.value)} <b>{escape(flag.title)}.</b> {escape(flag.sentence)} "
        f"<b>Remedy:</b> {escape(flag.remedy.sentence)} {source}</p>"
    )


def summary(session: Session, plate_map: PlateMap) -> str:
    """How many rows, pairs and wells; the numbers add up."""
    library = session.library
    counts = choice_counts(session)
    refused = sum(pair.verdict is Verdict.REFUSED for pair in library)
    taken = [sum(s.taken for s in reagent_standings(session, role)) for role in (Role.NUCLEOPHILE, Role.ELECTROPHILE)]
    figures = (
        (len(library), "pairs in all"),
        (counts[Choice.MAKE], "to make"),
        (counts[Choice.PARK], "parked"),
        (counts[Choice.SKIP], "not made"),
        (refused, "of these refused"),
        (len(plate_map.wells), f"wells on {plate_map.plates} plate(s) of {plate_map.format.wells}"),
    )
    shown = "".join(f"<li><b>{number:,}</b>{escape(words)}</li>" for number, words in figures)
    lists = "".join(
        f"<p>{role} list: {escape(blocks.summary())}. {number} to take from the store.</p>"
        for role, blocks, number in (
            ("Nucleophile", library.nucleophiles, taken[0]),
            ("Electrophile", library.electrophiles, taken[1]),
        )
    )
    decided = len(session.state.decisions)
    return (
        f'<ul class="figures">{shown}</ul>{lists}'
        f"<p>{decided:,} pairs were decided by a person, the others stand as suggested.</p>"
    )


def cautions(session: Session, citations: Citations) -> str:
    """Refusals, approvals and dangers, strictest first, each with the reagents and pairs it concerns."""
    found: dict[str, Hazard] = {}
    pairs: dict[str, list[Pair]] = {}
    for pair in session.library:
        for hazard in pair.hazards:
            wanted = hazard.level in {HazardLevel.STOP, HazardLevel.COMPLIANCE}
            if wanted or (hazard.level is not HazardLevel.INFO and choice_in_force(session, pair) is Choice.MAKE):
                found[hazard.id] = hazard
                pairs.setdefault(hazard.id, []).append(pair)
    if not found:
        return "<p>No structure or combination in these lists is on the list of cautions. That is not safety.</p>"
    own: dict[str, list[str]] = {}
    for reagent in (*session.library.rows, *session.library.columns):
        for hazard in reagent.hazards:
            own.setdefault(hazard.id, []).append(reagent.block.id)
    order = list(HazardLevel)
    rows = [
        (
            tag(hazard.level.value),
            escape(hazard.what),
            escape(_concerned(own.get(hazard.id, ()), pairs[hazard.id])),
            f"{len(pairs[hazard.id]):,}",
            f"{escape(hazard.action)}. {escape(hazard.reason)}. {citations.link(hazard.source)}",
        )
        for hazard in sorted(found.values(), key=lambda h: (order.index(h.level), h.id))
    ]
    return table(("", "What", "Reagents", "Pairs", "What to do, and why"), rows)


def _concerned(reagents: Sequence[str], pairs: Sequence[Pair]) -> str:
    names = list(reagents) or [" + ".join(pair.key) for pair in pairs]
    more = f" and {len(names) - 8} more" if len(names) > 8 else ""
    return ", ".join(names[:8]) + more


def design(session: Session) -> str:
    """Every pair as a grid, nucleophiles down and electrophiles across."""
    library = session.library
    if max(len(library.rows), len(library.columns)) > _LARGEST_GRID:
        return f"<p>More than {_LARGEST_GRID} reagents in one list: see pairs.csv for all {len(library):,} pairs.</p>"
    cells = [_cell(session, pair, i, j, "") for i, line in enumerate(library.pairs) for j, pair in enumerate(line)]
    grid = grid_svg(
        "All pairs: nucleophiles down, electrophiles across",
        [reagent.block.id for reagent in library.rows],
        [reagent.block.id for reagent in library.columns],
        cells,
    )
    return f'{legend(choices=True)}<div class="wide">{grid}</div>'


def plates(session: Session, plate_map: PlateMap) -> str:
    """Plate maps with the reagent of each row and column."""
    if not plate_map.wells:
        return "<p>No pair is to be made, so there is no plate.</p>"
    down, across = ("electrophiles", "nucleophiles") if plate_map.turned else ("nucleophiles", "electrophiles")
    shown = min(plate_map.plates, _MOST_PLATES)
    parts = [f"<p>{down.capitalize()} go down, {across} across.</p>", legend(choices=False)]
    for number in range(1, shown + 1):
        name = f"Plate {number} of {plate_map.plates}"
        parts.append(f'<h3>{name}</h3><div class="wide">{_plate(session, plate_map, number, name)}</div>')
    if plate_map.plates > shown:
        parts.append(f"<p>{plate_map.plates - shown} more plates are in plate.csv.</p>")
    return "".join(parts)


def _plate(session: Session, plate_map: PlateMap, number: int, name: str) -> str:
    size = plate_map.format
    row_names = [size.well_name(i, 0).rstrip("0123456789") for i in range(size.rows)]
    column_names = [str(j + 1) for j in range(size.columns)]
    cells: list[Cell] = []
    for well in plate_map.wells:
        if well.plate != number:
            continue
        pair = session.pair((well.nucleophile, well.electrophile))
        cells.append(_cell(session, pair, well.row, well.column, f"{well.name}: "))
        ids = pair.key[::-1] if plate_map.turned else pair.key
        letters, digits = well.name.rstrip("0123456789"), str(well.column + 1)
        row_names[well.row], column_names[well.column] = f"{ids[0]}  {letters}", f"{digits}  {ids[1]}"
    return grid_svg(name, row_names, column_names, cells)


def _cell(session: Session, pair: Pair, row: int, column: int, well: str) -> Cell:
    choice = choice_in_force(session, pair)
    words = f"{well}{pair.key[0]} + {pair.key[1]}: {choice.value}, {why(session, pair)}"
    return Cell(row=row, column=column, verdict=pair.verdict, choice=choice, words=words)


def made_pairs(session: Session, plate_map: PlateMap, citations: Citations) -> str:
    """Pairs to make, in the order of the wells, with estimate, flags and remedies."""
    places = wells_of(plate_map)
    pairs = [session.pair(key) for key in places]
    rows = [
        (
            f"{places[pair.key][0]}&nbsp;/&nbsp;{places[pair.key][1]}",
            f"{_named(pair.nucleophile.id, pair.nucleophile.name)}<br>+ "
            f"{_named(pair.electrophile.id, pair.electrophile.name)}",
            _product(pair),
            _estimate(pair),
            _flags(pair, citations) + _decision(session, pair),
        )
        for pair in pairs[:_MOST_PAIRS]
    ]
    if not rows:
        return "<p>No pair is to be made.</p>"
    more = len(pairs) - len(rows)
    rest = f"<p>{more:,} more pairs are in pairs.csv and plate.csv.</p>" if more else ""
    head = ("Plate / well", "Pair", "Product (M: exact mass)", "Estimated rate", "Flags and remedies")
    return table(head, rows) + rest + _basis(pairs, citations)


def _basis(pairs: Iterable[Pair], citations: Citations) -> str:
    """What the rates are relative to, and where their terms come from."""
    rates = [pair.rate for pair in pairs if isinstance(pair.rate, RateEstimate)]
    if not rates:
        return ""
    keys = dict.fromkeys(key for rate in rates for term in rate.terms for key in term.source.split(";"))
    return (
        f'<p class="soft">log10 of the rate constant relative to {escape(rates[0].reference)}; in brackets the range '
        f"of the published series. Terms from {citations.link(';'.join(keys))}.</p>"
    )


def _named(block_id: str, name: str) -> str:
    return f"<b>{escape(block_id)}</b> {escape(name)}"


def _product(pair: Pair) -> str:
    if not pair.products:
        return "none: a partner has no site that reacts"
    best = pair.products[0]
    others = len(pair.products) - 1
    more = f"<br>{best.confidence.value}; {others} other product(s) can form" if others else ""
    smiles = f'<span class="long">{escape(best.smiles)}</span>'
    return f"{escape(best.formula)}<br>M {best.exact_mass:.4f}<br>{smiles}{more}"


def _estimate(pair: Pair) -> str:
    rate = pair.rate
    if not isinstance(rate, RateEstimate):
        return f"no number: {escape(rate.reason)}"
    text = f"log10 {rate.log10_k_rel:.1f} ({rate.low:.1f} to {rate.high:.1f})".replace("-", "−")
    return f"{escape(rate.band)}<br>{text}"


def _flags(pair: Pair, citations: Citations) -> str:
    if not pair.flags:
        return '<p class="soft">no flag</p>'
    return "".join(flag_line(flag, citations.link(flag.source)) for flag in pair.flags)


def _decision(session: Session, pair: Pair) -> str:
    return f"<p><b>{escape(why(session, pair))}</b></p>" if pair.key in session.state.decisions else ""


def rows_not_used(session: Session) -> str:
    """Duplicates and rejected rows of both lists, each with its reason and remedy."""
    library = session.library
    found = [
        (escape(blocks.name), str(row), outcome, f'<span class="long">{escape(received)}</span>', *map(escape, words))
        for blocks in (library.nucleophiles, library.electrophiles)
        for row, outcome, _, received, *words in blocks.issues.itertuples(index=False, name=None)
    ]
    if not found:
        return "<p>Every row of both lists could be used.</p>"
    more = f"<p>{len(found) - _MOST_ROWS:,} more are in rejected_rows.csv.</p>" if len(found) > _MOST_ROWS else ""
    return table(("File", "Row", "", "Received", "Reason", "What to do"), found[:_MOST_ROWS]) + more


def table(head: Sequence[str], rows: Iterable[Sequence[str]]) -> str:
    """HTML table of cells that are HTML already; the head is plain text."""
    top = "".join(f'<th scope="col">{escape(text)}</th>' for text in head)
    body = "".join(f"<tr>{''.join(f'<td>{cell}</td>' for cell in row)}</tr>" for row in rows)
    return f'<div class="wide"><table><thead><tr>{top}</tr></thead><tbody>{body}</tbody></table></div>'
