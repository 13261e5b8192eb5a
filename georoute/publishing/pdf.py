"""Run sheets as PDF, made by WeasyPrint: an extra, for offices that print without a browser."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from georoute.errors import OutputError

if TYPE_CHECKING:
    from collections.abc import Callable

__all__ = ["pdf_maker", "plan_of_pdf"]

_MARK = re.compile(rb"%%EOF\s+%georoute-plan (\S+)\s*\Z")
"""Our mark stands behind the end of the document, where readers take it for a comment."""

_TAIL_BYTES = 200


def plan_of_pdf(data: bytes) -> str | None:
    """Return the id of the plan that a PDF of ours shows; ``None`` for any other file."""
    found = _MARK.search(data[-_TAIL_BYTES:])
    return found.group(1).decode("ascii", "replace") if found else None


def pdf_maker(plan_id: str) -> Callable[[str], bytes]:
    """Return what turns a run sheet in HTML into a PDF of the same bytes each time.

    Nothing is fetched from anywhere, whatever the page says.

    Raises
    ------
    OutputError
        WeasyPrint, or the library that sets its text, is not installed.
    """
    try:
        from weasyprint import HTML  # noqa: PLC0415  # an extra: nobody else pays for it
        from weasyprint.urls import URLFetcher  # noqa: PLC0415  # as above
    except ImportError as error:
        msg = (
            "A PDF needs WeasyPrint, which is not installed. Install it by "
            "pip install 'georoute[pdf]', or print the run sheets in HTML from a browser."
        )
        raise OutputError(msg) from error
    except OSError as error:
        msg = (
            f"WeasyPrint does not find Pango, which sets its text ({error}). Install Pango 1.44 "
            "or newer (on Debian: apt install libpango-1.0-0 libpangoft2-1.0-0 "
            "libharfbuzz-subset0), or print the run sheets in HTML from a browser."
        )
        raise OutputError(msg) from error

    def make(page: str) -> bytes:
        document = HTML(string=page, url_fetcher=URLFetcher(allowed_protocols=()))
        data: bytes = document.write_pdf()
        return data.rstrip() + f"\n%georoute-plan {plan_id}\n".encode("ascii", "replace")

    return make
