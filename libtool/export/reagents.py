"""The reagent lists: what to take from the store, what stays there, what could not be read.

Every input row is in exactly one of three files: taken, left out, or
unusable. The columns of the input stand first, unchanged and in their order;
what the triage adds is named with `PREFIX`.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from pathlib import Path

from libtool.blocks import BlockSet
from libtool.export.files import Cell, csv_text, write_together
from libtool.export.standing import Standing, is_refused, reagent_standings
from libtool.records import HazardLevel, Level, Role
from libtool.reference.tables import cite
from libtool.triage import Session

__all__ = ["PREFIX", "reagent_files", "write_reagents"]

PREFIX = "triage_"
_ADDED = (
    "id", "smiles", "counterions", "row", "decision", "pairs_to_make", "pairs", "why", "reasons", "remedies",
    "sources", "hazards",
)  # fmt: skip
_REJECTED = ("list", "file", "row", "outcome", "column", "received", "reason", "remedy")


def write_reagents(session: Session, folder: str | Path) -> tuple[Path, ...]:
    """Write the reagent lists of a session.

    Parameters
    ----------
    session : Session
    folder : path
        Made when missing.

    Returns
    -------
    tuple of Path
        For each list the reagents to take and those left out, then the
        unusable rows of both.

    Raises
    ------
    OSError
        The folder cannot be written.

    Notes
    -----
    Added columns: the id and parent SMILES in use, split-off counterions,
    input row, decision ("take", "wait" for parked, "leave out"), pairs to make
    and in all, why the other pairs are not made, sentences of the flags,
    remedies, citations, hazards. A refused reagent has no remedy: nothing here
    may help to run it.
    """
    return write_together(Path(folder), reagent_files(session))


def reagent_files(session: Session) -> dict[str, str]:
    """Text of each file that `write_reagents` writes, by name."""
    library = session.library
    files: dict[str, str] = {}
    for role, blocks in ((Role.NUCLEOPHILE, library.nucleophiles), (Role.ELECTROPHILE, library.electrophiles)):
        standings = reagent_standings(session, role)
        files[f"{role.value}s_filtered.csv"] = _list(blocks, (s for s in standings if s.taken))
        files[f"{role.value}s_left_out.csv"] = _list(blocks, (s for s in standings if not s.taken))
    issues = [
        (f"{role.value}s", blocks.name, *cells)
        for role, blocks in ((Role.NUCLEOPHILE, library.nucleophiles), (Role.ELECTROPHILE, library.electrophiles))
        for cells in blocks.issues.itertuples(index=False, name=None)
    ]
    files["rejected_rows.csv"] = csv_text(_REJECTED, issues)
    return files


def _list(blocks: BlockSet, standings: Iterable[Standing]) -> str:
    header = (*blocks.column_names, *_free_names(blocks.column_names))
    return csv_text(header, (_row(blocks.column_names, s) for s in standings))


def _free_names(taken: Sequence[str]) -> list[str]:
    """Names of the added columns; a list that went through a triage before has them already."""
    names: list[str] = []
    for wanted in _ADDED:
        name, copy = PREFIX + wanted, 2
        while name in taken:
            name = f"{PREFIX}{wanted} ({copy})"
            copy += 1
        names.append(name)
    return names


def _row(columns: Sequence[str], standing: Standing) -> list[Cell]:
    reagent = standing.reagent
    block, cells = reagent.block, dict(reagent.block.columns)
    remedies = [f.remedy.sentence for f in reagent.flags if f.level is not Level.NOTE]
    hazards = reagent.hazards
    if is_refused(reagent):
        # What holds for use is left out with the use: only the refusal is told.
        remedies, hazards = [], tuple(h for h in hazards if h.level is HazardLevel.STOP)
    joined = [*(f.source for f in reagent.flags), *(h.source for h in hazards)]
    sources = dict.fromkeys(key for keys in joined for key in keys.split(";"))
    return [
        *(cells.get(column, "") for column in columns),
        block.id,
        block.smiles,
        ".".join(block.counterions),
        block.row,
        standing.decision,
        standing.to_make,
        standing.pairs,
        standing.why,
        " ".join(f.sentence for f in reagent.flags),
        " ".join(dict.fromkeys(remedies)),
        "; ".join(cite(key) for key in sources),
        "; ".join(f"{h.level.value}: {h.what}. {h.action}" for h in hazards),
    ]
