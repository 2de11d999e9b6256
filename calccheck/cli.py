"""The command line: arguments and exit status. PYTHON_ARGCOMPLETE_OK"""

from __future__ import annotations

import argparse
import contextlib
import os
import sys
from collections.abc import Sequence
from datetime import date

from calccheck import __version__
from calccheck.command.batch import internal_fault
from calccheck.command.checking import check
from calccheck.command.files import Unusable
from calccheck.command.terminal import FAILED, complain
from calccheck.model import ROLES

_ABOUT = """\
Recomputes every claim in calc sheets (Markdown with a circuit block and hand-worked values) by nodal
solution and by superposition, and says which of them do not stand."""
_MARK = """\
Write the sheets with every claim marked where it stands: as Markdown for the author, as a page for the
screen, or as a PDF for the reviewer. NAME.md becomes NAME.checked.md (.html, .pdf) in the output folder,
below it in the folders that the sheet stands in. A sheet itself is changed only with --in-place."""
_STATUS = """\
exit status:
  0  every claim stands
  1  something is to be mended: a claim differs or is unchecked, or the sheet has an error
  2  the program could not do its work: wrong usage, a file that cannot be read, a bug

This is a check of arithmetic and circuit laws. It is not an approval."""


def entry() -> None:
    """What the installed command runs.

    The matrices of a sheet are too small to be shared among threads, whose start alone would cost a tenth of a run. It leaves
    without taking the interpreter down piece by piece, which would cost as much: all files are closed and all processes have
    ended by then.
    """
    os.environ.setdefault("OMP_NUM_THREADS", "1")  # read by numpy's linear algebra when it is loaded
    status = main()
    sys.stdout.flush()
    sys.stderr.flush()
    os._exit(status)


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command; the exit status. Wrong usage raises ``SystemExit(2)``, as argparse does."""
    parser = arguments()
    if "_ARGCOMPLETE" in os.environ:  # set by a shell that asks for completions, never otherwise
        _complete(parser)
    options = parser.parse_args(argv)
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):  # a terminal that lacks a sign gets its code point, not a traceback
            stream.reconfigure(errors="backslashreplace")
    try:
        status = _command(options)
        sys.stdout.flush()
    except KeyboardInterrupt:
        return FAILED
    except BrokenPipeError:  # the reader has seen enough; nothing more is to be written, not even at exit
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return FAILED
    return status


def _command(options: argparse.Namespace) -> int:
    try:
        match options.command:
            case "check":
                return check(options)
            case "mark":
                from calccheck.command.marking import mark  # late: writing is not needed to check

                return mark(options)
            case "sign":
                from calccheck.command.signing import sign

                return sign(options)
            case "register":
                from calccheck.command.registering import register

                return register(options)
            case "blank":
                from calccheck.command.blanking import blank

                return blank(options)
            case "editor":
                return _serve_editor()
            case _:
                from calccheck.command.working import working

                return working(options)
    except (KeyboardInterrupt, BrokenPipeError):
        raise
    except Unusable as problem:
        complain([str(problem)])
    except Exception as fault:  # nothing below may show a traceback
        complain([internal_fault(options.command, fault)])
    return FAILED


def _serve_editor() -> int:
    try:
        from calccheck.command.editor import serve
    except ModuleNotFoundError as missing:  # optional: the extra `editor`
        if (missing.name or "").partition(".")[0] not in ("pygls", "lsprotocol"):
            raise
        raise Unusable("editor", "needs the package pygls; install calccheck[editor]") from None
    return serve()


def _complete(parser: argparse.ArgumentParser) -> None:
    import importlib  # late: only a shell that completes comes here

    with contextlib.suppress(ImportError):  # optional: the extra `completion`
        importlib.import_module("argcomplete").autocomplete(parser)


# --- arguments ------------------------------------------------------------------------------------------------------


def arguments() -> argparse.ArgumentParser:
    """The commands and their options."""
    parser = argparse.ArgumentParser("calccheck", description=_ABOUT, epilog=_STATUS, formatter_class=_as_written)
    parser.add_argument("--version", action="version", version=f"calccheck {__version__}", help="print the version")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)
    one = commands.add_parser(
        "check", help="recompute every claim and print what is to be mended", epilog=_STATUS, formatter_class=_as_written,
        description="Recompute every claim of the sheets and print what is to be mended. Writes no file.",
    )  # fmt: skip
    _paths(one, "sheets, or folders to search for *.md (default: this folder); - is standard input")
    one.add_argument(
        "--format", choices=("text", "json", "sarif", "junit"), default="text",
        help="text to read (default), the JSON report, or for build services a SARIF log or test results",
    )  # fmt: skip
    one.add_argument(
        "-v", "--verbose", action="store_true", help="also what stands, and which files are no calc sheets"
    )
    _common(one)
    two = commands.add_parser(
        "mark", help="write the sheets with every claim marked where it stands", epilog=_STATUS, formatter_class=_as_written,
        description=_MARK,
    )  # fmt: skip
    _paths(two, "sheets, or folders to search for *.md (default: this folder)")
    two.add_argument("--to", choices=("md", "html", "pdf"), required=True, help="what to write")
    where = two.add_mutually_exclusive_group()
    where.add_argument(
        "-o", "--output", metavar="DIR", default="marked", help="folder for the copies (default: marked)"
    )
    where.add_argument("--in-place", action="store_true", help="put the marks into the sheets themselves (md only)")
    two.add_argument("--remove", action="store_true", help="take the marks out of marked sheets instead (md only)")
    two.add_argument("--replace", action="store_true", help="replace copies that exist")
    _common(two)
    three = commands.add_parser(
        "working", help="show the independent working of one quantity", formatter_class=_filled,
        description="Show the independent working of one quantity: each source alone, their sum, the nodal value, and the "
        "gap between the two routes.",
    )  # fmt: skip
    three.add_argument("sheet", metavar="SHEET", help="the sheet; - is standard input")
    three.add_argument("quantity", metavar="QUANTITY", help='as in a sheet: V_bus, "I_RL due to Vb", "R_{a,b}"')
    _sign_arguments(commands)
    _register_arguments(commands)
    six = commands.add_parser(
        "blank", help="print empty tables for a sheet that holds its circuit", formatter_class=_filled,
        description="Print the superposition table and the list of quantities of a sheet's circuits in the sheet's own language, "
        "with empty cells to fill in by hand. It never fills in a value. Writes no file.",
    )  # fmt: skip
    six.add_argument("sheet", metavar="SHEET", help="the sheet; - is standard input")
    commands.add_parser(
        "editor", help="serve an editor: findings while writing, working under the pointer", formatter_class=_filled,
        description="Serve an editor by the Language Server Protocol over standard input and output. Started by the editor, not "
        "by hand. Writes no file.",
    )  # fmt: skip
    return parser


def _as_written(prog: str) -> argparse.HelpFormatter:
    return argparse.RawDescriptionHelpFormatter(prog, width=_width())


def _filled(prog: str) -> argparse.HelpFormatter:
    return argparse.HelpFormatter(prog, width=_width())


def _width() -> int:
    """Columns for help, two less than the terminal has, as argparse takes them; to ask, it would load shutil at every start."""
    try:
        columns = int(os.environ.get("COLUMNS", "0")) or os.get_terminal_size(sys.stdout.fileno()).columns
    except (AttributeError, ValueError, OSError):  # no output, or one that is no terminal
        columns = 0
    return (columns or 80) - 2


def _register_arguments(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    five = commands.add_parser(
        "register", help="list the sheets: verdict, signatures, what is to be mended, what is open", epilog=_STATUS,
        formatter_class=_as_written,
        description="List the calc sheets with their verdicts and signatures, what is to be mended (claims, void signatures,\n"
        "numbers given twice, gaps in title blocks) and what is open (signatures missing, assumptions without a source).\n"
        "What is open does not count for the exit status. Writes no file.",
    )  # fmt: skip
    _paths(five, "sheets, or folders to search for *.md (default: this folder); - is standard input")
    five.add_argument(
        "--format", choices=("text", "markdown", "json"), default="text", help="how to print it (default text)"
    )
    _common(five)


def _sign_arguments(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    four = commands.add_parser(
        "sign", help="sign a sheet that stands", epilog=_STATUS, formatter_class=_as_written,
        description="Put a signature into a sheet's front matter. A sheet that is not clean is not signed. What changes in its\n"
        "circuit, claims, givens, waivers or settings later voids the signature.",
    )  # fmt: skip
    four.add_argument("sheet", metavar="SHEET", help="the sheet")
    four.add_argument("--role", choices=ROLES, required=True, help="the role in which to sign")
    four.add_argument("--by", metavar="NAME", required=True, help="name or initials of whoever signs")
    four.add_argument("--on", metavar="DATE", type=_day, help="the day of the signature (2027-03-01), if not today")


def _paths(parser: argparse.ArgumentParser, explained: str) -> None:
    parser.add_argument("paths", metavar="PATH", nargs="*", default=["."], help=explained)


def _common(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--on", metavar="DATE", type=_day, help="judge waivers as on this day (2027-03-01), not today")
    parser.add_argument(
        "--jobs", metavar="N", type=_jobs, default=1, help="share the sheets among N processes (default 1)"
    )


def _day(text: str) -> date:
    try:
        return date.fromisoformat(text)
    except ValueError:
        raise argparse.ArgumentTypeError(f"{text!r} is no day; write it as 2027-03-01") from None


def _jobs(text: str) -> int:
    if not text.isdecimal() or not 1 <= int(text) <= 256:
        raise argparse.ArgumentTypeError(f"{text!r} is no number of processes from 1 to 256")
    return int(text)
