"""The page for the screen: well formed, closed to the outside, readable without colour, every jump with a target.

The parser is the standard library's; contrast is worked by the formula of WCAG 2.2 (relative luminance, contrast ratio).
"""

from __future__ import annotations

import os
import re
import subprocess
import sys
from base64 import b64encode
from dataclasses import dataclass, field, replace
from datetime import date
from hashlib import sha256
from html.parser import HTMLParser
from itertools import pairwise
from pathlib import Path

import pytest
from annotate_fixture import EXAMPLE, HOSTILE, example, hostile, report_of, said

from calccheck import check_text
from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import LIMITS, entries
from calccheck.annotate.to_html import to_html
from calccheck.model import Claim, Finding, Judged, Settings, Signature
from calccheck.read.maths import parse_maths
from calccheck.source import Span, whole

VOID = {"meta", "br", "hr"}  # of the elements without an end (HTML Living Standard, 13.1.2) those that the page uses
TAGS = frozenset(
    re.findall(
        r"\w+",
        "html head meta title style body a header h1 h2 h3 h4 h5 h6 dl div dt dd section p strong nav ol ul li code pre "
        "span main mark sup em s blockquote table thead tbody tr th td br hr",
    )
)
ATTRIBUTES = {
    "lang", "charset", "http-equiv", "content", "name", "class", "href", "id", "aria-labelledby", "aria-label", "role",
    "tabindex", "scope", "start", "data-line", "rel",
}  # fmt: skip


@dataclass
class Page(HTMLParser):
    """A page taken apart, with a complaint for every tag that is out of place."""

    starts: list[tuple[str, dict[str, str | None]]] = field(default_factory=list)
    open: list[str] = field(default_factory=list)
    faults: list[str] = field(default_factory=list)
    texts: list[tuple[str, tuple[str, ...]]] = field(default_factory=list)

    def __post_init__(self) -> None:
        super().__init__(convert_charrefs=True)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.starts.append((tag, dict(attrs)))
        if len(dict(attrs)) != len(attrs):
            self.faults.append(f"an attribute twice in {tag}")
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        if not self.open or self.open.pop() != tag:
            self.faults.append(f"</{tag}> at {self.getpos()}")

    def handle_data(self, data: str) -> None:
        self.texts.append((data, tuple(self.open)))

    def handle_comment(self, data: str) -> None:
        self.faults.append(f"a comment: {data}")

    def handle_pi(self, data: str) -> None:
        self.faults.append(f"an instruction: {data}")

    def handle_decl(self, decl: str) -> None:
        if decl != "DOCTYPE html":
            self.faults.append(f"a declaration: {decl}")

    def text(self, inside: str = "body") -> str:
        return "".join(t for t, path in self.texts if inside in path and "style" not in path)

    def ids(self) -> list[str]:
        return [a["id"] or "" for _, a in self.starts if "id" in a]

    def jumps(self) -> list[str]:
        return [(a["href"] or "")[1:] for _, a in self.starts if (a.get("href") or "").startswith("#")]


def parsed(html: str) -> Page:
    page = Page()
    page.feed(html)
    page.close()
    return page


@pytest.fixture(scope="module")
def page() -> Page:
    return parsed(to_html(example()))


@pytest.fixture(scope="module")
def nasty() -> Page:
    return parsed(to_html(hostile()))


def flat(text: str) -> str:
    return re.sub(r"\s+", " ", text)


# --- form -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("which", ["page", "nasty"])
def test_well_formed_with_known_tags_only(which, request):
    page = request.getfixturevalue(which)
    assert page.faults == []
    assert page.open == []
    assert {tag for tag, _ in page.starts} <= TAGS
    assert {name for _, attributes in page.starts for name in attributes} <= ATTRIBUTES


@pytest.mark.parametrize("which", ["page", "nasty"])
def test_every_jump_has_its_target_and_every_id_is_one(which, request):
    page = request.getfixturevalue(which)
    ids = page.ids()
    assert len(ids) == len(set(ids))
    assert page.jumps()
    assert set(page.jumps()) <= set(ids)
    labels = {a["aria-labelledby"] for _, a in page.starts if "aria-labelledby" in a}
    assert labels <= set(ids)


@pytest.mark.parametrize("which", ["page", "nasty"])
def test_nothing_is_loaded_and_nothing_runs(which, request):
    page = request.getfixturevalue(which)
    style = "".join(t for t, path in page.texts if path[-1:] == ("style",))
    lock = b64encode(sha256(style.encode()).digest()).decode()  # CSP level 3, 6.6.3.3: the hash of the element's text
    (policy,) = [a["content"] for tag, a in page.starts if tag == "meta" and a.get("http-equiv")]
    assert policy == f"default-src 'none'; style-src 'sha256-{lock}'; base-uri 'none'; form-action 'none'"
    assert not re.search(r"url\(|@import|expression", style)
    outward = [a["href"] or "" for _, a in page.starts if not (a.get("href") or "#").startswith("#")]
    assert all(href.startswith("https://") for href in outward)
    assert not [name for _, a in page.starts for name in a if name.startswith("on") or name in ("src", "style")]


def test_language_title_and_landmarks(page):
    tags = [tag for tag, _ in page.starts]
    assert dict(page.starts)["html"]["lang"] == "en"
    assert page.text("title").startswith("✗ differs: Two resistors")
    assert tags.count("main") == tags.count("h1") == 1
    assert {"header", "nav", "main"} <= set(tags)
    levels = [int(t[1]) for t in tags if re.fullmatch("h[1-6]", t)]
    assert all(b - a <= 1 for a, b in pairwise(levels))


def test_headings_skip_no_level_even_where_the_sheet_does():
    tags = [tag for tag, _ in parsed(to_html(report_of("### Three\n\n###### Six\n\n# One\n\n#### Four\n"))).starts]
    levels = [int(t[1]) for t in tags if re.fullmatch("h[1-6]", t)]
    assert all(b - a <= 1 for a, b in pairwise(levels))


def test_keyboard_reaches_all_in_the_order_of_the_page(page):
    assert {a["tabindex"] for _, a in page.starts if "tabindex" in a} == {"0"}  # what scrolls, and never out of turn
    first = [a["href"] for tag, a in page.starts if tag == "a"][:3]
    assert first == ["#findings", "#sheet", "#record"]


def test_print_and_dark_have_their_own_look(page):
    style = page.text("style") or "".join(t for t, path in page.texts if "style" in path)
    dark = style[style.rindex("prefers-color-scheme: dark") :]
    assert "@media print" in style
    for kind, mark in MARKS.items():
        assert f".ink-{kind}{{color:{mark.ink}}}" in style
        assert f".ink-{kind}{{color:{mark.night_ink}}}" in dark
        assert f".tint-{kind}{{background:{mark.night_tint}}}" in dark


def luminance(colour: str) -> float:
    parts = [int(colour[k : k + 2], 16) / 255 for k in (1, 3, 5)]
    red, green, blue = (c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def contrast(a: str, b: str) -> float:
    light, dark = sorted((luminance(a), luminance(b)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def test_contrast_is_worked_as_the_standard_does():
    assert contrast("#000000", "#ffffff") == pytest.approx(21)  # WCAG 2.2, definition of contrast ratio: 1 to 21
    assert contrast("#777777", "#ffffff") == pytest.approx(4.48, abs=0.01)  # the known grey just below the limit


def test_every_text_has_contrast_enough_by_day_and_by_night(page):
    """WCAG 2.2, 1.4.3: 4.5 to 1."""
    style = "".join(t for t, path in page.texts if "style" in path)
    papers = {name: re.findall(rf"--{name}: (#\w+)", style) for name in ("paper", "ink", "soft", "band", "link")}
    for k in (0, 1):
        paper, band = (_long(papers[name][k]) for name in ("paper", "band"))
        for name in ("ink", "soft", "link"):
            assert contrast(_long(papers[name][k]), paper) >= 4.5
            assert contrast(_long(papers[name][k]), band) >= 4.5
        for mark in MARKS.values():
            ink, tint = (mark.ink, mark.tint) if k == 0 else (mark.night_ink, mark.night_tint)
            assert min(contrast(ink, ground) for ground in (paper, band, tint)) >= 4.5
            assert contrast(_long(papers["ink"][k]), tint) >= 4.5


def _long(colour: str) -> str:
    return colour if len(colour) == 7 else "#" + "".join(2 * c for c in colour[1:])


# --- contents -------------------------------------------------------------------------------------------------------


def test_every_claim_is_tinted_and_marked_by_sign_word_and_number_where_it_stands(page):
    shown = flat(page.text("main"))
    for entry in entries(example()):
        assert f"{MARKS[entry.kind].label}{entry.number}" in shown
        anchors = [a for tag, a in page.starts if tag == "a" and a.get("id") == entry.key]
        assert [a["href"] for a in anchors] == [f"#r-{entry.key}"]
        assert f"r-{entry.key}" in page.ids()
        assert entry.key in page.jumps()
    for claim in ("V_b = 3 V✓ agrees1", "I_R1 = 1.50 A✗ differs2", "7 W✗ differs4", "V_b is 3.3 V? unchecked7"):
        assert claim in shown
    tinted = ["".join(t for t, path in page.texts if "mark" in path)]
    assert "V_b is 3.3 V" in tinted[0]
    assert "(1 A)² × 6 Ω" in tinted[0]


def test_the_worst_stands_first_and_leads_there_and_back(page):
    nav = flat(page.text("nav"))
    order = ["differs2", "differs4", "unchecked7", "errorF2", "cautionF1", "accepted6"]
    assert sorted(order, key=nav.index) == order
    for key in ("c2", "c4", "c7", "f2", "f1", "c6"):
        assert f"l-{key}" in page.jumps()
    assert "I_R1 is not what the circuit gives." in nav
    assert "The number follows if R2 is left out." in nav
    assert "line 13Recomputed 1 A (+50 %)." in nav


def test_record_limits_and_figures(page):
    shown = flat(page.text())
    opening, points, closing = LIMITS
    for sentence in (opening, *points, closing, "3.1 × 10⁻¹⁶", "given Vmin = 2.5 V", "stated in this sheet"):
        assert sentence in shown
    assert sha256(EXAMPLE.encode()).hexdigest() in shown


def test_lines_of_fences_bear_the_sheets_numbers(page):
    numbers = {a["data-line"] for _, a in page.starts if "data-line" in a}
    wanted = {str(k) for k, s in enumerate(EXAMPLE.splitlines(), 1) if s.startswith(("R1:", "P_R1", "given"))}
    assert wanted <= numbers


def test_maths_stands_as_written():
    text = "# Head\n\nThe sum $a_1 + \\frac{b}{c}$ and\n\n$$\nx = \\sqrt{2} < 3\n$$\n"
    shown = parsed(to_html(report_of(text))).text("code")
    assert "$ a_1 + \\frac{b}{c} $" in shown
    assert "x = \\sqrt{2} < 3" in shown


MATHS_TAGS = {"math", "mrow", "mi", "mo", "mtext", "mfrac", "msub", "msup", "msqrt", "mspace"}  # of MathML Core


def test_claims_in_maths_are_set_as_they_were_read():
    text = "# Head\n\nThen $V_\\mathrm{b} = \\frac{a < c}{2\\,\\mathrm{V}}$ and $V_\\mathrm{b} = \\frac{6}{2}\\,\\mathrm{V} = 3\\,\\mathrm{V}$.\n"
    claim = "V_\\mathrm{b} = \\frac{6}{2}\\,\\mathrm{V} = 3\\,\\mathrm{V}"
    span = Span(text.index(claim), text.index(claim) + len(claim))
    read = Claim(claim, span, "math", 0, parse_maths(whole(claim, span.start)))
    page = parsed(to_html(report_of(text, Judged(read, "differs", message="said"))))
    assert page.faults == []
    assert MATHS_TAGS >= {t for t, _ in page.starts} - TAGS >= {"math", "mfrac", "msub"}
    assert "3\xa0V✗ differs1" in page.text("main")
    assert "$ V_\\mathrm{b} = \\frac{a < c}" in page.text("code")  # what claims nothing stands as written
    formulas = [t for t, path in page.texts if "math" in path]
    assert not [t for t in formulas if "\\" in t]
    assert formulas[:3] == ["V", "b", "="]


def test_hostile_text_is_shown_as_text(nasty):
    shown = nasty.text()
    for piece in (
        "<script>alert(1)</script>", '<b onclick="x">bold</b> & #', "[click](javascript:alert(1))", "c2 (annot:c1)",
        '<div onclick="x">#panic()</div>', 'no "]) #panic() <b>&amp;</b> \\ $x$', 'circuit #bad "info', "<!-- c -->",
        'V_<i> = "]#panic()',
    ):  # fmt: skip
        assert piece in shown
    assert not set("\u202e\u2066\u00ad\u0007\u200b") & set(shown)
    for name in ("U+202E", "U+2066", "U+0007", "U+00AD", "U+200B"):
        assert name in shown
    assert "\U0001f600" in shown  # a browser has fonts for it


def test_only_safe_addresses_become_links(nasty):
    outward = [a["href"] or "" for _, a in nasty.starts if not (a.get("href") or "#").startswith("#")]
    assert outward == ["https://e.org/%22onmouseover=%22x"]


def test_a_mark_inside_a_link_is_no_link_in_a_link():
    text = "# Head\n\n[see `V_b = 3 V` here](https://example.org/)\n"
    page = parsed(to_html(report_of(text, said(text, "V_b = 3 V", "agrees", place="code"))))
    assert page.faults == []
    assert "c1" in page.ids()
    assert "(https://example.org/)" in page.text()


def test_same_report_same_page():
    assert to_html(example()) == to_html(example())
    assert HOSTILE.splitlines()[1] not in to_html(hostile())  # never unescaped


@pytest.mark.parametrize(("seed", "zone"), [("7", "Asia/Tokyo"), ("0", "America/St_Johns")])
def test_same_sheet_same_bytes_in_another_process_and_folder(tmp_path, seed, zone):
    """A sheet read and judged anew there, under another seed for sets and dictionaries, in another time zone and language."""
    whole = Path(__file__).parent.parent / "sheets"
    (sheet,) = whole.glob("for-review/TS-111*.md")
    (tmp_path / "elsewhere").mkdir()
    here = to_html(check_text("TS-111.md", sheet.read_text("utf-8")))
    code = (
        "import sys; from calccheck import check_text; from calccheck.annotate.to_html import to_html; "
        "sheet = open(sys.argv[1], encoding='utf-8').read(); "
        "sys.stdout.buffer.write(to_html(check_text('TS-111.md', sheet)).encode())"
    )
    environment = {**os.environ, "PYTHONHASHSEED": seed, "TZ": zone, "LC_ALL": "C", "TMPDIR": str(tmp_path)}
    ran = subprocess.run(
        [sys.executable, "-c", code, str(sheet)],
        cwd=tmp_path / "elsewhere", env=environment, capture_output=True, check=True,
    )  # fmt: skip
    assert ran.stdout == here.encode()


def test_the_day_of_the_check_is_told_only_where_something_hangs_on_it():
    """A sheet without waivers is the same page on every day; one whose waiver runs out says by which day it was judged."""
    sheets = Path(__file__).parent.parent / "sheets"
    plain, waived = ((next(sheets.glob(f"{name}*.md"))).read_text("utf-8") for name in ("TS-101", "TS-107"))
    one, other = (Settings(on=date(2026, month, 4)) for month in (1, 7))
    assert to_html(check_text("a.md", plain, one)) == to_html(check_text("a.md", plain, other))
    assert "days judged on 2026-07-04" in to_html(check_text("a.md", waived, other))


def test_settings_and_signatures_stand_in_the_record():
    report = example()
    holds = Signature("originator", "A <b>", date(2026, 3, 4), 1, "0", {}, Span(0, 3))
    doubted = Signature("checker", "C D", date(2026, 3, 5), 1, "0", {}, Span(4, 7))
    void = Finding("signature", "error", "the checker's signature is void", doubted.span)
    reading = replace(report.reading, signatures=(holds, doubted), settings=Settings(on=date(2026, 4, 1)))
    shown = flat(parsed(to_html(replace(report, reading=reading, findings=(void,)))).text())
    assert "carry 0.5 %, approx 5 %, phasors rms, derate 1, preferred none." in shown
    assert "originatorA <b>2026-03-04holds" in shown
    assert "checkerC D2026-03-05see the findings" in shown
