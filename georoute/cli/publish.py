"""``georoute publish``: pages for browsers and paper."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from georoute.cli.render import print_caution, stderr

__all__ = ["publish"]


def publish(
    plan: Annotated[Path, typer.Argument(help="A plan file.")],
    folder: Annotated[Path, typer.Argument(help="Folder for the pages.")] = Path("maps"),
    pdf: Annotated[
        bool,
        typer.Option("--pdf", help="Also write each run sheet as PDF; needs the extra 'pdf'."),
    ] = False,
) -> None:
    """Write the pages of a plan.

    An overview, a page for the office, and a map page and a run sheet for each day and inspector.
    Each page is one file that opens without a network. A plan that fails its check is refused.
    """
    from georoute.audit import audit
    from georoute.errors import AuditError
    from georoute.publishing import publish as write_pages
    from georoute.store import read_plan

    finished = read_plan(plan)
    breaches = [finding for finding in audit(finished) if finding.is_fault]
    if breaches:
        msg = f"{plan} fails its check in {len(breaches)} place(s); no page was written."
        raise AuditError(msg, findings=breaches)
    pages = write_pages(finished, folder, pdf=pdf)
    stderr().print(f"{len(pages)} pages in {folder}: open {folder / 'index.html'}")
    print_caution()
