"""Earlier versions of a sheet from its git history. Used by the command line only, and silent wherever there is none to read."""

from __future__ import annotations

import os
import time
from collections.abc import Iterable, Sequence
from pathlib import Path

LOOK_BACK = 20  # versions
SECONDS = 1.0
_HOOK = ("GIT_DIR", "GIT_WORK_TREE", "GIT_INDEX_FILE", "GIT_PREFIX")  # set inside a hook, for its own folder


def earlier_versions(path: Path) -> list[tuple[str, str]]:
    """The committed versions of a file, newest first, renames followed: ``commit 1a2b3c4, 2026-11-18`` and the text.

    Nothing where there is no git, no repository, no commit, or where reading takes too long. Writes nothing, asks nobody and
    fetches nothing.
    """
    path = Path(os.path.realpath(path))
    until = time.monotonic() + SECONDS
    log = ("log", f"-n{LOOK_BACK}", "--follow", "--no-show-signature", "--no-color", "--name-only")
    told = _git(path.parent, (*log, "--format=%h%x09%cs", "--", path.name), b"", until)
    versions = _versions(told.decode("utf-8", "replace").splitlines())
    asked = "".join(f"{commit}:{name}\n" for commit, _, name in versions)
    texts = _texts(_git(path.parent, ("cat-file", "--batch"), asked.encode(), until)) if versions else []
    return [
        (f"commit {commit}, {day}", text)
        for (commit, day, _), text in zip(versions, texts, strict=False)
        if text is not None
    ]


def _git(folder: Path, arguments: Sequence[str], asked: bytes, until: float) -> bytes:
    """What git prints, or nothing where it fails."""
    import subprocess  # late: only where a claim differs

    environment = {name: x for name, x in os.environ.items() if name not in _HOOK}
    environment |= {"GIT_TERMINAL_PROMPT": "0", "GIT_OPTIONAL_LOCKS": "0", "GIT_NO_LAZY_FETCH": "1", "LC_ALL": "C"}
    command = ["git", "-c", "core.quotePath=false", "-c", "protocol.allow=never", *arguments]
    try:
        done = subprocess.run(
            command,
            cwd=folder,
            input=asked,
            capture_output=True,
            env=environment,
            timeout=max(0.01, until - time.monotonic()),
        )
    except (OSError, subprocess.SubprocessError):
        return b""
    return done.stdout if done.returncode == 0 else b""


def _versions(lines: Iterable[str]) -> list[tuple[str, str, str]]:
    """Commit, day, and the file's name from the repository's root, from a log that names them on lines of their own."""
    found: list[tuple[str, str, str]] = []
    commit = day = ""
    for line in lines:
        if "\t" in line:
            commit, _, day = line.partition("\t")
        elif line and not line.startswith('"'):  # a quoted name has characters that cannot be asked for by line
            found.append((commit, day, line))
    return found


def _texts(told: bytes) -> list[str | None]:
    """The contents that git prints one after the other, each behind a line with its size; ``None`` for one that it lacks."""
    texts: list[str | None] = []
    while told:
        head, _, rest = told.partition(b"\n")
        words = head.split()
        if len(words) != 3 or words[1] != b"blob":
            texts.append(None)
            told = rest
            continue
        size = int(words[2])
        texts.append(_decoded(rest[:size]))
        told = rest[size + 1 :]
    return texts


def _decoded(data: bytes) -> str | None:
    try:
        return data.decode("utf-8")
    except UnicodeDecodeError:
        return None
