"""Pages printed by the browser, read back as text by poppler's pdftotext."""

from __future__ import annotations

import shutil
import subprocess
from pathlib import Path

from playwright.sync_api import Page

from tests.conftest import absent


def text_of_pdf(page: Page, folder: Path) -> list[str]:
    """Print a page to PDF and return the text of each sheet of paper."""
    reader = shutil.which("pdftotext")
    if reader is None:
        absent("browser", "pdftotext (poppler-utils) is not installed")
    assert reader is not None
    target = folder / "printed.pdf"
    page.pdf(path=target, prefer_css_page_size=True, print_background=True)
    done = subprocess.run(
        [reader, "-layout", str(target), "-"], capture_output=True, text=True, check=True
    )
    return done.stdout.rstrip("\f").split("\f")


def squeezed(text: str) -> str:
    """Return a text without any white space, as line breaks on paper are free."""
    return "".join(text.split())
