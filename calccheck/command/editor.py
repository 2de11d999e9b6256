"""A server for editors over standard input and output: Language Server Protocol 3.17.

It publishes what is to be mended or weighed in each open sheet, and shows of a claim under the pointer the recomputed value
and its parts by source. It changes nothing. The only module that knows the protocol's library.
"""

from __future__ import annotations

import asyncio
import os
import signal
import sys
from bisect import bisect_left
from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path

from lsprotocol import types as lsp
from pygls.lsp.server import LanguageServer
from pygls.uris import to_fs_path
from pygls.workspace import TextDocument

from calccheck import __version__
from calccheck.annotate.positions import offset_of, position_of
from calccheck.annotate.remarks import Remark, remarks
from calccheck.annotate.to_hover import claim_at, to_hover
from calccheck.command.batch import internal_fault
from calccheck.command.citing import Run
from calccheck.command.files import Source, Unusable, settings_table
from calccheck.command.reports import report_on
from calccheck.command.terminal import MEND, STANDS
from calccheck.edits import kept
from calccheck.model import Report
from calccheck.source import Sheet, Span

PAUSE = 0.3  # seconds without a keystroke after which a sheet is checked again

_SEVERITIES = {
    "differs": lsp.DiagnosticSeverity.Error,
    "error": lsp.DiagnosticSeverity.Error,
    "unchecked": lsp.DiagnosticSeverity.Warning,
    "caution": lsp.DiagnosticSeverity.Warning,
    "note": lsp.DiagnosticSeverity.Information,
    "accepted": lsp.DiagnosticSeverity.Information,
}  # what stands and what is given raises none


@dataclass(frozen=True, slots=True)
class Checked:
    """A document as last checked.

    ``sheet``: the text that the editor holds; ``at``: where in it each character of the report's sheet stands, which lacks the
    marks of an earlier run; ``problem``: why there is no report.
    """

    sheet: Sheet
    at: Sequence[int]
    report: Report | None
    problem: str = ""


class Server(LanguageServer):
    """The protocol's server with what it knows of the open documents, by their URI.

    ``run``: within which other sheets are read once; a new one begins when a document is opened or saved. ``orderly``: whether
    the client has announced the end.
    """

    def __init__(self) -> None:
        super().__init__("calccheck", __version__, text_document_sync_kind=lsp.TextDocumentSyncKind.Full)
        self.checked: dict[str, Checked] = {}
        self.waiting: dict[str, asyncio.TimerHandle] = {}
        self.run = Run()
        self.orderly = False


def serve() -> int:
    """``calccheck editor``: serve until the client ends it; 0 after an orderly end, 1 else, as the protocol asks.

    Standard output belongs to the protocol: whatever else would be printed there goes to standard error.
    """
    if sys.stdin.isatty():
        raise Unusable("editor", "to be started by an editor, which speaks the Language Server Protocol with it")
    signal.signal(signal.SIGINT, signal.SIG_DFL)  # else an interrupt would wait for the next line of input
    speaking = os.fdopen(os.dup(sys.stdout.fileno()), "wb")
    os.dup2(sys.stderr.fileno(), sys.stdout.fileno())
    server = make_server()
    server.start_io(sys.stdin.buffer, speaking)
    return STANDS if server.orderly else MEND


def make_server() -> Server:
    """A server with everything that it answers to."""
    server = Server()
    server.feature(lsp.TEXT_DOCUMENT_DID_OPEN)(partial(_opened, server))
    server.feature(lsp.TEXT_DOCUMENT_DID_CHANGE)(partial(_changed, server))
    server.feature(lsp.TEXT_DOCUMENT_DID_SAVE)(partial(_saved, server))
    server.feature(lsp.TEXT_DOCUMENT_DID_CLOSE)(partial(_closed, server))
    server.feature(lsp.TEXT_DOCUMENT_HOVER)(partial(_hovered, server))
    server.feature(lsp.SHUTDOWN)(partial(_ending, server))
    return server


# --- what the client says -------------------------------------------------------------------------------------------


def _opened(server: Server, params: lsp.DidOpenTextDocumentParams) -> None:
    _look_around(server)
    _publish(server, params.text_document.uri)


def _changed(server: Server, params: lsp.DidChangeTextDocumentParams) -> None:
    uri = params.text_document.uri
    _forget_waiting(server, uri)
    server.waiting[uri] = asyncio.get_running_loop().call_later(PAUSE, _publish, server, uri)


def _saved(server: Server, params: lsp.DidSaveTextDocumentParams) -> None:
    _look_around(server)
    server.checked.clear()  # another sheet may take values from this one
    for document in list(server.workspace.text_documents.values()):
        _publish(server, document.uri)


def _closed(server: Server, params: lsp.DidCloseTextDocumentParams) -> None:
    uri = params.text_document.uri
    _forget_waiting(server, uri)
    server.checked.pop(uri, None)
    server.text_document_publish_diagnostics(lsp.PublishDiagnosticsParams(uri, []))


def _hovered(server: Server, params: lsp.HoverParams) -> lsp.Hover | None:
    checked = _look(server, server.workspace.get_text_document(params.text_document.uri))
    report, encoding = checked.report, _encoding(server)
    here = offset_of(checked.sheet, params.position.line, params.position.character, encoding)
    judged = claim_at(report, _standing(checked, here)) if report is not None else None
    if report is None or judged is None:
        return None
    return lsp.Hover(_block(server, to_hover(report, judged)), _range(checked, judged.claim.span, encoding))


def _ending(server: Server, params: None) -> None:
    server.orderly = True


# --- checking -------------------------------------------------------------------------------------------------------


def _look_around(server: Server) -> None:
    """Settings and other sheets may have changed: they are read anew."""
    server.run = Run()
    settings_table.cache_clear()


def _forget_waiting(server: Server, uri: str) -> None:
    waiting = server.waiting.pop(uri, None)
    if waiting is not None:
        waiting.cancel()


def _publish(server: Server, uri: str) -> None:
    """Check a document as it stands and tell the client what was found."""
    _forget_waiting(server, uri)
    document = server.workspace.get_text_document(uri)
    found = _diagnostics(_look(server, document), _encoding(server))
    server.text_document_publish_diagnostics(lsp.PublishDiagnosticsParams(uri, found, document.version))


def _look(server: Server, document: TextDocument) -> Checked:
    """The document checked, unless it has been since it changed."""
    known = server.checked.get(document.uri)
    if known is None or known.sheet.text != document.source:
        known = server.checked[document.uri] = _check(document, server.run)
    return known


def _check(document: TextDocument, run: Run) -> Checked:
    """The document checked; whatever goes wrong inside is said and ends nothing."""
    path = Path(to_fs_path(document.uri) or Path(document.uri).name)
    sheet = Sheet(str(path), document.source)
    try:
        return Checked(sheet, kept(sheet.text), report_on(Source(path, path, sheet.text), run))
    except Unusable as problem:
        return Checked(sheet, (), None, str(problem))
    except Exception as fault:
        return Checked(sheet, (), None, internal_fault(sheet.name, fault))


# --- in the client's terms ------------------------------------------------------------------------------------------


def _diagnostics(checked: Checked, encoding: str) -> list[lsp.Diagnostic]:
    if checked.report is None:
        top = lsp.Range(lsp.Position(0, 0), lsp.Position(0, 0))
        return [_diagnostic(top, checked.problem, lsp.DiagnosticSeverity.Error, "unchecked")]
    found: list[lsp.Diagnostic] = []
    for remark in remarks(checked.report) if checked.report.reading.is_calc else ():
        severity = _SEVERITIES.get(remark.kind)
        if severity is not None:
            places = ((remark.span, _lines(remark)), *remark.further)
            found += [_diagnostic(_range(checked, s, encoding), said, severity, remark.rule) for s, said in places]
    return found


def _diagnostic(where: lsp.Range, said: str, severity: lsp.DiagnosticSeverity, code: str) -> lsp.Diagnostic:
    return lsp.Diagnostic(where, said, severity, code, source="calccheck")


def _lines(remark: Remark) -> str:
    recomputed = [f"recomputed: {remark.recomputed}"] if remark.recomputed else []
    likely = [f"likely: {slip}" for slip in remark.likely]
    return "\n".join([remark.message, *recomputed, *likely, *([f"write: {remark.write}"] if remark.write else [])])


def _range(checked: Checked, span: Span, encoding: str) -> lsp.Range:
    """A span of the report's sheet where it stands in the editor's text."""
    start = checked.at[span.start]
    end = checked.at[span.end - 1] + 1 if span.end > span.start else start
    places = (position_of(checked.sheet, offset, encoding) for offset in (start, end))
    return lsp.Range(*(lsp.Position(*place) for place in places))


def _standing(checked: Checked, offset: int) -> int:
    """The offset in the report's sheet of a character of the editor's text; −1 for a mark, which is no part of the sheet."""
    k = bisect_left(checked.at, offset)
    return k if k < len(checked.at) and checked.at[k] == offset else -1


def _encoding(server: Server) -> str:
    """The units in which the client and this server agreed to count columns."""
    return str(getattr(server.workspace.position_encoding, "value", server.workspace.position_encoding) or "utf-16")


def _block(server: Server, text: str) -> lsp.MarkupContent:
    """Text in columns as the client shows it best: in a fence that no line of it closes, where it takes Markdown."""
    hover = getattr(server.client_capabilities.text_document, "hover", None)
    if lsp.MarkupKind.Markdown not in (getattr(hover, "content_format", None) or ()):
        return lsp.MarkupContent(lsp.MarkupKind.PlainText, text)
    fence = "`" * (3 + text.count("`"))
    return lsp.MarkupContent(lsp.MarkupKind.Markdown, f"{fence}text\n{text}\n{fence}")
