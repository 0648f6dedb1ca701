"""Wells as SVG, readable in print: each verdict has a colour, a shape and a letter."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from html import escape

from libtool.records import Choice, Verdict

__all__ = ["CHOICE_WORDS", "VERDICT_LETTERS", "VERDICT_WORDS", "Cell", "grid_svg", "legend"]

VERDICT_WORDS = {
    Verdict.GO: "should work",
    Verdict.WATCH: "take care: a warning",
    Verdict.STUCK: "will fail as it stands",
    Verdict.REFUSED: "refused, not to be made here",
}
"""What the toolkit thinks of a pair, in the legends."""

CHOICE_WORDS = {
    Choice.MAKE: "filled: make",
    Choice.PARK: "half filled: park",
    Choice.SKIP: "hollow: skip",
}
"""What holds for a pair, in the legends."""

VERDICT_LETTERS = {Verdict.GO: "", Verdict.WATCH: "!", Verdict.STUCK: "F", Verdict.REFUSED: "R"}
_SHAPES = {
    Verdict.GO: '<circle r="8"/>',
    Verdict.WATCH: '<path d="M0-10L10 0L0 10L-10 0z"/>',
    Verdict.STUCK: '<path d="M-8-8H8V8H-8z"/>',
    Verdict.REFUSED: '<path d="M-4.1-10H4.1L10-4.1V4.1L4.1 10H-4.1L-10 4.1V-4.1z"/>',
}
# Left half of each shape, filled for a parked pair.
_HALVES = {
    Verdict.GO: '<path class="half" d="M0-8a8 8 0 0 0 0 16z"/>',
    Verdict.WATCH: '<path class="half" d="M0-10L-10 0L0 10z"/>',
    Verdict.STUCK: '<path class="half" d="M-8-8H0V8H-8z"/>',
    Verdict.REFUSED: "",
}
# Grid units; a glyph is 20 of them wide.
_STEP = 24
_LETTER = 6.6
_LONGEST = 18


@dataclass(frozen=True, slots=True, kw_only=True)
class Cell:
    """One pair at a place of a grid, zero-based; `words` appear under the pointer."""

    row: int
    column: int
    verdict: Verdict
    choice: Choice
    words: str


def grid_svg(title: str, row_names: Sequence[str], column_names: Sequence[str], cells: Iterable[Cell]) -> str:
    """Grid of wells as one <svg> element.

    Parameters
    ----------
    title : str
        Read out in place of the drawing.
    row_names, column_names : sequence of str
        Written at the left and, leaning, on top.
    cells : iterable of Cell
        Places without one are drawn as empty wells.

    Returns
    -------
    str
    """
    left = max(map(len, map(_short, row_names)), default=1) * _LETTER + 14
    lean = max(map(len, map(_short, column_names)), default=1) * _LETTER
    # Names lean by 50 degrees: that much height, that much overhang to the right.
    top, overhang = lean * 0.77 + 18, lean * 0.65
    width = left + len(column_names) * _STEP + overhang + 8
    height = top + len(row_names) * _STEP + 6
    parts = [
        f'<text class="name" x="{left - 8:.0f}" y="{top + (i + 0.5) * _STEP + 4:.0f}" text-anchor="end">'
        f"{escape(_short(name))}</text>"
        for i, name in enumerate(row_names)
    ]
    parts += [
        f'<text class="name" transform="translate({left + (j + 0.5) * _STEP + 3:.0f} {top - 6:.0f}) rotate(-50)">'
        f"{escape(_short(name))}</text>"
        for j, name in enumerate(column_names)
    ]
    found = {(cell.row, cell.column): cell for cell in cells}
    for i in range(len(row_names)):
        for j in range(len(column_names)):
            place = f"translate({left + (j + 0.5) * _STEP:.1f} {top + (i + 0.5) * _STEP:.1f})"
            cell = found.get((i, j))
            parts.append(_glyph(cell, place) if cell else f'<circle class="empty" r="7" transform="{place}"/>')
    size = f'width="{width:.0f}" height="{height:.0f}" viewBox="0 0 {width:.0f} {height:.0f}"'
    return f'<svg class="grid" {size} role="img" aria-label="{escape(title)}">{"".join(parts)}</svg>'


def legend(*, choices: bool) -> str:
    """List of the glyphs and what they mean; `choices` adds how the choice is drawn."""
    samples = [(verdict, Choice.MAKE, words) for verdict, words in VERDICT_WORDS.items()]
    # A refused pair is never drawn as made.
    samples.pop()
    if choices:
        samples += [
            (Verdict.REFUSED, Choice.SKIP, VERDICT_WORDS[Verdict.REFUSED]),
            *((Verdict.GO, choice, words) for choice, words in CHOICE_WORDS.items()),
        ]
    items = "".join(
        '<li><svg class="grid" width="24" height="24" viewBox="0 0 24 24" aria-hidden="true">'
        f"{_glyph(Cell(row=0, column=0, verdict=v, choice=c, words=''), 'translate(12 12)')}</svg>{escape(words)}</li>"
        for v, c, words in samples
    )
    return f'<ul class="legend">{items}</ul>'


def _glyph(cell: Cell, place: str) -> str:
    # A letter on a half-filled shape could not be read.
    letter = "" if cell.choice is Choice.PARK else VERDICT_LETTERS[cell.verdict]
    text = f'<text y="4" text-anchor="middle">{letter}</text>' if letter else ""
    words = f"<title>{escape(cell.words)}</title>" if cell.words else ""
    half = _HALVES[cell.verdict] if cell.choice is Choice.PARK else ""
    kinds = f"{cell.verdict.value} {cell.choice.value}"
    return f'<g class="{kinds}" transform="{place}">{words}{_SHAPES[cell.verdict]}{half}{text}</g>'


def _short(name: str) -> str:
    return name if len(name) <= _LONGEST else f"{name[: _LONGEST - 1]}…"
