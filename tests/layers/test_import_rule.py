"""The corridor: each room of libtool imports only rooms to its left.

Every import statement counts, also inside functions and for type checking
only. The one exception: errors and records stand at the same end, and errors
may name a record in a type.
"""

from __future__ import annotations

import ast
import json
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

CORRIDOR = (
    "errors", "records", "reference", "assets", "blocks", "reaction", "rate", "approach",
    "triage", "plate", "export", "views", "command line",
)  # fmt: skip
COMMAND_LINE = {"cli", "__main__"}
# Side by side: neither may know the other.
SIDE_BY_SIDE = {("approach", "rate")}
FOR_TYPES_ONLY = {("errors", "records")}
HEAVY = ("pandas", "pyarrow", "ipywidgets", "anywidget", "py3Dmol", "IPython", "jupyter")


def room_of(name: str) -> str:
    return "command line" if name in COMMAND_LINE else name


def imported_rooms(tree: ast.AST, *, typing_only: bool = False) -> Iterator[tuple[str, int, bool]]:
    """Room, line and whether for types only, of each import of libtool below a node."""
    for node in ast.iter_child_nodes(tree):
        inside = typing_only
        if isinstance(node, ast.If) and ast.unparse(node.test) in {"TYPE_CHECKING", "typing.TYPE_CHECKING"}:
            inside = True
        modules: list[str] = []
        if isinstance(node, ast.Import):
            modules = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            source = "." * node.level + (node.module or "")
            # `from libtool import plate` names the room in the second half.
            modules = [f"libtool.{alias.name}" for alias in node.names] if source == "libtool" else [source]
        for module in modules:
            if module.startswith("."):
                yield "relative import", node.lineno, inside
            elif module.startswith("libtool."):
                yield room_of(module.split(".")[1]), node.lineno, inside
        yield from imported_rooms(node, typing_only=inside)


def faults(room: str, source: str) -> list[str]:
    """What a module of a room imports and may not."""
    found = []
    for other, line, typing_only in imported_rooms(ast.parse(source)):
        if other in {room, "__version__"} or (typing_only and (room, other) in FOR_TYPES_ONLY):
            continue
        known = other in CORRIDOR
        if not known or CORRIDOR.index(other) > CORRIDOR.index(room) or (room, other) in SIDE_BY_SIDE:
            found.append(f"line {line}: {room} imports {other}")
    return found


def modules(root: Path) -> dict[Path, str]:
    """Each module of libtool with its room; the package's own __init__ sees every room."""
    package = root / "libtool"
    rooms = {}
    for path in sorted(package.rglob("*.py")):
        first = path.relative_to(package).parts[0].removesuffix(".py")
        rooms[path] = "command line" if first == "__init__" else room_of(first)
    return rooms


def test_every_module_stands_in_a_room(root_folder: Path) -> None:
    assert {room for room in modules(root_folder).values() if room not in CORRIDOR} == set()


def test_imports_go_left(root_folder: Path) -> None:
    checked = modules(root_folder)
    assert len(checked) > len(CORRIDOR)
    found = {
        str(path.relative_to(root_folder)): faults(room, path.read_text("utf-8")) for path, room in checked.items()
    }
    assert {path: wrong for path, wrong in found.items() if wrong} == {}


@pytest.mark.parametrize(
    ("room", "source"),
    [
        ("rate", "from libtool.approach import approach"),
        ("approach", "import libtool.rate.estimate"),
        ("blocks", "def late():\n    from libtool import views"),
        ("records", "if True:\n    from libtool.reference.tables import row"),
        ("errors", "from libtool.records import RowIssue"),
        ("export", "from libtool.cli import main"),
        ("plate", "from . import formats"),
        ("plate", "from libtool.cupboard import thing"),
    ],
)
def test_a_wrong_import_is_found(room: str, source: str) -> None:
    assert len(faults(room, source)) == 1


@pytest.mark.parametrize(
    ("room", "source"),
    [
        ("triage", "from libtool.rate import estimate_rate\nfrom libtool.approach import approach"),
        ("views", "import libtool.records, rdkit\nfrom libtool.views.html import escape"),
        (
            "errors",
            "from typing import TYPE_CHECKING\nif TYPE_CHECKING:\n    from libtool.records import RowIssue",
        ),
        ("export", "from libtool import __version__"),
    ],
)
def test_a_right_import_passes(room: str, source: str) -> None:
    assert faults(room, source) == []


def test_import_of_the_package_is_light(root_folder: Path) -> None:
    code = "import json, sys, libtool; print(json.dumps([name.partition('.')[0] for name in sys.modules]))"
    answer = subprocess.run([sys.executable, "-c", code], cwd=root_folder, capture_output=True, text=True, check=True)
    loaded = set(json.loads(answer.stdout))
    assert "libtool" in loaded
    assert loaded.isdisjoint(HEAVY)
