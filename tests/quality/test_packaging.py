"""What is built holds what is needed, and a build that cannot fetch says what to do."""

from __future__ import annotations

import importlib.util
import json
import shutil
import subprocess
import sys
import zipfile
from pathlib import Path
from types import ModuleType

import pytest

from libtool.assets import threedmol
from libtool.errors import LibtoolError

SCRIPT_FILES = {"3Dmol-min.js", "LICENSE.txt", "version.txt"}
# 3Dmol.js takes 0.16 MB compressed; the package's own files take the rest.
WHEEL_BYTES = 1_000_000


def build(root: Path, target: str, folder: Path) -> Path:
    """Build without an isolated environment, so without the network."""
    command = [sys.executable, "-m", "hatchling", "build", "--target", target, "--directory", str(folder)]
    answer = subprocess.run(command, cwd=root, capture_output=True, text=True, check=False)
    if answer.returncode != 0:
        pytest.fail(answer.stdout + answer.stderr, pytrace=False)
    (built,) = folder.iterdir()
    return built


@pytest.fixture
def hook(root_folder: Path) -> ModuleType:
    """The build hook, loaded by path as hatchling does."""
    file = root_folder / "libtool" / "assets" / "build_hook.py"
    spec = importlib.util.spec_from_file_location("build_hook", file)
    if spec is None or spec.loader is None:
        pytest.fail(f"{file} cannot be loaded")
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture
def bare_assets(root_folder: Path, tmp_path: Path) -> Path:
    """The assets folder of a fresh clone: pinned, nothing fetched."""
    folder = tmp_path / "assets"
    folder.mkdir()
    for name in ("package.json", "package-lock.json"):
        shutil.copy(root_folder / "libtool" / "assets" / name, folder)
    return folder


def test_wheel(root_folder: Path, tmp_path: Path) -> None:
    wheel = build(root_folder, "wheel", tmp_path / "wheel")
    with zipfile.ZipFile(wheel) as archive:
        names = set(archive.namelist())
    assert {f"libtool/assets/threedmol/{name}" for name in SCRIPT_FILES} <= names
    assert any(name.endswith("share/jupyter/voila/templates/waldenbench/index.html.j2") for name in names)
    assert {"libtool/py.typed", "libtool/assets/loader.js"} <= names
    tables = root_folder.joinpath("libtool", "reference").glob("*.csv")
    assert {f"libtool/reference/{path.name}" for path in tables} <= names
    assert not any(name.endswith((".gz", "build_hook.py", "package-lock.json")) for name in names)
    assert all(name.startswith(("libtool/", "waldenbench-")) for name in names)
    assert wheel.stat().st_size <= WHEEL_BYTES


def test_sdist_builds_without_npm(root_folder: Path, tmp_path: Path, hook: ModuleType) -> None:
    sdist = build(root_folder, "sdist", tmp_path / "sdist")
    unpacked = tmp_path / "unpacked"
    unpacked.mkdir()
    # Python's own tarfile takes different arguments within 3.11.
    subprocess.run(["tar", "-xf", str(sdist), "-C", str(unpacked)], check=True)
    (top,) = unpacked.iterdir()
    assert hook.is_complete(top / "libtool" / "assets")
    assert {"pyproject.toml", "README.md", "LICENSE", "tests"} <= {path.name for path in top.iterdir()}


def test_no_npm_says_what_to_do(
    hook: ModuleType, bare_assets: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("PATH", str(tmp_path))
    with pytest.raises(hook.ThreeDmolMissingError, match=r"no npm .* found.*HTTPS_PROXY.*node_modules"):
        hook.provide(bare_assets)
    assert not hook.is_complete(bare_assets)


def test_failing_npm_is_quoted(
    hook: ModuleType, bare_assets: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    npm = tmp_path / "npm"
    npm.write_text('#!/bin/sh\n[ "$1" = --version ] && echo 10.0.0 && exit 0\necho no route >&2\nexit 1\n', "utf-8")
    npm.chmod(0o755)
    monkeypatch.setenv("PATH", str(tmp_path))
    with pytest.raises(hook.ThreeDmolMissingError, match=r"(?s)npm ci --ignore-scripts.*no route.*HTTPS_PROXY"):
        hook.provide(bare_assets)


@pytest.mark.parametrize("version", ["6.14.0", "not a version"])
def test_an_npm_that_cannot_read_the_lock_is_passed_over(
    version: str, hook: ModuleType, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    npm = tmp_path / "npm"
    npm.write_text(f"#!/bin/sh\necho {version}\n", "utf-8")
    npm.chmod(0o755)
    monkeypatch.setenv("PATH", str(tmp_path))
    assert hook.npm_command() is None


def by_hand(root_folder: Path, folder: Path, version: str) -> None:
    """node_modules as somebody without a network would put it there."""
    package = folder / "node_modules" / "3dmol"
    package.joinpath("build").mkdir(parents=True)
    package.joinpath("package.json").write_text(json.dumps({"version": version}), "utf-8")
    package.joinpath("LICENSE").write_text("terms", "utf-8")
    fetched = root_folder / "libtool" / "assets" / "threedmol"
    shutil.copy(fetched / "3Dmol-min.js", package / "build" / "3Dmol-min.js")


def test_files_put_there_by_hand_are_used(
    root_folder: Path, hook: ModuleType, bare_assets: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("PATH", str(tmp_path))
    by_hand(root_folder, bare_assets, hook.wanted_version(bare_assets))
    hook.provide(bare_assets)
    assert hook.is_complete(bare_assets)
    assert "terms" in bare_assets.joinpath("threedmol", "LICENSE.txt").read_text("utf-8")


def test_files_of_another_version_are_not_used(
    root_folder: Path, hook: ModuleType, bare_assets: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("PATH", str(tmp_path))
    by_hand(root_folder, bare_assets, "1.0.0")
    with pytest.raises(hook.ThreeDmolMissingError):
        hook.provide(bare_assets)


def test_lock_names_hashes_and_no_addresses(root_folder: Path) -> None:
    lock = json.loads(root_folder.joinpath("libtool", "assets", "package-lock.json").read_text("utf-8"))
    packages = {name: entry for name, entry in lock["packages"].items() if name}
    assert packages
    assert all(entry["integrity"].startswith("sha512-") for entry in packages.values())
    assert not any("resolved" in entry for entry in packages.values())


def test_packed_script_is_the_pinned_one(root_folder: Path, hook: ModuleType) -> None:
    assert threedmol.version() == hook.wanted_version(root_folder / "libtool" / "assets")
    assert "University of Pittsburgh" in threedmol.licence_text()
    assert "pako" in threedmol.licence_text()


def test_compressed_script_is_the_same_in_every_run(tmp_path: Path) -> None:
    code = "import sys; from libtool.assets.threedmol import script_gzip; sys.stdout.buffer.write(script_gzip())"
    runs = [subprocess.run([sys.executable, "-c", code], capture_output=True, check=True).stdout for _ in range(2)]
    assert runs[0] == runs[1] == threedmol.script_gzip()
    # Read back with a program that is not ours.
    packed = tmp_path / "script.gz"
    packed.write_bytes(runs[0])
    unpacked = subprocess.run(["gzip", "-dc", str(packed)], capture_output=True, check=True).stdout
    assert unpacked.decode("utf-8") == threedmol.script_text()


def test_a_missing_file_names_the_remedy() -> None:
    with pytest.raises(LibtoolError, match=r"absent\.js is missing.*pip install -e \."):
        threedmol._read("absent.js")
