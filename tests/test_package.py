"""What is installed: every file that the program reads at work, and the version that it says."""

from __future__ import annotations

import re
import tomllib
from pathlib import Path

from calccheck import __version__

PROJECT = Path(__file__).parents[1]
SETTINGS = tomllib.loads((PROJECT / "pyproject.toml").read_text(encoding="utf-8"))


def test_every_file_beside_the_modules_is_shipped() -> None:
    package = PROJECT / "calccheck"
    beside = {p for p in package.rglob("*") if p.is_file() and p.suffix != ".py" and "__pycache__" not in p.parts}
    patterns = SETTINGS["tool"]["setuptools"]["package-data"]["calccheck"]
    assert beside == {p for pattern in patterns for p in package.glob(pattern)}
    assert {p.suffix for p in beside} >= {".typ", ".css"}


def test_every_folder_of_modules_is_a_package() -> None:
    modules = sorted((PROJECT / "calccheck").rglob("*.py"))
    assert modules and all((p.parent / "__init__.py").is_file() for p in modules)


def test_one_version() -> None:
    assert SETTINGS["project"]["version"] == __version__


def test_the_slow_library_of_algebra_has_one_door() -> None:
    """It is imported by name, which the import contracts do not see."""
    users = {
        p.name
        for p in (PROJECT / "calccheck").rglob("*.py")
        if re.search(r"[\"']sympy|import sympy", p.read_text("utf-8"))
    }
    assert users == {"symbolic.py"}
