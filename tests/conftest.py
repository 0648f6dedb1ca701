"""Settings and places shared by all tests."""

from __future__ import annotations

import random
from pathlib import Path

import pytest
from hypothesis import settings

ROOT = Path(__file__).resolve().parents[1]
SEED = 20260105

# Both profiles are derandomised: a failure is the same on every machine. The
# deadline is off because a loaded machine is slow without anything being wrong.
# Choose with `python -m pytest --hypothesis-profile=thorough`.
settings.register_profile("quick", max_examples=30, derandomize=True, deadline=None)
settings.register_profile("thorough", max_examples=1000, derandomize=True, deadline=None)
settings.load_profile("quick")


@pytest.fixture(autouse=True)
def _fixed_seed() -> None:
    """Same start for every test; the order of tests is random on purpose."""
    random.seed(SEED)


@pytest.fixture(scope="session")
def root_folder() -> Path:
    """Top of the source tree."""
    return ROOT


@pytest.fixture(scope="session")
def test_data() -> Path:
    """Files that only tests read; origin and licence in its README.md."""
    return ROOT / "tests" / "data"


@pytest.fixture(scope="session")
def example_data() -> Path:
    """Files that the notebooks read."""
    return ROOT / "data"


@pytest.fixture(scope="session")
def notebooks_folder() -> Path:
    return ROOT / "notebooks"
