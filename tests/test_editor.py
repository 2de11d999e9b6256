"""The editor server with a real client over standard input and output: Language Server Protocol 3.17, sections quoted from memory."""

from __future__ import annotations

import asyncio
import contextlib
import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

pytest.importorskip("pygls", reason="pygls is not installed: pip install calccheck[editor]")

from lsprotocol import types as lsp
from pygls.lsp.client import LanguageClient

from calccheck import check_text
from calccheck.cli import main

CIRCUIT = "```circuit\nreference g\nV1: 10 V, a to g\nR1: 1 kΩ, a to b\nR2: 3 kΩ, b to g\nI1: 2 mA, g to b\n```\n\n"
# By hand: V1 alone gives 10 V × 3/(1 + 3) = 7.5 V (divider), I1 alone 2 mA × (1 kΩ ∥ 3 kΩ) = 1.5 V; together 9 V.
SHEETS = Path(__file__).parents[1] / "sheets"
SECONDS = 20


class Editor:
    """A client that keeps what is published, and asks by the words that stand at a place."""

    def __init__(self, client, encoding, published):
        self.client, self.encoding, self.published, self.version = client, encoding, published, 0
        self.texts = {}

    def open(self, uri, text):
        self.texts[uri] = text
        item = lsp.TextDocumentItem(uri, "markdown", 0, text)
        self.client.text_document_did_open(lsp.DidOpenTextDocumentParams(item))

    def change(self, uri, text):
        self.version += 1
        self.texts[uri] = text
        document = lsp.VersionedTextDocumentIdentifier(self.version, uri)
        change = lsp.TextDocumentContentChangeWholeDocument(text)
        self.client.text_document_did_change(lsp.DidChangeTextDocumentParams(document, [change]))

    async def told(self, uri):
        while True:
            params = await asyncio.wait_for(self.published.get(), SECONDS)
            if params.uri == uri:
                return params

    async def hover(self, uri, words, behind=0):
        """What is shown over the first character of some words, or over one further behind."""
        at = self.texts[uri].index(words) + behind
        lines = self.texts[uri][:at].replace("\r\n", "\n").replace("\r", "\n").split("\n")
        place = lsp.Position(len(lines) - 1, columns(lines[-1], self.encoding))
        params = lsp.HoverParams(lsp.TextDocumentIdentifier(uri), place)
        return await asyncio.wait_for(self.client.text_document_hover_async(params), SECONDS)

    def at(self, uri, where):
        """The text in a range, cut by the encoding's own bytes."""
        import re

        width = {"utf-8": 1, "utf-16": 2, "utf-32": 4}[self.encoding]
        codec = self.encoding if self.encoding == "utf-8" else f"{self.encoding}-le"
        lines = re.split("\r\n|\n|\r", self.texts[uri])[where.start.line : where.end.line + 1]
        raw = [line.encode(codec) for line in lines]
        raw[-1] = raw[-1][: where.end.character * width]
        raw[0] = raw[0][where.start.character * width :]
        return "\n".join(line.decode(codec) for line in raw)


def columns(text, encoding):
    width = {"utf-8": 1, "utf-16": 2, "utf-32": 4}[encoding]
    return len(text.encode(encoding if width == 1 else f"{encoding}-le")) // width


def encoding_of(capabilities):
    agreed = capabilities.position_encoding
    return getattr(agreed, "value", agreed) or "utf-16"


@contextlib.asynccontextmanager
async def editor(encodings=None, markdown=False, folder=None):
    client, published = LanguageClient("test", "1"), asyncio.Queue()
    client.feature(lsp.TEXT_DOCUMENT_PUBLISH_DIAGNOSTICS)(lambda params: published.put_nowait(params))
    await client.start_io(sys.executable, "-m", "calccheck", "editor", cwd=folder)
    formats = [lsp.MarkupKind.Markdown if markdown else lsp.MarkupKind.PlainText]
    able = lsp.ClientCapabilities(
        general=lsp.GeneralClientCapabilities(position_encodings=encodings),
        text_document=lsp.TextDocumentClientCapabilities(hover=lsp.HoverClientCapabilities(content_format=formats)),
    )
    try:
        asked = client.initialize_async(lsp.InitializeParams(able, os.getpid()))
        result = await asyncio.wait_for(asked, SECONDS)
        client.initialized(lsp.InitializedParams())
        assert result.server_info.name == "calccheck"
        assert result.capabilities.text_document_sync.change == lsp.TextDocumentSyncKind.Full
        assert result.capabilities.hover_provider
        yield Editor(client, encoding_of(result.capabilities), published)
        await asyncio.wait_for(client.shutdown_async(None), SECONDS)
        client.exit(None)
        assert await asyncio.wait_for(client._server.wait(), SECONDS) == 0
    finally:
        if client._server.returncode is None:
            client._server.kill()
        await client.stop()


def session(play, **options):
    async def whole():
        async with editor(**options) as e:
            await play(e)

    asyncio.run(whole())


def codes(params):
    return [d.code for d in params.diagnostics]


def test_diagnostics_on_open_change_save_and_close(tmp_path):
    uri = (tmp_path / "a b.md").as_uri()

    async def play(e):
        e.open(uri, CIRCUIT + "`V_b = 9.5 V`, `V_q = 1 V`\n")
        first = await e.told(uri)
        assert codes(first) == ["differs", "unchecked"] and first.version == 0
        differs, unchecked = first.diagnostics
        assert differs.severity == lsp.DiagnosticSeverity.Error and differs.source == "calccheck"
        assert unchecked.severity == lsp.DiagnosticSeverity.Warning
        assert e.at(uri, differs.range) == "9.5 V" and "V_q" in e.at(uri, unchecked.range)
        assert "9 V" in differs.message
        e.change(uri, CIRCUIT + "`V_b = 9.4 V`\n")
        e.change(uri, CIRCUIT + "`V_b = 9.0 V`\n")
        second = await e.told(uri)
        assert codes(second) == [] and second.version == 2
        e.client.text_document_did_save(lsp.DidSaveTextDocumentParams(lsp.TextDocumentIdentifier(uri)))
        assert codes(await e.told(uri)) == []
        e.change(uri, CIRCUIT + "`V_b = 9.5 V`\n")
        assert codes(await e.told(uri)) == ["differs"]
        e.client.text_document_did_close(lsp.DidCloseTextDocumentParams(lsp.TextDocumentIdentifier(uri)))
        assert codes(await e.told(uri)) == []

    session(play)


@pytest.mark.parametrize(
    ("encodings", "end"),
    [(None, "\n"), (["utf-16"], "\r\n"), (["utf-8", "utf-16"], "\r\n"), (["utf-32"], "\r"), (["utf-7"], "\n")],
    ids=str,
)
def test_places_in_the_units_agreed_upon(encodings, end):
    """3.17, Position: UTF-16 unless both sides agree on another encoding. A form feed and U+2028 end no line."""
    uri = "untitled:Untitled-1"
    text = (CIRCUIT + "a\x0cb\u2028c\n\U0001f600 é 漢 `V_b = 9.5 V` \U0001f600 `V_b = 9.0 V`\n").replace("\n", end)

    async def play(e):
        assert e.encoding == {"utf-8": "utf-8", "utf-32": "utf-32"}.get((encodings or [""])[0], "utf-16")
        e.open(uri, text)
        (found,) = (await e.told(uri)).diagnostics
        assert e.at(uri, found.range) == "9.5 V" and found.range.start.line == 9
        for words in ("V_b = 9.5 V", "V_b = 9.0 V"):
            shown = await e.hover(uri, words)
            assert e.at(uri, shown.range) in (words, f"`{words}`") and shown.contents.value.startswith(words)

    session(play, encodings=encodings)


def test_hover_shows_the_value_and_its_parts_by_source():
    uri = "untitled:a.md"

    async def play(e):
        e.open(uri, CIRCUIT + "Some words, `V_b = 9.5 V`, `P_R2 = 27 mW`.\n")
        shown = (await e.hover(uri, "V_b = 9.5", 3)).contents
        assert shown.kind == lsp.MarkupKind.PlainText
        rows = [line.split("  ") for line in shown.value.split("\n")]
        told = {row[0].strip(): [cell.strip() for cell in row[1:] if cell.strip()] for row in rows}
        assert told["V_b = 9.5 V"] == [] and told["✗ differs, held against the circuit"] == []
        assert told["recomputed"] == ["9 V"]
        assert told["due to V1"][0] == "7.5 V" and told["due to I1"][0] == "1.5 V" and told["sum"][0] == "9 V"
        power = (await e.hover(uri, "P_R2")).contents.value
        assert "recomputed  27 mW" in power and "due to" not in power  # a power is no sum of parts by source
        for nothing in ("Some words", "reference", "V1: 10 V", ", `P_R2"):
            assert await e.hover(uri, nothing) is None
        behind = lsp.HoverParams(lsp.TextDocumentIdentifier(uri), lsp.Position(99, 99))
        assert await e.client.text_document_hover_async(behind) is None

    session(play)


def test_hover_as_markdown_cannot_be_left_by_the_sheet():
    uri = "untitled:a.md"

    async def play(e):
        e.open(uri, CIRCUIT + "`` V_```x = 9.5 V ``\n\n`V_b = 9.5 V`\n")
        shown = (await e.hover(uri, "V_b = 9.5")).contents
        assert shown.kind == lsp.MarkupKind.Markdown
        first, *body, last = shown.value.split("\n")
        assert first == "```text" and last == "```" and "```" not in "".join(body)
        odd = await e.hover(uri, "V_```x")
        if odd is not None:
            fence = odd.contents.value.split("\n")[-1]
            assert fence not in odd.contents.value[len(fence) : -len(fence)]

    session(play, markdown=True)


def test_a_marked_sheet_keeps_its_places(tmp_path, monkeypatch):
    """Marks put in by an earlier run are no part of the sheet; what stands behind them is still found where it stands."""
    monkeypatch.chdir(tmp_path)
    path = tmp_path / "a.md"
    path.write_text(CIRCUIT + "`V_b = 9.6 V` and `V_b = 9.5 V`\n\nMore: `I_I1 = 2 mA`\n", encoding="utf-8")
    main(["mark", "a.md", "--to", "md", "--in-place"])
    marked = path.read_text(encoding="utf-8")
    assert "calccheck-1" in marked

    async def play(e):
        e.open(path.as_uri(), marked)
        found = (await e.told(path.as_uri())).diagnostics
        assert [e.at(path.as_uri(), d.range) for d in found] == ["9.6 V", "9.5 V"]
        shown = await e.hover(path.as_uri(), "I_I1 = 2 mA")
        assert shown.contents.value.startswith("I_I1 = 2 mA")
        assert await e.hover(path.as_uri(), "[^calccheck-1]") is None

    session(play)


def test_half_written_text_never_ends_it():
    """A sheet typed sign by sign, text that is no sheet, and signs that no file holds."""
    text = (SHEETS / "for-review" / "TS-111-radio-and-lamp-feed.md").read_text(encoding="utf-8")
    uri = "untitled:a.md"

    async def play(e):
        e.open(uri, "")
        assert codes(await e.told(uri)) == []
        for cut in range(0, len(text), len(text) // 12):
            e.open(uri, text[:cut])  # opened anew, so that each one is checked
            await e.told(uri)
        for odd in (
            "```circuit",
            "```circuit\n\x00",
            "\ud800 `V_b = 1 V`",
            "---\n",
            "|`V_b`|\n|-|\n|",
            CIRCUIT + "`V_b =",
        ):
            e.open(uri, odd)
            await e.told(uri)
            await e.client.text_document_hover_async(
                lsp.HoverParams(lsp.TextDocumentIdentifier(uri), lsp.Position(0, 3))
            )
        e.open(uri, text)
        counts = check_text("a.md", text).counts
        found = codes(await e.told(uri))
        assert found.count("unchecked") == counts["unchecked"] and found.count("differs") >= counts["differs"] > 0

    session(play)


def test_settings_and_other_sheets_are_read_anew_on_saving(tmp_path):
    """A value moves on in one sheet: the sheet that takes it from there is told when the first is saved."""
    one, two = tmp_path / "one.md", tmp_path / "two.md"
    front = "---\nsheet: {}\n---\n\n"
    first = front.format("TS-1") + CIRCUIT + "`V_b = 9.0 V`\n"
    one.write_text(first, encoding="utf-8")
    second = front.format("TS-2") + CIRCUIT + "```working\ngiven Vbus = 9.0 V from TS-1\n```\n"
    two.write_text(second, encoding="utf-8")

    async def play(e):
        e.open(one.as_uri(), first)
        await e.told(one.as_uri())
        e.open(two.as_uri(), second)
        before = codes(await e.told(two.as_uri()))
        one.write_text(first.replace("V_b = 9.0 V", "V_a = 10 V"), encoding="utf-8")
        e.client.text_document_did_save(lsp.DidSaveTextDocumentParams(lsp.TextDocumentIdentifier(one.as_uri())))
        after = codes(await e.told(two.as_uri()))
        assert "reference" not in before and "reference" in after
        (tmp_path / "pyproject.toml").write_text("[tool.calccheck]\ncarry = 'much'\n", encoding="utf-8")
        e.client.text_document_did_save(lsp.DidSaveTextDocumentParams(lsp.TextDocumentIdentifier(one.as_uri())))
        (broken,) = (await e.told(two.as_uri())).diagnostics
        assert "pyproject.toml" in broken.message and broken.severity == lsp.DiagnosticSeverity.Error

    session(play, folder=tmp_path)


def talk(*messages: dict, then: bytes = b"") -> subprocess.CompletedProcess:
    """What the server writes when it is told these messages and its input ends."""
    body = b""
    for message in messages:
        raw = json.dumps({"jsonrpc": "2.0", **message}).encode()
        body += b"Content-Length: %d\r\n\r\n%s" % (len(raw), raw)
    return subprocess.run(
        [sys.executable, "-m", "calccheck", "editor"],
        input=body + then,
        capture_output=True,
        timeout=SECONDS,
        check=False,
    )


INITIALIZE = {"id": 1, "method": "initialize", "params": {"processId": None, "rootUri": None, "capabilities": {}}}


def test_the_exit_status_is_the_protocol_s():
    """3.17, Exit Notification: 0 if the shutdown request came before it, else 1. An input that ends leaves no process behind."""
    orderly = talk(INITIALIZE, {"id": 2, "method": "shutdown"}, {"method": "exit"})
    assert orderly.returncode == 0 and b"Traceback" not in orderly.stderr
    assert orderly.stdout.count(b"Content-Length") == 2
    hasty = talk(INITIALIZE, {"method": "exit"})
    assert hasty.returncode == 1 and b"Traceback" not in hasty.stderr
    assert talk(INITIALIZE).returncode == 1 and talk().returncode == 1


def test_at_a_terminal_it_says_who_is_to_start_it():
    leader, follower = os.openpty()
    try:
        done = subprocess.run(
            [sys.executable, "-m", "calccheck", "editor"],
            stdin=follower,
            capture_output=True,
            timeout=SECONDS,
            check=False,
        )
    finally:
        os.close(leader)
        os.close(follower)
    assert done.returncode == 2 and b"by an editor" in done.stderr and done.stdout == b""


def test_without_the_library_it_says_what_to_install(monkeypatch, capsys):
    monkeypatch.setitem(sys.modules, "pygls", None)
    monkeypatch.setitem(sys.modules, "pygls.lsp.server", None)
    monkeypatch.delitem(sys.modules, "calccheck.command.editor", raising=False)
    assert main(["editor"]) == 2
    assert "calccheck[editor]" in capsys.readouterr().err
