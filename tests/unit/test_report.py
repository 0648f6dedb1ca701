"""The report as a browser and a reader without one see it."""

from __future__ import annotations

import base64
import hashlib
import json
import os
import re
import shutil
import subprocess
import sys
from collections import Counter
from html.parser import HTMLParser
from pathlib import Path

import pandas
import pytest
from playwright.sync_api import expect, sync_playwright

from libtool.blocks import read_blocks
from libtool.errors import LibtoolError
from libtool.export import report, write_report
from libtool.export.grid_svg import VERDICT_LETTERS
from libtool.export.structure_svg import block_svg
from libtool.plate import PlateMap, lay_out, plate_format
from libtool.records import Choice, Verdict
from libtool.triage import Journal, Session, build_library
from tests.browser.page import FLAGS, wait_for_ink, watch

HOSTILE = '<img src=x onerror="alert(1)">'
CLOSING = "</script><script>alert(2)</script>"
NUCLEOPHILES = {"N1": "C1CCNCC1", "N2": "NCc1ccccc1", HOSTILE: "Cc1cc[nH]n1"}
ELECTROPHILES = {
    "E1": "CCCBr",
    "E2": "CC(C)CBr",
    "E3": "CC(C)(C)CBr",
    "E4": "CC(C)(C)Br",
    "E5": "CCC[C@H](C)OS(C)(=O)=O",
    "E6": "CCCCO",
    "E7": "BrC12CC3CC(CC(C3)C1)C2",
    "E8": "COCCl",
    CLOSING: "CC(C)CCl",
    "E9": "C1CC(",
}
FLAGGED = {"E2", "E3", "E4", "E5", "E6", "E7", CLOSING}


class Page(HTMLParser):
    """Elements, attributes and text of a document."""

    VOID = ("meta", "br", "path", "circle", "ellipse")

    def __init__(self, text: str) -> None:
        super().__init__(convert_charrefs=True)
        self.count: Counter[str] = Counter()
        self.attributes: list[tuple[str, str, str]] = []
        self.inside: dict[str, list[str]] = {"script": [], "style": []}
        self.text = ""
        self.open: list[str] = []
        self.feed(text)
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.count[tag] += 1
        self.attributes += [(tag, name, value or "") for name, value in attrs]
        if tag not in self.VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.count[tag] += 1
        self.attributes += [(tag, name, value or "") for name, value in attrs]

    def handle_endtag(self, tag: str) -> None:
        if tag not in self.VOID:
            assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if self.open and self.open[-1] in self.inside:
            self.inside[self.open[-1]].append(data)
        else:
            self.text += data

    def values(self, name: str) -> list[str]:
        return [value for _, attribute, value in self.attributes if attribute == name]


def make_session(folder: Path) -> Session:
    lists = [
        read_blocks(
            pandas.DataFrame([(i, f"{i} {HOSTILE}", s) for i, s in found.items()], columns=["id", "name", "smiles"])
        )
        for found in (NUCLEOPHILES, ELECTROPHILES)
    ]
    session = Session(build_library(lists[0], lists[1]), Journal(folder / "decisions.sqlite", who=HOSTILE))
    session.decide([("N1", "E3")], Choice.MAKE, f"try {HOSTILE}")
    return session


def plate_of(session: Session) -> PlateMap:
    return lay_out(session.to_make(), plate_format(96))


@pytest.fixture(scope="module")
def session(tmp_path_factory: pytest.TempPathFactory) -> Session:
    return make_session(tmp_path_factory.mktemp("project"))


@pytest.fixture(scope="module")
def file(session: Session, tmp_path_factory: pytest.TempPathFactory) -> Path:
    return write_report(session, plate_of(session), tmp_path_factory.mktemp("out") / "report.html")


@pytest.fixture(scope="module")
def page(file: Path) -> Page:
    return Page(file.read_text("utf-8"))


def scenes_of(page: Page) -> list[dict[str, object]]:
    return list(json.loads(page.inside["script"][0]))


def test_every_element_is_closed(page: Page) -> None:
    assert page.open == []
    assert page.count["section"] == page.count["h2"] == 8


def test_nothing_is_asked_from_anywhere(page: Page) -> None:
    assert page.values("src") == []
    assert page.count["link"] == page.count["img"] == page.count["iframe"] == 0
    targets = set(page.values("id"))
    hrefs = page.values("href")
    assert hrefs
    assert {href.removeprefix("#") for href in hrefs} <= targets
    assert all(href.startswith("#") for href in hrefs)
    assert "url(" not in page.inside["style"][0]
    assert "@import" not in page.inside["style"][0]


def test_the_policy_allows_only_what_stands_in_the_page(page: Page) -> None:
    (policy,) = [value for _, name, value in page.attributes if name == "content" and "default-src" in value]
    rules = dict(rule.split(" ", 1) for rule in policy.split("; "))
    assert rules["default-src"] == rules["base-uri"] == rules["form-action"] == "'none'"

    def digest(text: str) -> str:
        return f"'sha256-{base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()}'"

    assert rules["style-src"] == digest(page.inside["style"][0])
    assert rules["script-src"] == f"{digest(page.inside['script'][2])} blob:"
    assert set(rules) == {"default-src", "script-src", "style-src", "base-uri", "form-action"}
    # The policy forbids both; a drawing that had them would lose its colours.
    assert page.values("style") == []
    assert [name for _, name, _ in page.attributes if name.startswith("on")] == []


def test_hostile_text_is_shown_and_does_nothing(page: Page) -> None:
    assert page.count["script"] == 3
    assert HOSTILE in page.text
    assert CLOSING in page.text
    assert f"try {HOSTILE}" in page.text
    assert "<" not in page.inside["script"][0]


def test_one_card_per_flagged_electrophile_and_the_hindered_one_is_first(page: Page) -> None:
    scenes = scenes_of(page)
    assert page.count["article"] == len(scenes) == len(FLAGGED)
    assert page.values("data-scene") == [str(number) for number in range(len(FLAGGED))]
    assert {str(s["title"]).removesuffix(f" {HOSTILE}").split(" ")[0] for s in scenes} == {
        name.split(" ")[0] for name in FLAGGED
    }
    assert str(scenes[0]["title"]).startswith("E3 ")
    for found in scenes:
        assert str(found["sentence"]) in page.text
        assert isinstance(found["calls"], list)
        assert found["calls"][0][0] == "addModel"


def test_each_flag_has_its_sentence_remedy_and_source(session: Session, page: Page) -> None:
    for reagent in session.library.columns:
        for flag in reagent.flags if reagent.block.id in FLAGGED else ():
            assert flag.sentence in page.text
            assert flag.remedy.sentence in page.text
    assert "Streitwieser" in page.text


def test_what_is_refused_is_named_and_gets_no_advice(session: Session, page: Page) -> None:
    refused = next(c for c in session.library.columns if c.block.id == "E8")
    assert refused.hazards[0].what in page.text
    assert refused.hazards[0].action in page.text
    assert refused.flags
    assert all(flag.remedy.sentence not in page.text for flag in refused.flags)
    assert all("E8" not in str(s["title"]).split(" ")[0] for s in scenes_of(page))


def test_the_plate_has_one_glyph_per_well_and_verdicts_differ_without_colour(session: Session, file: Path) -> None:
    plate = re.search(r'<svg class="grid"[^>]*aria-label="Plate 1 of 1">.*?</svg>', file.read_text("utf-8"), re.DOTALL)
    assert plate
    assert len(re.findall(r"<title>", plate[0])) == len(session.to_make()) == 10
    assert plate[0].count('class="empty"') == 96 - 10
    assert len(set(VERDICT_LETTERS.values())) == len(Verdict)


def test_rows_that_were_not_used_are_told(page: Page) -> None:
    assert "C1CC(" in page.text
    assert "Draw the compound again" in page.text


def test_drawings_keep_colours_and_bonds(session: Session) -> None:
    block = next(c.block for c in session.library.columns if c.block.id == "E3")
    drawing = Page(block_svg(block, reacting=[4], flagged=[0]))
    assert drawing.open == []
    assert drawing.values("style") == []
    strokes = Counter(drawing.values("stroke"))
    # Four carbon-carbon bonds and half of the bond to bromine are black.
    assert strokes["#000000"] >= 5
    assert len([fill for fill in drawing.values("fill") if fill in {"#FCC984", "#BCD6F2"}]) == 2


def test_more_views_than_fit_are_announced(session: Session, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(report, "MOST_VIEWS", 2)
    seen: list[tuple[int, int]] = []
    path = write_report(
        session, plate_of(session), tmp_path / "r.html", progress=lambda done, total: seen.append((done, total))
    )
    page = Page(path.read_text("utf-8"))
    assert page.count["article"] == 2
    assert f"The first 2 of {len(FLAGGED)} flagged electrophiles" in page.text
    assert seen == [(1, 2), (2, 2)]


def test_without_threedmol_the_words_remain(session: Session, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def missing() -> bytes:
        raise LibtoolError("3Dmol.js is not here")

    monkeypatch.setattr(report, "script_gzip", missing)
    page = Page(write_report(session, plate_of(session), tmp_path / "r.html").read_text("utf-8"))
    assert "3Dmol.js is not here" in page.text
    assert page.count["article"] == len(FLAGGED)


def test_the_screen_packages_are_not_needed(tmp_path: Path, root_folder: Path) -> None:
    code = """import sys
for name in ("py3Dmol", "ipywidgets", "anywidget", "IPython"):
    sys.modules[name] = None
import pandas
from libtool.blocks import read_blocks
from libtool.export import write_all
from libtool.triage import Journal, Session, build_library
lists = [read_blocks(pandas.DataFrame({"id": ["A"], "smiles": [s]})) for s in ("C1CCNCC1", "CC(C)(C)CBr")]
write_all(Session(build_library(*lists), Journal(sys.argv[1] + "/d.sqlite", who="a")), sys.argv[1])
assert "libtool.views" not in sys.modules"""
    subprocess.run([sys.executable, "-c", code, str(tmp_path)], cwd=root_folder, check=True)
    assert "Show the approach" in (tmp_path / "report.html").read_text("utf-8")


@pytest.mark.browser
def test_a_browser_draws_it_without_a_request(file: Path) -> None:
    chromium = shutil.which("/usr/bin/chromium") or shutil.which("chromium") or shutil.which("google-chrome")
    if chromium is None:
        reason = "no browser found; on Debian: apt-get install chromium"
        if os.environ.get("LIBTOOL_REQUIRE_BROWSER") == "1":
            pytest.fail(reason, pytrace=False)
        pytest.skip(reason)
    with sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=chromium, args=list(FLAGS))
        context = browser.new_context(viewport={"width": 1280, "height": 900})
        traffic = watch(context)
        page = context.new_page()
        page.on("dialog", lambda dialog: pytest.fail(f"hostile text ran: {dialog.message}"))
        page.goto(file.as_uri())
        viewer = page.locator("#viewer")
        expect(viewer).to_have_attribute("data-drawn", "0", timeout=30_000)
        expect(page.locator("#viewer-title")).to_contain_text("E3 ")
        assert wait_for_ink(page, "#viewer canvas")
        page.get_by_role("button", name="Show the approach").nth(3).click()
        expect(viewer).to_have_attribute("data-drawn", "3")
        assert wait_for_ink(page, "#viewer canvas")
        # One drawing context, however many pictures were shown.
        expect(page.locator("canvas")).to_have_count(1)
        # The drawing of a structure has kept its colours under the policy.
        ground = page.locator("svg.mol ellipse").first.evaluate("node => getComputedStyle(node).fill")
        assert ground == "rgb(252, 201, 132)"
        assert page.evaluate("document.documentElement.scrollWidth <= document.documentElement.clientWidth")
        assert [url for url in traffic.requests if not url.startswith(("file:", "blob:"))] == []
        assert traffic.foreign == []
        assert traffic.console_errors == []
        browser.close()
