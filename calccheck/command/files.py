"""Sheets on disk: which files are meant, what stands in them, and files written whole or not at all."""

from __future__ import annotations

import os
import re
import stat
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path
from typing import Any

MARKED = ".checked"  # before the suffix of a marked copy, which a search through folders passes over


class Unusable(Exception):
    """A file that cannot be read, written or searched: its name and the reason, one line."""

    def __init__(self, name: str, reason: str) -> None:
        super().__init__(name, reason)
        self.name, self.reason = name, reason

    def __str__(self) -> str:
        """One line: ``name: reason``."""
        return f"{self.name}: {self.reason}"


@dataclass(frozen=True, slots=True)
class Source:
    """A sheet to be read. ``within``: its place below the folder that was searched, or its bare name.

    ``text``: of standard input, which is read only once.
    """

    path: Path
    within: Path
    text: str | None = None

    @property
    def name(self) -> str:
        """The name by which reports call it."""
        return str(self.path)


def sources(paths: Sequence[str]) -> tuple[list[Source], list[Unusable]]:
    """The files named, and under each folder named every ``*.md``, each file once; and what could not be searched.

    Hidden folders, marked copies and folders met before (a circle of links) are passed over.
    """
    found: dict[str, Source] = {}
    problems: list[Unusable] = []
    for path in map(Path, paths):
        try:
            for source in _under(path, problems) if path.is_dir() else _one(path):
                found.setdefault(os.path.realpath(source.path), source)
        except Unusable as problem:
            problems.append(problem)
    return list(found.values()), problems


def _one(path: Path) -> list[Source]:
    if not path.exists():
        raise Unusable(str(path), _missing(path))
    return [Source(path, Path(path.name))]


def _missing(path: Path) -> str:
    if path.is_symlink():
        return f"a link to {path.readlink()}, which does not exist"
    return "there is no such file or folder"


def _under(folder: Path, problems: list[Unusable]) -> Iterator[Source]:
    def refused(error: OSError) -> None:
        problems.append(Unusable(str(error.filename), f"the folder cannot be searched: {error.strerror}"))

    met: set[tuple[int, int]] = set()
    _new(folder, met)
    for here, folders, names in os.walk(folder, onerror=refused, followlinks=True):
        folders[:] = [f for f in sorted(folders) if not f.startswith(".") and _new(Path(here, f), met)]
        for name in sorted(names):
            path = Path(here, name)
            if path.suffix.lower() != ".md" or path.stem.endswith(MARKED):
                continue
            if path.exists():
                yield Source(path, path.relative_to(folder))
            else:
                problems.append(Unusable(str(path), _missing(path)))


def _new(folder: Path, met: set[tuple[int, int]]) -> bool:
    """Whether the folder has not been met before."""
    try:
        status = folder.stat()
    except OSError:
        return True  # the walk itself says why
    before = len(met)
    met.add((status.st_dev, status.st_ino))
    return len(met) > before


def read_text(path: Path) -> str:
    """A file's text as it stands, byte order mark and line ends kept. Raises ``Unusable``."""
    try:
        return decoded(path.read_bytes(), str(path))
    except IsADirectoryError:
        raise Unusable(str(path), "a folder stands where a file is meant") from None
    except OSError as error:
        raise Unusable(str(path), f"the file cannot be read: {error.strerror}") from None


def decoded(data: bytes, name: str) -> str:
    """Bytes as UTF-8. Raises ``Unusable`` with the place of the first byte that is not."""
    try:
        return data.decode("utf-8")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        reason = f"not UTF-8: byte 0x{data[error.start]:02x} in line {line}; save the file as UTF-8"
        raise Unusable(name, reason) from None


@lru_cache(maxsize=256)
def settings_table(folder: Path) -> tuple[str, dict[str, Any]]:
    """``[tool.calccheck]`` of the nearest pyproject.toml from an absolute folder upward, with that file's name.

    Empty where there is none. Raises ``Unusable``.
    """
    path = next((p for p in (d / "pyproject.toml" for d in (folder, *folder.parents)) if p.is_file()), None)
    text = read_text(path) if path is not None else ""
    if not re.search(r"""tool["'\s]*\.["'\s]*calccheck|^\s*\[\s*["']?tool["']?\s*\]""", text, re.MULTILINE):
        return str(path), {}
    import tomllib  # late: most projects keep no settings of ours

    try:
        tool = tomllib.loads(text).get("tool", {})
    except tomllib.TOMLDecodeError as error:
        raise Unusable(str(path), f"the settings cannot be read: {error}") from None
    table = tool.get("calccheck", {})
    if not isinstance(table, dict):
        raise Unusable(str(path), "tool.calccheck is a table of settings")
    return str(path), table


def write_whole(path: Path, data: bytes, replace: bool, expected: bytes | None = None) -> None:
    """Write a file in one step, so that a reader sees the old or the new one and a failure leaves the old. Raises ``Unusable``.

    ``replace``: whether a file of that name may be replaced; ``expected``: what it must then still hold.
    """
    target = Path(os.path.realpath(path))
    if target.is_dir():
        raise Unusable(str(path), "a folder of this name is in the way")
    if target.exists() and not replace:
        raise Unusable(str(path), "a file of this name exists; --replace lets it be replaced")
    if target.exists() and not os.access(target, os.W_OK):
        raise Unusable(str(path), "the file is write-protected")
    passing = target.with_name(f".{target.name}.{os.getpid()}.new")
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        if expected is not None and target.read_bytes() != expected:
            raise Unusable(str(path), "the file has changed since it was read; nothing written")
        _write(passing, target, data)
    except OSError as error:
        raise Unusable(str(path), f"the file cannot be written: {error.strerror}") from None


def _write(passing: Path, target: Path, data: bytes) -> None:
    with passing.open("xb") as file:
        try:
            file.write(data)
            file.close()
            if target.exists():
                passing.chmod(stat.S_IMODE(target.stat().st_mode))
            passing.replace(target)
        except BaseException:  # also a full disk or an interrupt leaves nothing behind
            file.close()
            passing.unlink(missing_ok=True)
            raise
