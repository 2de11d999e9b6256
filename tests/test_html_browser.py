"""The page in a real browser, Debian's Chromium without a window: accessibility, keyboard, narrow screens, print, nothing loaded.

Accessibility is judged by axe-core, which holds a page against WCAG 2.2; reflow is success criterion 1.4.10 (320 CSS pixels
wide, no scrolling of the page in two directions), visible focus 2.4.7, contrast 1.4.3, all from memory.
"""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from pathlib import Path

import pymupdf
import pytest
from annotate_fixture import example, hostile, report_of
from pdf_reading import MM, flat

from calccheck import check_file
from calccheck.annotate.to_html import to_html
from calccheck.model import Report

CHROMIUM = shutil.which("chromium")
if CHROMIUM is None:
    pytest.skip("no browser: install Debian's package chromium", allow_module_level=True)
playwright = pytest.importorskip("playwright.sync_api", reason="no client for the browser: pip install playwright")
axe = pytest.importorskip("axe_playwright_python.base", reason="no axe-core: pip install axe-playwright-python")

SHEETS = Path(__file__).parent.parent / "sheets"
FLAGS = [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-dev-shm-usage",
    "--disable-background-networking",
    "--no-first-run",
]
WIDE, NARROW = 1280, 320  # CSS pixels

# what there is to look at: of each kind the first sheet
KINDS = {
    "for review": "for-review/*.md",
    "no circuit": "TS-109*",
    "AC": "TS-112*",
    "mains": "TS-115*",
    "symbols": "TS-116*",
}
FOUND = {kind: path for kind, name in KINDS.items() for path in sorted(SHEETS.glob(name))[:1]}


@pytest.fixture(scope="module")
def browser() -> Iterator[object]:
    with playwright.sync_playwright() as p:
        started = p.chromium.launch(executable_path=CHROMIUM, args=FLAGS)
        yield started
        started.close()


@pytest.fixture(scope="module")
def files(tmp_path_factory) -> dict[str, Path]:
    """The pages as files, by kind."""
    folder = tmp_path_factory.mktemp("pages")
    reports: dict[str, Report] = {"example": example(), "hostile": hostile()}
    reports |= {kind: check_file(path) for kind, path in FOUND.items()}
    for kind, report in reports.items():
        (folder / f"{kind}.html").write_text(to_html(report), "utf-8")
    return {kind: folder / f"{kind}.html" for kind in reports}


class Seen:
    """A page that is open, with all that it asked for and complained about."""

    def __init__(self, browser, path: Path, width: int = WIDE, scheme: str = "light") -> None:
        self.context = browser.new_context(viewport={"width": width, "height": 900}, color_scheme=scheme)
        self.page = self.context.new_page()
        self.asked: list[str] = []
        self.told: list[str] = []
        self.page.on("request", lambda r: self.asked.append(r.url))
        self.page.on("console", lambda m: self.told.append(m.text))
        self.page.on("pageerror", lambda e: self.told.append(str(e)))
        self.page.on("dialog", lambda d: self.told.append(d.message))
        self.page.goto(path.as_uri())

    def __enter__(self) -> Seen:
        return self

    def __exit__(self, *_: object) -> None:
        self.context.close()


# --- accessibility --------------------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def engine() -> str:
    return axe.AXE_FILE_PATH.read_text("utf-8")


def complaints(page, engine: str) -> list[str]:
    """What axe-core finds fault with: its rule, and where. The page lets no script of its own run; the client's are let in."""
    page.evaluate(engine)
    found = page.evaluate("axe.run(document, {resultTypes: ['violations']})")
    assert len(found["passes"]) > 15  # it has looked: this many rules had something to say, and said it is well
    return [f"{v['id']}: {node['html'][:120]}" for v in found["violations"] for node in v["nodes"]]


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("width", [WIDE, NARROW])
@pytest.mark.parametrize("kind", ["example", "hostile", *FOUND])
def test_no_complaint_of_accessibility(browser, files, engine, kind, width, scheme):
    with Seen(browser, files[kind], width, scheme) as seen:
        assert complaints(seen.page, engine) == []


def test_a_page_with_faults_is_found_out(browser, engine, tmp_path):
    """The checker itself: pale grey on white, an image without words, a link without a name, no language."""
    page = "<!DOCTYPE html><title>x</title><main><h1>x</h1><p style='color:#bbb'>pale</p><img src=''><a href='#'></a></main>"
    (tmp_path / "faulty.html").write_text(page, "utf-8")
    with Seen(browser, tmp_path / "faulty.html") as seen:
        seen.page.evaluate(engine)
        found = {v["id"] for v in seen.page.evaluate("axe.run()")["violations"]}
        assert {"color-contrast", "image-alt", "link-name", "html-has-lang"} <= found


# --- nothing from elsewhere -----------------------------------------------------------------------------------------


@pytest.mark.parametrize("kind", ["example", "hostile", *FOUND])
def test_nothing_is_asked_for_and_nothing_goes_wrong(browser, files, kind):
    with Seen(browser, files[kind]) as seen:
        seen.page.wait_for_load_state("networkidle")
        assert seen.asked == [files[kind].as_uri()]
        assert seen.told == []


def test_hostile_text_is_shown_and_does_nothing(browser, files):
    with Seen(browser, files["hostile"]) as seen:
        shown = seen.page.inner_text("body")
        for words in (
            "<script>alert(1)</script>",
            '<b onclick="x">bold</b>',
            "<!-- c -->",
            '<div onclick="x">#panic()</div>',
        ):
            assert words in shown
        assert seen.page.evaluate("document.scripts.length + document.images.length + document.forms.length") == 0
        assert seen.page.evaluate("document.querySelectorAll('[onclick],[onmouseover],b').length") == 0
        assert seen.told == []


# --- keyboard -------------------------------------------------------------------------------------------------------


def focused(page) -> dict[str, str]:
    return page.evaluate(
        "() => {const e = document.activeElement; const s = getComputedStyle(e); return {id: e.id, href: e.getAttribute('href') || '',"
        " text: e.innerText, style: s.outlineStyle, width: s.outlineWidth, top: e.getBoundingClientRect().top}}"
    )


def tab_to(page, wanted, at_most: int) -> dict[str, str]:
    for _ in range(at_most):
        page.keyboard.press("Tab")
        here = focused(page)
        if wanted(here):
            return here
    raise AssertionError(f"not reached by {at_most} tabs")


def test_the_first_keys_lead_to_the_list_from_there_to_the_place_and_back(browser, files):
    with Seen(browser, files["for review"]) as seen:
        page = seen.page
        page.keyboard.press("Tab")
        assert focused(page)["text"] == "To the list of findings"
        page.keyboard.press("Enter")
        first = tab_to(page, lambda e: e["href"].startswith("#c"), 1)
        key = first["href"][1:]
        page.keyboard.press("Enter")
        assert page.url.endswith(f"#{key}")
        assert focused(page)["id"] == key
        assert 0 <= page.locator(f"#{key}").bounding_box()["y"] < 900  # the place is on the screen
        back = tab_to(page, lambda e: e["href"] == f"#l-{key}", 12)
        assert back["text"] == "to the list"
        page.keyboard.press("Enter")
        assert 0 <= page.locator(f"#l-{key}").bounding_box()["y"] < 900
        assert tab_to(page, lambda e: True, 1)["href"] == first["href"]


def test_every_place_leads_on_to_the_next(browser, files):
    """From note to note, each the next in the sheet, until all that is listed was seen."""
    with Seen(browser, files["for review"]) as seen:
        page = seen.page
        listed = page.locator(".findings li").count()
        onward = page.locator(".beside a:has-text('to the next')")
        assert onward.count() == listed - 1
        heights = []
        for k in range(onward.count()):
            target = onward.nth(k).get_attribute("href")
            heights.append(page.evaluate(f"document.querySelector('{target}').getBoundingClientRect().top"))
        assert heights == sorted(heights)


def test_focus_is_seen_wherever_it_goes(browser, files):
    with Seen(browser, files["for review"]) as seen:
        stops = []
        for _ in range(200):
            seen.page.keyboard.press("Tab")
            here = focused(seen.page)
            if not here["text"] or (here["href"], here["id"], here["text"]) in stops:
                break
            stops.append((here["href"], here["id"], here["text"]))
            assert here["style"] == "solid"
            assert float(here["width"].removesuffix("px")) >= 2
        links = seen.page.locator("a, [tabindex='0']").count()
        assert len(stops) >= min(links, 60)


# --- narrow screens and paper ---------------------------------------------------------------------------------------


CUT = """() => {
  const out = [], wide = document.documentElement.clientWidth;
  for (const e of document.querySelectorAll('body *')) {
    if (e.closest('svg') || e.closest('.skip') || e.closest('.scroll, pre') && !e.matches('.scroll, pre')) continue;
    const box = e.getBoundingClientRect();
    if (box.width && (box.right > wide + 1 || box.left < -1)) out.push(e.outerHTML.slice(0, 120));
    const style = getComputedStyle(e);
    if (e.scrollWidth > e.clientWidth + 1 && !['auto', 'scroll'].includes(style.overflowX) && style.display != 'inline')
      out.push('over: ' + e.outerHTML.slice(0, 120));
    if (style.overflowX == 'hidden' || style.textOverflow == 'ellipsis') out.push('hidden: ' + e.outerHTML.slice(0, 120));
  }
  return out;
}"""


@pytest.mark.parametrize("kind", ["example", "hostile", *FOUND])
@pytest.mark.parametrize("width", [NARROW, WIDE])
def test_nothing_is_cut_and_the_page_scrolls_one_way_only(browser, files, kind, width):
    with Seen(browser, files[kind], width) as seen:
        assert seen.page.evaluate(CUT) == []
        assert seen.page.evaluate("document.documentElement.scrollWidth - document.documentElement.clientWidth") <= 0


def test_long_words_are_parted_rather_than_cut(browser, tmp_path):
    long = "x" * 300
    text = f"# {long}\n\n{long} `{long}`\n\n| {long} | b |\n|---|---|\n| {long} | {long} |\n\n```circuit\n# {long}\n```\n\n- {long}\n"
    (tmp_path / "long.html").write_text(to_html(report_of(text)), "utf-8")
    with Seen(browser, tmp_path / "long.html", NARROW) as seen:
        assert seen.page.evaluate(CUT) == []


@pytest.mark.parametrize("kind", ["example", *FOUND])
def test_on_paper_all_words_stand_inside_the_margins(browser, files, kind):
    """The printed page holds every claim's row, its words within the paper, none of the ways to jump about."""
    with Seen(browser, files[kind], scheme="dark") as seen:
        seen.page.emulate_media(media="print")
        assert seen.page.evaluate("getComputedStyle(document.body).backgroundColor") == "rgb(255, 255, 255)"
        assert not seen.page.locator(".jump").first.is_visible()
        margin = "15mm"
        paper = seen.page.pdf(format="A4", margin=dict.fromkeys(("top", "bottom", "left", "right"), margin))
        rows = [flat(t) for t in seen.page.locator("table.record tbody tr").all_inner_texts()]
    with pymupdf.open(stream=paper) as pages:
        words = [(page.rect.width, word) for page in pages for word in page.get_text("words")]
    told = flat("".join(word[4] for _, word in words))
    assert rows
    assert [row for row in rows if row not in told] == []
    assert "tothelist" not in told
    assert all(word[0] > 14 * MM and word[2] < width - 14 * MM for width, word in words)
