"""The page without a browser: what it sends, what a click does, what hostile text becomes."""

from __future__ import annotations

import json
from collections import Counter
from html.parser import HTMLParser
from pathlib import Path

import pandas
import pytest

from libtool.blocks import read_blocks
from libtool.records import Choice, Verdict
from libtool.triage import Journal, Session, build_library
from libtool.views import TriagePage
from libtool.views.cards import pair_head, pair_reasons
from libtool.views.plate_grid import PlateGrid

HOSTILE = '<img src=x onerror="alert(1)">'


@pytest.fixture
def session(tmp_path: Path, example_data: Path) -> Session:
    lists = [read_blocks(example_data / f"{name}.csv") for name in ("nucleophiles", "electrophiles")]
    return Session(build_library(*lists), Journal(tmp_path / "decisions.sqlite", who="tester"))


@pytest.fixture
def page(session: Session) -> TriagePage:
    return TriagePage(session, lambda now, wells: (Path(f"{len(now.to_make())} of {wells}"),), wells=384)


class Tags(HTMLParser):
    """Elements of a piece of HTML, and whether every one of them is closed."""

    VOID = ("br", "img", "rect", "path", "circle", "ellipse", "input")

    def __init__(self, text: str) -> None:
        super().__init__()
        self.count: Counter[str] = Counter()
        self.open: list[str] = []
        self.feed(text)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.count[tag] += 1
        assert not [name for name, _ in attrs if name.startswith("on")]
        if tag not in self.VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.count[tag] += 1

    def handle_endtag(self, tag: str) -> None:
        if tag not in self.VOID:
            assert self.open.pop() == tag


def press(page: TriagePage, choice: Choice, note: str = "") -> None:
    page.note.value = note
    page.buttons[choice].click()


def test_one_glyph_per_pair_and_the_counts_add_up(page: TriagePage, session: Session) -> None:
    assert len(page.grid._cells) == len(session.library) == 16 * 24
    assert sum(session.counts().values()) == len(session.library)
    assert f"{len(session.library)} pairs" in page.counts.value


def test_a_click_shows_the_pair_its_flags_and_its_picture(page: TriagePage, session: Session) -> None:
    column = [c.block.id for c in session.library.columns].index("HE-005")
    page.grid._cursor = [0, column]
    assert session.state.selected == ("HN-001", "HE-005")
    assert "neopentyl" in page.head.value
    assert "Remedy:" in page.reasons.value
    assert "Streitwieser" in page.reasons.value
    assert "0% of the approach cone is open" in page.viewer._sentence
    assert page.viewer._calls[0][0] == "addModel"
    json.dumps(page.viewer._calls)


def test_a_refused_pair_gets_no_picture_and_no_well(page: TriagePage, session: Session) -> None:
    session.select(("HN-001", "HE-024"))
    assert page.viewer._calls == []
    assert "refused" in page.viewer._sentence
    press(page, Choice.MAKE)
    assert 'role="alert"' in page.answer.value
    assert session.choice(("HN-001", "HE-024")) is Choice.SKIP
    assert not [p for p in session.to_make() if p.verdict is Verdict.REFUSED]


def test_a_decision_is_drawn_kept_and_taken_back(page: TriagePage, session: Session, tmp_path: Path) -> None:
    session.select(("HN-001", "HE-002"))
    press(page, Choice.PARK, "wait for the lab")
    assert "wait for the lab" in page.head.value
    assert page.note.value == ""
    drawn = {(r, c): (choice, decided) for r, c, _, choice, decided, _ in page.grid._cells}
    assert drawn[0, 1] == ("park", True)
    again = Session(session.library, Journal(tmp_path / "decisions.sqlite"))
    assert again.choice(("HN-001", "HE-002")) is Choice.PARK
    page.undo.click()
    assert session.choice(("HN-001", "HE-002")) is Choice.MAKE
    page.undo.click()
    assert "no decision" in page.answer.value


def test_marked_pairs_are_decided_together(page: TriagePage, session: Session) -> None:
    page.grid._marked = [[0, 0], [1, 0], [2, 0]]
    assert "3 marked pairs" in page.scope.value
    press(page, Choice.SKIP, "no stock")
    assert [session.choice((f"HN-00{i}", "HE-001")) for i in (1, 2, 3)] == [Choice.SKIP] * 3
    assert page.grid.marked == ()
    page.undo.click()
    assert session.state.decisions == {}


def test_without_a_pair_a_decision_says_what_is_missing(page: TriagePage) -> None:
    press(page, Choice.MAKE)
    assert "Pick a well first" in page.answer.value


def test_the_plate_shows_what_is_made_and_a_click_there_selects(page: TriagePage, session: Session) -> None:
    assert len(page.plate._cells) == len(session.to_make())
    row, column, *_ = page.plate._cells[0]
    page.plate._cursor = [row, column]
    assert session.state.selected == session.to_make()[0].key
    page.wells.value = 96
    assert page.number.max == 4
    page.number.value = 4
    assert all(row < 8 and column < 12 for row, column, *_ in page.plate._cells)


def test_the_list_of_flagged_pairs_follows_the_flag(page: TriagePage, session: Session) -> None:
    page.flag.value = "tertiary"
    assert [key for _, key in page.flagged.options] == [(r.block.id, "HE-010") for r in session.library.rows]
    page.flagged.value = ("HN-003", "HE-010")
    assert session.state.selected == ("HN-003", "HE-010")


def test_the_twin_in_the_store_is_one_click_away(page: TriagePage, session: Session) -> None:
    session.select(("HN-001", "HE-003"))
    assert "HE-002" in page.twin.description
    page.twin.click()
    assert session.state.selected == ("HN-001", "HE-002")
    assert page.twin.layout.display == "none"


def test_the_button_writes_through_the_given_function(page: TriagePage, session: Session) -> None:
    page.write.click()
    assert f"{len(session.to_make())} of 384" in page.answer.value


def test_hostile_text_stays_text(tmp_path: Path) -> None:
    lists = [
        read_blocks(pandas.DataFrame({"id": [HOSTILE], "name": [HOSTILE], "smiles": [smiles]}))
        for smiles in ("C1CCNCC1.Cl", "CC(C)CCl")
    ]
    session = Session(build_library(*lists), Journal(tmp_path / "decisions.sqlite", who=HOSTILE))
    page = TriagePage(session, lambda *_: (), wells=96)
    session.select((HOSTILE, HOSTILE))
    press(page, Choice.PARK, HOSTILE)
    pair = session.pair((HOSTILE, HOSTILE))
    texts = [pair_head(pair, session.state.decisions[pair.key]), pair_reasons(pair), page.answer.value]
    texts += [page.grid._repr_html_(), page.viewer._repr_html_(), page.scope.value, page.counts.value]
    for text in texts:
        assert Tags(text).count["img"] == 0
    assert "&lt;img" in texts[0]


def test_every_card_is_well_formed(session: Session) -> None:
    for pair in session.library:
        for text in (pair_head(pair, None), pair_reasons(pair)):
            assert Tags(text).open == []


def test_a_grid_without_widgets_is_a_table() -> None:
    grid = PlateGrid("Wells")
    grid.show(["A"], ["1", "2"], [])
    assert Tags(grid._repr_html_()).count["td"] == 2
