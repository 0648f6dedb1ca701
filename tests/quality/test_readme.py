"""What the README shows can be typed."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from pathlib import Path

import pytest

BLOCK = re.compile(r"^```(\w*)\n(.+?)\n```", re.MULTILINE | re.DOTALL)


def blocks(root: Path, kind: str) -> list[str]:
    text = root.joinpath("README.md").read_text("utf-8")
    return [code for language, code in BLOCK.findall(text) if language == kind]


def test_python_blocks_run(root_folder: Path) -> None:
    (code,) = blocks(root_folder, "python")
    environment = {**os.environ, "PYTHONPATH": str(root_folder)}
    command = [sys.executable, "-c", code]
    answer = subprocess.run(command, cwd=root_folder, env=environment, capture_output=True, text=True, check=False)
    assert answer.returncode == 0, answer.stderr
    # HE-005 is neopentyl bromide.
    assert answer.stdout.startswith("stuck")
    assert "neopentyl-type" in answer.stdout


def test_the_first_command_runs_on_the_demo_data(root_folder: Path, tmp_path: Path) -> None:
    """Its last part, with the interpreter of this run and another folder for the results."""
    command = next(code for code in blocks(root_folder, "") if "libtool triage data/" in code)
    words = command.split(" && ")[-1].replace(".venv/bin/python", sys.executable).split()
    words[words.index("--out") + 1] = str(tmp_path / "out")
    answer = subprocess.run(words, cwd=root_folder, capture_output=True, text=True, check=False)
    assert answer.returncode == 0, answer.stderr
    assert "jupyter lab notebooks/1_triage.ipynb" in answer.stdout
    assert "report.html" in answer.stdout


@pytest.mark.parametrize("kind", ["path", "picture"])
def test_files_that_the_readme_names_are_there(root_folder: Path, kind: str) -> None:
    text = root_folder.joinpath("README.md").read_text("utf-8")
    pattern = r"!\[[^\]]*\]\(([^)]+)\)" if kind == "picture" else r"`((?:notebooks|data|libtool|tests)/[\w./-]+)`"
    named = re.findall(pattern, text) + (["LICENSE", "DEVELOPERS.md"] if kind == "path" else [])
    assert named
    assert [name for name in named if not root_folder.joinpath(name).exists()] == []
