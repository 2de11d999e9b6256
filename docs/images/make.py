"""Makes the pictures of the documents anew: python docs/images/make.py

From the sheet that is kept for review: a page of its PDF, and the top of its page for the screen.
"""

from __future__ import annotations

import shutil
import sys
from pathlib import Path
from tempfile import TemporaryDirectory

import pymupdf
from playwright.sync_api import sync_playwright

from calccheck import Settings, check_file
from calccheck.annotate.to_html import to_html
from calccheck.annotate.to_pdf import to_pdf

HERE = Path(__file__).parent
(SHEET,) = (HERE.parent.parent / "sheets" / "for-review").glob("*.md")
LARGEST = 200_000  # bytes of a picture
WIDE, HIGH = 1000, 1250  # CSS pixels of the picture of the screen
FLAGS = ["--no-sandbox", "--disable-gpu", "--disable-background-networking", "--no-first-run"]


def marked_page(pdf: bytes) -> bytes:
    """The page with the drawing of the circuit, working and the superposition table."""
    with pymupdf.open(stream=pdf) as pages:
        page = next(page for page in pages if "due to" in page.get_text() and page.search_for("The circuit as read"))
        return page.get_pixmap(dpi=100).tobytes("png")


def marked_screen(html: str) -> bytes:
    """The top of the page for the screen."""
    chromium = shutil.which("chromium")
    if chromium is None:
        sys.exit("no browser: install Debian's package chromium")
    with TemporaryDirectory() as folder, sync_playwright() as p:
        path = Path(folder) / "page.html"
        path.write_text(html, "utf-8")
        browser = p.chromium.launch(executable_path=chromium, args=FLAGS)
        page = browser.new_page(viewport={"width": WIDE, "height": HIGH})
        page.goto(path.as_uri())
        picture = page.screenshot()
        browser.close()
    return picture


def main() -> None:
    """Both pictures, none larger than what a page of documents should bear."""
    report = check_file(SHEET, Settings())
    for name, picture in (
        ("marked-page.png", marked_page(to_pdf(report))),
        ("marked-screen.png", marked_screen(to_html(report))),
    ):
        if len(picture) > LARGEST:
            sys.exit(f"{name}: {len(picture)} bytes are more than {LARGEST}")
        (HERE / name).write_bytes(picture)
        print(f"{name}: {len(picture)} bytes")


if __name__ == "__main__":
    main()
