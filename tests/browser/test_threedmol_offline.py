"""py3Dmol draws from the copy in the package, and nothing else is asked.

The notebooks leave py3Dmol's own public address in place: if the copy did not
get there first, the request would be seen and refused.
"""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

import nbformat
import pytest
from nbformat.v4 import new_code_cell, new_notebook
from playwright.sync_api import Page, expect
from rdkit import Chem
from rdkit.Chem import rdDistGeom

from libtool.assets.inline import loader_html
from tests.browser.page import Traffic, canvas_has_ink, run_all_cells, take_picture, wait_for_ink, wait_until
from tests.browser.server import Server

FRONT_ENDS = ("lab", "notebook", "voila")
CANVAS = "div[id^='3dmolviewer_'] canvas"
VIEW = """import py3Dmol
from IPython.display import HTML
from libtool.assets.inline import loader_html
view = py3Dmol.view(width=400, height=300)
{commands}
HTML({loader} + view._make_html())"""


def mol_block() -> str:
    molecule = Chem.AddHs(Chem.MolFromSmiles("CC(C)(C)CBr"))
    rdDistGeom.EmbedMolecule(molecule, randomSeed=7)
    return Chem.MolToMolBlock(molecule)


def view_cell(*, molecule: bool = True, loader: bool = True) -> str:
    drawing = f"view.addModel({mol_block()!r}, 'sdf')\nview.setStyle({{'stick': {{}}}})\nview.zoomTo()"
    return VIEW.format(commands=drawing if molecule else "", loader="loader_html()" if loader else "''")


def write(server: Server, name: str, *cells: str) -> str:
    book = new_notebook(cells=[new_code_cell(cell) for cell in cells])
    book.metadata["kernelspec"] = {"name": "python3", "display_name": "Python 3", "language": "python"}
    # Voila's own page asks public addresses for fonts; ours does not.
    book.metadata["voila"] = {"template": "waldenbench"}
    nbformat.write(book, server.root / name)
    return name


@pytest.fixture
def show(notebook_page: Page, server: Server) -> Callable[..., Page]:
    """Write a notebook, open it in a front end and run it."""

    def opened(front_end: str, *cells: str) -> Page:
        name = write(server, f"drawing_{front_end}.ipynb", *cells)
        address: str = getattr(server, front_end)(name)
        # Voila answers when the notebook has run, the other two when the page is there.
        notebook_page.goto(address, timeout=120_000)
        if front_end != "voila":
            run_all_cells(notebook_page)
        return notebook_page

    return opened


@pytest.mark.parametrize("front_end", FRONT_ENDS)
def test_molecules_are_drawn_without_a_foreign_request(
    front_end: str, show: Callable[..., Page], traffic: Traffic, tmp_path: Path
) -> None:
    page = show(front_end, view_cell(), view_cell())
    for number in range(2):
        expect(page.locator(CANVAS).nth(number)).to_be_attached()
        page.locator(CANVAS).nth(number).scroll_into_view_if_needed()
        assert wait_for_ink(page, f"{CANVAS} >> nth={number}"), traffic.console_errors
    take_picture(page, tmp_path / f"{front_end}.png")
    assert traffic.foreign == [], traffic.foreign
    # One copy on the page although two outputs carried it.
    assert page.locator("head script[src^='blob:']").count() == 1
    assert page.evaluate("typeof window.$3Dmol.createViewer") == "function"


def test_without_the_copy_the_foreign_request_is_seen_and_refused(show: Callable[..., Page], traffic: Traffic) -> None:
    page = show("lab", view_cell(loader=False))
    wait_until(page, "() => typeof window.$3Dmolpromise !== 'undefined'")
    assert any(url.endswith("3Dmol-min.js") for url in traffic.foreign)
    assert page.locator(CANVAS).count() == 0


def test_an_empty_view_shows_no_ink(show: Callable[..., Page]) -> None:
    page = show("lab", view_cell(molecule=False))
    expect(page.locator(CANVAS)).to_be_visible()
    assert not canvas_has_ink(page, CANVAS)


def test_a_page_with_an_amd_loader_keeps_it(page: Page) -> None:
    page.set_content(f"<body><script>window.define = () => 0; define.amd = {{}};</script>{loader_html()}</body>")
    page.evaluate("() => window.$3Dmolpromise")
    kind = page.evaluate("[typeof window.$3Dmol.createViewer, typeof window.define.amd]")
    assert kind == ["function", "object"]


def test_a_page_that_forbids_the_script_says_so(page: Page) -> None:
    policy = "script-src 'unsafe-inline'"
    page.set_content(f'<meta http-equiv="Content-Security-Policy" content="{policy}"><body>{loader_html()}</body>')
    expect(page.get_by_role("alert")).to_contain_text("3Dmol.js did not start")


def test_the_loader_is_one_script_element() -> None:
    html = loader_html()
    assert html.count("<script") == html.count("</script>") == 1
    assert json.dumps("GZIP_BASE64") not in html
