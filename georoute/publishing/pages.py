"""Make the pages of a plan, write them, and clear away our own pages that it no longer has."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from georoute.errors import OutputError
from georoute.files import atomic_write_bytes
from georoute.publishing.day_page import day_page
from georoute.publishing.names import OFFICE_NAME, OVERVIEW_NAME, PAGE_PATTERN, page_name
from georoute.publishing.office_page import office_page
from georoute.publishing.overview_page import overview_page
from georoute.publishing.page_values import Edition
from georoute.publishing.pdf import pdf_maker, plan_of_pdf
from georoute.publishing.run_sheet import run_sheet

if TYPE_CHECKING:
    from collections.abc import Collection, Mapping
    from datetime import datetime
    from pathlib import Path

    from georoute.domain.plan import Plan

__all__ = ["pages_of", "with_sheets_as_pdf", "write_pages"]

_HEAD_BYTES = 2_000
"""The marks of a page of ours stand within this many bytes of its start."""

_GENERATOR = re.compile(r'<meta name="generator" content="georoute [^"]*">')
_PLAN = re.compile(r'<meta name="georoute-plan" content="([^"]*)">')


def pages_of(plan: Plan, *, issued: datetime | None, language: str) -> dict[str, bytes]:
    """Return the pages of a plan, by file name: overview, each tour's page and sheet, office page.

    Raises
    ------
    ValueError
        There is no catalogue for the language.
    """
    edition = Edition.of(plan, issued=issued, language=language)
    pages = {OVERVIEW_NAME: overview_page(edition)}
    for tour in plan.tours:
        person = edition.slugs[tour.inspector_id]
        pages[page_name("day", tour.day, person)] = day_page(edition, tour)
        pages[page_name("sheet", tour.day, person)] = run_sheet(edition, tour)
    pages[OFFICE_NAME] = office_page(edition)
    return {name: page.encode("utf-8", "replace") for name, page in pages.items()}


def with_sheets_as_pdf(pages: Mapping[str, bytes], *, plan_id: str) -> dict[str, bytes]:
    """Return the pages with a PDF behind every run sheet.

    Raises
    ------
    OutputError
        The extra ``pdf`` is not installed.
    """
    make = pdf_maker(plan_id)
    more = {}
    for name, page in pages.items():
        more[name] = page
        if name.startswith("sheet_"):
            more[name.removesuffix(".html") + ".pdf"] = make(page.decode("utf-8"))
    return more


def _plan_of(path: Path) -> str | None:
    """Return the id of the plan that a page of ours shows; ``None`` for any other file."""
    if path.suffix == ".pdf":
        return plan_of_pdf(path.read_bytes())
    with path.open("rb") as file:
        head = file.read(_HEAD_BYTES).decode("utf-8", "replace")
    found = _PLAN.search(head)
    return found.group(1) if found and _GENERATOR.search(head) else None


def _ours(folder: Path) -> dict[str, str | None]:
    """Return the files of a folder that are named like our pages, with the plan each shows."""
    return {
        path.name: _plan_of(path)
        for path in sorted(folder.iterdir())
        if PAGE_PATTERN.fullmatch(path.name) and path.is_file()
    }


def _refuse_strangers(present: dict[str, str | None], names: Collection[str], folder: Path) -> None:
    strangers = [name for name in names if name in present and present[name] is None]
    if strangers:
        msg = (
            f"{folder} holds files that georoute did not make: {', '.join(strangers)}. Nothing "
            "was written. Choose another folder, or move these files."
        )
        raise OutputError(msg)


def write_pages(pages: Mapping[str, bytes], folder: Path, *, plan_id: str) -> tuple[Path, ...]:
    """Write pages into a folder, overview last, and remove stale pages of the same plan.

    Raises
    ------
    OutputError
        The folder cannot be used, or a file there that we did not make is in the way.
    """
    try:
        folder.mkdir(parents=True, exist_ok=True)
        present = _ours(folder)
    except OSError as error:
        msg = f"The folder {folder} for the pages cannot be used: {error}. Choose another folder."
        raise OutputError(msg) from error
    _refuse_strangers(present, pages, folder)
    # the overview last: it never links to a page that is not there yet
    for name in sorted(pages, key=lambda name: name == OVERVIEW_NAME):
        atomic_write_bytes(folder / name, pages[name])
    for name, shown in present.items():
        if name not in pages and shown == plan_id:
            (folder / name).unlink(missing_ok=True)
    return tuple(folder / name for name in pages)
