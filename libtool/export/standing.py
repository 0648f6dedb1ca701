"""What holds now: for a pair, and for a reagent as the sum of its pairs."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass

from libtool.records import Choice, HazardLevel, Role, Verdict
from libtool.triage import Pair, Session
from libtool.triage.hazards import strictest
from libtool.triage.library import Reagent

__all__ = ["Standing", "choice_counts", "choice_in_force", "is_refused", "reagent_standings", "why"]

TAKE, WAIT, LEAVE = "take", "wait", "leave out"
_AGAINST = {Choice.PARK: "parked", Choice.SKIP: "not made"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Standing:
    """One reagent and what its pairs come to.

    `decision` is "take" with at least one pair to make, "wait" when nothing is
    to be made but something is parked, else "leave out". `why` gives the
    reasons of the pairs that are not made, the commonest first.
    """

    reagent: Reagent
    decision: str
    to_make: int
    pairs: int
    why: str

    @property
    def taken(self) -> bool:
        """Whether the reagent is to be fetched from the store."""
        return self.decision == TAKE


def choice_in_force(session: Session, pair: Pair) -> Choice:
    """What holds for a pair; never to make a refused one, whatever an older decision says."""
    return Choice.SKIP if pair.verdict is Verdict.REFUSED else session.choice(pair.key)


def choice_counts(session: Session) -> dict[Choice, int]:
    """How many pairs are to be made, parked and skipped; adds up to all pairs."""
    found = Counter(choice_in_force(session, pair) for pair in session.library)
    return {choice: found[choice] for choice in Choice}


def is_refused(reagent: Reagent) -> bool:
    """Whether the reagent by itself is not to be used here."""
    return strictest(reagent.hazards) is HazardLevel.STOP


def why(session: Session, pair: Pair) -> str:
    """Why the choice in force holds: the decision with its note, else the suggestion."""
    decision = session.state.decisions.get(pair.key)
    if pair.verdict is Verdict.REFUSED or decision is None or decision.choice is None:
        return pair.suggestion_reason
    note = f": {decision.note}" if decision.note else ""
    return f"decided by {decision.who}{note}"


def reagent_standings(session: Session, role: Role) -> tuple[Standing, ...]:
    """Standing of every usable reagent of one list, in the order of the file."""
    library = session.library
    if role is Role.NUCLEOPHILE:
        return tuple(_standing(session, r, line) for r, line in zip(library.rows, library.pairs, strict=True))
    return tuple(_standing(session, r, (line[j] for line in library.pairs)) for j, r in enumerate(library.columns))


def _standing(session: Session, reagent: Reagent, pairs: Iterable[Pair]) -> Standing:
    found = tuple(pairs)
    choices = [choice_in_force(session, pair) for pair in found]
    made = choices.count(Choice.MAKE)
    against = Counter(
        (_AGAINST[choice], why(session, pair))
        for pair, choice in zip(found, choices, strict=True)
        if choice is not Choice.MAKE
    )
    reasons = "; ".join(f"{count} {words}: {reason}" for (words, reason), count in against.most_common())
    return Standing(
        reagent=reagent,
        decision=TAKE if made else WAIT if Choice.PARK in choices else LEAVE,
        to_make=made,
        pairs=len(found),
        why=reasons,
    )
