"""What the page says about a pair, as HTML.

Pure functions: a record goes in, HTML comes out. Everything that stood in a
file or was typed by a person is escaped.
"""

from __future__ import annotations

from html import escape
from typing import TYPE_CHECKING

from libtool.export.grid_svg import VERDICT_WORDS
from libtool.export.structure_svg import block_svg, product_svg
from libtool.records import Choice, HazardLevel, Level, RateEstimate, Role, Verdict
from libtool.reference.tables import cite
from libtool.triage.hazards import CAUTION

if TYPE_CHECKING:
    from libtool.records import BuildingBlock, Decision, Flag, Hazard, NotAvailable
    from libtool.triage.library import Pair
    from libtool.triage.session import Session

__all__ = ["block_title", "caution", "counts_line", "message", "pair_head", "pair_reasons"]

_TONES = {
    Verdict.GO: "#16786a",
    Verdict.WATCH: "#b96400",
    Verdict.STUCK: "#8b3a74",
    Verdict.REFUSED: "#4a4a4a",
}
_LEVEL_WORDS = {Level.FAIL: "will fail", Level.WARN: "warning", Level.NOTE: "note"}
_LEVEL_TONES = {Level.FAIL: _TONES[Verdict.STUCK], Level.WARN: _TONES[Verdict.WATCH], Level.NOTE: "#5a6472"}
_HAZARD_WORDS = {
    HazardLevel.STOP: "not to be made here",
    HazardLevel.COMPLIANCE: "approval needed",
    HazardLevel.HIGH: "dangerous",
    HazardLevel.WARN: "caution",
    HazardLevel.INFO: "for information",
}


def block_title(block: BuildingBlock) -> str:
    """Id and name of a block, plain text."""
    return f"{block.id} {block.name}".strip()


def caution() -> str:
    """The caution that stands above every list."""
    return f'<p style="margin:2px 0;padding:4px 8px;border-left:4px solid #b3261e">{escape(CAUTION)}</p>'


def message(text: str, *, alarm: bool = False) -> str:
    """One line of answer to what was just done."""
    role, tone = ("alert", "#b3261e") if alarm else ("status", "inherit")
    return f'<div role="{role}" style="color:{tone};white-space:pre-wrap">{escape(text)}</div>'


def counts_line(session: Session, wells: int) -> str:
    """How the pairs are spread; the numbers add up to all pairs."""
    counts = session.counts()
    decided = len(session.state.decisions)
    total = len(session.library)
    text = (
        f"{total} pairs: {counts[Choice.MAKE]} to make, {counts[Choice.PARK]} parked, {counts[Choice.SKIP]} skipped. "
        f"{decided} decided by a person, {total - decided} as suggested. {wells} wells on the plate."
    )
    stray = len(session.state.stray)
    if stray:
        text += f" {stray} older decisions belong to ids or structures that are no longer in the lists; they are kept."
    return f"<b>{escape(text)}</b>"


def pair_head(pair: Pair, decision: Decision | None) -> str:
    """Who reacts with whom, what comes out, and what holds.

    Parameters
    ----------
    pair : Pair
    decision : Decision or None
        The decision in force.

    Returns
    -------
    str
        HTML.
    """
    parts = [
        f'<h3 style="margin:0">{escape(block_title(pair.nucleophile))} + {escape(block_title(pair.electrophile))}</h3>',
        f'<div style="color:{_TONES[pair.verdict]};font-weight:600">{escape(VERDICT_WORDS[pair.verdict])}</div>',
        f"<div>{escape(_holds(pair, decision))}</div>",
        _scheme(pair),
        _outcome(pair),
    ]
    return f'<div style="line-height:1.35">{"".join(parts)}</div>'


def pair_reasons(pair: Pair) -> str:
    """Flags with remedies and sources, cautions, estimated rate; as HTML."""
    parts = _flags(pair.flags, refused=pair.verdict is Verdict.REFUSED) + _hazards(pair.hazards) + _estimate(pair.rate)
    return f'<div style="line-height:1.35">{parts}</div>'


def _holds(pair: Pair, decision: Decision | None) -> str:
    if decision is None or decision.choice is None:
        return f"Suggested: {pair.suggestion.value} ({pair.suggestion_reason})."
    when = decision.when.replace("T", " ")[:16]
    note = f": {decision.note}" if decision.note else ""
    return f"Decided: {decision.choice.value}, {decision.who}, {when} UTC{note}"


def _scheme(pair: Pair) -> str:
    sign = '<span style="font-size:20px;padding:0 4px">{}</span>'
    product = pair.products[0] if pair.products else None
    flagged = {role: {a for f in pair.flags if f.role is role for a in f.atoms} for role in Role}
    n_reacting = [product.nucleophile.atom] if product else []
    e_reacting = [product.electrophile.carbon] if product else []
    size = {"width": 150, "height": 105}
    left = block_svg(pair.nucleophile, reacting=n_reacting, flagged=flagged[Role.NUCLEOPHILE], **size)
    right = block_svg(pair.electrophile, reacting=e_reacting, flagged=flagged[Role.ELECTROPHILE], **size)
    drawn = [left, sign.format("+"), right]
    if product:
        drawn += [sign.format("→"), product_svg(product, width=200, height=105)]
    # Structures are drawn in dark colours whatever the theme of the notebook.
    style = "display:flex;flex-wrap:wrap;align-items:center;margin:4px 0;background:#fff;color:#111"
    return f'<div style="{style}">{"".join(drawn)}</div>'


_STEREO_WORDS = {
    "inverted": "drawn with inversion at the attacked carbon",
    "undefined": "the attacked carbon is a stereocentre without a drawn configuration",
    "none": "",
}


def _outcome(pair: Pair) -> str:
    if not pair.products:
        return ""
    first, others = pair.products[0], pair.products[1:]
    words = [f"Product {first.formula}, exact mass {first.exact_mass:.4f}"]
    if _STEREO_WORDS[first.stereo]:
        words.append(_STEREO_WORDS[first.stereo])
    text = escape("; ".join(words) + ".")
    if others:
        lines = "".join(f"<li><code>{escape(p.smiles)}</code> {p.probability:.0%}</li>" for p in others[:5])
        more = f"<li>and {len(others) - 5} more</li>" if len(others) > 5 else ""
        head = f"{len(others)} other product{'s' * (len(others) > 1)} can form ({first.reason})"
        text += f"<details><summary>{escape(head)}</summary><ul>{lines}{more}</ul></details>"
    return f"<div>{text}</div>"


def _flags(flags: tuple[Flag, ...], *, refused: bool) -> str:
    if not flags:
        return "<p>No flag.</p>"
    lines = [
        f'<li style="margin:3px 0"><b style="color:{_LEVEL_TONES[f.level]}">{escape(f.title)}</b> '
        f"({_LEVEL_WORDS[f.level]}, {f.role.value}). {escape(f.sentence)}<br>"
        # What is refused gets no recipe.
        + ("" if refused else f"<b>Remedy:</b> {escape(f.remedy.sentence)} ")
        + f'<span style="opacity:.75">Source: {escape(cite(f.source))}.</span></li>'
        for f in flags
    ]
    return f'<ul style="margin:4px 0;padding-left:18px">{"".join(lines)}</ul>'


def _hazards(hazards: tuple[Hazard, ...]) -> str:
    if not hazards:
        return ""
    shown = [h for h in hazards if h.level is not HazardLevel.INFO]
    quiet = [h for h in hazards if h.level is HazardLevel.INFO]
    lines = [
        f'<li><b style="color:#b3261e">{_HAZARD_WORDS[h.level]}:</b> {escape(h.what)}. {escape(h.action)}. '
        f'<span style="opacity:.75">{escape(h.reason)}. Source: {escape(cite(h.source))}.</span></li>'
        for h in shown
    ]
    text = f'<ul style="margin:4px 0;padding-left:18px">{"".join(lines)}</ul>' if lines else ""
    if quiet:
        inside = "".join(f"<li>{escape(h.what)}. {escape(h.action)}.</li>" for h in quiet)
        text += f"<details><summary>General caution{'s' * (len(quiet) > 1)}</summary><ul>{inside}</ul></details>"
    return text


def _estimate(rate: RateEstimate | NotAvailable) -> str:
    if not isinstance(rate, RateEstimate):
        return f"<p>No relative rate: {escape(rate.reason)}.</p>"
    number = f"log10 = {rate.log10_k_rel:.1f} ({rate.low:.1f} to {rate.high:.1f})".replace("-", "−")
    lines = "".join(
        f"<tr><td>{escape(t.label)}</td><td style='text-align:right'>{t.value:+.1f}</td>"
        f"<td>{t.low:+.1f} to {t.high:+.1f}</td><td>{escape(cite(t.source))}</td></tr>".replace("-", "−")
        for t in rate.terms
    )
    head = "<tr><th>term</th><th>log10</th><th>range</th><th>source</th></tr>"
    return (
        f"<details><summary>Estimated rate: {escape(rate.band)}; {number}</summary>"
        f"<div>Reference: {escape(rate.reference)}.</div><table>{head}{lines}</table></details>"
    )
