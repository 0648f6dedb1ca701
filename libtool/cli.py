"""The command line: two lists in, a folder of files out.

One sentence on the error stream says what is wrong; a Python traceback is
never shown. Whatever is cheap to check is checked before the work begins.
"""

from __future__ import annotations

import argparse
import os
import signal
import sys
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from types import FrameType, TracebackType
from typing import TYPE_CHECKING, NoReturn

from libtool import __version__
from libtool.errors import InputError, LibtoolError

if TYPE_CHECKING:
    from libtool.blocks import BlockSet
    from libtool.triage import Session

__all__ = ["main", "run"]

DONE, FAULT, BAD_INPUT, NOTHING_TO_MAKE, INTERRUPTED, TERMINATED = 0, 1, 2, 3, 130, 143
_PROGRAM = "python -m libtool"
_REJECTED_SHOWN = 10

_EXIT_CODES = f"""\
exit codes:
  {DONE}    the files are written
  {FAULT}    a fault of the program itself
  {BAD_INPUT}    a list, an option or a folder cannot be used; one sentence says why
  {NOTHING_TO_MAKE}    the files are written, but no pair is to be made
  {INTERRUPTED}  stopped with Ctrl-C, {TERMINATED} by a signal; earlier files are left as they were
"""

_DESCRIPTION = """\
Judges every pair of two reagent lists for one SN2 step and writes the lists of
reagents to take and to leave, all pairs, the plate, the products (SDF, CSV) and
one HTML report with the flagged electrophiles in three dimensions.

Decisions made in the notebook are honoured: they are read from the decisions
file, which is never overwritten. All other files of the folder are renewed.
"""


class _Parser(argparse.ArgumentParser):
    """Parser that complains in one sentence."""

    def error(self, message: str) -> NoReturn:
        self.exit(BAD_INPUT, f"{self.prog}: {message}. {self.prog} --help lists the options.\n")


def run() -> NoReturn:
    """Run as a process of its own: `main`, then leave with its exit code."""
    sys.excepthook = _tell_fault
    signal.signal(signal.SIGTERM, _stop)
    sys.exit(main())


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command line; returns the exit code.

    Parameters
    ----------
    arguments : sequence of str, optional
        Words after the program name; those of the process without it.
    """
    for stream in (sys.stdout, sys.stderr):
        # A console that lacks a letter shows "?" instead of failing.
        getattr(stream, "reconfigure", lambda **_: None)(errors="replace")
    try:
        return _triage(_parser().parse_args(arguments))
    except KeyboardInterrupt:
        print("Stopped. No file was written half.", file=sys.stderr)
        return INTERRUPTED
    except BrokenPipeError:
        # Whoever read the output has gone; the files were written before the summary.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return DONE
    except LibtoolError as error:
        print(f"{_PROGRAM}: {error}", file=sys.stderr)
    except OSError as error:
        what = f"{error.filename}: " if error.filename else ""
        print(
            f"{_PROGRAM}: {what}{error.strerror or error}. Check that the folder can be written, the disk is not full "
            "and no other program has the file open.",
            file=sys.stderr,
        )
    return BAD_INPUT


def _parser() -> argparse.ArgumentParser:
    parser = _Parser(prog=_PROGRAM, description="Triage of parallel SN2 alkylation plates.")
    parser.add_argument("--version", action="version", version=f"waldenbench {__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)
    triage = commands.add_parser(
        "triage",
        help="judge two reagent lists and write the files",
        description=_DESCRIPTION,
        epilog=_EXIT_CODES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    lists = "CSV, TSV, XLSX, Parquet, SMI or SDF; the columns of structure and id are found by name and content"
    triage.add_argument("nucleophiles", metavar="NUCLEOPHILES", type=Path, help=f"list of nucleophiles: {lists}")
    triage.add_argument("electrophiles", metavar="ELECTROPHILES", type=Path, help="list of electrophiles, likewise")
    triage.add_argument("--out", metavar="DIR", type=Path, required=True, help="folder for the files")
    triage.add_argument("--solvent", default="DMF", help="solvent, name or usual short form (default: DMF)")
    triage.add_argument(
        "--temperature", metavar="CELSIUS", type=_celsius, default=60.0, help="degrees Celsius, 0 to 150 (default: 60)"
    )
    triage.add_argument(
        "--wells", metavar="N", type=_wells, default=96, help="wells of a plate: 24, 48, 96, 384 or 1536 (default: 96)"
    )
    triage.add_argument(
        "--decisions", metavar="FILE", type=Path, help="decisions file of the notebook (default: DIR/decisions.sqlite)"
    )
    return parser


def _celsius(text: str) -> float:
    try:
        return float(text)
    except ValueError:
        raise argparse.ArgumentTypeError(f"received {text!r}; give degrees Celsius as a number") from None


def _wells(text: str) -> int:
    try:
        return int(text)
    except ValueError:
        raise argparse.ArgumentTypeError(f"received {text!r}; give a whole number") from None


def _triage(options: argparse.Namespace) -> int:
    # Imported late, so that --help answers at once.
    from libtool.blocks import read_blocks
    from libtool.export import write_all
    from libtool.export.standing import choice_counts
    from libtool.plate import lay_out, plate_format
    from libtool.rate import find_solvent, temperature_term
    from libtool.records import Choice, Conditions, Verdict
    from libtool.triage import Journal, Session, build_library
    from libtool.triage.hazards import CAUTION

    out: Path = options.out
    decisions: Path = options.decisions or out / "decisions.sqlite"
    conditions = Conditions(solvent=find_solvent(options.solvent)["name"], temperature_celsius=options.temperature)
    temperature_term(conditions)
    plate = plate_format(options.wells)
    _check_places(out, decisions, (options.nucleophiles, options.electrophiles))
    lists = (read_blocks(options.nucleophiles), read_blocks(options.electrophiles))
    # Nothing is decided here, so the name is not asked of the system.
    journal = Journal(decisions, who=_PROGRAM)
    with _bar("pairs", "pair") as progress:
        library = build_library(*lists, conditions, progress=progress)
    session = Session(library, journal)
    with _bar("drawing", "structure") as progress:
        paths = write_all(session, out, options.wells, progress=progress)

    print(*_list_lines(lists, out), sep="\n")
    wells = lay_out(session.to_make(), plate)
    made = session.to_make()
    refused = sum(pair.verdict is Verdict.REFUSED for pair in library)
    parked = choice_counts(session)[Choice.PARK]
    print(
        f"Pairs: {len(library):,} = {len(made):,} to make + {parked:,} parked + "
        f"{len(library) - len(made) - parked:,} not made, of which {refused:,} refused for safety or legal reasons."
    )
    print(_decision_line(session, decisions))
    print(f"Plate: {len(wells.wells):,} wells on {wells.plates} plate(s) of {options.wells}.")
    print("\nFiles:", *(f"  {path}" for path in paths), sep="\n")
    print("\nOpen the report in a browser. To decide pair by pair, open the notebook:")
    print(f"  {_python()} -m jupyter lab notebooks/1_triage.ipynb")
    print("  (its first cell names the lists and the folder: put your own there)")
    print(f"\n{CAUTION}", flush=True)
    if not made:
        print("No pair is to be made: pairs.csv says why for each.", file=sys.stderr)
        return NOTHING_TO_MAKE
    return DONE


def _python() -> str:
    """Path of the interpreter that runs, as short as it can be typed from here."""
    try:
        return str(Path(sys.executable).relative_to(Path.cwd()))
    except ValueError:
        return sys.executable


def _check_places(out: Path, decisions: Path, inputs: Sequence[Path]) -> None:
    """Refuse to write over what was given to read.

    Raises
    ------
    InputError
        The folder is a file, or an output would replace an input.
    """
    from libtool.export import FILE_NAMES

    if out.exists() and not out.is_dir():
        raise InputError(f"--out {out}: this is a file. Give a folder.")
    given = {path.resolve() for path in inputs}
    if decisions.resolve() in given:
        raise InputError(f"--decisions {decisions}: this is one of the lists. Give the decisions file of the notebook.")
    for written in (out / name for name in FILE_NAMES):
        if written.resolve() in given:
            raise InputError(f"{written}: this list would be overwritten. Give another folder with --out.")


def _list_lines(lists: Sequence[BlockSet], out: Path) -> Iterator[str]:
    for blocks in lists:
        yield f"{blocks.summary()}."
    rejected = [f"  {blocks.name}, {issue}" for blocks in lists for issue in blocks.rejected]
    if rejected:
        yield "Rows that could not be used:"
        yield from rejected[:_REJECTED_SHOWN]
    if len(rejected) > _REJECTED_SHOWN:
        yield f"  ... and {len(rejected) - _REJECTED_SHOWN} more, see {out / 'rejected_rows.csv'}"


def _decision_line(session: Session, decisions: Path) -> str:
    stray = len(session.state.stray)
    line = f"Decisions: {len(session.state.decisions):,} pairs decided by a person, in {decisions}."
    return f"{line} {stray:,} others belong to ids or structures that are not in these lists." if stray else line


@contextmanager
def _bar(words: str, unit: str) -> Iterator[Callable[[int, int], None]]:
    """Progress bar on the error stream; none where that is not a terminal."""
    from tqdm import tqdm

    with tqdm(desc=words, unit=unit, disable=None, leave=False) as bar:

        def advance(done: int, total: int) -> None:
            bar.total = total
            bar.update(done - bar.n)

        yield advance


def _stop(number: int, frame: FrameType | None) -> NoReturn:
    # Leaves through the finally clauses, which clear half-written files away.
    sys.exit(TERMINATED)


def _tell_fault(kind: type[BaseException], fault: BaseException, trace: TracebackType | None) -> None:
    """One sentence for what nobody expected, with the place for whoever mends it."""
    while trace is not None and trace.tb_next is not None:
        trace = trace.tb_next
    place = f"{Path(trace.tb_frame.f_code.co_filename).name}, line {trace.tb_lineno}" if trace else "unknown place"
    print(
        f"{_PROGRAM}: unexpected {kind.__name__} ({place}): {fault}. This is a fault of the program, not of your "
        "lists. Please report this line.",
        file=sys.stderr,
    )
