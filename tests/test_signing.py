"""``calccheck sign`` on real files and in real git repositories: what it writes, what it refuses, what merges."""

from __future__ import annotations

import os
import stat
import subprocess
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from signed_sheets import SHEET, read, sign_text

from calccheck import check_text
from calccheck.cli import main
from calccheck.model import ROLES
from calccheck.signatures import digest_of

BARE = "Text `V_b = 7.5 V`.\n\n```circuit\nreference g\nV1: 10 V, a to g\nR1: 1 kΩ, a to b\nR2: 3 kΩ, b to g\n```\n"


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    return tmp_path


def run(capsys, *arguments: str) -> tuple[int, str, str]:
    status = main(arguments)
    shown = capsys.readouterr()
    return status, shown.out, shown.err


def sign(capsys, role: str, name: str, path: str = "a.md") -> tuple[int, str, str]:
    return run(capsys, "sign", path, "--role", role, "--by", name, "--on", "2026-11-20")


def without_signatures(text: str, end: str, created: bool) -> str:
    """The text without the lines that signing adds: the block, and the two lines around front matter that it created."""
    lines = text.split(end)
    first = lines.index("signatures:")
    last = first + 1
    while lines[last].startswith(" "):
        last += 1
    return end.join([*lines[: first - created], *lines[last + created :]])


# --- what is written ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("final", [True, False])
@pytest.mark.parametrize("mark", ["", "\ufeff"])
@pytest.mark.parametrize("text", [SHEET, BARE, "---\n---\n" + BARE, "\n\n" + BARE])
def test_every_other_byte_stays(folder, capsys, text, mark, final, end):
    before = mark + (text if final else text.rstrip("\n")).replace("\n", end)
    Path("a.md").write_bytes(before.encode())
    assert sign(capsys, "originator", "QD")[0] == 0
    assert sign(capsys, "checker", "AB")[0] == 0
    after = Path("a.md").read_bytes().decode()
    assert after.startswith(mark + "---" + end) and len(read(after).signatures) == 2
    created = not text.startswith("---")
    assert mark + without_signatures(after.removeprefix(mark), end, created) == before
    assert run(capsys, "check", "a.md")[0] == 0


@given(st.permutations(ROLES), st.lists(st.sampled_from(ROLES), max_size=3), st.booleans())
@settings(max_examples=40, deadline=None)
def test_signing_in_any_order_and_again_changes_neither_verdict_nor_digest(order, again, bare):
    text = start = BARE if bare else SHEET
    for k, role in enumerate([*order, *again]):
        text = sign_text(text, role, f"Name {role}, {k}")
    last = {role: f"Name {role}, {k}" for k, role in enumerate([*order, *again])}
    assert {s.role: s.name for s in read(text).signatures} == last
    assert [s.role for s in read(text).signatures] == list(ROLES)
    assert digest_of(read(text)) == digest_of(read(start))
    before, after = check_text("a", start), check_text("a", text)
    assert (after.verdict, after.counts, len(after.findings)) == (before.verdict, before.counts, len(before.findings))
    assert without_signatures(text, "\n", bare) == start


def test_what_is_said_and_where_the_line_stands(folder, capsys):
    Path("a.md").write_text(SHEET)
    status, out, err = sign(capsys, "checker", "  A.  B ")
    assert (status, out, err) == (0, "a.md: signed as checker by A. B, 2026-11-20\n", "")
    lines = Path("a.md").read_text().split("\n")
    assert lines[lines.index("  checker:") + 1].startswith("    A. B 2026-11-20 form:1 sha256:")
    assert lines[lines.index("  checker:") + 2] == "  approver:"


def test_signing_again_replaces(folder, capsys):
    Path("a.md").write_text(SHEET)
    sign(capsys, "checker", "AB")
    changed = Path("a.md").read_text().replace("2.50 mA", "2.5 mA")
    Path("a.md").write_text(changed)
    status, out, _ = run(capsys, "check", "a.md")
    assert status == 1 and "the checker's signature (AB, 2026-11-20) is void: changed since: claims;" in out
    assert sign(capsys, "checker", "AB")[0] == 0 and run(capsys, "check", "a.md")[0] == 0
    assert Path("a.md").read_text().count("sha256:") == 1


@pytest.mark.parametrize(
    ("block", "status"),
    [
        ("signatures:\n", 0),
        ("signatures: # all of us\n    checker:\n", 0),
        ("signatures:\n  approver:\n  # the checker signs last\n", 0),
        ("signatures:\n  checker:\n    to be signed\n", 0),
        ("signatures: [QD]\n", 2),
        ("signatures:\n- QD\n", 2),
    ],
)
def test_blocks_written_by_hand(folder, capsys, block, status):
    before = SHEET.replace("check:\n", block + "check:\n")
    Path("a.md").write_text(before)
    found, _, err = sign(capsys, "checker", "AB")
    after = Path("a.md").read_text()
    assert found == status
    assert ("takes no signature" in err and after == before) if status else read(after).signatures[0].name == "AB"


def test_front_matter_in_one_line_is_left_alone(folder, capsys):
    before = "---\n{sheet: A, by: QD}\n---\n" + BARE
    Path("a.md").write_text(before)
    assert sign(capsys, "checker", "AB")[0] == 2 and Path("a.md").read_text() == before


def test_a_link_and_the_files_mode_are_kept(folder, capsys):
    Path("real.md").write_text(SHEET)
    Path("real.md").chmod(0o640)
    Path("a.md").symlink_to("real.md")
    assert sign(capsys, "originator", "QD")[0] == 0
    assert Path("a.md").is_symlink() and stat.S_IMODE(Path("real.md").stat().st_mode) == 0o640
    assert sorted(p.name for p in folder.iterdir()) == ["a.md", "real.md"]


def test_marks_in_the_sheet_void_nothing(folder, capsys):
    Path("a.md").write_text(SHEET)
    sign(capsys, "originator", "QD")
    assert run(capsys, "mark", "a.md", "--to", "md", "--in-place")[0] == 0
    assert "calccheck" in Path("a.md").read_text().replace(SHEET, "")
    assert run(capsys, "check", "a.md")[0] == 0
    assert "VOID" not in run(capsys, "register", "a.md")[1]


# --- what is refused ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("old", "new", "says"),
    [
        ("V_b = 7.5 V`", "V_b = 7.6 V`", "claims that differ: 1"),
        ("I_R2 = 2.50 mA", "I_Rx = 2.50 mA", "unchecked: 1"),
        ("until 2027-03-01", "until 2026-03-01", "claims that differ: 1, errors: 1"),
        ("carry: 0.4 %", "cary: 0.4 %", "errors: 1"),
        ("given k = 2 ", "given k = 2 from EX-9 ", "errors: 1"),
    ],
)
def test_a_sheet_that_is_not_clean_is_not_signed(folder, capsys, old, new, says):
    before = SHEET.replace(old, new)
    Path("a.md").write_text(before)
    status, out, err = sign(capsys, "originator", "QD")
    assert (status, err) == (1, "") and f"a.md: not signed: the sheet is not clean ({says})" in out
    assert out.startswith("a.md:") and Path("a.md").read_text() == before


def test_nobody_checks_their_own_sheet(folder, capsys):
    Path("a.md").write_text(SHEET)
    assert sign(capsys, "checker", " qd ")[0] == 1  # by: QD
    assert sign(capsys, "originator", "Q. Dahl")[0] == 0
    status, out, _ = sign(capsys, "checker", "q. DAHL")
    assert status == 1 and "somebody else checks it" in out
    assert sign(capsys, "checker", "AB")[0] == 0
    status, out, _ = sign(capsys, "originator", "ab")
    assert status == 1 and "two people" in out
    assert [s.name for s in read(Path("a.md").read_text()).signatures] == ["Q. Dahl", "AB"]


@pytest.mark.parametrize("name", ["", "  ", "1st", "A: B", "A #1", "- A", "[A]", "A" * 81, "A\u202eB"])
def test_names_that_would_not_stay_one_line_of_text(folder, capsys, name):
    Path("a.md").write_text(SHEET)
    status, out, err = sign(capsys, "originator", name)
    assert (status, out) == (2, "") and "no name for a signature" in err and Path("a.md").read_text() == SHEET


@pytest.mark.parametrize("name", ["QD", "Åse Müller-Øye", "O'Neil, P. (chief)", "A & B/C+D", "山田"])
def test_names_of_people_and_offices(folder, capsys, name):
    Path("a.md").write_text(SHEET)
    assert sign(capsys, "approver", name)[0] == 0
    assert read(Path("a.md").read_text()).signatures[0].name == name


def test_marked_copies_are_refused(folder, capsys):
    Path("a.md").write_text(SHEET)
    assert run(capsys, "mark", "a.md", "--to", "md", "-o", ".")[0] == 0
    status, _, err = sign(capsys, "originator", "QD", "a.checked.md")
    assert status == 2 and "a marked copy is not signed" in err
    Path("b.md").write_bytes(Path("a.checked.md").read_bytes())
    assert sign(capsys, "originator", "QD", "b.md")[0] == 2
    assert run(capsys, "mark", "a.md", "--to", "md", "--in-place")[0] == 0
    assert sign(capsys, "originator", "QD")[0] == 2


def test_what_cannot_be_signed(folder, capsys):
    Path("minutes.md").write_text("# Minutes\n")
    assert sign(capsys, "originator", "QD", "minutes.md")[0] == 2
    assert sign(capsys, "originator", "QD", "nothing.md")[0] == 2
    assert sign(capsys, "originator", "QD", "-")[0] == 2


# --- in a repository ------------------------------------------------------------------------------------------------


def git(*arguments: str, ok: bool = True) -> str:
    who = {f"GIT_{r}_{w}": v for r in ("AUTHOR", "COMMITTER") for w, v in (("NAME", "t"), ("EMAIL", "t@example.org"))}
    alone = {"GIT_CONFIG_GLOBAL": os.devnull, "GIT_CONFIG_SYSTEM": os.devnull}
    done = subprocess.run(["git", *arguments], capture_output=True, text=True, env={**os.environ, **who, **alone})
    assert not ok or done.returncode == 0, done.stderr
    return done.stdout


@pytest.fixture
def repository(folder):
    git("init", "-q", "-b", "main", ".")
    return folder


def commit(text: str | None = None) -> None:
    if text is not None:
        Path("a.md").write_text(text)
    git("add", "a.md")
    git("commit", "-q", "-m", "a")


def on_branch(name: str) -> None:
    git("checkout", "-q", "-b", name, "main")


def test_two_roles_signed_on_two_branches_merge_cleanly(repository, capsys):
    Path("a.md").write_text(SHEET)
    sign(capsys, "originator", "QD")
    commit()
    for branch, role, name in (("check", "checker", "AB"), ("approve", "approver", "CD")):
        on_branch(branch)
        sign(capsys, role, name)
        commit()
    git("merge", "-q", "--no-edit", "check")
    assert [s.name for s in read(Path("a.md").read_text()).signatures] == ["QD", "AB", "CD"]
    assert run(capsys, "check", "a.md")[0] == 0


def test_two_first_signatures_conflict_in_the_signature_lines_alone(repository, capsys):
    commit(SHEET)
    for branch, role, name in (("check", "checker", "AB"), ("approve", "approver", "CD")):
        on_branch(branch)
        sign(capsys, role, name)
        commit()
    git("merge", "-q", "--no-edit", "check", ok=False)
    text = Path("a.md").read_text()
    marks = ("<<<<<<<", "=======", ">>>>>>>")
    between = [line for line in text.split("\n") if line.startswith(marks)]
    assert between and all(line.startswith((" ", "signatures:", *marks)) for line in _conflicting(text))
    status, out, _ = run(capsys, "check", "a.md")
    assert status == 1 and "a merge of two branches was left open here" in out
    hunk = _conflicting(text)
    checker, approver = sorted(line for line in hunk if "sha256" in line)
    kept = text.replace("\n".join(hunk), "\n".join([checker, "  approver:", approver]))
    Path("a.md").write_text(kept)
    assert {s.name for s in read(kept).signatures} == {"AB", "CD"}
    assert run(capsys, "check", "a.md")[0] == 0


def _conflicting(text: str) -> list[str]:
    """The lines from each opening mark to its closing one."""
    found, inside = [], False
    for line in text.split("\n"):
        inside = inside or line.startswith("<<<<<<<")
        found += [line] if inside else []
        inside = inside and not line.startswith(">>>>>>>")
    return found


@pytest.mark.parametrize(
    ("old", "new", "status", "says"),
    [
        ("Some words before", "Reworded words before", 0, "0 ✗ differs"),
        ("max 0.5 W", "max 0.25 W", 1, "is void: changed since: circuit;"),
    ],
)
def test_a_signature_merged_with_somebody_elses_change(repository, capsys, old, new, status, says):
    commit(SHEET)
    on_branch("edit")
    commit(SHEET.replace(old, new))
    on_branch("check")
    sign(capsys, "checker", "AB")
    commit()
    git("merge", "-q", "--no-edit", "edit")
    assert new in Path("a.md").read_text()
    found, out, _ = run(capsys, "check", "a.md")
    assert found == status and says in out
