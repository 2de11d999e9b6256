"""The commands: what they read, print and write, and the exit status that people, hooks and scripts rely on."""

from __future__ import annotations

import contextlib
import io
import json
import os
import signal
import subprocess
import sys
import time
from datetime import date
from pathlib import Path

import pytest

import calccheck.pipeline
from calccheck import __version__
from calccheck.cli import main
from calccheck.command import batch
from calccheck.command.files import Unusable, sources, write_whole

CIRCUIT = "```circuit\nreference g\nV1: 10 V, a to g\nR1: 1 kΩ, a to b\nR2: 3 kΩ, b to g\n```\n"
RIGHT = CIRCUIT + "\nThe bus is at `V_b = 7.5 V`.\n"
WRONG = CIRCUIT + "\nThe bus is at `V_b = 7.6 V`.\n"
DOUBTFUL = CIRCUIT + "\nThe bus is at `V_q = 7.5 V`.\n"
NO_SHEET = "# Minutes\n\nNothing here.\n"


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    monkeypatch.delenv("CALCCHECK_TRACEBACK", raising=False)
    return tmp_path


def write(path: Path, text: str = RIGHT) -> Path:
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(text.encode())
    return path


def run(capsys, *arguments: str) -> tuple[int, str, str]:
    status = main(arguments)
    shown = capsys.readouterr()
    return status, shown.out, shown.err


# --- exit status ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "status"),
    [(RIGHT, 0), (WRONG, 1), (DOUBTFUL, 1), (NO_SHEET, 0), (CIRCUIT.replace("R1:", "R1"), 1), ("", 0)],
)
def test_the_status_of_one_sheet(folder, capsys, text, status):
    write(folder / "a.md", text)
    assert run(capsys, "check", "a.md")[0] == status


def test_a_wrong_sheet_names_the_claim_and_both_values(folder, capsys):
    write(folder / "sheets" / "bus.md", WRONG)
    status, out, err = run(capsys, "check", "sheets/bus.md")
    assert out.startswith(f"{Path('sheets/bus.md')}:8:15: differs: ") and "7.5" in out and "7.6 V" in out
    assert (status, err) == (1, "")


def bytes_that_are_not_utf8(folder):
    (folder / "bad.md").write_bytes(b"# one\ntwo \xff\n")
    return "bad.md", "not UTF-8: byte 0xff in line 2"


def nothing_there(folder):
    return "missing.md", "there is no such file"


def a_broken_link(folder):
    (folder / "bad.md").symlink_to("nowhere.md")
    return "bad.md", "a link to nowhere.md, which does not exist"


def an_unreadable_file(folder):
    write(folder / "bad.md")
    return "bad.md", "the file cannot be read: Permission denied"


def settings_that_are_no_toml(folder):
    write(folder / "sub" / "pyproject.toml", "[tool.calccheck\n")
    write(folder / "sub" / "bad.md")
    return "sub/bad.md", "pyproject.toml: the settings cannot be read"


def a_setting_that_is_unknown(folder):
    write(folder / "sub" / "pyproject.toml", "[tool.calccheck]\ncary = '1 %'\n")
    write(folder / "sub" / "bad.md")
    return "sub/bad.md", "[tool.calccheck]: there is no setting cary"


@pytest.mark.parametrize(
    "prepare",
    [
        bytes_that_are_not_utf8, nothing_there, a_broken_link, an_unreadable_file, settings_that_are_no_toml,
        a_setting_that_is_unknown,
    ],
)  # fmt: skip
@pytest.mark.parametrize("command", [("check",), ("mark", "--to", "md")], ids=["check", "mark"])
def test_bad_input_is_one_line_and_the_others_are_still_checked(folder, capsys, monkeypatch, prepare, command):
    write(folder / "good.md", WRONG)
    name, reason = prepare(folder)
    if prepare is an_unreadable_file:  # told to the program itself, because a superuser may read everything
        read = Path.read_bytes
        denied = PermissionError(13, "Permission denied")
        monkeypatch.setattr(
            Path, "read_bytes", lambda p: (_ for _ in ()).throw(denied) if p.name == "bad.md" else read(p)
        )
    status, out, err = run(capsys, *command, name, "good.md")
    assert status == 2
    assert err.startswith("calccheck: ") and err.count("\n") == 1 and reason in err
    assert "1 ✗ differs" in out


def test_a_folder_where_a_file_is_meant(folder, capsys):
    (folder / "sheets.md").mkdir()
    status, out, err = run(capsys, "working", "sheets.md", "V_b")
    assert (status, out) == (2, "") and err == "calccheck: sheets.md: a folder stands where a file is meant\n"


@pytest.fixture
def faulty(monkeypatch):
    whole = calccheck.pipeline.check

    def check(sheet, *rest):
        if "faulty" in sheet.name:
            raise ZeroDivisionError("a bug")
        return whole(sheet, *rest)

    monkeypatch.setattr(calccheck.pipeline, "check", check)
    monkeypatch.delitem(sys.modules, "typst", raising=False)  # else processes begin anew, without the patch


@pytest.mark.parametrize("jobs", ["1", "2"])
def test_a_bug_is_one_line_and_the_others_are_still_checked(folder, capsys, faulty, jobs):
    write(folder / "faulty.md")
    write(folder / "good.md", WRONG)
    status, out, err = run(capsys, "check", "--jobs", jobs)
    assert status == 2 and "1 ✗ differs" in out
    assert err.startswith("calccheck: faulty.md: internal fault (ZeroDivisionError: a bug)") and err.count("\n") == 1


def test_the_traceback_of_a_bug_is_shown_to_whoever_asks(folder, capsys, faulty, monkeypatch):
    monkeypatch.setenv("CALCCHECK_TRACEBACK", "1")
    write(folder / "faulty.md")
    assert "Traceback" in run(capsys, "check")[2]


@pytest.mark.parametrize(
    "arguments",
    [[], ["chek"], ["check", "--jobs", "0"], ["check", "--jobs", "x"], ["check", "--on", "tomorrow"], ["check", "--format", "x"],
     ["mark"], ["mark", "--to", "doc"], ["mark", "--to", "md", "--in-place", "-o", "x"], ["working", "a.md"]],
)  # fmt: skip
def test_wrong_usage(folder, capsys, arguments):
    with pytest.raises(SystemExit) as stopped:
        main(arguments)
    assert stopped.value.code == 2 and "usage: calccheck" in capsys.readouterr().err


@pytest.mark.parametrize(
    "arguments",
    [["mark", "--to", "pdf", "--in-place"], ["mark", "--to", "html", "--remove"], ["mark", "--to", "md", "-"]],
)
def test_marks_that_cannot_be_asked_for(folder, capsys, arguments):
    write(folder / "a.md")
    status, _, err = run(capsys, *arguments)
    assert status == 2 and err.startswith("calccheck: mark: ")


def test_version_and_help(capsys):
    for arguments, said in [
        (["--version"], f"calccheck {__version__}\n"),
        (["--help"], "exit status:"),
        (["mark", "--help"], "--to"),
    ]:
        with pytest.raises(SystemExit) as stopped:
            main(arguments)
        assert stopped.value.code == 0 and said in capsys.readouterr().out


# --- which files ----------------------------------------------------------------------------------------------------


def test_folders_are_searched_in_order_and_without_what_is_not_meant(folder):
    for name in ("b.md", "a/z.md", "a/y.MD", ".hidden/h.md", "a/.git/g.md", "n.txt", "a.checked.md", "a/deep/er/x.md"):
        write(folder / name)
    (folder / "a" / "loop").symlink_to(folder, target_is_directory=True)
    (folder / "again.md").symlink_to(folder / "b.md")
    found, problems = sources(["."])
    assert [s.path.as_posix() for s in found] == ["again.md", "a/y.MD", "a/z.md", "a/deep/er/x.md"]
    assert problems == []
    assert [s.path.as_posix() for s in sources(["a.checked.md", "b.md", "b.md"])[0]] == ["a.checked.md", "b.md"]


def test_a_broken_link_in_a_folder_is_named(folder, capsys):
    write(folder / "a.md")
    (folder / "b.md").symlink_to("nowhere")
    status, _, err = run(capsys, "check")
    assert (status, err) == (2, "calccheck: b.md: a link to nowhere, which does not exist\n")


def test_the_current_folder_is_the_default_and_other_files_are_named_on_request(folder, capsys):
    write(folder / "a.md")
    write(folder / "minutes.md", NO_SHEET)
    status, out, _ = run(capsys, "check")
    assert status == 0 and "1 calc sheet, 1 claim" in out and "1 file passed over" in out and "minutes" not in out
    assert "minutes.md: not a calc sheet\n" in run(capsys, "check", "-v")[1]


def test_standard_input(folder, capsys, monkeypatch):
    for text, status in ((RIGHT.encode(), 0), (WRONG.encode(), 1), (b"\xff", 2)):
        monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(text)))
        found, out, err = run(capsys, "check", "-")
        assert found == status and (status != 1 or out.startswith("-:8:15: differs: "))
    assert err == "calccheck: -: not UTF-8: byte 0xff in line 1; save the file as UTF-8\n"


def test_settings_of_the_nearest_project_file(folder, capsys):
    """Two figures behind ≈ pass within approx, 5 % unless set (language, section 7); 7.8 V is 4 % off 7.5 V."""
    sheet = CIRCUIT + "\n`V_b ≈ 7.8 V`\n"
    write(folder / "pyproject.toml", "[tool.calccheck]\napprox = '1 %'\n")
    write(folder / "a.md", sheet)
    write(folder / "sub" / "pyproject.toml", "[project]\nname = 'x'\n")
    write(folder / "sub" / "a.md", sheet)
    assert run(capsys, "check", "a.md")[0] == 1
    assert run(capsys, "check", "sub/a.md")[0] == 0


@pytest.mark.parametrize(
    "table",
    ["[tool.calccheck]\napprox = '1 %'", "[ tool . 'calccheck' ]\napprox = '1 %'", "tool.calccheck.approx = '1 %'",
     "[tool]\ncalccheck = {approx = '1 %'}", "[tool]\ncalccheck.approx = 0.01", "# x\n ['tool']\ncalccheck.approx = '1%'"],
)  # fmt: skip
def test_settings_however_toml_lets_them_be_written(folder, capsys, table):
    write(folder / "pyproject.toml", f"{table}\n")
    write(folder / "a.md", CIRCUIT + "\n`V_b ≈ 7.8 V`\n")
    assert run(capsys, "check")[0] == 1


def test_the_day_on_which_waivers_are_judged(folder, capsys):
    waiver = '<!-- calccheck: accept 7.6 V for 7.5 V "measured" by QD until 2027-03-01 -->'
    write(folder / "a.md", WRONG.replace("`.", f"` {waiver}."))
    assert run(capsys, "check", "--on", "2027-03-01")[0] == 0
    status, out, _ = run(capsys, "check", "--on", "2027-03-02")
    assert status == 1 and "the waiver has lapsed" in out


def test_several_processes_say_the_same(folder, capsys):
    for k in range(5):
        write(folder / f"s{k}.md", [RIGHT, WRONG, DOUBTFUL, NO_SHEET, WRONG][k])
    for form in ("text", "json"):
        assert run(capsys, "check", "--jobs", "2", "--format", form) == run(capsys, "check", "--format", form)


def test_json(folder, capsys):
    write(folder / "a.md", WRONG)
    status, out, _ = run(capsys, "check", "--format", "json")
    report = json.loads(out)
    assert status == 1 and report["sheets"][0]["path"] == "a.md" and report["program"] == __version__


def test_checking_writes_nothing(folder, capsys):
    write(folder / "a.md", WRONG)
    before = sorted(folder.rglob("*"))
    run(capsys, "check")
    run(capsys, "working", "a.md", "V_b")
    assert sorted(folder.rglob("*")) == before and (folder / "a.md").read_bytes() == WRONG.encode()


def test_working(folder, capsys):
    write(folder / "a.md", RIGHT)
    status, out, _ = run(capsys, "working", "a.md", "V_b due to V1")
    assert status == 0 and "due to V1" in out and "7.5" in out
    status, out, err = run(capsys, "working", "a.md", "V_q")
    assert (status, out) == (2, "") and err.startswith("calccheck: a.md: V_q: neither a node")


class Terminal(io.StringIO):
    """Standard error on a terminal."""

    def isatty(self) -> bool:
        return True


@pytest.mark.parametrize(("seconds", "shown"), [(0.1, False), (0.6, True)])
def test_a_bar_for_work_of_more_than_a_second(monkeypatch, seconds, shown):
    clock = (seconds * k for k in range(100))
    screen = Terminal()
    monkeypatch.setattr(batch.time, "monotonic", lambda: next(clock))
    monkeypatch.setattr(sys, "stderr", screen)
    assert [o.value for o in batch.run(len, ["a", "bb", "ccc", "dddd"], str)] == [1, 2, 3, 4]
    assert ("4 of 4 sheets" in screen.getvalue()) == shown
    assert screen.getvalue().endswith("\r\x1b[K") == shown


def test_no_bar_where_nobody_sees_it(monkeypatch):
    clock = iter(range(100))
    monkeypatch.setattr(batch.time, "monotonic", lambda: next(clock))
    monkeypatch.setattr(sys, "stderr", io.StringIO())
    assert len(list(batch.run(len, ["a", "bb", "ccc"], str))) == 3 and sys.stderr.getvalue() == ""


def test_a_worker_that_dies_takes_no_other_sheet_with_it(monkeypatch):
    outcomes = list(batch.run(die_on_b, ["a", "b", "c", "d", "b"], str, jobs=2))
    assert [o.value for o in outcomes] == ["a", None, "c", "d", None]
    assert all(o.problem.startswith("b: internal fault") for o in outcomes if o.value is None)


def die_on_b(name: str) -> str:
    if name == "b":
        os._exit(3)
    return name


# --- marked copies --------------------------------------------------------------------------------------------------


def test_copies_go_to_the_output_folder_as_the_sheets_stand(folder, capsys):
    write(folder / "sheets" / "sub" / "bus.md", WRONG)
    write(folder / "sheets" / "minutes.md", NO_SHEET)
    status, out, err = run(capsys, "mark", "sheets", "--to", "md", "-o", "out")
    copy = folder / "out" / "sub" / "bus.checked.md"
    assert (status, err) == (1, "") and out.startswith(f"{Path('out/sub/bus.checked.md')}\n")
    assert "✗ differs" in copy.read_text(encoding="utf-8")
    assert sorted(p.name for p in folder.rglob("*.md")) == ["bus.checked.md", "bus.md", "minutes.md"]
    assert (folder / "sheets" / "sub" / "bus.md").read_bytes() == WRONG.encode()


def test_the_default_output_folder(folder, capsys):
    write(folder / "bus.md")
    assert run(capsys, "mark", "bus.md", "--to", "md")[0] == 0
    assert (folder / "marked" / "bus.checked.md").is_file()
    assert run(capsys, "check")[1].startswith("1 calc sheet,")  # copies are passed over


def test_a_file_that_exists_is_replaced_only_on_request(folder, capsys):
    write(folder / "bus.md")
    mine = write(folder / "marked" / "bus.checked.md", "mine")
    status, _, err = run(capsys, "mark", "--to", "md", "bus.md")
    assert status == 2 and "a file of this name exists; --replace" in err and mine.read_text() == "mine"
    assert run(capsys, "mark", "--to", "md", "bus.md", "--replace")[0] == 0
    assert mine.read_text(encoding="utf-8").startswith(CIRCUIT)


def test_pages_and_documents_by_several_processes(folder, capsys):
    write(folder / "a.md", RIGHT)
    write(folder / "b.md", WRONG)
    for form, start in (("html", b"<!doctype html>"), ("pdf", b"%PDF-")):
        status, out, err = run(capsys, "mark", "--to", form, "--jobs", "2", ".")
        assert (status, err) == (1, "") and out.startswith(str(Path(f"marked/a.checked.{form}")))
        for name in ("a", "b"):
            assert (folder / "marked" / f"{name}.checked.{form}").read_bytes()[: len(start)].lower() == start.lower()


def test_two_sheets_never_go_to_one_copy(folder, capsys):
    write(folder / "a" / "bus.md", RIGHT)
    write(folder / "b" / "bus.md", WRONG)
    status, _, err = run(capsys, "mark", "--to", "md", "a/bus.md", "b/bus.md")
    assert status == 2 and "would be written over that of" in err
    assert "✓ agrees" in (folder / "marked" / "bus.checked.md").read_text(encoding="utf-8")


@pytest.mark.parametrize(
    "text", [WRONG, "\ufeff" + WRONG.replace("\n", "\r\n"), WRONG.rstrip("\n")], ids=["lf", "bom crlf", "no end"]
)
def test_marks_in_place_and_out_again(folder, capsys, text):
    sheet = write(folder / "bus.md", text)
    sheet.chmod(0o640)
    assert run(capsys, "mark", "--to", "md", "--in-place", "bus.md")[0] == 1
    once = sheet.read_bytes()
    assert "✗ differs" in once.decode() and sheet.stat().st_mode & 0o777 == 0o640
    assert run(capsys, "check", "bus.md")[0] == 1
    assert run(capsys, "mark", "--to", "md", "--in-place", "bus.md")[0] == 1 and sheet.read_bytes() == once
    assert run(capsys, "mark", "--to", "md", "--remove", "bus.md")[0] == 0
    assert (folder / "marked" / "bus.unmarked.md").read_bytes() == text.encode() and sheet.read_bytes() == once
    assert run(capsys, "mark", "--to", "md", "--remove", "--in-place", "bus.md")[0] == 0
    assert sheet.read_bytes() == text.encode()
    assert list(folder.glob(".*")) == []


def test_marks_changed_by_hand_are_not_piled_upon(folder, capsys):
    sheet = write(folder / "bus.md", WRONG)
    run(capsys, "mark", "--to", "md", "--in-place", "bus.md")
    sheet.write_bytes(sheet.read_bytes() + b"\n## More\n")
    before = sheet.read_bytes()
    for more in ([], ["--remove"]):
        status, _, err = run(capsys, "mark", "--to", "md", "--in-place", "bus.md", *more)
        assert status == 2 and "cannot be taken out" in err and sheet.read_bytes() == before
    assert "error: the marks of an earlier run cannot be taken out" in run(capsys, "check", "bus.md")[1]


def test_a_link_to_a_sheet_stays_a_link(folder, capsys):
    sheet = write(folder / "real" / "bus.md", WRONG)
    (folder / "bus.md").symlink_to(sheet)
    run(capsys, "mark", "--to", "md", "--in-place", "bus.md")
    assert (folder / "bus.md").is_symlink() and "✗ differs" in sheet.read_text(encoding="utf-8")


def test_an_output_folder_that_cannot_be(folder, capsys):
    write(folder / "bus.md")
    write(folder / "taken", "a file")
    status, _, err = run(capsys, "mark", "--to", "md", "-o", "taken", "bus.md")
    assert (
        status == 2
        and err.count("\n") == 1
        and "cannot be written" in err
        and (folder / "taken").read_text() == "a file"
    )
    (folder / "marked" / "bus.checked.md").mkdir(parents=True)
    status, _, err = run(capsys, "mark", "--to", "md", "--replace", "bus.md")
    assert status == 2 and "a folder of this name is in the way" in err


def test_files_are_written_whole_or_not_at_all(folder, monkeypatch):
    path = write(folder / "a.md", "old")
    with pytest.raises(Unusable, match="changed since it was read"):
        write_whole(path, b"new", True, b"older")

    def full(self, target):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "replace", full)
    with pytest.raises(Unusable, match="No space left on device"):
        write_whole(path, b"new", True)
    assert path.read_text() == "old" and list(folder.iterdir()) == [path]


# --- the whole process ----------------------------------------------------------------------------------------------


def process(*arguments: str, **more):
    environment = {**os.environ, "PYTHONWARNINGS": "error", **more.pop("env", {})}
    return subprocess.run([sys.executable, "-m", "calccheck", *arguments], capture_output=True, env=environment, **more)


def test_as_a_process(folder):
    write(folder / "a.md", WRONG)
    done = process("check", "a.md", env={"PYTHONUTF8": "1"})
    assert done.returncode == 1 and done.stderr == b"" and done.stdout.decode().startswith("a.md:8:15: differs: ")


def test_a_terminal_without_the_signs_gets_code_points(folder):
    write(folder / "a.md", RIGHT)
    done = process("check", env={"PYTHONIOENCODING": "ascii"})
    assert done.returncode == 0 and b"\\u2713 agrees" in done.stdout and done.stderr == b""
    done = process("check", "--format", "json", env={"PYTHONIOENCODING": "ascii"})
    assert json.loads(done.stdout.decode("utf-8"))["sheets"][0]["claims"][0]["text"] == "V_b = 7.5 V"


def test_a_reader_that_stops_early_is_no_fault(folder):
    for k in range(40):
        write(folder / f"{k}.md", WRONG * 20)
    with subprocess.Popen(
        [sys.executable, "-m", "calccheck", "check"], stdout=subprocess.PIPE, stderr=subprocess.PIPE
    ) as p:
        assert p.stdout is not None and p.stderr is not None
        p.stdout.close()
        assert p.stderr.read() == b""


def heed_interrupts() -> None:
    """Jobs in the background of a shell, and all that they start, ignore them."""
    signal.signal(signal.SIGINT, signal.SIG_DFL)


@pytest.mark.parametrize("jobs", ["1", "2"])
@pytest.mark.undisturbed
def test_an_interrupt_is_quiet(folder, jobs):
    for k in range(200):
        write(folder / f"{k}.md", WRONG * 30)
    command = [sys.executable, "-m", "calccheck", "check", "--jobs", jobs]
    pipes = {"stdout": subprocess.PIPE, "stderr": subprocess.PIPE, "preexec_fn": heed_interrupts}
    with subprocess.Popen(command, start_new_session=True, env={**os.environ, "PYTHONUTF8": "1"}, **pipes) as p:
        time.sleep(1.5)
        os.killpg(p.pid, signal.SIGINT)  # as a terminal does: the whole group
        try:
            out, err = p.communicate(timeout=60)
        finally:
            with contextlib.suppress(ProcessLookupError):  # as it should be: none of the group is left
                os.killpg(p.pid, signal.SIGKILL)
    assert (p.returncode, out, err) == (2, b"", b"")


def seen_on_a_terminal(arguments: list[str], env: dict[str, str]) -> bytes:
    """What the program prints when its output is a terminal."""
    import pty  # late: POSIX only, as this test is

    main_end, other_end = pty.openpty()
    command = [sys.executable, "-m", "calccheck", *arguments]
    with subprocess.Popen(command, stdout=other_end, env={**os.environ, **env}):
        os.close(other_end)
        shown = b""
        while True:
            try:
                more = os.read(main_end, 65536)
            except OSError:  # Linux says so when the other end is closed
                break
            if not more:
                break
            shown += more
    os.close(main_end)
    return shown


def test_colour_on_a_terminal_unless_told_otherwise(folder):
    """NO_COLOR, when set to anything but nothing, whatever its value (no-color.org, from memory)."""
    write(folder / "a.md", WRONG)
    terminal = {"TERM": "xterm", "NO_COLOR": ""}
    assert b"\x1b[1;31mdiffers" in seen_on_a_terminal(["check"], terminal)
    assert b"\x1b" not in seen_on_a_terminal(["check"], {**terminal, "NO_COLOR": "1"})
    assert b"\x1b" not in seen_on_a_terminal(["check"], {**terminal, "TERM": "dumb"})


@pytest.mark.undisturbed
def test_a_check_loads_nothing_that_it_does_not_use(folder):
    """Each module here would cost a plain sheet milliseconds; what is below a name counts with it."""
    write(folder / "a.md", RIGHT)
    late = {
        "sympy", "mpmath", "scipy", "pint", "pypdf", "typst", "yaml", "mdit_py_plugins", "pygls", "lsprotocol", "json", "tomllib",
        "subprocess", "tempfile", "multiprocessing", "concurrent", "asyncio", "socket", "ssl", "http", "email", "xml", "hashlib",
        "difflib", "random", "statistics", "unittest", "importlib.metadata", "numpy.random", "numpy.fft", "numpy.ma",
        "calccheck.annotate.to_markdown", "calccheck.annotate.to_json", "calccheck.judge.slips", "calccheck.judge.ratings",
        "calccheck.judge.right_formula", "calccheck.judge.spreads", "calccheck.judge.two_sided", "calccheck.toleranced",
        "calccheck.sought", "calccheck.read.maths", "calccheck.read.cases", "calccheck.command.history", "shutil", "calccheck.solve.tolerance", "calccheck.solve.symbolic", "calccheck.read.mending",
    }  # fmt: skip
    code = (  # what the two libraries load themselves is their affair
        "import sys, numpy, markdown_it; before = set(sys.modules); "
        "from calccheck.cli import main; main(['check', 'a.md']); print(*set(sys.modules) - before)"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, env={**os.environ, "PYTHONUTF8": "1"}
    )
    loaded = done.stdout.splitlines()[-1].split()
    assert "calccheck.solve.nodal" in loaded, done.stdout + done.stderr
    assert [m for m in loaded if any(m == name or m.startswith(f"{name}.") for name in late)] == []


def test_linear_algebra_starts_no_threads_but_where_they_are_asked_for(folder):
    write(folder / "a.md", RIGHT)
    code = (
        "import os, sys; os._exit = lambda status: print(status, os.environ['OMP_NUM_THREADS']); "
        "sys.argv = ['calccheck', 'check', 'a.md']; from calccheck.cli import entry; entry()"
    )
    for told, found in (({}, "0 1"), ({"OMP_NUM_THREADS": "3"}, "0 3")):
        environment = {k: v for k, v in os.environ.items() if k != "OMP_NUM_THREADS"} | {"PYTHONUTF8": "1"} | told
        done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, env=environment)
        assert done.stdout.splitlines()[-1] == found, done.stdout + done.stderr


@pytest.mark.parametrize(("typed", "offered"), [("calccheck ch", "check"), ("calccheck mark --to ", "md html pdf")])
def test_a_shell_completes_commands_and_options(tmp_path, typed, offered):
    """By argcomplete's protocol: the line in COMP_LINE, the completions to file descriptor 8."""
    answer = tmp_path / "answer"
    shell = {
        "_ARGCOMPLETE": "1",
        "_ARGCOMPLETE_IFS": " ",
        "COMP_LINE": typed,
        "COMP_POINT": str(len(typed)),
        "COMP_TYPE": "9",
    }
    code = "import sys; sys.argv = ['calccheck']; from calccheck.cli import entry; entry()"
    command = f'"{sys.executable}" -c "{code}" 8>"{answer}" 9>/dev/null'
    subprocess.run(command, shell=True, check=True, env={**os.environ, **shell})
    assert answer.read_text().strip() == offered


def test_days_are_those_of_the_calendar(folder, capsys):
    write(folder / "a.md")
    assert run(capsys, "check", "--on", date.today().isoformat())[0] == 0
