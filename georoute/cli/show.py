"""``georoute show``: a plan in the terminal."""

from __future__ import annotations

from datetime import date, datetime
from pathlib import Path
from typing import Annotated

import typer

from georoute.cli.render import print_caution, print_json, stderr
from georoute.cli.summary import as_json, print_plan, print_tour, print_unplaced

__all__ = ["show"]


def show(
    plan: Annotated[Path, typer.Argument(help="A plan file.")],
    *,
    day: Annotated[
        datetime | None,
        typer.Option(formats=["%Y-%m-%d"], metavar="DATE", help="Only this date, stop by stop."),
    ] = None,
    inspector: Annotated[
        str | None, typer.Option(help="Only this inspector (the id), stop by stop.")
    ] = None,
    unplaced: Annotated[
        bool, typer.Option("--unplaced", help="Every visit that is not placed, with its reason.")
    ] = False,
    json: Annotated[bool, typer.Option("--json", help="Print the plan as JSON.")] = False,
) -> None:
    """Show a plan in the terminal.

    The sums, or the stops of one date or one inspector.
    """
    from georoute.store import read_plan

    finished = read_plan(plan)
    wanted: date | None = None if day is None else day.date()
    if json:
        print_json(as_json(finished))
        return
    if unplaced:
        print_unplaced(finished.unplaced)
    elif wanted is None and inspector is None:
        print_plan(finished)
    else:
        tours = [
            tour
            for tour in finished.tours
            if wanted in {None, tour.day} and inspector in {None, tour.inspector_id}
        ]
        for tour in tours:
            print_tour(finished, tour)
        if not tours:
            known = ", ".join(person.inspector_id for person in finished.programme.inspectors)
            stderr().print(
                f"No tour for that choice. Dates: {finished.programme.first_date} to "
                f"{finished.programme.last_date}; inspectors: {known}."
            )
    print_caution()
