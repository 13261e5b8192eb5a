"""Names of page files: safe on every file system, free of people's particulars."""

from __future__ import annotations

import re
import unicodedata
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable
    from datetime import date

__all__ = ["OFFICE_NAME", "OVERVIEW_NAME", "PAGE_PATTERN", "page_name", "slug", "slugs_of"]

OVERVIEW_NAME = "index.html"
OFFICE_NAME = "office.html"

PAGE_PATTERN = re.compile(
    r"(?:index|office|(?:day|sheet)_\d{4}-\d{2}-\d{2}_[a-z0-9-]+)\.html"
    r"|sheet_\d{4}-\d{2}-\d{2}_[a-z0-9-]+\.pdf"
)
"""What the names of our pages look like; nothing else in a folder is ever touched."""

_LONGEST_SLUG = 40


def slug(text: str) -> str:
    """Return ``text`` in lower-case ASCII letters, digits and hyphens; may be empty."""
    plain = unicodedata.normalize("NFKD", text).encode("ascii", "ignore").decode("ascii").lower()
    return re.sub(r"[^a-z0-9]+", "-", plain)[:_LONGEST_SLUG].strip("-")


def slugs_of(ids: Iterable[str]) -> dict[str, str]:
    """Return a slug for each id, all different; ids without a Latin letter get a number."""
    taken: set[str] = set()
    slugs: dict[str, str] = {}
    for number, text in enumerate(ids, start=1):
        wanted = slug(text) or f"inspector-{number}"
        name, again = wanted, 2
        while name in taken:
            name, again = f"{wanted}-{again}", again + 1
        taken.add(name)
        slugs[text] = name
    return slugs


def page_name(kind: str, day: date, inspector_slug: str) -> str:
    """Return the file name of a ``day`` or ``sheet`` page."""
    return f"{kind}_{day.isoformat()}_{inspector_slug}.html"
