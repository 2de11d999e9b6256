"""README, DEVELOPERS and docs/: every link and anchor exists, every command shown runs as shown, examples give what is shown.

A command is a line that begins with ``calccheck`` in a shell fence or an indented block, or code in a sentence that begins so and
has more than the command's name. ``PATH``, ``SHEET`` and ``QUANTITY`` in it stand for something of the demonstration.
"""

from __future__ import annotations

import json
import os
import re
import shlex
import shutil
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest
from test_sheet_language_page import anchors, fence_text

from calccheck.annotate.remarks import REMARK_RULES
from calccheck.document import Block, blocks, inlines
from calccheck.read.markdown import read_page
from calccheck.rules import RULES

PROJECT = Path(__file__).parents[1]
DOCS = PROJECT / "docs"
PAGES = [PROJECT / "README.md", PROJECT / "DEVELOPERS.md", *sorted(DOCS.glob("*.md"))]
TEXTS = {page.relative_to(PROJECT).as_posix(): page.read_text(encoding="utf-8") for page in PAGES}
STANDS = {
    "PATH …": "sheets",
    "PATH": "sheets",
    "SHEET": "sheets/TS-101.md",
    "QUANTITY": "V_bus",
    "--on DATE": "--on 2026-12-01",
}
INSTALLS = re.compile(r"python3? -m venv|pip install|pre-commit|pytest|ruff|images/make")


# --- links ----------------------------------------------------------------------------------------------------------


def links(text: str) -> list[str]:
    """The targets of links and pictures, other pages of the web left out."""
    prose = re.sub(r"^(`{3,}).*?^\1$", "", text, flags=re.MULTILINE | re.DOTALL)
    found = re.findall(r"\]\(([^)\s]+)\)", re.sub(r"`[^`\n]*`", "", prose))
    return [target for target in found if not target.startswith("http")]


@pytest.mark.parametrize("page", TEXTS)
def test_links_lead_somewhere(page: str) -> None:
    for target in links(TEXTS[page]):
        path, _, anchor = target.partition("#")
        file = ((PROJECT / page).parent / path).resolve() if path else PROJECT / page
        assert file.is_file(), target
        assert not anchor or anchor in anchors(file.read_text(encoding="utf-8")), target


@pytest.mark.parametrize("rules", [RULES, REMARK_RULES], ids=["findings", "remarks"])
def test_every_kind_of_finding_is_explained(rules: dict[str, object]) -> None:
    for key, rule in rules.items():
        page, _, anchor = rule.anchor.partition("#")
        assert anchor and anchor in anchors(TEXTS[f"docs/{page}"]), key


def test_every_document_can_be_reached_from_the_readme() -> None:
    listed = {target.partition("#")[0] for target in links(TEXTS["README.md"])}
    assert {page for page in TEXTS if page != "README.md"} <= listed


# --- what the documents may say -------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["marked-page.png", "marked-screen.png"])
def test_the_picture_is_small(name: str) -> None:
    picture = (DOCS / "images" / name).read_bytes()
    assert picture.startswith(b"\x89PNG") and len(picture) < 200_000


def test_tables_of_keys_are_complete() -> None:
    from calccheck.judge.slips.table import SLIPS

    assert {s.key for s in SLIPS} <= set(re.findall(r"^\| `([\w-]+)` \|", TEXTS["docs/slips.md"], re.MULTILINE))


def test_the_sizes_stated_are_those_of_the_program() -> None:
    from calccheck.annotate.pictures import MOST_PARTS
    from calccheck.command.history import LOOK_BACK
    from calccheck.read import expression, markdown_inlines, part_lines, sheet, titleblock, tokens
    from calccheck.solve.superposition import EXACT_NODES, EXACT_NODES_AC

    stated = (
        f"a sheet | {sheet.LONGEST_SHEET:,} characters", f"a line | {sheet.LONGEST_LINE:,} characters",
        f"front matter | {titleblock.LARGEST // 1024} K characters, nested {titleblock.DEEPEST} deep",
        f"in one another | {markdown_inlines.DEEPEST} |", f"circuit block | {part_lines.LONGEST_LINE} characters",
        f"a statement | {tokens.LONGEST:,} characters", f"a chain | {expression.LONGEST_CHAIN} members",
        f"{expression.LONGEST_SUM} operations in a row, {expression.TALLEST} within one another, brackets {expression.DEEPEST} deep",
        f"exact up to {EXACT_NODES} nodes at DC and {EXACT_NODES_AC} at AC", f"in a drawing | {MOST_PARTS} |",
        f"the last {LOOK_BACK},",
    )  # fmt: skip
    assert [s for s in stated if s not in TEXTS["docs/limits.md"]] == []


# --- commands -------------------------------------------------------------------------------------------------------


def scripts(text: str) -> Iterator[str]:
    """What a page shows to be typed: shell fences whole, indented lines and code in sentences one by one."""
    for block in blocks(read_page(text)):
        if block.kind == "fence" and block.info == "sh":
            yield fence_text(block)
        elif block.kind == "code":
            yield from (line for line in fence_text(block).splitlines() if line.startswith("calccheck "))
        yield from (s for s in _in_sentences(block) if s.startswith("calccheck ") and len(s.split()) > 2)


def _in_sentences(block: Block) -> list[str]:
    return [i.text.text for i in inlines(block.inlines) if i.kind == "code" and i.text is not None]


def runnable(script: str) -> str:
    """The script without what installs or belongs to other programs, and with something of the demonstration for its placeholders."""
    for placeholder, meant in STANDS.items():
        script = script.replace(placeholder, meant)
    script = re.sub(r"^python3 -m venv \S+ && \S+ install \S+ && (?=\{)", "", script)
    return "\n".join(line for line in script.splitlines() if not INSTALLS.search(line))


SHOWN = sorted({(page, runnable(s)) for page, text in TEXTS.items() for s in scripts(text) if runnable(s).strip()})


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A folder as a reader has it: the demonstration, the sheets that the pages name, and the command."""
    shutil.copytree(PROJECT / "sheets", tmp_path / "sheets")
    shutil.copy(tmp_path / "sheets" / "TS-101-instrument-bus.md", tmp_path / "sheets" / "TS-101.md")
    circuit = "---\nsheet: TS-112\n---\n\n```circuit\nV1: 5 V, a to gnd\nR1: 1 kΩ, a to gnd\n```\n"
    (tmp_path / "sheets" / "TS-112.md").write_text(circuit, encoding="utf-8")
    (tmp_path / "bus.md").write_text(example_of_readme(), encoding="utf-8")
    for place in (tmp_path / ".venv" / "bin", tmp_path / "bin"):
        place.mkdir(parents=True)
        command = place / "calccheck"
        command.write_text(f'#!/bin/sh\nexec {shlex.quote(sys.executable)} -m calccheck "$@"\n')
        command.chmod(0o755)
    return tmp_path


def run_in(folder: Path, script: str) -> subprocess.CompletedProcess[str]:
    env = {**os.environ, "PATH": f"{folder / 'bin'}{os.pathsep}{os.environ['PATH']}", "PYTHONUTF8": "1"}
    return subprocess.run(
        ["bash", "-c", script],
        cwd=folder,
        env=env,
        text=True,
        encoding="utf-8",
        capture_output=True,
        stdin=subprocess.DEVNULL,
    )


@pytest.mark.parametrize(("page", "script"), SHOWN, ids=[f"{page}: {script.strip()[:60]}" for page, script in SHOWN])
def test_commands_run_as_shown(folder: Path, page: str, script: str) -> None:
    done = run_in(folder, script)
    assert done.returncode in (0, 1), (script, done.stderr)
    assert not done.stderr, (script, done.stderr)


def test_the_commands_are_among_them() -> None:
    shown = " ".join(script for _, script in SHOWN)
    assert len(SHOWN) > 12
    assert all(
        f"calccheck {command} " in shown for command in ("check", "mark", "working", "sign", "register", "blank")
    )


def test_the_first_command_of_the_readme_writes_the_pdf(folder: Path) -> None:
    script = next(s for page, s in SHOWN if page == "README.md" and "--to pdf" in s)
    assert run_in(folder, script).returncode == 0
    assert (folder / "marked" / "TS-111-radio-and-lamp-feed.checked.pdf").read_bytes().startswith(b"%PDF-")


# --- what the commands print ----------------------------------------------------------------------------------------


def fence_behind(text: str, lead: str, info: str) -> str:
    """The first fence of a kind behind some words of a page."""
    start = text.index(lead)
    fences = (b for b in blocks(read_page(text)) if b.kind == "fence" and b.info == info and b.span.start > start)
    return fence_text(next(fences))


def example_of_readme() -> str:
    return fence_behind(TEXTS["README.md"], "<!-- example -->", "markdown")


def test_the_example_of_the_readme_gives_what_is_shown(folder: Path) -> None:
    assert run_in(folder, "calccheck check bus.md").stdout == fence_behind(
        TEXTS["README.md"], "`calccheck check bus.md`", "text"
    )


def test_the_working_shown_is_the_working(folder: Path) -> None:
    page = TEXTS["docs/how-it-checks.md"]
    command = "calccheck working sheets/TS-101-instrument-bus.md V_bus"
    printed, shown = run_in(folder, command).stdout, fence_behind(page, command, "text")
    assert _without_gap(printed) == _without_gap(shown)


def _without_gap(text: str) -> list[str]:
    """The lines but for the gap, which differs from machine to machine."""
    gaps = [line for line in text.splitlines() if line.startswith("gap ")]
    assert len(gaps) == 1 and float(gaps[0].split()[1]) < 1e-12
    return [line for line in text.splitlines() if line not in gaps]


def test_the_json_report_shown_is_the_report(folder: Path) -> None:
    page = TEXTS["docs/report-json.md"]
    (folder / "sheets" / "bus.md").write_text(fence_behind(page, "For this sheet", "markdown"), encoding="utf-8")
    shown = json.loads(fence_behind(page, "the report is", "json"))
    printed = json.loads(run_in(folder, "calccheck check sheets/bus.md --format json").stdout)
    for report in (shown, printed):
        for circuit in report["sheets"][0]["circuits"]:
            for figure in ("route_gap", "kcl_residual", "power_balance"):
                assert circuit.pop(figure) < 1e-12
    assert printed == shown


# --- the hook -------------------------------------------------------------------------------------------------------


def test_the_hook_is_shown_alike_and_exists() -> None:
    import yaml

    shown = [yaml.safe_load(fence_behind(TEXTS[page], "pre-commit", "yaml")) for page in ("README.md", "docs/hook.md")]
    assert shown[0] == shown[1]
    offered = {hook["id"] for hook in yaml.safe_load((PROJECT / ".pre-commit-hooks.yaml").read_text(encoding="utf-8"))}
    assert {hook["id"] for repository in shown[0]["repos"] for hook in repository["hooks"]} <= offered
