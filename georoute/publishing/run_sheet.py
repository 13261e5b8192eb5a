"""The run sheet: one tour on paper, without a script, to be printed or made into a PDF."""

from __future__ import annotations

from typing import TYPE_CHECKING

from markupsafe import Markup

from georoute.publishing.day_page import view_of
from georoute.publishing.frame import environment, own, policy
from georoute.publishing.looks import HUES
from georoute.publishing.names import OVERVIEW_NAME, page_name
from georoute.publishing.sketch import HEIGHT, PLATE_HEIGHT, WIDTH, sketch_of

if TYPE_CHECKING:
    from georoute.domain.plan import DayTour
    from georoute.publishing.page_values import Edition

__all__ = ["run_sheet"]


def run_sheet(edition: Edition, tour: DayTour) -> str:
    """Return the run sheet of a tour as HTML."""
    words = edition.figures.words
    view = view_of(edition, tour)
    style = own("sheet.css") + (own("sheet_roads.css") if edition.ground else "")
    return (
        environment()
        .get_template("sheet.html")
        .render(
            **edition.common() | {"map_note": edition.map_note([tour])},
            title=words("day_title", date=view.date_long, inspector=view.inspector),
            day=view,
            sketch=sketch_of(view, words, side=edition.side(), ground=edition.ground),
            ferry_sign=words("ferry_sign"),
            hue=HUES[view.look.hue],
            width=WIDTH,
            height=HEIGHT,
            plate_height=PLATE_HEIGHT,
            style=Markup(style),  # noqa: S704  # our own style sheet
            policy=policy([], [style]),
            overview_href=OVERVIEW_NAME,
            day_href=page_name("day", tour.day, edition.slugs[tour.inspector_id]),
            finish_line=words("finish_line", finish=view.finish, end=view.shift_end),
            tell_line=words("tell_line", end=view.shift_end),
        )
    )
