"""A grid of wells: every pair of the design, or the wells of one plate."""

from __future__ import annotations

import html
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from importlib import resources

import anywidget
import traitlets

from libtool.export.grid_svg import CHOICE_WORDS, VERDICT_WORDS
from libtool.records import Choice, Verdict

__all__ = ["Cell", "PlateGrid"]

Place = tuple[int, int]

# A refused pair is never drawn as made.
_LEGEND_CHOICE = {v: Choice.SKIP if v is Verdict.REFUSED else Choice.MAKE for v in Verdict}


@dataclass(frozen=True, slots=True, kw_only=True)
class Cell:
    """One well of the grid; `row` and `column` are zero-based.

    `decided` marks a decision of a person, without it the choice is the
    toolkit's suggestion. `words` is read aloud and shown as tooltip.
    """

    row: int
    column: int
    verdict: Verdict
    choice: Choice
    decided: bool
    words: str


class PlateGrid(anywidget.AnyWidget):
    """Wells that can be walked with the arrow keys, clicked and marked.

    Shape and colour say what the toolkit thinks, the filling what holds, a dot
    that a person decided. `cursor` is the well in front, `marked` the wells
    for the next decision (Shift-click, a click on a row or column name).
    """

    _esm = resources.files("libtool.views").joinpath("plate_grid.js").read_text("utf-8")
    _css = resources.files("libtool.views").joinpath("plate_grid.css").read_text("utf-8")
    _row_names: traitlets.List = traitlets.List().tag(sync=True)
    _column_names: traitlets.List = traitlets.List().tag(sync=True)
    _cells: traitlets.List = traitlets.List().tag(sync=True)
    _legend: traitlets.List = traitlets.List().tag(sync=True)
    _cursor: traitlets.List = traitlets.List().tag(sync=True)
    _marked: traitlets.List = traitlets.List().tag(sync=True)
    name = traitlets.Unicode("Wells").tag(sync=True)

    def __init__(self, name: str) -> None:
        super().__init__(
            name=name,
            _legend=[
                *([v.value, _LEGEND_CHOICE[v].value, False, words] for v, words in VERDICT_WORDS.items()),
                *([Verdict.GO.value, c.value, False, words] for c, words in CHOICE_WORDS.items()),
                [Verdict.GO.value, Choice.MAKE.value, True, "dot: decided by a person"],
            ],
        )

    def show(self, row_names: Sequence[str], column_names: Sequence[str], cells: Iterable[Cell]) -> None:
        """Draw wells; names stand at the left and on top."""
        with self.hold_sync():
            self._row_names = list(row_names)
            self._column_names = list(column_names)
            self._cells = [[c.row, c.column, c.verdict.value, c.choice.value, c.decided, c.words] for c in cells]

    @property
    def cursor(self) -> Place | None:
        """Well in front, None for none."""
        return (int(self._cursor[0]), int(self._cursor[1])) if self._cursor else None

    @cursor.setter
    def cursor(self, place: Place | None) -> None:
        self._cursor = list(place) if place else []

    @property
    def marked(self) -> tuple[Place, ...]:
        """Wells marked for the next decision."""
        return tuple((int(row), int(column)) for row, column in self._marked)

    @marked.setter
    def marked(self, places: Iterable[Place]) -> None:
        self._marked = [list(place) for place in places]

    def on_cursor(self, act: Callable[[Place | None], None]) -> None:
        """Call `act` whenever the well in front changes."""
        self.observe(lambda _: act(self.cursor), names="_cursor")

    def on_marked(self, act: Callable[[tuple[Place, ...]], None]) -> None:
        """Call `act` whenever the marked wells change."""
        self.observe(lambda _: act(self.marked), names="_marked")

    def _repr_html_(self) -> str:
        """Table of words, where no widget can be shown."""
        words = {(c[0], c[1]): f"{c[2]}, {c[3]}" for c in self._cells}
        head = "".join(f"<th>{html.escape(str(name))}</th>" for name in self._column_names)
        lines = [
            f"<tr><th>{html.escape(str(name))}</th>"
            + "".join(f"<td>{html.escape(words.get((i, j), ''))}</td>" for j in range(len(self._column_names)))
            + "</tr>"
            for i, name in enumerate(self._row_names)
        ]
        return f"<table><tr><th></th>{head}</tr>{''.join(lines)}</table>"
