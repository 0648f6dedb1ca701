"""The report: one HTML file that needs nothing but a browser.

Everything is inside: style, script, 3Dmol.js, the scenes. A content security
policy forbids the page to ask for anything, and allows only the script and
style whose hashes it names. Without JavaScript or WebGL the sentences beside
the drawings say what the pictures would show.
"""

from __future__ import annotations

import base64
import hashlib
import json
from collections.abc import Callable
from dataclasses import dataclass
from html import escape
from importlib import resources
from pathlib import Path
from string import Template

from libtool import __version__
from libtool.approach import approach
from libtool.approach.scene import LEGEND, Scene, scene
from libtool.assets.inline import scene_script
from libtool.assets.threedmol import licence_text, script_gzip, version
from libtool.errors import LibtoolError
from libtool.export import sections
from libtool.export.citations import Citations
from libtool.export.files import write_together
from libtool.export.standing import Standing, is_refused, reagent_standings
from libtool.export.structure_svg import block_svg
from libtool.plate import PlateMap
from libtool.records import ElectrophileSite, Level, NotAvailable, Role
from libtool.reference.tables import fingerprint
from libtool.triage import Session
from libtool.triage.hazards import CAUTION

__all__ = ["MOST_VIEWS", "flagged_electrophiles", "report_text", "write_report"]

MOST_VIEWS = 60
"""Electrophiles shown with a picture; each costs up to 0.3 s."""

Progress = Callable[[int, int], None]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Card:
    """One flagged electrophile with its picture; `order` puts the most telling pictures first."""

    standing: Standing
    picture: Scene | NotAvailable
    marked: frozenset[int]
    model: str
    order: tuple[int, bool, float]


def write_report(session: Session, plate_map: PlateMap, path: str | Path, *, progress: Progress | None = None) -> Path:
    """Write the report of a session as one self-contained HTML file.

    Parameters
    ----------
    session : Session
    plate_map : PlateMap
        Wells of `session.to_make()`.
    path : path
        File to write.
    progress : callable, optional
        Called with (pictures done, pictures in all).

    Returns
    -------
    Path

    Raises
    ------
    OSError
        The file cannot be written; an older one is left as it was.
    """
    path = Path(path)
    return write_together(path.parent, {path.name: report_text(session, plate_map, progress=progress)})[0]


def flagged_electrophiles(session: Session) -> tuple[Standing, ...]:
    """Electrophiles with a flag, the worst level first; refused ones are not among them."""
    order = list(Level)
    flagged = [
        s for s in reagent_standings(session, Role.ELECTROPHILE) if s.reagent.flags and not is_refused(s.reagent)
    ]
    return tuple(sorted(flagged, key=lambda s: order.index(s.reagent.flags[0].level)))


def report_text(session: Session, plate_map: PlateMap, *, progress: Progress | None = None) -> str:
    """HTML of the report, see `write_report`."""
    citations = Citations()
    flagged = flagged_electrophiles(session)
    cards = _cards(flagged[:MOST_VIEWS], progress)
    scenes = [_wire(card, card.picture) for card in cards if isinstance(card.picture, Scene)]
    library, problem = _library()
    parts = (
        ("summary", "Summary", sections.summary(session, plate_map)),
        ("cautions", "Refused, under control, dangerous", sections.cautions(session, citations)),
        ("electrophiles", "Flagged electrophiles", _electrophiles(cards, len(flagged), problem, citations)),
        ("design", "All pairs", sections.design(session)),
        ("plates", "Plate map", sections.plates(session, plate_map)),
        ("pairs", "Pairs to make", sections.made_pairs(session, plate_map, citations)),
        ("rows", "Rows that were not used", sections.rows_not_used(session)),
        ("sources", "Sources", citations.listed()),
    )
    css, script = _asset("report.css"), _script()
    conditions = session.library.conditions
    names = [blocks.name for blocks in (session.library.nucleophiles, session.library.electrophiles)]
    return Template(_asset("report.html")).substitute(
        policy=_policy(css, script),
        css=css,
        heading=escape(" × ".join(names)),
        conditions=escape(f"{conditions.solvent}, {conditions.temperature_celsius:g} °C, one SN2 step per well"),
        caution=escape(CAUTION),
        contents="".join(f'<a href="#{key}">{escape(title)}</a>' for key, title, _ in parts),
        sections="\n".join(
            f'<section aria-labelledby="{key}"><h2 id="{key}">{escape(title)}</h2>{body}</section>'
            for key, title, body in parts
        ),
        footer=_footer(with_library=bool(library)),
        scenes=_json(scenes),
        library=library,
        script=script,
    )


def _cards(flagged: tuple[Standing, ...], progress: Progress | None) -> list[_Card]:
    cards: list[_Card] = []
    for standing in flagged:
        cards.append(_drawn(standing))
        if progress:
            progress(len(cards), len(flagged))
    return sorted(cards, key=lambda card: card.order)


def _drawn(standing: Standing) -> _Card:
    reagent = standing.reagent
    marked = frozenset(a for f in reagent.flags if f.role is Role.ELECTROPHILE for a in f.atoms)
    sites = [s for s in reagent.sites if isinstance(s, ElectrophileSite)]
    found = (
        approach(sites[0])
        if sites
        else NotAvailable(what="3D approach", reason=f"{reagent.block.id} has no carbon with a leaving group")
    )
    # A picture says most about a carbon that SN2 could reach if nothing stood in
    # the way, so those come before the ones that have no rate at all.
    worst = list(Level).index(reagent.flags[0].level)
    no_rate = isinstance(reagent.terms, NotAvailable)
    if isinstance(found, NotAvailable):
        return _Card(standing=standing, picture=found, marked=marked, model="", order=(worst, True, 2.0))
    return _Card(
        standing=standing,
        picture=scene(found, marked=marked),
        marked=marked,
        model=found.model,
        order=(worst, no_rate, found.open_fraction),
    )


def _title(card: _Card) -> str:
    block = card.standing.reagent.block
    return f"{block.id} {block.name}".strip()


def _wire(card: _Card, picture: Scene) -> dict[str, object]:
    calls = [[name, list(arguments)] for name, arguments in picture.calls]
    return {"title": _title(card), "sentence": picture.sentence, "calls": calls}


def _electrophiles(cards: list[_Card], flagged: int, problem: str, citations: Citations) -> str:
    if not cards:
        return "<p>No electrophile is flagged.</p>"
    lines: list[str] = []
    number = 0
    for card in cards:
        lines.append(_article(card, number, citations))
        number += isinstance(card.picture, Scene)
    more = (
        f"<p>The first {len(cards)} of {flagged} flagged electrophiles are shown; all are in the reagent lists.</p>"
        if flagged > len(cards)
        else ""
    )
    models = [card.model for card in cards if card.model]
    stage = _stage(models[0], problem) if models else ""
    return f'{more}<div class="approach"><div>{"".join(lines)}</div>{stage}</div>'


def _article(card: _Card, number: int, citations: Citations) -> str:
    reagent = card.standing.reagent
    site = next((s for s in reagent.sites if isinstance(s, ElectrophileSite)), None)
    drawing = block_svg(reagent.block, reacting=[site.carbon] if site else [], flagged=card.marked)
    flags = "".join(sections.flag_line(flag, citations.full(flag.source)) for flag in reagent.flags)
    if isinstance(card.picture, Scene):
        words = card.picture.sentence
        button = f'<button type="button" data-scene="{number}" aria-pressed="false" hidden>Show the approach</button>'
    else:
        words, button = f"No picture: {card.picture.reason}.", ""
    pairs = f"{card.standing.to_make} of {card.standing.pairs} pairs to make."
    return (
        f'<article class="card"><div>{drawing}{button}</div><div><h3>{escape(_title(card))}</h3>'
        f'<p class="soft">{pairs}</p>{flags}<p>{escape(words)}</p></div></article>'
    )


def _stage(model: str, problem: str) -> str:
    dots = "".join(
        f'<li><svg width="12" height="12" aria-hidden="true"><circle cx="6" cy="6" r="5" fill="{colour}"/></svg>'
        f"{escape(meaning)}</li>"
        for colour, meaning in LEGEND
    )
    inside = f"<p>{escape(problem)}</p>" if problem else "<p>The 3D picture needs JavaScript.</p>"
    return (
        '<aside class="stage" aria-label="Approach of the nucleophile"><h3 id="viewer-title"></h3>'
        f'<div id="viewer" role="img">{inside}</div><ul class="legend">{dots}</ul>'
        f'<p id="viewer-words" aria-live="polite"></p><p class="soft">{escape(model)} Drag to turn.</p></aside>'
    )


def _footer(*, with_library: bool) -> str:
    words = (
        f"waldenbench {__version__}, tables {fingerprint()[:12]}. Estimates order a plate; they replace no experiment."
    )
    if not with_library:
        return f"<p>{escape(words)}</p>"
    licence = f"<details><summary>Licences of 3Dmol.js {escape(version())}</summary><pre>{escape(licence_text())}</pre>"
    return f"<p>{escape(words)}</p>{licence}</details>"


def _library() -> tuple[str, str]:
    """3Dmol.js, packed, and what to say instead when the installation has none."""
    try:
        return base64.b64encode(script_gzip()).decode("ascii"), ""
    except LibtoolError as error:
        # The words of the report are worth having without its pictures.
        return "", str(error)


def _script() -> str:
    return f"\n(() => {{\n{scene_script()}\n{_asset('report.js')}}})();\n"


def _asset(name: str) -> str:
    return resources.files("libtool.export").joinpath(name).read_text("utf-8")


def _policy(css: str, script: str) -> str:
    # 3Dmol.js is started from a blob that the script itself makes.
    return (
        f"default-src 'none'; script-src {_hash(script)} blob:; style-src {_hash(css)}; "
        "base-uri 'none'; form-action 'none'"
    )


def _hash(text: str) -> str:
    return f"'sha256-{base64.b64encode(hashlib.sha256(text.encode()).digest()).decode('ascii')}'"


def _json(value: object) -> str:
    """JSON that cannot end the script element it stands in."""
    text = json.dumps(value, separators=(",", ":"))
    return text.replace("<", "\\u003c").replace(">", "\\u003e").replace("&", "\\u0026")
