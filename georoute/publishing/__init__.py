"""Pages for browsers and paper, made from a plan."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from datetime import datetime

    from georoute.domain.plan import Plan

__all__ = ["publish"]


def publish(
    plan: Plan,
    folder: Path | str,
    *,
    issued: datetime | None = None,
    language: str = "en",
    pdf: bool = False,
) -> tuple[Path, ...]:
    """Write the pages of a plan: overview, office page, and a day page and run sheet per tour.

    Each page is one file that opens without a network. The same plan, issue time and language
    give the same bytes. Pages of an earlier publishing of the same plan that it no longer has
    are removed; other files are left alone.

    Parameters
    ----------
    plan
        The plan to show.
    folder
        Where the pages go; made if it is not there.
    issued
        When the plan is given out, an aware datetime; ``None`` takes the plan's own issue time,
        and a plan that has none is shown as not issued.
    language
        ``en`` or ``es``.
    pdf
        Whether to write each run sheet as PDF too, beside its page; needs the extra ``pdf``.

    Returns
    -------
    tuple
        Paths of the pages, the overview first.

    Raises
    ------
    OutputError
        A page could not be written, a file that is not ours is in its place, or a PDF is wanted
        and the extra ``pdf`` is not installed.
    ValueError
        There is no catalogue for the language.
    """
    # folium and its templates are slow to import; nobody pays for them before publishing
    from georoute.publishing.pages import pages_of, with_sheets_as_pdf, write_pages  # noqa: PLC0415

    pages = pages_of(plan, issued=issued, language=language)
    if pdf:
        pages = with_sheets_as_pdf(pages, plan_id=plan.plan_id)
    return write_pages(pages, Path(folder), plan_id=plan.plan_id)
