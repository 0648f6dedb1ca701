"""A triage in progress: suggestions, decisions, restart, and what is never allowed."""

from __future__ import annotations

from pathlib import Path

import pandas
import pytest

from libtool.blocks import read_blocks
from libtool.errors import InputError
from libtool.plate import lay_out, plate_format
from libtool.records import Choice, Conditions, NotAvailable, Verdict
from libtool.triage import Journal, Library, Session, build_library
from libtool.triage.session import SessionState

NUCLEOPHILES = [("N1", "C1CCNCC1"), ("N2", "NCc1ccccc1"), ("N3", "Oc1ccccc1")]
ELECTROPHILES = [
    ("E1", "CCCBr"),
    ("E2", "COCCl"),  # methyl chloromethyl ether: regulated carcinogen
    ("E3", "CN(C)CCCl"),  # scheduled 2-dialkylaminoethyl chloride
    ("E4", "CC(C)(C)CBr"),
    ("E5", "CCCCl"),
]


def library(electrophiles: list[tuple[str, str]] = ELECTROPHILES) -> Library:
    lists = [read_blocks(pandas.DataFrame(rows, columns=["id", "smiles"])) for rows in (NUCLEOPHILES, electrophiles)]
    return build_library(*lists)


LIBRARY = library()


@pytest.fixture
def path(tmp_path: Path) -> Path:
    return tmp_path / "decisions.sqlite"


@pytest.fixture
def session(path: Path) -> Session:
    return Session(LIBRARY, Journal(path, who="Ana"))


def test_suggestions_hold_until_somebody_decides(session: Session) -> None:
    assert session.choice(("N1", "E1")) is Choice.MAKE
    assert session.choice(("N1", "E4")) is Choice.SKIP
    assert session.choice(("N1", "E3")) is Choice.PARK
    assert session.choice(("N1", "E5")) is Choice.SKIP, "the bromide of the same group is in the set"
    session.decide([("N1", "E4")], Choice.MAKE, "let us see")
    assert session.choice(("N1", "E4")) is Choice.MAKE
    assert session.state.decisions["N1", "E4"].note == "let us see"


def test_counts_add_up_to_all_pairs(session: Session) -> None:
    assert sum(session.counts().values()) == len(LIBRARY) == 15
    before = session.counts()
    session.decide([("N1", "E1"), ("N2", "E1")], Choice.PARK)
    after = session.counts()
    assert after[Choice.PARK] == before[Choice.PARK] + 2
    assert after[Choice.MAKE] == before[Choice.MAKE] - 2


def test_undo_takes_back_a_stroke(session: Session) -> None:
    before = session.counts()
    session.decide([("N1", "E1"), ("N2", "E1")], Choice.SKIP)
    assert session.undo()
    assert session.counts() == before
    assert not session.undo()


def test_a_restart_keeps_decisions(session: Session, path: Path) -> None:
    session.decide([("N2", "E1")], Choice.SKIP, "too little left")
    again = Session(library(), Journal(path, who="Ben"))
    assert again.choice(("N2", "E1")) is Choice.SKIP
    assert again.state.decisions["N2", "E1"].who == "Ana"
    assert again.counts() == session.counts()


def test_a_colleague_is_seen_after_reload(session: Session, path: Path) -> None:
    Session(LIBRARY, Journal(path, who="Ben")).decide([("N3", "E1")], Choice.SKIP)
    assert session.choice(("N3", "E1")) is Choice.MAKE
    session.reload()
    assert session.choice(("N3", "E1")) is Choice.SKIP


def test_stop_hazards_cannot_be_made_whatever_the_note(session: Session) -> None:
    pair = session.pair(("N1", "E2"))
    assert pair.verdict is Verdict.REFUSED
    with pytest.raises(InputError, match="refused"):
        session.decide([("N1", "E2")], Choice.MAKE, "approved by everybody, reference 1")
    assert session.state.decisions == {}
    assert session.choice(("N1", "E2")) is Choice.SKIP


def test_a_refused_pair_has_no_product_no_number_no_well(session: Session) -> None:
    pair = session.pair(("N1", "E2"))
    assert pair.products == ()
    assert isinstance(pair.rate, NotAvailable)
    assert pair not in session.to_make()
    assert lay_out([pair], plate_format(96)).wells == ()


def test_one_refused_pair_stops_the_whole_stroke(session: Session) -> None:
    with pytest.raises(InputError):
        session.decide([("N1", "E1"), ("N1", "E2")], Choice.MAKE, "all of them")
    assert session.journal.history() == ()


def test_parking_or_skipping_a_refused_pair_is_allowed(session: Session) -> None:
    session.decide([("N1", "E2")], Choice.SKIP, "seen")
    assert session.choice(("N1", "E2")) is Choice.SKIP


@pytest.mark.parametrize("note", ["", "   ", "\n"])
def test_controlled_substances_need_a_reference(session: Session, note: str) -> None:
    with pytest.raises(InputError, match="approval"):
        session.decide([("N1", "E3")], Choice.MAKE, note)
    assert session.journal.history() == ()


def test_controlled_substances_with_a_reference_get_a_well(session: Session) -> None:
    session.decide([("N1", "E3")], Choice.MAKE, "approval CW-17")
    assert ("N1", "E3") in [p.key for p in session.to_make()]
    assert session.state.decisions["N1", "E3"].note == "approval CW-17"


def test_a_make_in_the_journal_does_not_outweigh_a_refusal(path: Path) -> None:
    """Somebody decided before the rule existed, or wrote into the file by other means."""
    journal = Journal(path)
    pair = LIBRARY.pair("N1", "E2")
    identity = (pair.nucleophile.id, pair.electrophile.id, pair.nucleophile.smiles, pair.electrophile.smiles)
    journal.record([identity], Choice.MAKE, "")
    session = Session(LIBRARY, journal)
    assert ("N1", "E2") not in [p.key for p in session.to_make()]
    assert session.counts()[Choice.MAKE] == len(session.to_make())


def test_decisions_about_another_structure_are_stray(session: Session, path: Path) -> None:
    session.decide([("N1", "E1")], Choice.SKIP, "old bromide")
    changed = Session(library([("E1", "CCCI"), *ELECTROPHILES[1:]]), Journal(path))
    assert changed.choice(("N1", "E1")) is Choice.MAKE
    assert [(d.nucleophile, d.electrophile, d.note) for d in changed.state.stray] == [("N1", "E1", "old bromide")]
    assert session.state.stray == ()


def test_unknown_pairs_are_named(session: Session) -> None:
    with pytest.raises(InputError, match=r"N9 \+ E1"):
        session.decide([("N9", "E1")], Choice.SKIP)
    with pytest.raises(InputError, match=r"N9 \+ E1"):
        session.select(("N9", "E1"))


def test_listeners_hear_every_change_until_they_stop(session: Session) -> None:
    heard: list[SessionState] = []
    stop = session.listen(heard.append)
    session.select(("N1", "E1"))
    session.decide([("N1", "E1")], Choice.PARK)
    session.undo()
    assert [s.selected for s in heard] == [("N1", "E1")] * 3
    assert [len(s.decisions) for s in heard] == [0, 1, 0]
    stop()
    stop()
    session.select(None)
    assert len(heard) == 3


def test_state_cannot_be_changed_from_outside(session: Session) -> None:
    with pytest.raises(TypeError):
        session.state.decisions["N1", "E1"] = None  # type: ignore[index]


def test_library_frame_holds_one_row_a_pair_and_agrees_with_the_pairs() -> None:
    frame = LIBRARY.frame()
    assert list(zip(frame["nucleophile"], frame["electrophile"], strict=True)) == [p.key for p in LIBRARY]
    assert list(frame["verdict"]) == [p.verdict.value for p in LIBRARY]
    refused = frame[frame["verdict"] == "refused"]
    assert set(refused["electrophile"]) == {"E2"}
    assert set(refused["product"]) == {""}


def test_progress_runs_to_the_end() -> None:
    seen: list[tuple[int, int]] = []
    build_library(LIBRARY.nucleophiles, LIBRARY.electrophiles, progress=lambda done, total: seen.append((done, total)))
    assert seen == [(i, 15) for i in range(1, 16)]


def test_unknown_solvent_and_temperature_are_refused_before_any_work() -> None:
    for conditions in (Conditions(solvent="beer"), Conditions(temperature_celsius=400.0)):
        with pytest.raises(InputError):
            build_library(LIBRARY.nucleophiles, LIBRARY.electrophiles, conditions)
