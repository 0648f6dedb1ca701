"""One triage in progress, without a widget in sight.

A session holds the library, the decisions and what is selected, in one
immutable state. A method computes the next state, keeps it and tells the
listeners; a view draws the state and calls methods. Decisions go to the
journal on disk first, so a restart loses nothing.
"""

from __future__ import annotations

import threading
from collections import Counter
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, replace
from types import MappingProxyType

from libtool.errors import InputError
from libtool.records import Choice, Decision, HazardLevel, Verdict
from libtool.triage.hazards import strictest
from libtool.triage.journal import Journal
from libtool.triage.library import Library, Pair

__all__ = ["Session", "SessionState"]

PairKey = tuple[str, str]


@dataclass(frozen=True, slots=True, kw_only=True)
class SessionState:
    """What a view draws.

    `decisions` holds the line in force for each decided pair; `stray` lists
    decisions of the journal whose pair is not in this library (another id or
    another structure).
    """

    selected: PairKey | None
    decisions: Mapping[PairKey, Decision]
    stray: tuple[Decision, ...]


class Session:
    """A library, its decisions, and the selected pair.

    Parameters
    ----------
    library : Library
    journal : Journal
    """

    def __init__(self, library: Library, journal: Journal) -> None:
        self.library = library
        self.journal = journal
        self._pairs = {pair.key: pair for pair in library}
        self._listeners: list[Callable[[SessionState], None]] = []
        # Widget callbacks may come from any thread.
        self._lock = threading.RLock()
        decisions, stray = self._read()
        self._state = SessionState(selected=None, decisions=decisions, stray=stray)

    @property
    def state(self) -> SessionState:
        """The state as it is now."""
        return self._state

    def listen(self, listener: Callable[[SessionState], None]) -> Callable[[], None]:
        """Call `listener` with every new state; returns the function that stops it."""
        self._listeners.append(listener)
        return lambda: self._listeners.remove(listener) if listener in self._listeners else None

    def pair(self, key: PairKey) -> Pair:
        """Pair of two ids.

        Raises
        ------
        InputError
            The pair is not in the library.
        """
        if key not in self._pairs:
            raise InputError(f"pair {key[0]} + {key[1]} is not in the library.")
        return self._pairs[key]

    def choice(self, key: PairKey) -> Choice:
        """What holds for a pair: the decision if there is one, else the suggestion.

        A refused pair is never made, whatever an older decision says.
        """
        if self.pair(key).verdict is Verdict.REFUSED:
            return Choice.SKIP
        decision = self._state.decisions.get(key)
        return decision.choice if decision and decision.choice else self.pair(key).suggestion

    def select(self, key: PairKey | None) -> None:
        """Put one pair in front of the chemist."""
        if key is not None:
            self.pair(key)
        self._replace(selected=key)

    def decide(self, keys: Iterable[PairKey], choice: Choice, note: str = "") -> None:
        """Decide about one or more pairs.

        Parameters
        ----------
        keys : iterable of (nucleophile id, electrophile id)
        choice : Choice
        note : str
            Why. Needed, as the reference of the approval, to make a pair that
            holds a substance under control.

        Raises
        ------
        InputError
            A pair is refused, or an approval reference is missing; nothing is
            written then.
        """
        pairs = [self.pair(key) for key in keys]
        if choice is Choice.MAKE:
            for pair in pairs:
                _check_allowed(pair, note)
        self.journal.record([_identity(p) for p in pairs], choice, note.strip())
        self.reload()

    def undo(self) -> bool:
        """Take back the last decision (all pairs of one stroke); False when there is none."""
        undone = self.journal.undo()
        self.reload()
        return undone

    def reload(self) -> None:
        """Read the journal again, for instance after a colleague decided something."""
        decisions, stray = self._read()
        self._replace(decisions=decisions, stray=stray)

    def counts(self) -> dict[Choice, int]:
        """How many pairs are to be made, parked and skipped; adds up to all pairs."""
        found = Counter(self.choice(key) for key in self._pairs)
        return {choice: found.get(choice, 0) for choice in Choice}

    def to_make(self) -> tuple[Pair, ...]:
        """Pairs that get a well, in the order of the library. Refused pairs never do."""
        return tuple(p for p in self.library if self.choice(p.key) is Choice.MAKE)

    def _read(self) -> tuple[Mapping[PairKey, Decision], tuple[Decision, ...]]:
        known = {_identity(p): p.key for p in self._pairs.values()}
        latest = self.journal.latest()
        decisions = {known[k]: d for k, d in latest.items() if k in known}
        stray = tuple(d for k, d in latest.items() if k not in known)
        return MappingProxyType(decisions), stray

    def _replace(self, **changes: object) -> None:
        with self._lock:
            self._state = replace(self._state, **changes)  # type: ignore[arg-type]
            state = self._state
        for listener in tuple(self._listeners):
            listener(state)


def _identity(pair: Pair) -> tuple[str, str, str, str]:
    return pair.nucleophile.id, pair.electrophile.id, pair.nucleophile.smiles, pair.electrophile.smiles


def _check_allowed(pair: Pair, note: str) -> None:
    level = strictest(pair.hazards)
    if level is HazardLevel.STOP:
        raise InputError(
            f"{pair.nucleophile.id} + {pair.electrophile.id} is refused: {pair.hazards[0].what} "
            f"({pair.hazards[0].reason}). It cannot get a well. Talk to your compliance officer or safety team."
        )
    if level is HazardLevel.COMPLIANCE and not note.strip():
        raise InputError(
            f"{pair.nucleophile.id} + {pair.electrophile.id} holds a substance under control: {pair.hazards[0].what}. "
            "Write the reference of the approval into the note first."
        )
