"""The day page: one tour as a map, a run list and a time rule."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.publishing.day_view import day_view
from georoute.publishing.frame import DataLayer, Page, SurveyMap
from georoute.publishing.island import differences
from georoute.publishing.leg_paths import APART_M, any_roads, pieces_of, told_pieces, tour_m
from georoute.publishing.looks import looks_of
from georoute.publishing.names import OVERVIEW_NAME, page_name
from georoute.publishing.page_budget import page_on_ground
from georoute.publishing.road_lines import STEP_DEG

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from georoute.domain.plan import DayTour
    from georoute.publishing.day_view import DayView
    from georoute.publishing.ground import Ground
    from georoute.publishing.page_values import Edition

__all__ = ["day_page", "view_of"]

_SCRIPTS = ("base.js", "labels.js", "map.js", "day.js")
_STYLES = ("page.css", "day.css", "print.css")
_ROAD_SCRIPTS = ("base.js", "labels.js", "map.js", "cords.js", "ground.js", "streets.js", "day.js")
_ROAD_STYLES = (*_STYLES[:-1], "roads.css", "print.css")


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


def _road_island(edition: Edition, tour: DayTour, ground: Ground) -> dict[str, object]:
    """Return what a tour on roads adds: pieces of legs, last metres, roads driven, a word."""
    ends = [tour.start_base_id]
    if tour.end_base_id != tour.start_base_id:
        ends.append(tour.end_base_id)
    apart = []
    for number, place in enumerate([*ends, *(stop.site_id for stop in tour.stops)]):
        point = edition.index.road_points.get(place)
        if point is not None and point.distance_m >= APART_M:
            lat, lon = point.lat_deg, edition.lon(point.lon_deg)
            apart += [number, round(lat / STEP_DEG), round(lon / STEP_DEG)]
    return {
        "ways": [told_pieces(pieces_of(leg, ground), ground.flat) for leg in tour.legs],
        "apart": apart,
        "driven": sorted({name for leg in tour.legs for name, _ in leg.roads if name}),
        "ferry_sign": edition.figures.words("ferry_sign"),
    }


def _where_m(
    view: DayView, ground: Ground
) -> tuple[list[NDArray[np.float64]], NDArray[np.float64]]:
    """Return the tour and its places in metres; the ground is shown around them."""
    places = [(base.lat_deg, base.lon_deg) for base in (view.start_base, view.end_base)]
    places += [(stop.lat_deg, stop.lon_deg) for stop in view.stops]
    return [tour_m(view.tour, ground.flat)], ground.flat.forward(places)


def day_page(edition: Edition, tour: DayTour) -> str:
    """Return the day page of a tour as HTML."""
    words = edition.figures.words
    view = view_of(edition, tour)
    on_roads = edition.ground is not None and any_roads(tour.legs)
    page = Page(
        template="day.html",
        scripts=_ROAD_SCRIPTS if on_roads else _SCRIPTS,
        styles=_ROAD_STYLES if on_roads else _STYLES,
    )
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
        "map_note": edition.map_note([tour]),
        "on_roads": on_roads,
    }
    island = _island(edition, view)
    if edition.ground is None or not on_roads:
        return page.page_text(island, values)
    island["roads"] = _road_island(edition, tour, edition.ground)
    where_m = _where_m(view, edition.ground)
    return page_on_ground(page, island, values, edition.ground, where_m)
