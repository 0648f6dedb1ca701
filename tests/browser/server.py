"""A notebook server for the tests: JupyterLab, Notebook 7 and Voila in one process.

Everything it reads or writes lies in a temporary folder: the notebooks (copies),
settings, runtime files and IPython's history. It listens on 127.0.0.1 only,
which is why it may do without a token, and asks no other host for news.
"""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
import threading
import urllib.request
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
# A loaded two-core machine needs about 10 s.
START_SECONDS = 90
STOP_SECONDS = 20


@dataclass(frozen=True, slots=True, kw_only=True)
class Server:
    """A running server; `root` is the folder it shows."""

    address: str
    root: Path

    def lab(self, notebook: str) -> str:
        """Address of a notebook in JupyterLab, in a workspace without memory."""
        return f"{self.address}/lab/tree/{notebook}?reset"

    def notebook(self, notebook: str) -> str:
        return f"{self.address}/notebooks/{notebook}"

    def voila(self, notebook: str) -> str:
        return f"{self.address}/voila/render/{notebook}"

    def stop_kernels(self) -> None:
        """End every kernel, so that one test leaves no load for the next."""
        with urllib.request.urlopen(f"{self.address}/api/kernels") as answer:
            kernels = json.load(answer)
        for kernel in kernels:
            request = urllib.request.Request(f"{self.address}/api/kernels/{kernel['id']}", method="DELETE")
            with urllib.request.urlopen(request):
                pass


@contextmanager
def running_server(folder: Path) -> Iterator[Server]:
    """Serve copies of notebooks/ and data/ from `folder` until the block is left."""
    root = folder / "root"
    root.mkdir(parents=True)
    for name in ("notebooks", "data"):
        if ROOT.joinpath(name).is_dir():
            shutil.copytree(ROOT / name, root / name, ignore=shutil.ignore_patterns("out", ".ipynb_checkpoints"))
    write_settings(folder, root)
    process = subprocess.Popen(
        [sys.executable, "-m", "jupyterlab"],
        cwd=root,
        env=environment(folder),
        stdin=subprocess.DEVNULL,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.PIPE,
        text=True,
    )
    try:
        yield Server(address=wait_for_address(process), root=root)
    finally:
        # SIGTERM makes the server end its kernels first.
        process.terminate()
        try:
            process.wait(STOP_SECONDS)
        except subprocess.TimeoutExpired:
            process.kill()
            process.wait()


def wait_for_address(process: subprocess.Popen[str]) -> str:
    """Address the server says it listens on; fails with its log if it does not start."""
    lines: list[str] = []
    found: list[str] = []
    settled = threading.Event()

    def read() -> None:
        # Goes on to the end: a full pipe would stop the server.
        for line in process.stderr or ():
            lines.append(line)
            address = next((word for word in line.split() if word.startswith("http://127.0.0.1:")), None)
            if address is not None and not found:
                found.append(address.split("/lab")[0].rstrip("/"))
                settled.set()
        settled.set()

    threading.Thread(target=read, name="server-log", daemon=True).start()
    settled.wait(START_SECONDS)
    if not found:
        raise RuntimeError("The notebook server did not start:\n" + "".join(lines[-40:]))
    return found[0]


def write_settings(folder: Path, root: Path) -> None:
    """Settings of server, JupyterLab and Notebook below `folder`."""
    config = folder / "config"
    config.mkdir()
    server = {
        "ip": "127.0.0.1",
        # The system picks a free port.
        "port": 0,
        "root_dir": str(root),
        "open_browser": False,
        "allow_root": True,
        # The tests end kernels over HTTP and have no cookie.
        "disable_check_xsrf": True,
        "terminals_enabled": False,
    }
    shown = {"expose_app_in_browser": True}
    lab = {
        **shown,
        "news_url": None,
        "check_for_updates_class": "jupyterlab.NeverCheckForUpdate",
        "extension_manager": "readonly",
    }
    everything = {
        "ServerApp": server,
        "IdentityProvider": {"token": ""},
        "LabApp": lab,
        "JupyterNotebookApp": shown,
    }
    for name in ("jupyter_server_config", "jupyter_lab_config", "jupyter_notebook_config"):
        config.joinpath(f"{name}.json").write_text(json.dumps(everything), "utf-8")
    # Installing puts it below the environment; here it comes from the tree under test.
    shutil.copytree(ROOT / "libtool" / "assets" / "voila", folder / "share" / "voila" / "templates" / "waldenbench")
    quiet = config / "lab" / "user-settings" / "@jupyterlab" / "apputils-extension"
    quiet.mkdir(parents=True)
    asked = {"fetchNews": "false", "checkForUpdates": False, "doNotDisturbMode": True}
    quiet.joinpath("notification.jupyterlab-settings").write_text(json.dumps(asked), "utf-8")


def environment(folder: Path) -> dict[str, str]:
    """Environment in which nothing of the user's own Jupyter or IPython is seen."""
    inherited = {name: value for name, value in os.environ.items() if not name.startswith(("JUPYTER", "IPYTHON"))}
    paths = [str(ROOT), *filter(None, [inherited.get("PYTHONPATH")])]
    return {
        **inherited,
        # The kernels load the tree under test, installed or not.
        "PYTHONPATH": os.pathsep.join(paths),
        "JUPYTER_CONFIG_DIR": str(folder / "config"),
        "JUPYTER_DATA_DIR": str(folder / "share"),
        "JUPYTER_RUNTIME_DIR": str(folder / "runtime"),
        "JUPYTERLAB_SETTINGS_DIR": str(folder / "config" / "lab" / "user-settings"),
        "JUPYTERLAB_WORKSPACES_DIR": str(folder / "config" / "lab" / "workspaces"),
        "JUPYTER_PLATFORM_DIRS": "1",
        "IPYTHONDIR": str(folder / "ipython"),
    }
