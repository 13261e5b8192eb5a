"""The day page: one tour as a map, a run list and a time rule."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.publishing.day_view import day_view
from georoute.publishing.frame import DataLayer, Page, SurveyMap
from georoute.publishing.island import differences
from georoute.publishing.looks import looks_of
from georoute.publishing.names import OVERVIEW_NAME, page_name

if TYPE_CHECKING:
    from georoute.domain.plan import DayTour
    from georoute.publishing.day_view import DayView
    from georoute.publishing.page_values import Edition

__all__ = ["day_page", "view_of"]

_SCRIPTS = ("base.js", "labels.js", "map.js", "day.js")
_STYLES = ("page.css", "day.css", "print.css")


def view_of(edition: Edition, tour: DayTour) -> DayView:
    """Return what the pages of a tour say."""
    look = looks_of(edition.plan.programme.inspectors, tour.inspector_id, tour.day)
    return day_view(edition.index, tour, look, edition.figures)


def _steps(edition: Edition, lat_deg: float, lon_deg: float) -> tuple[int, int]:
    """Return a place in whole steps of 1e-6 degrees, a tenth of a metre."""
    return round(lat_deg * 1e6), round(edition.lon(lon_deg) * 1e6)


def _island(edition: Edition, view: DayView) -> dict[str, object]:
    """Return the data of the map: bases (one or two) and stops in order, which make its legs."""
    bases = [view.start_base]
    if view.end_base.base_id != view.start_base.base_id:
        bases.append(view.end_base)
    words = edition.figures.words
    out = f"{words('out')} {view.out}"
    back = f"{words('back')} {view.back}"
    times = [f"{out} · {back}"] if len(bases) == 1 else [out, back]
    return {
        "words": words.for_scripts(),
        "side": edition.side(),
        "tour": {
            "hue": view.look.hue,
            "outlined": view.look.outlined,
            "dash": view.look.dash,
            "bases": [
                {
                    "name": base.name,
                    "times": text,
                    "lat": round(base.lat_deg, 6),
                    "lon": edition.lon(base.lon_deg),
                }
                for base, text in zip(bases, times, strict=True)
            ],
            # names, times and states stand in the run list; the map reads them there
            "places": differences(
                [_steps(edition, stop.lat_deg, stop.lon_deg) for stop in view.stops]
            ),
            "leave_s": differences([(stop.leave_ms // 1000,) for stop in view.stops]),
            "arrive": [stop.arrive for stop in view.stops],
            "notes": {stop.number: stop.note for stop in view.stops if stop.note},
        },
    }


def day_page(edition: Edition, tour: DayTour) -> str:
    """Return the day page of a tour as HTML."""
    words = edition.figures.words
    view = view_of(edition, tour)
    page = Page(template="day.html", scripts=_SCRIPTS, styles=_STYLES)
    survey_map = SurveyMap("map_name")
    survey_map.add_child(DataLayer("drawDay"))
    page.add_child(survey_map)
    finish = words("finish_line", finish=view.finish, end=view.shift_end)
    values = {
        **edition.common(),
        "title": words("day_title", date=view.date_long, inspector=view.inspector),
        "day": view,
        "overview_href": OVERVIEW_NAME,
        "sheet_href": page_name("sheet", tour.day, edition.slugs[tour.inspector_id]),
        "finish_line": finish,
        "tell_line": words("tell_line", end=view.shift_end),
        "rule_text": words(
            "time_rule_text",
            date=view.date_long,
            out=view.out,
            stops=len(view.stops),
            back=view.back,
            finish=view.finish,
        ),
        "about": [*edition.about(), words("library")],
    }
    return page.page_text(_island(edition, view), values)
