"""The hook in a fresh repository, by the real pre-commit: installed from a clone, then asked to pass and to refuse commits.

pre-commit builds its own environment with all dependencies, which takes a quarter of a minute or so with a warm cache of packages
and a minute or more without.
"""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import time
from pathlib import Path

import pytest

PROJECT = Path(__file__).parents[1]
SHIPPED = ("calccheck", "pyproject.toml", "README.md", ".pre-commit-hooks.yaml")
RIGHT = """```circuit
reference g
V1: 10 V, a to g
R1: 1 kΩ, a to b
R2: 3 kΩ, b to g
```

The bus is at `V_b = 7.5 V`.
"""
WRONG = RIGHT.replace("7.5 V", "7.6 V")
CONFIG = "repos:\n- repo: {clone}\n  rev: {revision}\n  hooks:\n  - id: calccheck\n"


def environment(home: Path) -> dict[str, str]:
    """No settings of whoever runs the test, and environments of pre-commit's own that go with the test."""
    nobody = {"NAME": "Originator", "EMAIL": "originator@example.org"}
    names = {f"GIT_{who}_{what}": value for who in ("AUTHOR", "COMMITTER") for what, value in nobody.items()}
    clean = {k: v for k, v in os.environ.items() if not k.startswith(("GIT_", "PRE_COMMIT")) and k != "PYTHONPATH"}
    return {**clean, **names, "PRE_COMMIT_HOME": str(home), "GIT_CONFIG_GLOBAL": os.devnull, "PYTHONUTF8": "1"}


@pytest.fixture(scope="module")
def work(tmp_path_factory):
    """A repository with the hook installed, and how long the installation took."""
    base = tmp_path_factory.mktemp("hook")
    env = environment(base / "environments")
    reach = [
        sys.executable,
        "-m",
        "pip",
        "download",
        "--no-cache-dir",
        "--no-deps",
        "-d",
        str(base / "reach"),
        "setuptools",
    ]
    asked = subprocess.run(reach, capture_output=True, text=True, env=env)
    if asked.returncode:
        pytest.skip(f"no package registry can be reached, and the hook's environment needs one: {asked.stderr[-300:]}")
    clone, repository = base / "calccheck", base / "station"
    clone.mkdir()
    for name in SHIPPED:
        source = PROJECT / name
        if source.is_dir():
            shutil.copytree(source, clone / name, ignore=shutil.ignore_patterns("__pycache__"))
        else:
            shutil.copy(source, clone / name)
    git(clone, env, "init", "-q")
    git(clone, env, "add", ".")
    git(clone, env, "commit", "-qm", "calccheck")
    revision = git(clone, env, "rev-parse", "HEAD").stdout.strip()
    repository.mkdir()
    git(repository, env, "init", "-q")
    config = CONFIG.format(clone=clone.as_posix(), revision=revision)
    (repository / ".pre-commit-config.yaml").write_text(config, encoding="utf-8")
    began = time.monotonic()
    for step in (["install"], ["install-hooks"]):
        subprocess.run([sys.executable, "-m", "pre_commit", *step], cwd=repository, env=env, check=True)
    print(f"pre-commit built the hook's environment in {time.monotonic() - began:.0f} s")
    git(repository, env, "add", ".pre-commit-config.yaml")
    git(repository, env, "commit", "-qm", "Hook")
    return repository, env


def git(folder: Path, env: dict[str, str], *arguments: str, check: bool = True) -> subprocess.CompletedProcess[str]:
    done = subprocess.run(["git", *arguments], cwd=folder, env=env, capture_output=True, text=True, encoding="utf-8")
    assert not check or done.returncode == 0, done.stderr
    return done


def commit(work, files: dict[str, str], then: dict[str, str] | None = None):
    """Stage files, change some of them again without staging, try to commit; whether it was made, and what was said."""
    repository, env = work
    git(repository, env, "reset", "-q", "--hard")
    for name, text in files.items():
        (repository / name).write_text(text, encoding="utf-8", newline="")
        git(repository, env, "add", name)
    for name, text in (then or {}).items():
        (repository / name).write_text(text, encoding="utf-8", newline="")
    kept = contents(repository)
    done = git(repository, env, "commit", "-m", "Sheets", check=False)
    assert contents(repository) == kept, "the hook wrote something"
    return done.returncode == 0, done.stdout + done.stderr


def contents(folder: Path) -> dict[str, bytes]:
    return {p.name: p.read_bytes() for p in sorted(folder.iterdir()) if p.is_file()}


def test_a_right_sheet_is_committed(work):
    made, said = commit(work, {"right.md": RIGHT})
    assert made and "check calc sheets" in said and "Passed" in said


def test_a_wrong_sheet_is_refused_with_its_place_and_value(work):
    made, said = commit(work, {"wrong.md": WRONG, "right2.md": RIGHT})
    assert not made and "wrong.md:8:15: differs: " in said and "7.5" in said and "1 ✓ agrees" in said


def test_a_claim_that_cannot_be_checked_is_refused(work):
    made, said = commit(work, {"doubt.md": RIGHT.replace("V_b", "V_q")})
    assert not made and "doubt.md:8:15: unchecked: " in said


def test_only_what_is_staged_counts(work):
    made, said = commit(work, {"a.md": RIGHT}, then={"a.md": WRONG})
    assert made, said
    made, said = commit(work, {"b.md": WRONG}, then={"b.md": RIGHT})
    assert not made and "b.md:8:15: differs: " in said


def test_a_file_that_is_no_calc_sheet_passes(work):
    made, said = commit(work, {"minutes.md": "# Minutes\n\n`x = 3 V` was said.\n", "notes.txt": WRONG})
    assert made, said
