"""Cells of a notebook stay in their order, whatever shuffles the rest.

pytest-randomly shuffles tests within a module; notebook cells belong to no
module and would be dealt out across all notebooks. This file stands at the
root so that it also counts for `python -m pytest notebooks`.
"""

from __future__ import annotations

from pathlib import Path

import pytest


@pytest.hookimpl(trylast=True)
def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """Put the cells of each notebook back into one block, notebooks by name."""
    cells = [item for item in items if item.path.suffix == ".ipynb"]
    if not cells:
        return
    first = items.index(cells[0])
    before = sum(item.path.suffix != ".ipynb" for item in items[:first])
    others = [item for item in items if item.path.suffix != ".ipynb"]
    cells.sort(key=_place)
    items[:] = others[:before] + cells + others[before:]


def _place(cell: pytest.Item) -> tuple[Path, int]:
    # nbval names a cell "notebook::Cell 7".
    return cell.path, int(cell.name.rsplit(" ", 1)[-1])
