"""The decisions file: it only grows, survives what happens to notebooks, and says so when it cannot."""

from __future__ import annotations

import os
import signal
import sqlite3
import subprocess
import sys
import threading
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from libtool.errors import InputError
from libtool.records import Choice
from libtool.reference.tables import fingerprint
from libtool.triage import Journal

PAIR = ("N1", "E1", "C1CCNCC1", "CCBr")
OTHER = ("N1", "E2", "C1CCNCC1", "CCCBr")


@pytest.fixture
def path(tmp_path: Path) -> Path:
    return tmp_path / "deep" / "folder" / "decisions.sqlite"


def test_a_decision_is_kept_with_who_when_and_with_what(path: Path) -> None:
    Journal(path, who="Ana").record([PAIR], Choice.MAKE, "needed for the series")
    (line,) = Journal(path, who="Ben").history()
    assert (line.nucleophile, line.electrophile, line.choice) == ("N1", "E1", Choice.MAKE)
    assert (line.note, line.who, line.tables) == ("needed for the series", "Ana", fingerprint())
    assert line.when.endswith("+00:00")
    assert line.tool_version


@pytest.mark.parametrize("statement", ["UPDATE decisions SET choice = 'skip'", "DELETE FROM decisions"])
def test_the_database_itself_refuses_changes(path: Path, statement: str) -> None:
    journal = Journal(path)
    journal.record([PAIR], Choice.MAKE, "")
    with sqlite3.connect(path) as raw, pytest.raises(sqlite3.IntegrityError, match="never"):
        raw.execute(statement)
    raw.close()
    assert [d.choice for d in journal.history()] == [Choice.MAKE]


def test_replacing_a_line_is_refused_too(path: Path) -> None:
    journal = Journal(path)
    journal.record([PAIR], Choice.MAKE, "mine")
    with sqlite3.connect(path) as raw:
        columns = [c[1] for c in raw.execute("PRAGMA table_info(decisions)")]
        line = list(raw.execute("SELECT * FROM decisions").fetchone())
        line[columns.index("note")] = "forged"
        # REPLACE deletes the old line without firing a delete trigger.
        with pytest.raises(sqlite3.IntegrityError):
            raw.execute(f"INSERT OR REPLACE INTO decisions VALUES ({', '.join('?' * len(line))})", line)
    raw.close()
    assert [d.note for d in journal.history()] == ["mine"]


def test_a_changed_mind_and_an_undo_are_further_lines(path: Path) -> None:
    journal = Journal(path)
    journal.record([PAIR], Choice.MAKE, "")
    journal.record([PAIR], Choice.SKIP, "no")
    assert journal.latest()[PAIR].choice is Choice.SKIP
    assert journal.undo()
    assert journal.latest()[PAIR].choice is Choice.MAKE
    assert journal.undo()
    assert PAIR not in journal.latest()
    assert not journal.undo()
    assert [d.choice for d in journal.history()] == [Choice.MAKE, Choice.SKIP, Choice.MAKE, None]


def test_one_stroke_over_many_pairs_is_undone_as_one(path: Path) -> None:
    journal = Journal(path)
    journal.record([OTHER], Choice.PARK, "earlier")
    journal.record([PAIR, OTHER], Choice.SKIP, "")
    assert journal.undo()
    assert {k: (d.choice, d.note) for k, d in journal.latest().items()} == {OTHER: (Choice.PARK, "earlier")}


@settings(max_examples=25)
@given(
    steps=st.lists(
        st.one_of(
            st.just("undo"),
            st.tuples(st.sets(st.integers(0, 3), min_size=1, max_size=3), st.sampled_from(list(Choice))),
        ),
        max_size=12,
    )
)
def test_undo_is_a_stack(tmp_path_factory: pytest.TempPathFactory, steps: list[str | tuple[set[int], Choice]]) -> None:
    """Against a plain list of states: each undo returns to the state before the last stroke in force."""
    journal = Journal(tmp_path_factory.mktemp("stack") / "d.sqlite")
    states: list[dict[int, Choice]] = [{}]
    for step in steps:
        if isinstance(step, str):
            assert journal.undo() is (len(states) > 1)
            states = states[:-1] or states
        else:
            pairs, choice = step
            journal.record([("N", f"E{i}", "CN", "CBr") for i in sorted(pairs)], choice, "")
            states.append({**states[-1], **dict.fromkeys(pairs, choice)})
        held = {int(k[1][1:]): d.choice for k, d in journal.latest().items()}
        assert held == states[-1]


def test_a_decision_belongs_to_structures_not_only_to_ids(path: Path) -> None:
    journal = Journal(path)
    journal.record([PAIR], Choice.MAKE, "")
    assert ("N1", "E1", "C1CCNCC1", "CCI") not in journal.latest()


def test_two_journals_on_one_file(path: Path) -> None:
    """Two notebooks write at once; nothing is lost and nothing is half written."""
    journals = [Journal(path, who=who) for who in ("Ana", "Ben")]
    faults: list[InputError] = []

    def write(journal: Journal) -> None:
        try:
            for i in range(20):
                journal.record(
                    [(journal.who, f"E{i}", "CN", "CBr"), (journal.who, f"F{i}", "CN", "CBr")], Choice.MAKE, ""
                )
        except InputError as error:
            faults.append(error)

    threads = [threading.Thread(target=write, args=(j,)) for j in journals]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert faults == []
    lines = Journal(path).history()
    assert len(lines) == 80
    assert {d.who for d in lines} == {"Ana", "Ben"}
    # Both lines of a stroke follow each other.
    assert all(a.electrophile[1:] == b.electrophile[1:] for a, b in zip(lines[::2], lines[1::2], strict=True))


def test_two_notebooks_may_start_on_a_new_project_at_once(path: Path) -> None:
    faults: list[InputError] = []

    def start() -> None:
        try:
            Journal(path)
        except InputError as error:
            faults.append(error)

    threads = [threading.Thread(target=start) for _ in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert faults == []
    Journal(path).record([PAIR], Choice.MAKE, "")
    assert len(Journal(path).history()) == 1


def damage_header(path: Path) -> None:
    path.write_bytes(b"this is not a database" * 100)


def damage_middle(path: Path) -> None:
    data = bytearray(path.read_bytes())
    data[4096:8192] = b"\xa5" * 4096
    path.write_bytes(data)


def cut_short(path: Path) -> None:
    path.write_bytes(path.read_bytes()[:5000])


def folder_instead(path: Path) -> None:
    path.unlink()
    path.mkdir()


def other_program(path: Path) -> None:
    path.unlink()
    raw = sqlite3.connect(path)
    raw.executescript("CREATE TABLE stock (id TEXT); PRAGMA user_version = 1;")
    raw.close()


@pytest.mark.parametrize("harm", [damage_header, damage_middle, cut_short, folder_instead, other_program])
def test_a_damaged_file_is_reported_with_a_sentence(path: Path, harm: object) -> None:
    journal = Journal(path)
    for i in range(200):
        journal.record([("N", f"E{i}", "C" * 50, "CBr")], Choice.MAKE, "x" * 50)
    assert callable(harm)
    harm(path)
    with pytest.raises(InputError) as caught:
        Journal(path).history()
    message = str(caught.value)
    assert str(path) in message
    assert message.endswith(".")


def test_a_file_of_a_newer_version_is_refused_and_left_alone(path: Path) -> None:
    Journal(path).record([PAIR], Choice.MAKE, "")
    raw = sqlite3.connect(path)
    raw.execute("PRAGMA user_version = 99")
    raw.close()
    before = path.read_bytes()
    with pytest.raises(InputError, match="newer version"):
        Journal(path)
    assert path.read_bytes() == before


@pytest.mark.skipif(os.geteuid() == 0, reason="nothing is read-only for the administrator")
def test_a_read_only_folder_is_reported(tmp_path: Path) -> None:
    tmp_path.chmod(0o500)
    with pytest.raises(InputError):
        Journal(tmp_path / "decisions.sqlite")


WRITER = """
import sys
from libtool.records import Choice
from libtool.triage import Journal
journal = Journal(sys.argv[1], who="writer")
for i in range(100000):
    journal.record([("N", f"E{i}", "CN", "CBr"), ("N", f"F{i}", "CN", "CBr")], Choice.MAKE, "")
    print(i, flush=True)
"""


def test_a_killed_notebook_loses_nothing_that_was_decided(path: Path, root_folder: Path) -> None:
    """SIGKILL in the middle of writing, five times on one file.

    What the writer reported as done is there, whole strokes only, and the file
    is sound. One stroke more may be there: written, not yet reported.
    """
    kept = 0
    for acknowledged in (1, 2, 5, 9, 14):
        writer = subprocess.Popen(
            [sys.executable, "-c", WRITER, str(path)], stdout=subprocess.PIPE, text=True, cwd=root_folder
        )
        assert writer.stdout is not None
        done = [int(writer.stdout.readline()) for _ in range(acknowledged)]
        writer.send_signal(signal.SIGKILL)
        done += [int(line) for line in writer.stdout.read().split()]
        writer.stdout.close()
        assert writer.wait() == -signal.SIGKILL
        lines = Journal(path).history()[kept:]
        strokes = {d.electrophile for d in lines}
        assert {f"{letter}{i}" for i in done for letter in "EF"} <= strokes
        assert len(lines) % 2 == 0
        assert len(lines) // 2 - len(done) in {0, 1}
        kept += len(lines)
    raw = sqlite3.connect(path)
    assert raw.execute("PRAGMA integrity_check").fetchone() == ("ok",)
    raw.close()
