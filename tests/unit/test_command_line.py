"""The command line as a person at a terminal meets it."""

from __future__ import annotations

import csv
import os
import subprocess
import sys
from pathlib import Path

import pytest

from libtool import cli
from libtool.export import FILE_NAMES
from libtool.records import Choice
from libtool.triage import Journal

ROOT = Path(cli.__file__).resolve().parents[1]
NUCLEOPHILES = "id,smiles\nN1,C1CCNCC1\nN2,NCc1ccccc1\n"
ELECTROPHILES = "id,smiles\nE1,CCCBr\nE2,CC(C)(C)CBr\nE3,COCCl\nE4,C1CC(\nE5,BrCCC\n"
SMILES = {"N1": "C1CCNCC1", "E1": "CCCBr", "E2": "CC(C)(C)CBr"}
# Stops the process by a signal of its own in the middle of writing.
KILLED = """import os, signal, sys
from libtool import cli
number, written = getattr(signal, sys.argv.pop()), []
def stop(descriptor):
    written.append(descriptor)
    if len(written) == 4:
        os.kill(os.getpid(), number)
os.fsync = stop
cli.run()"""
FAULTY = """import libtool.export
from libtool import cli
def write_all(*args, **settings):
    return {}["no such key"]
libtool.export.write_all = write_all
cli.run()"""


@pytest.fixture
def project(tmp_path: Path) -> Path:
    tmp_path.joinpath("n.csv").write_text(NUCLEOPHILES, "utf-8")
    tmp_path.joinpath("e.csv").write_text(ELECTROPHILES, "utf-8")
    return tmp_path


def run(
    project: Path, *words: str, program: tuple[str, ...] = ("-m", "libtool"), **variables: str
) -> subprocess.CompletedProcess[str]:
    environment = os.environ | {"PYTHONPATH": str(ROOT)} | variables
    command = [sys.executable, *program, *words]
    return subprocess.run(command, cwd=project, env=environment, capture_output=True, text=True, timeout=120)


def triage(
    project: Path, *words: str, program: tuple[str, ...] = ("-m", "libtool"), **variables: str
) -> subprocess.CompletedProcess[str]:
    return run(project, "triage", "n.csv", "e.csv", "--out", "out", *words, program=program, **variables)


def choices(project: Path) -> dict[tuple[str, str], str]:
    with (project / "out" / "pairs.csv").open(encoding="utf-8-sig", newline="") as stream:
        return {(row["nucleophile"], row["electrophile"]): row["choice"] for row in csv.DictReader(stream)}


def test_a_run_tells_what_became_of_every_row_and_pair(project: Path) -> None:
    done = triage(project)
    assert (done.returncode, done.stderr) == (0, "")
    assert {path.name for path in (project / "out").iterdir()} == {*FILE_NAMES, "decisions.sqlite"}
    assert "n.csv: 2 rows = 2 blocks + 0 duplicates + 0 rejected." in done.stdout
    assert "e.csv: 5 rows = 3 blocks + 1 duplicates + 1 rejected." in done.stdout
    assert "e.csv, row 5, smiles: received 'C1CC('" in done.stdout
    assert "Pairs: 6 = 2 to make + 0 parked + 4 not made, of which 2 refused" in done.stdout
    assert "Plate: 2 wells on 1 plate(s) of 96." in done.stdout
    assert "python -m jupyter lab notebooks/1_triage.ipynb" in done.stdout
    assert "Read the SDS of every reagent first" in done.stdout
    for name in FILE_NAMES:
        assert str(Path("out") / name) in done.stdout


def test_decisions_are_honoured_and_the_journal_only_grows(project: Path) -> None:
    assert triage(project).returncode == 0
    journal = Journal(project / "out" / "decisions.sqlite", who="anna")
    journal.record([("N1", "E1", SMILES["N1"], SMILES["E1"])], Choice.SKIP, "no stock")
    journal.record([("N1", "E2", SMILES["N1"], SMILES["E2"])], Choice.PARK, "")
    before = journal.history()
    again = triage(project)
    assert again.returncode == 0
    assert "1 to make + 1 parked + 4 not made" in again.stdout
    assert "2 pairs decided by a person" in again.stdout
    found = choices(project)
    assert (found["N1", "E1"], found["N1", "E2"], found["N2", "E1"]) == ("skip", "park", "make")
    assert journal.history() == before


def test_a_decisions_file_elsewhere(project: Path) -> None:
    journal = Journal(project / "shared" / "d.sqlite", who="anna")
    journal.record([("N1", "E1", SMILES["N1"], SMILES["E1"])], Choice.SKIP, "")
    assert triage(project, "--decisions", "shared/d.sqlite").returncode == 0
    assert choices(project)["N1", "E1"] == "skip"
    assert not (project / "out" / "decisions.sqlite").exists()


def test_many_rejected_rows_are_cut_short(project: Path) -> None:
    rows = "".join(f"X{i},C1CC(\n" for i in range(14))
    (project / "n.csv").write_text(NUCLEOPHILES + rows, "utf-8")
    done = triage(project)
    assert done.stdout.count("received 'C1CC('") == 10
    assert f"... and 5 more, see {Path('out') / 'rejected_rows.csv'}" in done.stdout


def test_nothing_to_make_has_a_code_of_its_own(project: Path) -> None:
    (project / "e.csv").write_text("id,smiles\nE1,CC(C)(C)Br\n", "utf-8")
    done = triage(project)
    assert done.returncode == 3
    assert done.stderr == "No pair is to be made: pairs.csv says why for each.\n"
    assert (project / "out" / "report.html").exists()


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (("--solvent", "beer"), ("'beer'", "DMF", "toluene")),
        (("--temperature", "hot"), ("'hot'", "number")),
        (("--temperature", "nan"), ("nan", "0 and 150")),
        (("--temperature", "400"), ("400", "0 and 150")),
        (("--wells", "100"), ("100", "24, 48, 96, 384, 1536")),
        (("--wells", "many"), ("'many'", "whole number")),
        (("--out", "n.csv"), ("n.csv", "Give a folder")),
        (("--decisions", "e.csv"), ("e.csv", "one of the lists")),
        (("--colour",), ("--colour", "--help")),
    ],
)
def test_a_bad_word_gets_one_sentence(project: Path, words: tuple[str, ...], told: tuple[str, ...]) -> None:
    before = {path: path.read_bytes() for path in project.iterdir()}
    done = triage(project, *words)
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.startswith("python -m libtool")
    assert len(done.stderr.splitlines()) == 1
    assert [part for part in told if part not in done.stderr] == []
    assert {path: path.read_bytes() for path in project.iterdir()} == before


@pytest.mark.parametrize(
    ("content", "told"),
    [
        (None, "no such file"),
        (b"", "empty"),
        (b"id,smiles\nA,C1CC(\n", "none of its 1 rows can be used"),
        (b"a,b\n1,2\n", "no column holds structures"),
        (b"\x00\xff\xfe\x01", "n.csv"),
    ],
)
def test_a_bad_list_gets_one_sentence(project: Path, content: bytes | None, told: str) -> None:
    (project / "n.csv").unlink()
    if content is not None:
        (project / "n.csv").write_bytes(content)
    done = triage(project)
    assert (done.returncode, done.stdout) == (2, "")
    assert len(done.stderr.splitlines()) == 1
    assert told in done.stderr


def test_an_input_is_never_overwritten(project: Path) -> None:
    assert triage(project).returncode == 0
    kept = (project / "out" / "nucleophiles_filtered.csv").read_bytes()
    done = run(project, "triage", "out/nucleophiles_filtered.csv", "e.csv", "--out", "out")
    assert done.returncode == 2
    assert "would be overwritten" in done.stderr
    assert (project / "out" / "nucleophiles_filtered.csv").read_bytes() == kept


def test_a_folder_in_the_way_is_told_and_nothing_is_written(project: Path) -> None:
    (project / "out" / "plate.csv").mkdir(parents=True)
    done = triage(project)
    assert done.returncode == 2
    assert "plate.csv: a folder has the name" in done.stderr
    assert len(done.stderr.splitlines()) == 1
    assert {path.name for path in (project / "out").iterdir()} == {"plate.csv", "decisions.sqlite"}


@pytest.mark.parametrize(("signal_name", "code"), [("SIGINT", 130), ("SIGTERM", 143)])
def test_a_run_stopped_while_writing_leaves_the_files_before(project: Path, signal_name: str, code: int) -> None:
    assert triage(project).returncode == 0
    before = {path: path.read_bytes() for path in (project / "out").iterdir()}
    done = triage(project, "--solvent", "MeCN", signal_name, program=("-c", KILLED))
    assert done.returncode == code
    assert "Traceback" not in done.stderr
    assert {path: path.read_bytes() for path in (project / "out").iterdir()} == before


def test_a_fault_of_the_program_is_one_line_without_traceback(project: Path) -> None:
    done = triage(project, program=("-c", FAULTY))
    assert done.returncode == 1
    assert done.stderr.startswith("python -m libtool: unexpected KeyError (")
    assert "line 4" in done.stderr
    assert len(done.stderr.splitlines()) == 1


def test_a_console_without_the_letters_shows_something(project: Path) -> None:
    (project / "e.csv").write_text("id,smiles\nE1,CCCBr\nα,C1CC(µ\n", "utf-8")
    done = triage(project, PYTHONIOENCODING="ascii")
    assert (done.returncode, done.stderr) == (0, "")
    assert "row 3" in done.stdout


def test_a_reader_that_leaves_early_is_no_error(project: Path) -> None:
    read, write = os.pipe()
    os.close(read)
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    command = [sys.executable, "-m", "libtool", "triage", "n.csv", "e.csv", "--out", "out"]
    done = subprocess.run(command, cwd=project, env=environment, stdout=write, stderr=subprocess.PIPE, text=True)
    os.close(write)
    assert (done.returncode, done.stderr) == (0, "")
    assert (project / "out" / "report.html").exists()


def test_help_tells_the_exit_codes_and_version_the_name(project: Path) -> None:
    told = run(project, "triage", "--help")
    assert told.returncode == 0
    for words in ("exit codes:", "130", "--solvent", "--decisions", "degrees Celsius"):
        assert words in told.stdout
    assert run(project, "--version").stdout.startswith("waldenbench ")
    assert run(project).returncode == 2
