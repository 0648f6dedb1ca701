"""What the tests do with a page: watch its traffic, run a notebook, look at a canvas."""

from __future__ import annotations

import io
import re
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
from PIL import Image
from playwright.sync_api import BrowserContext, ConsoleMessage, Page, Request, Route, WebSocketRoute

FLAGS = (
    # Containers and root accounts offer the browser no sandbox of its own.
    "--no-sandbox",
    "--disable-gpu",
    "--enable-unsafe-swiftshader",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-default-apps",
    "--disable-sync",
    "--no-first-run",
    # Second barrier behind the routes below: no name but the machine's own resolves.
    "--host-resolver-rules=MAP * ~NOTFOUND , EXCLUDE 127.0.0.1",
)
FOREIGN = re.compile(r"^(https?|wss?)://(?!127\.0\.0\.1[:/])")
# Running a notebook on a loaded two-core machine.
RUN_MILLISECONDS = 120_000

READY = """() => {
  const panel = window.jupyterapp?.shell?.currentWidget;
  return panel?.sessionContext?.isReady === true && panel.context.isReady === true
    && panel.sessionContext.session?.kernel?.status === "idle";
}"""
RUN_ALL = """async (milliseconds) => {
  const app = window.jupyterapp;
  const panel = app.shell.currentWidget;
  const late = new Promise((_, reject) =>
    setTimeout(() => reject(new Error("the cells did not end in time")), milliseconds));
  await Promise.race([app.commands.execute("notebook:run-all-cells"), late]);
  return panel.content.widgets.flatMap((cell) => cell.model.sharedModel.outputs ?? [])
    .filter((output) => output.output_type === "error")
    .map((output) => `${output.ename}: ${output.evalue}`);
}"""


@dataclass(slots=True)
class Traffic:
    """What pages of one browser context asked for and complained about."""

    requests: list[str] = field(default_factory=list)
    foreign: list[str] = field(default_factory=list)
    console_errors: list[str] = field(default_factory=list)


def watch(context: BrowserContext) -> Traffic:
    """Record all traffic of a context; refuse and record what leaves the machine."""
    traffic = Traffic()

    def asked(request: Request) -> None:
        traffic.requests.append(request.url)

    def refuse(route: Route) -> None:
        traffic.foreign.append(route.request.url)
        route.abort()

    def refuse_socket(socket: WebSocketRoute) -> None:
        traffic.foreign.append(socket.url)
        socket.close()

    def said(message: ConsoleMessage) -> None:
        if message.type == "error":
            traffic.console_errors.append(message.text)

    context.on("request", asked)
    context.on("console", said)
    context.on("weberror", lambda error: traffic.console_errors.append(str(error.error)))
    context.route(FOREIGN, refuse)
    context.route_web_socket(FOREIGN, refuse_socket)
    return traffic


def run_all_cells(page: Page) -> None:
    """Run the open notebook, in JupyterLab or Notebook, and wait until the kernel is idle.

    Raises
    ------
    RuntimeError
        A cell ended in an error.
    """
    page.wait_for_function(READY, timeout=RUN_MILLISECONDS)
    errors = page.evaluate(RUN_ALL, RUN_MILLISECONDS)
    if errors:
        raise RuntimeError("Cells ended in an error: " + "; ".join(errors))
    page.wait_for_function(READY, timeout=RUN_MILLISECONDS)


def wait_until(page: Page, predicate: str, seconds: float = 30) -> None:
    """Wait until a JavaScript expression or function is true in the page."""
    page.wait_for_function(predicate, timeout=seconds * 1000)


def take_picture(page: Page, file: Path) -> Path:
    """Screenshot of what is in view."""
    page.screenshot(path=file)
    return file


def ink(png: bytes) -> int:
    """Number of pixels that differ from the background.

    Background is the commonest colour. A pixel counts from 16 of 255 steps in
    one channel, which is above the dithering of software rendering.
    """
    pixels = np.asarray(Image.open(io.BytesIO(png)).convert("RGB")).reshape(-1, 3).astype(np.int16)
    colours, counts = np.unique(pixels, axis=0, return_counts=True)
    background = colours[counts.argmax()]
    return int((np.abs(pixels - background).max(axis=1) >= 16).sum())


def canvas_has_ink(page: Page, selector: str, pixels: int = 300) -> bool:
    """Whether an element shows a drawing: at least `pixels` away from the background.

    A small molecule drawn as sticks in a 400 x 300 canvas covers some thousand
    pixels; a frame or a focus ring of one element corner stays below 300.
    """
    return ink(page.locator(selector).first.screenshot()) >= pixels


def wait_for_ink(page: Page, selector: str, pixels: int = 300, frames: int = 200) -> bool:
    """Look again after each drawn frame until there is ink; False after `frames`."""
    page.locator(selector).first.wait_for(state="visible")
    for _ in range(frames):
        if canvas_has_ink(page, selector, pixels):
            return True
        page.evaluate("() => new Promise((done) => requestAnimationFrame(() => done()))")
    return False
