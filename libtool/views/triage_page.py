"""The triage page: pick a pair, see why it is flagged, decide, write the files."""

from __future__ import annotations

from collections.abc import Callable
from html import escape
from pathlib import Path

import ipywidgets

from libtool.approach import Approach, approach
from libtool.approach.scene import scene
from libtool.errors import LibtoolError
from libtool.plate import PlateMap, lay_out, plate_format, plate_formats
from libtool.records import Choice, ElectrophileSite, NotAvailable, Role, Verdict
from libtool.triage.library import Pair
from libtool.triage.session import Session, SessionState
from libtool.views.approach_viewer import ApproachViewer
from libtool.views.cards import caution, counts_line, message, pair_head, pair_reasons
from libtool.views.plate_grid import Cell, PlateGrid

__all__ = ["TriagePage"]

Key = tuple[str, str]
_ANY_FLAG = "any flag"


class TriagePage(ipywidgets.VBox):
    """All parts on one page, fed by one session.

    Parameters
    ----------
    session : Session
    export : callable
        Called with (session, wells of the plate) by the button that writes
        the files; returns the paths written.
    wells : int
        Wells of the plate, a known format.
    """

    def __init__(
        self, session: Session, export: Callable[[Session, int], tuple[Path, ...]], *, wells: int = 96
    ) -> None:
        self.session = session
        self._export = export
        # Widgets answer to what the page itself sets; those answers are not clicks.
        self._drawing = False
        self._approaches: dict[str, Approach | NotAvailable] = {}
        self._keys: list[Key] = [pair.key for pair in session.library]
        self._place = {
            (n.block.id, e.block.id): (i, j)
            for i, n in enumerate(session.library.rows)
            for j, e in enumerate(session.library.columns)
        }
        self._key_at = {place: key for key, place in self._place.items()}
        self._well_key: dict[tuple[int, int], Key] = {}
        self._make_parts(wells)
        self._connect()
        super().__init__(children=self._arranged())
        self._stop = session.listen(self._draw)
        self._draw(session.state)

    def close(self) -> None:
        """Stop listening to the session and take the page away."""
        self._stop()
        super().close()

    # --- parts ---------------------------------------------------------------

    def _make_parts(self, wells: int) -> None:
        self.grid = PlateGrid("Design: nucleophiles down, electrophiles across")
        self.plate = PlateGrid("Plate")
        self.plate_words = ipywidgets.HTML()
        self.wells = ipywidgets.Dropdown(options=list(plate_formats()), value=wells, description="wells")
        self.number = ipywidgets.BoundedIntText(value=1, min=1, max=1, description="plate")
        self.flag = ipywidgets.Dropdown(options=self._flag_options(), value=_ANY_FLAG, description="show")
        self.flagged = ipywidgets.Select(rows=7, layout=ipywidgets.Layout(width="100%"))
        self.head = ipywidgets.HTML(message("Pick a well to see the pair."))
        self.viewer = ApproachViewer(height=300)
        self.reasons = ipywidgets.HTML()
        self.note = ipywidgets.Text(
            placeholder="why (kept with the decision)", layout=ipywidgets.Layout(width="auto", flex="1 1 200px")
        )
        self.buttons = {
            choice: ipywidgets.Button(description=words, tooltip=tip, layout=ipywidgets.Layout(width="90px"))
            for choice, words, tip in (
                (Choice.MAKE, "Make", "these pairs get a well"),
                (Choice.PARK, "Park", "leave for later, no well"),
                (Choice.SKIP, "Skip", "do not make"),
            )
        }
        self.undo = ipywidgets.Button(
            description="Take back", tooltip="take back the last decision", layout={"width": "90px"}
        )
        self.twin = ipywidgets.Button(description="", layout=ipywidgets.Layout(display="none", width="auto"))
        self.scope = ipywidgets.HTML()
        self.answer = ipywidgets.HTML()
        self.counts = ipywidgets.HTML()
        self.write = ipywidgets.Button(
            description="Write the files", tooltip="filtered reagent lists, pairs, plate map, products, report"
        )

    def _arranged(self) -> list[ipywidgets.Widget]:
        tabs = ipywidgets.Tab(
            children=[
                self.grid,
                ipywidgets.VBox([ipywidgets.HBox([self.wells, self.number]), self.plate_words, self.plate]),
            ],
            titles=("Design", "Plate"),
        )
        bar = ipywidgets.HBox([*self.buttons.values(), self.note, self.undo], layout={"flex_flow": "row wrap"})
        left = ipywidgets.VBox(
            [tabs, self.scope, bar, self.answer, self.flag, self.flagged],
            layout=ipywidgets.Layout(flex="3 1 500px", min_width="320px"),
        )
        right = ipywidgets.VBox(
            [self.head, self.viewer, self.twin, self.reasons],
            layout=ipywidgets.Layout(flex="2 1 420px", min_width="320px"),
        )
        middle = ipywidgets.HBox([left, right], layout=ipywidgets.Layout(flex_flow="row wrap", grid_gap="12px"))
        return [ipywidgets.HTML(caution()), self.counts, middle, self.write]

    def _connect(self) -> None:
        self.grid.on_cursor(lambda place: self._select(self._key_at.get(place) if place else None))
        self.grid.on_marked(lambda _: self._draw_scope())
        self.plate.on_cursor(lambda place: self._select(self._well_key.get(place) if place else None))
        self.plate.on_marked(lambda _: self._mark_from_plate())
        self.flag.observe(lambda _: self._draw(self.session.state), names="value")
        self.flagged.observe(lambda change: self._select(change["new"]), names="value")
        self.wells.observe(lambda _: self._draw(self.session.state), names="value")
        self.number.observe(lambda _: self._draw(self.session.state) if not self._drawing else None, names="value")
        for choice, button in self.buttons.items():
            button.on_click(lambda _, choice=choice: self.decide(choice))
        self.undo.on_click(lambda _: self._take_back())
        self.twin.on_click(lambda _: self._go_to_twin())
        self.write.on_click(lambda _: self.write_files())

    # --- acts ----------------------------------------------------------------

    def decide(self, choice: Choice) -> None:
        """Decide about the marked pairs, or about the pair in front."""
        keys = self._aimed()
        if not keys:
            self.answer.value = message("Pick a well first.", alarm=True)
            return
        try:
            self.session.decide(keys, choice, self.note.value)
        except LibtoolError as error:
            self.answer.value = message(str(error), alarm=True)
            return
        self.note.value = ""
        self.grid.marked = ()
        self.plate.marked = ()
        what = " + ".join(keys[0]) if len(keys) == 1 else f"{len(keys)} pairs"
        self.answer.value = message(f"Saved: {choice.value} {what}.")

    def write_files(self) -> None:
        """Write all lists and the report; the answer says where they are."""
        self.write.disabled = True
        self.answer.value = message("Writing...")
        try:
            paths = self._export(self.session, self.wells.value)
        except (LibtoolError, OSError) as error:
            self.answer.value = message(f"Not written: {error}", alarm=True)
        else:
            self.answer.value = message("Written:\n" + "\n".join(str(path) for path in paths))
        finally:
            self.write.disabled = False

    def _take_back(self) -> None:
        try:
            undone = self.session.undo()
        except LibtoolError as error:
            self.answer.value = message(str(error), alarm=True)
            return
        self.answer.value = message("Taken back." if undone else "There is no decision to take back.")

    def _select(self, key: Key | None) -> None:
        if not self._drawing and key != self.session.state.selected:
            self.session.select(key)

    def _go_to_twin(self) -> None:
        pair = self._pair()
        twin = self._twin_of(pair) if pair else ""
        if pair and twin:
            self._select((pair.nucleophile.id, twin))

    def _aimed(self) -> list[Key]:
        marked = [self._key_at[place] for place in self.grid.marked]
        return marked or ([self.session.state.selected] if self.session.state.selected else [])

    def _mark_from_plate(self) -> None:
        keys = [self._well_key[place] for place in self.plate.marked if place in self._well_key]
        self.grid.marked = [self._place[key] for key in keys]

    def _pair(self) -> Pair | None:
        key = self.session.state.selected
        return self.session.pair(key) if key else None

    # --- drawing -------------------------------------------------------------

    def _draw(self, state: SessionState) -> None:
        self._drawing = True
        try:
            self._draw_grid(state)
            self._draw_plate()
            self._draw_flagged()
            self._draw_scope()
            self._draw_pair()
        finally:
            self._drawing = False

    def _draw_grid(self, state: SessionState) -> None:
        library = self.session.library
        self.grid.show(
            [r.block.id for r in library.rows],
            [c.block.id for c in library.columns],
            [self._cell(key, *self._place[key]) for key in self._keys],
        )
        self.grid.cursor = self._place.get(state.selected) if state.selected else None

    def _cell(self, key: Key, row: int, column: int, name: str = "") -> Cell:
        pair = self.session.pair(key)
        choice, decided = self.session.choice(key), key in self.session.state.decisions
        held = f"decided: {choice.value}" if decided else f"suggested: {choice.value}"
        words = f"{name + ': ' if name else ''}{key[0]} + {key[1]}, {pair.verdict.value}, {held}"
        reason = pair.suggestion_reason
        return Cell(
            row=row,
            column=column,
            verdict=pair.verdict,
            choice=choice,
            decided=decided,
            words=f"{words} ({reason})" if reason else words,
        )

    def _plate_map(self) -> PlateMap:
        return lay_out(self.session.to_make(), plate_format(self.wells.value))

    def _draw_plate(self) -> None:
        made = self._plate_map()
        self.number.max = max(1, made.plates)
        shown = [w for w in made.wells if w.plate == self.number.value]
        self._well_key = {(w.row, w.column): (w.nucleophile, w.electrophile) for w in shown}
        names = [made.format.well_name(row, 0)[:-2] for row in range(made.format.rows)]
        self.plate.show(
            names,
            [str(column + 1) for column in range(made.format.columns)],
            [self._cell((w.nucleophile, w.electrophile), w.row, w.column, w.name) for w in shown],
        )
        places = {key: place for place, key in self._well_key.items()}
        selected = self.session.state.selected
        self.plate.cursor = places.get(selected) if selected else None
        across = "nucleophiles across, electrophiles down" if made.turned else "nucleophiles down, electrophiles across"
        self.plate_words.value = escape(f"{len(made.wells)} wells on {made.plates} plate(s), {across}.")
        self.counts.value = counts_line(self.session, len(made.wells))

    def _flag_options(self) -> list[str]:
        titles = sorted({f.title for pair in self.session.library for f in pair.flags})
        return [_ANY_FLAG, *titles]

    def _draw_flagged(self) -> None:
        wanted = self.flag.value
        options = [
            (f"{pair.nucleophile.id} + {pair.electrophile.id}: {', '.join(f.title for f in pair.flags)}", pair.key)
            for pair in self.session.library
            if pair.flags and (wanted == _ANY_FLAG or any(f.title == wanted for f in pair.flags))
        ]
        selected = self.session.state.selected
        if options != list(self.flagged.options):
            self.flagged.options = options
        self.flagged.value = selected if selected in [key for _, key in options] else None

    def _draw_scope(self) -> None:
        marked = len(self.grid.marked)
        pair = self._pair()
        if marked:
            words = f"The next decision counts for {marked} marked pair{'s' * (marked > 1)}."
        elif pair:
            words = f"The next decision counts for {pair.nucleophile.id} + {pair.electrophile.id}."
        else:
            words = "Pick a well, or mark several."
        self.scope.value = escape(words)

    def _draw_pair(self) -> None:
        pair = self._pair()
        if pair is None:
            return
        self.head.value = pair_head(pair, self.session.state.decisions.get(pair.key))
        self.reasons.value = pair_reasons(pair)
        twin = self._twin_of(pair)
        self.twin.layout.display = "" if twin else "none"
        self.twin.description = f"Go to the same product from {twin}" if twin else ""
        self._draw_approach(pair)

    @staticmethod
    def _twin_of(pair: Pair) -> str:
        return next((f.remedy.block_id for f in pair.flags if f.remedy.block_id), "")

    def _draw_approach(self, pair: Pair) -> None:
        if pair.verdict is Verdict.REFUSED:
            self.viewer.clear("No picture: this pair is refused, see the cautions.")
            return
        found = self._approach_of(pair.electrophile.id)
        if isinstance(found, NotAvailable):
            self.viewer.clear(f"No picture: {found.reason}.")
            return
        marked = {a for f in pair.flags if f.role is Role.ELECTROPHILE for a in f.atoms}
        self.viewer.show(scene(found, marked=marked), found.model)

    def _approach_of(self, block_id: str) -> Approach | NotAvailable:
        if block_id not in self._approaches:
            reagent = next(c for c in self.session.library.columns if c.block.id == block_id)
            sites = [s for s in reagent.sites if isinstance(s, ElectrophileSite)]
            self._approaches[block_id] = (
                approach(sites[0])
                if sites
                else NotAvailable(what="3D approach", reason=f"{block_id} has no carbon with a leaving group")
            )
        return self._approaches[block_id]
