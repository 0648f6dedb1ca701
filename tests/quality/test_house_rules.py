"""Rules of the house that no linter knows."""

from __future__ import annotations

import json
import re
import subprocess
from collections.abc import Iterator
from pathlib import Path

import pytest

MOST_LINES = 400
TEXT = {
    ".cfg",
    ".csv",
    ".css",
    ".html",
    ".ipynb",
    ".js",
    ".json",
    ".md",
    ".py",
    ".toml",
    ".txt",
    ".yml",
    ".yaml",
    "",
}
FETCHED_OR_CACHED = {"threedmol", "node_modules", "__pycache__", ".ipynb_checkpoints", "out"}
# Joined here so that this file does not hold the words themselves.
FORBIDDEN = tuple(
    "".join(parts)
    for parts in (
        ("lec", "ture"),
        ("tran", "script"),
        ("seed ", "document"),
        ("/wo", "rk/"),
        ("/tm", "p/"),
        ("registry.", "npmjs"),
        ("files.python", "hosted"),
        ("pypi", ".org"),
    )
)


def project_files(root: Path) -> Iterator[Path]:
    """Every file somebody wrote: top level, and the folders that are in the repository."""
    yield from (path for path in root.iterdir() if path.is_file())
    for name in (".ci", "data", "docs", "libtool", "notebooks", "tests"):
        for path in root.joinpath(name).rglob("*"):
            if path.is_file() and not FETCHED_OR_CACHED.intersection(path.relative_to(root).parts):
                yield path


def code_files(root: Path) -> list[Path]:
    return [path for path in project_files(root) if path.suffix in {".py", ".js"}]


def notebooks(root: Path) -> list[Path]:
    return [path for path in project_files(root) if path.suffix == ".ipynb"]


def test_no_file_is_long(root_folder: Path) -> None:
    lengths = {str(path): len(path.read_text("utf-8").splitlines()) for path in code_files(root_folder)}
    assert lengths
    assert {path: lines for path, lines in lengths.items() if lines > MOST_LINES} == {}


def test_no_module_is_a_drawer_for_everything(root_folder: Path) -> None:
    names = {"utils", "util", "helpers", "misc"}
    assert [path for path in code_files(root_folder) if path.stem in names or path.parent.name in names] == []


def forbidden_in(text: str) -> list[str]:
    low = text.lower()
    return [word for word in FORBIDDEN if word in low]


@pytest.mark.parametrize("word", FORBIDDEN)
def test_the_search_finds_each_forbidden_word(word: str) -> None:
    assert forbidden_in(f"before {word.capitalize()} after") == [word]


def test_no_forbidden_word(root_folder: Path) -> None:
    found = {}
    for path in project_files(root_folder):
        text = path.read_text("utf-8") if path.suffix in TEXT else ""
        if words := forbidden_in(text) + forbidden_in(path.name):
            found[str(path)] = words
    assert found == {}


def test_notebooks_are_stored_without_results(root_folder: Path) -> None:
    left = []
    for path in notebooks(root_folder):
        for number, cell in enumerate(json.loads(path.read_text("utf-8"))["cells"]):
            if cell.get("outputs") or cell.get("execution_count") is not None:
                left.append(f"{path.name}, cell {number}")
    assert left == []


def test_ci_runs_the_command_that_the_readme_gives(root_folder: Path) -> None:
    readme = root_folder.joinpath("README.md").read_text("utf-8")
    block = re.search(r"^<!-- test command -->\s*\n```\w*\n(.+?)\n```", readme, re.MULTILINE | re.DOTALL)
    assert block, "README.md holds no fenced block after the comment <!-- test command -->"
    command = ["bash", str(root_folder / ".ci" / "run"), "--show"]
    shown = subprocess.run(command, capture_output=True, text=True, check=True)
    assert shown.stdout.strip() == block[1].strip()
    # The command runs the whole suite, from an environment of its own.
    assert re.search(r"-m venv \S+ && .*pip install .*\[test\].* && \S+ -m pytest$", block[1].strip())
