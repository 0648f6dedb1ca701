"""The triage notebook in a real browser: click a flagged well, see its picture, decide, restart.

The pairs belong to the demo data: HE-005 is neopentyl bromide, HE-002 isobutyl
bromide, HE-024 chloromethyl methyl ether.
"""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from playwright.sync_api import Locator, Page, expect

from tests.browser.page import Traffic, canvas_has_ink, run_all_cells, take_picture, wait_for_ink
from tests.browser.server import Server

NOTEBOOK = "notebooks/1_triage.ipynb"
FRONT_ENDS = ("lab", "notebook", "voila")
CANVAS = ".libtool-approach canvas"
# The frame around the canvas may lend it one line of pixels on each side (2 x 1000);
# the incoming sphere alone covers more than 5000.
INK = 3000
# Judging 384 pairs and starting a kernel on a loaded two-core machine.
PATIENCE = 60_000


def opened(page: Page, server: Server, front_end: str) -> Page:
    address: str = getattr(server, front_end)(NOTEBOOK)
    page.goto(address, timeout=120_000)
    if front_end != "voila":
        run_all_cells(page)
    expect(grid(page)).to_be_attached(timeout=PATIENCE)
    grid(page).scroll_into_view_if_needed()
    return page


def grid(page: Page) -> Locator:
    return page.get_by_role("grid", name=re.compile("Design"))


def well(page: Page, row: int, column: int) -> Locator:
    return grid(page).locator(f'[data-row="{row}"][data-column="{column}"]')


def choice(page: Page, row: int, column: int) -> str:
    """Choice that the glyph of a well shows."""
    shown = well(page, row, column).locator("g").first.get_attribute("class") or ""
    return shown.split()[-1]


@pytest.mark.parametrize("front_end", FRONT_ENDS)
def test_a_click_on_a_flagged_well_draws_its_back_side(
    front_end: str, notebook_page: Page, server: Server, traffic: Traffic, tmp_path: Path
) -> None:
    page = opened(notebook_page, server, front_end)
    page.locator(CANVAS).scroll_into_view_if_needed()
    assert not canvas_has_ink(page, CANVAS, INK)
    well(page, 0, 4).click()
    expect(page.get_by_role("heading", name="HE-005 neopentyl bromide")).to_be_visible(timeout=PATIENCE)
    reasons = page.get_by_role("listitem").filter(has_text="beta-branched twice (neopentyl-type)")
    expect(reasons).to_contain_text("Remedy:")
    expect(page.get_by_role("img", name="0% of the approach cone is open")).to_be_visible()
    page.locator(CANVAS).scroll_into_view_if_needed()
    assert wait_for_ink(page, CANVAS, INK), traffic.console_errors
    take_picture(page, tmp_path / f"{front_end}.png")
    assert traffic.foreign == []


def test_the_next_well_changes_the_picture_in_the_same_canvas(notebook_page: Page, server: Server) -> None:
    page = opened(notebook_page, server, "lab")
    well(page, 0, 4).click()
    page.locator(CANVAS).scroll_into_view_if_needed()
    assert wait_for_ink(page, CANVAS, INK)
    first = page.locator(CANVAS).screenshot()
    grid(page).press("ArrowLeft")
    expect(page.get_by_role("heading", name="HE-004 (bromomethyl)cyclohexane")).to_be_visible(timeout=PATIENCE)
    assert wait_for_ink(page, CANVAS, INK)
    assert page.locator(CANVAS).screenshot() != first
    assert page.locator(CANVAS).count() == 1


def test_a_decision_survives_a_restart_of_the_kernel(notebook_page: Page, server: Server) -> None:
    page = opened(notebook_page, server, "lab")
    well(page, 1, 1).click()
    expect(page.get_by_role("heading", name="HN-002 morpholine hydrochloride + HE-002")).to_be_visible(timeout=PATIENCE)
    assert choice(page, 1, 1) == "make"
    page.get_by_placeholder("why (kept with the decision)").fill("wait for the new lot")
    page.get_by_placeholder("why (kept with the decision)").press("Tab")
    page.get_by_role("button", name="Park").click()
    expect(page.get_by_text("Saved: park HN-002 + HE-002.")).to_be_visible()
    assert choice(page, 1, 1) == "park"
    server.stop_kernels()
    page = opened(page, server, "lab")
    assert choice(page, 1, 1) == "park"
    well(page, 1, 1).click()
    expect(page.get_by_text("wait for the new lot")).to_be_visible(timeout=PATIENCE)
    page.get_by_role("button", name="Take back").click()
    expect(page.get_by_text("Taken back.")).to_be_visible()
    assert choice(page, 1, 1) == "make"


def test_a_refused_pair_shows_the_reason_and_no_picture(notebook_page: Page, server: Server) -> None:
    page = opened(notebook_page, server, "lab")
    well(page, 0, 23).click()
    expect(page.get_by_text("No picture: this pair is refused")).to_be_visible(timeout=PATIENCE)
    page.get_by_role("button", name="Make").click()
    expect(page.get_by_role("alert")).to_contain_text("It cannot get a well")


def test_the_files_are_written_from_the_page(notebook_page: Page, server: Server) -> None:
    page = opened(notebook_page, server, "lab")
    page.get_by_role("button", name="Write the files").click()
    expect(page.get_by_text("Written:")).to_be_visible(timeout=PATIENCE)
    written = {path.name for path in server.root.joinpath("out").iterdir()}
    assert {"nucleophiles_filtered.csv", "electrophiles_filtered.csv", "report.html"} <= written
