"""Lint, format and types are part of the suite; a failure shows the tool's own report."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

CHECKS = {
    "lint": ("ruff", "check", "."),
    "format": ("ruff", "format", "--check", "."),
    "types": ("mypy",),
}


@pytest.mark.parametrize("check", CHECKS)
def test_clean(check: str, root_folder: Path) -> None:
    command = [sys.executable, "-m", *CHECKS[check]]
    answer = subprocess.run(command, cwd=root_folder, capture_output=True, text=True, check=False)
    if answer.returncode != 0:
        pytest.fail(f"{' '.join(CHECKS[check])}\n{answer.stdout}{answer.stderr}", pytrace=False)
