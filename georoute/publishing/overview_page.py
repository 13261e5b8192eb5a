"""The overview page: what is not placed, all tours on one map, and their table."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.publishing.frame import DataLayer, Page, SurveyMap
from georoute.publishing.ground import MAIN_ONLY
from georoute.publishing.island import differences, island_json
from georoute.publishing.leg_paths import tour_m
from georoute.publishing.looks import WEEKDAY_LOOKS
from georoute.publishing.names import OFFICE_NAME
from georoute.publishing.overview_view import overview_view
from georoute.publishing.page_budget import page_on_ground
from georoute.publishing.strands import runs_of, told_runs

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from georoute.domain.sites import Base, Site
    from georoute.publishing.ground import Ground
    from georoute.publishing.overview_view import OverviewView, TourRow
    from georoute.publishing.page_values import Edition

__all__ = ["overview_page"]

_SCRIPTS = ("base.js", "labels.js", "map.js", "overview.js")
_STYLES = ("page.css", "overview.css", "print.css")
_ROAD_SCRIPTS = (*_SCRIPTS[:-1], "cords.js", "ground.js", "streets.js", "overview.js")
_ROAD_STYLES = (*_STYLES[:-1], "roads.css", "print.css")
_MOST_STRAND_BYTES = 110_000
_STRAND_M = (8.0, 15.0, 30.0, 60.0, 120.0, 250.0)
"""Strands are told to this many metres, more coarsely where a plan has very many."""


_STEP_DEG = 1e-5
"""Places of the overview are told in whole steps of this, about a metre."""


def _steps(edition: Edition, place: Base | Site) -> tuple[int, int]:
    """Return latitude and longitude in whole steps."""
    return round(place.lat_deg / _STEP_DEG), round(edition.lon(place.lon_deg) / _STEP_DEG)


def _outermost(stops: list[tuple[int, int]]) -> list[int]:
    """Return the stops (from 0) where the tag of a tour may hang: the farthest one each way."""
    numbers = range(len(stops))
    south_to_north = sorted(numbers, key=lambda number: stops[number][0])
    west_to_east = sorted(numbers, key=lambda number: stops[number][1])
    chosen = [line[end] for line in (south_to_north, west_to_east) for end in (0, -1)]
    return list(dict.fromkeys(chosen))


def _short_name(name: str) -> str:
    """Return a name with its first word shortened: ``R. Tapia``."""
    parts = name.split()
    return f"{parts[0][0]}. {parts[-1]}" if len(parts) > 1 else name


def _island(edition: Edition, view: OverviewView) -> dict[str, object]:
    """Return the data of the map: bases, and each tour's bases by number and stops by place."""
    words, index = edition.figures.words, edition.index
    people = list(index.inspectors)
    numbers = {base_id: number for number, base_id in enumerate(index.bases)}

    def strand(row: TourRow) -> dict[str, object]:
        tour = row.tour
        stops = [_steps(edition, index.sites[stop.site_id]) for stop in tour.stops]
        return {
            "hue": row.look.hue,
            **({"outlined": True} if row.look.outlined else {}),
            "weekday": tour.day.weekday(),
            "date": row.date_short,
            "who": people.index(tour.inspector_id),
            "tags": _outermost(stops),
            "bases": [numbers[tour.start_base_id], numbers[tour.end_base_id]],
            "stops": differences(stops),
        }

    return {
        "words": words.for_scripts(),
        "side": edition.side(),
        "bases": [base.name for base in index.bases.values()],
        "base_places": differences([_steps(edition, base) for base in index.bases.values()]),
        # by weekday, from Monday
        "looks": [[look.dash, look.mark] for look in WEEKDAY_LOOKS],
        "people": [_short_name(person.name) for person in index.inspectors.values()],
        "tours": [strand(row) for row in view.rows],
    }


def _road_island(edition: Edition, ground: Ground) -> dict[str, object]:
    """Return the runs of all strands, as finely as they may be told."""
    tours = runs_of(edition.plan.tours, ground.flat)
    told: dict[str, object] = {}
    for tolerance_m in _STRAND_M:
        told = {"runs": [told_runs(legs, ground.flat, tolerance_m) for legs in tours]}
        if len(island_json(told)) <= _MOST_STRAND_BYTES:
            break
    return {**told, "driven": []}


def _where_m(
    edition: Edition, ground: Ground
) -> tuple[list[NDArray[np.float64]], NDArray[np.float64]]:
    """Return all tours and places in metres; the ground is shown around them."""
    index = edition.index
    stops = [index.sites[stop.site_id] for tour in edition.plan.tours for stop in tour.stops]
    places = [(base.lat_deg, base.lon_deg) for base in index.bases.values()]
    places += [(site.lat_deg, site.lon_deg) for site in stops]
    lines = [tour_m(tour, ground.flat) for tour in edition.plan.tours]
    return lines, ground.flat.forward(places)


def _column_words(view: OverviewView) -> str:
    """Return the style that puts the word of its column before each figure on a phone.

    The words come from the catalogue; none from a user gets into a style sheet.
    """
    rules = []
    for number, word in enumerate(view.columns, start=2):
        text = word.replace("\\", "\\\\").replace('"', '\\"')
        rules.append(f'.tours td:nth-of-type({number})::before{{content:"{text}"}}')
    return f"@media screen and (max-width:899px){{{''.join(rules)}}}"


def overview_page(edition: Edition) -> str:
    """Return the overview page as HTML."""
    words = edition.figures.words
    view = overview_view(edition.plan, edition.index, edition.slugs, edition.figures)
    ground = edition.ground
    page = Page(
        template="overview.html",
        scripts=_ROAD_SCRIPTS if ground else _SCRIPTS,
        styles=_ROAD_STYLES if ground else _STYLES,
        own_style=_column_words(view),
    )
    survey_map = SurveyMap("map_overview_name")
    survey_map.add_child(DataLayer("drawOverview"))
    page.add_child(survey_map)
    values = {
        **edition.common(),
        "title": view.title,
        "view": view,
        "office_href": OFFICE_NAME,
        "about": [*edition.about(), words("library")],
    }
    island = _island(edition, view)
    if ground is None:
        return page.page_text(island, values)
    island["roads"] = _road_island(edition, ground)
    return page_on_ground(page, island, values, ground, _where_m(edition, ground), MAIN_ONLY)
