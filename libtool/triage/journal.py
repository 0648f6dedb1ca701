"""Decisions, written once and never changed.

A SQLite file of one table that only grows: the database itself refuses updates
and deletions. What holds for a pair is its last line; taking a decision back
is another line. Laboratories keep notebooks on network shares, where
write-ahead logging is unsafe, so the rollback journal is used, and each line
is on disk before the screen says so.
"""

from __future__ import annotations

import getpass
import sqlite3
import uuid
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from datetime import UTC, datetime
from pathlib import Path

from libtool import __version__
from libtool.errors import InputError
from libtool.records import Choice, Decision
from libtool.reference.tables import fingerprint

__all__ = ["Journal", "PairIdentity"]

PairIdentity = tuple[str, str, str, str]
"""Ids of nucleophile and electrophile, then their SMILES."""

_SCHEMA_VERSION = 1
_SCHEMA = """
CREATE TABLE decisions (
    serial INTEGER PRIMARY KEY AUTOINCREMENT,
    nucleophile TEXT NOT NULL,
    electrophile TEXT NOT NULL,
    nucleophile_smiles TEXT NOT NULL,
    electrophile_smiles TEXT NOT NULL,
    choice TEXT CHECK (choice IS NULL OR choice IN ('make', 'park', 'skip')),
    note TEXT NOT NULL,
    who TEXT NOT NULL,
    at TEXT NOT NULL,
    tool_version TEXT NOT NULL,
    tables TEXT NOT NULL,
    stroke TEXT NOT NULL,
    undoes TEXT NOT NULL
);
CREATE TRIGGER decisions_stay BEFORE UPDATE ON decisions
    BEGIN SELECT RAISE(ABORT, 'decisions are never changed'); END;
CREATE TRIGGER decisions_are_new BEFORE INSERT ON decisions
    WHEN EXISTS (SELECT 1 FROM decisions WHERE serial = NEW.serial)
    BEGIN SELECT RAISE(ABORT, 'decisions are never replaced'); END;
CREATE TRIGGER decisions_remain BEFORE DELETE ON decisions
    BEGIN SELECT RAISE(ABORT, 'decisions are never deleted'); END;
"""
_PAIR = "nucleophile, electrophile, nucleophile_smiles, electrophile_smiles"
_COLUMNS = "serial, nucleophile, electrophile, choice, note, who, at, tool_version, tables"
# A colleague's notebook may hold the file for the length of one write.
_WAIT_SECONDS = 10.0


class Journal:
    """The decisions file of one project.

    Parameters
    ----------
    path : path
        Created when missing, with its folder.
    who : str, optional
        Name written beside each decision; the login name without it.

    Raises
    ------
    InputError
        The file cannot be written, is damaged, or comes from a newer version.
    """

    def __init__(self, path: str | Path, *, who: str = "") -> None:
        self.path = Path(path)
        self.who = who or _login_name()
        with self._open() as connection:
            self._prepare(connection)

    def record(self, pairs: Sequence[PairIdentity], choice: Choice, note: str) -> None:
        """Append one line per pair, all or none.

        Parameters
        ----------
        pairs : sequence of (nucleophile id, electrophile id, nucleophile SMILES, electrophile SMILES)
        choice : Choice
        note : str
        """
        with self._open() as connection:
            self._append(connection, [(pair, choice.value, note) for pair in pairs], undoes="")

    def undo(self) -> bool:
        """Take back the latest stroke (all pairs decided at once); False when there is none.

        The lines that held before are written again, so nothing is erased.
        """
        with self._open() as connection:
            connection.execute("BEGIN IMMEDIATE")
            last = connection.execute(
                "SELECT stroke, MIN(serial) FROM decisions WHERE undoes = '' AND stroke NOT IN "
                "(SELECT undoes FROM decisions) GROUP BY stroke ORDER BY MIN(serial) DESC LIMIT 1"
            ).fetchone()
            if last is None:
                return False
            stroke, serial = last
            pairs = connection.execute(f"SELECT {_PAIR} FROM decisions WHERE stroke = ?", (stroke,)).fetchall()
            lines = []
            for pair in pairs:
                earlier = connection.execute(
                    "SELECT choice, note FROM decisions WHERE nucleophile = ? AND electrophile = ? AND "
                    "nucleophile_smiles = ? AND electrophile_smiles = ? AND serial < ? ORDER BY serial DESC LIMIT 1",
                    (*pair, serial),
                ).fetchone()
                lines.append((pair, *(earlier or (None, ""))))
            self._append(connection, lines, undoes=stroke)
        return True

    def _append(
        self,
        connection: sqlite3.Connection,
        lines: Sequence[tuple[PairIdentity, str | None, str]],
        *,
        undoes: str,
    ) -> None:
        stroke, at, tables = (
            uuid.uuid4().hex,
            datetime.now(UTC).isoformat(timespec="milliseconds"),
            fingerprint(),
        )
        connection.executemany(
            f"INSERT INTO decisions ({_PAIR}, choice, note, who, at, tool_version, tables, stroke, undoes) "
            "VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)",
            [(*pair, choice, note, self.who, at, __version__, tables, stroke, undoes) for pair, choice, note in lines],
        )

    def history(self) -> tuple[Decision, ...]:
        """Every line ever written, oldest first."""
        with self._open() as connection:
            found = connection.execute(f"SELECT {_COLUMNS} FROM decisions ORDER BY serial").fetchall()
        return tuple(_decision(line) for line in found)

    def latest(self) -> dict[PairIdentity, Decision]:
        """Line in force for each pair, by ids and structures.

        A pair whose structure changed since the decision has another key: an
        old decision is never applied to a new molecule.
        """
        with self._open() as connection:
            found = connection.execute(
                f"SELECT nucleophile_smiles, electrophile_smiles, {_COLUMNS} FROM decisions WHERE serial IN (SELECT "
                f"MAX(serial) FROM decisions GROUP BY {_PAIR})"
            ).fetchall()
        decisions = {(str(d.nucleophile), d.electrophile, ns, es): d for ns, es, d in map(_keyed, found)}
        return {key: d for key, d in decisions.items() if d.choice is not None}

    @contextmanager
    def _open(self) -> Iterator[sqlite3.Connection]:
        """Connection for one transaction; any SQLite trouble becomes a sentence."""
        try:
            self.path.parent.mkdir(parents=True, exist_ok=True)
            connection = sqlite3.connect(self.path, timeout=_WAIT_SECONDS)
        except (OSError, sqlite3.Error) as error:
            raise InputError(
                f"decisions file {self.path}: cannot be opened ({error}). Check the folder and its permissions."
            ) from error
        try:
            connection.execute("PRAGMA journal_mode = DELETE")
            connection.execute("PRAGMA synchronous = FULL")
            with connection:
                yield connection
        except sqlite3.DatabaseError as error:
            raise InputError(
                f"decisions file {self.path}: {error}. Nothing was changed. If the disk is full or read-only, mend "
                "that; if the file is damaged, move it away and put back your last copy."
            ) from error
        finally:
            connection.close()

    def _prepare(self, connection: sqlite3.Connection) -> None:
        (version,) = connection.execute("PRAGMA user_version").fetchone()
        if version == 0:
            # Two notebooks may start on a new project at once; the second waits.
            connection.execute("BEGIN IMMEDIATE")
            (version,) = connection.execute("PRAGMA user_version").fetchone()
            if version == 0:
                for statement in _statements(_SCHEMA):
                    connection.execute(statement)
                connection.execute(f"PRAGMA user_version = {_SCHEMA_VERSION}")
        elif version > _SCHEMA_VERSION:
            raise InputError(
                f"decisions file {self.path}: written by a newer version of the toolkit (layout {version}, this one "
                f"knows {_SCHEMA_VERSION}). Update the toolkit."
            )


def _login_name() -> str:
    """Name of the account; containers run accounts that have none."""
    try:
        return getpass.getuser()
    except (OSError, KeyError, ImportError):
        return "unknown account"


def _statements(script: str) -> Iterator[str]:
    statement = ""
    for line in script.splitlines(keepends=True):
        statement += line
        if sqlite3.complete_statement(statement):
            yield statement
            statement = ""


def _decision(line: tuple[object, ...]) -> Decision:
    serial, n, e, choice, note, who, at, version, tables = line
    return Decision(
        serial=int(str(serial)),
        nucleophile=str(n),
        electrophile=str(e),
        choice=Choice(str(choice)) if choice else None,
        note=str(note),
        who=str(who),
        when=str(at),
        tool_version=str(version),
        tables=str(tables),
    )


def _keyed(line: tuple[object, ...]) -> tuple[str, str, Decision]:
    return str(line[0]), str(line[1]), _decision(line[2:])
