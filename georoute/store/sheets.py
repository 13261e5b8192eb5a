"""A plan as sheets: the rows of each layer and table, before they become cells or data frames."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from typing import TYPE_CHECKING

from georoute.store.cells import Codec, codec_for
from georoute.store.lines import Line, split_at_antimeridian
from georoute.store.rows import columns_of, flatten
from georoute.store.schema import BACKDROP, EXTRA_COLUMNS, PLAN, ROAD_POINTS, SCHEMA, TABLES
from georoute.store.settings import write_settings

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

    from georoute.domain.plan import DayTour, Leg, Plan
    from georoute.domain.sites import Site

__all__ = ["Sheet", "sheets_of"]

FORMAT = "georoute plan"
MINUTE_S = 60.0
KM_M = 1_000.0
KEPT_IN_TABLES = frozenset({"bases", "inspectors"})

Shape = tuple[Line, ...]
"""Lines of (lon, lat) corners in degrees; a point is one line of one corner."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Sheet:
    """One layer or table: columns with their codecs, rows of values, shapes of the rows.

    ``geometry`` is empty for a table without shapes; a shape ``None`` is a row without a place.
    """

    name: str
    description: str
    geometry: str
    columns: tuple[tuple[str, Codec], ...]
    rows: tuple[tuple[object, ...], ...]
    shapes: tuple[Shape | None, ...] = ()


def _way(path: Sequence[tuple[float, float]]) -> Shape:
    """Return the shape of a way given as (latitude, longitude)."""
    return split_at_antimeridian(tuple((lon, lat) for lat, lon in path))


class _Places:
    """Where every id is: (lon, lat) in degrees."""

    def __init__(self, plan: Plan) -> None:
        self._sites = {site.site_id: (site.lon_deg, site.lat_deg) for site in plan.sites}
        self._bases = {base.base_id: (base.lon_deg, base.lat_deg) for base in plan.programme.bases}

    def point(self, place_id: str) -> Shape | None:
        spot = self._sites.get(place_id, self._bases.get(place_id))
        return None if spot is None else ((spot,),)

    def leg(self, leg: Leg) -> Shape | None:
        """Return the way of a leg along roads, or the straight line where none is known."""
        if not leg.path:
            return self.line((leg.from_id, leg.to_id))
        return _way(leg.path)

    def tour(self, tour: DayTour) -> Shape | None:
        """Return the way of a whole tour."""
        if not any(leg.path for leg in tour.legs):
            return self.line(
                (tour.start_base_id, *(s.site_id for s in tour.stops), tour.end_base_id)
            )
        shapes = [shape for shape in map(self.leg, tour.legs) if shape is not None]
        return tuple(line for shape in shapes for line in shape)

    def line(self, place_ids: Iterable[str]) -> Shape | None:
        """Return the straight lines through places; those of unknown id are passed over."""
        spots = [shape[0][0] for shape in map(self.point, place_ids) if shape is not None]
        return split_at_antimeridian(tuple(spots)) if len(spots) > 1 else None


def _sheet(
    name: str,
    values: Sequence[object],
    *,
    keys: Sequence[tuple[object, ...]] = (),
    added: Sequence[tuple[object, ...]] = (),
    shapes: Sequence[Shape | None] = (),
) -> Sheet:
    """Put together keys, fields and added columns of one table."""
    table = TABLES[name]
    key_columns = tuple((column, codec_for(hint)) for column, hint in table.keys.items())
    held = columns_of(table)
    fields = tuple((column.name, column.codec) for column in held)
    added_columns = tuple((column, codec_for(hint)) for column, hint in table.added.items())
    rows = [flatten(held, value) for value in values]
    if keys:
        rows = [(*key, *row) for key, row in zip(keys, rows, strict=True)]
    if added:
        rows = [(*row, *more) for row, more in zip(rows, added, strict=True)]
    return Sheet(
        name=name,
        description=table.description,
        geometry=table.geometry,
        columns=(*key_columns, *fields, *added_columns),
        rows=tuple(rows),
        shapes=tuple(shapes),
    )


def _extra_keys(plan: Plan) -> dict[str, bool]:
    """Return every extra key in order, and whether the plan's list of extra columns names it."""
    keys = dict.fromkeys(plan.extra_columns, True)
    for site in plan.sites:
        for key in site.extra:
            keys.setdefault(key, False)
    return keys


def _free_names(headers: Iterable[str], taken: Iterable[str]) -> dict[str, str]:
    """Return a column name for each header: as it is where it can be, else numbered.

    Names of columns differ by more than case and hold no control characters.
    """
    used = {name.casefold() for name in taken}
    names = {}
    for header in headers:
        plain = "".join(c if c.isprintable() else "_" for c in header).strip() or "column"
        name, number = plain, 1
        while name.casefold() in used:
            number += 1
            name = f"{plain}_{number}"
        used.add(name.casefold())
        names[header] = name
    return names


def _status_of_sites(plan: Plan) -> dict[str, str]:
    status = dict.fromkeys((visit.site_id for visit in plan.visits), "planned")
    return status | dict.fromkeys((entry.site_id for entry in plan.unplaced), "unplaced")


def _sites(plan: Plan, places: _Places, names: Mapping[str, str]) -> Sheet:
    status = _status_of_sites(plan)
    plain = _sheet(
        "sites",
        plan.sites,
        added=[(status.get(site.site_id, ""),) for site in plan.sites],
        shapes=[places.point(site.site_id) for site in plan.sites],
    )
    text = codec_for(str | None)
    return Sheet(
        name=plain.name,
        description=plain.description,
        geometry=plain.geometry,
        columns=(*plain.columns, *((name, text) for name in names.values())),
        rows=tuple(
            (*row, *(site.extra.get(key) for key in names))
            for row, site in zip(plain.rows, plan.sites, strict=True)
        ),
        shapes=plain.shapes,
    )


def _extra_columns(keys: Mapping[str, bool], names: Mapping[str, str]) -> Sheet:
    text, flag = codec_for(str), codec_for(bool)
    return Sheet(
        name=EXTRA_COLUMNS,
        description="The register's own columns: header in the register, column in layer sites",
        geometry="",
        columns=(("header", text), ("site_column", text), ("in_register", flag)),
        rows=tuple((key, names[key], listed) for key, listed in keys.items()),
    )


def _keys(number: int, tour: DayTour) -> tuple[object, ...]:
    return number, tour.tour_id, tour.inspector_id, tour.day


def _stops(plan: Plan, places: _Places) -> Sheet:
    sites = {site.site_id: site for site in plan.sites}
    visits = {visit.visit_id: visit for visit in plan.visits}
    entries = [(_keys(n, t), s) for n, t in enumerate(plan.tours, 1) for s in t.stops]
    added = []
    for _, stop in entries:
        site, visit = sites.get(stop.site_id), visits.get(stop.visit_id)
        added.append(
            (
                site.name if site else "",
                visit.task if visit else "",
                "planned",
                visit.work_s / MINUTE_S if visit else 0.0,
                visit.access_s / MINUTE_S if visit else 0.0,
                stop.wait_s / MINUTE_S,
            )
        )
    return _sheet(
        "stops",
        [stop for _, stop in entries],
        keys=[key for key, _ in entries],
        added=added,
        shapes=[places.point(stop.site_id) for _, stop in entries],
    )


def _legs(plan: Plan, places: _Places) -> Sheet:
    entries = [(_keys(n, t), leg) for n, t in enumerate(plan.tours, 1) for leg in t.legs]
    return _sheet(
        "legs",
        [leg for _, leg in entries],
        keys=[key for key, _ in entries],
        shapes=[places.leg(leg) for _, leg in entries],
    )


def _days(plan: Plan, places: _Places) -> Sheet:
    people = {person.inspector_id: person.name for person in plan.programme.inspectors}
    added = [
        (people.get(t.inspector_id, ""), len(t.stops), t.duration_s, t.dist_m / KM_M)
        for t in plan.tours
    ]
    shapes = [places.tour(tour) for tour in plan.tours]
    return _sheet("days", plan.tours, added=added, shapes=shapes)


def _visits(plan: Plan) -> Sheet:
    placed = Counter(stop.visit_id for tour in plan.tours for stop in tour.stops)
    added = [("planned" if placed[v.visit_id] else "unplaced",) for v in plan.visits]
    return _sheet("visits", plan.visits, added=added)


def _unplaced(plan: Plan) -> Sheet:
    sites: dict[str, Site] = {site.site_id: site for site in plan.sites}
    added = [(sites[u.site_id].name if u.site_id in sites else "",) for u in plan.unplaced]
    return _sheet("unplaced", plan.unplaced, added=added)


def _plan_texts(plan: Plan) -> dict[str, str]:
    return {
        "format": FORMAT,
        "schema": str(SCHEMA),
        "plan_id": plan.plan_id,
        **write_settings(plan.programme, prefix="programme", omit=KEPT_IN_TABLES),
        **write_settings(plan.provenance, prefix="provenance"),
        **write_settings(plan.travel, prefix="travel"),
        **write_settings(plan.capacity, prefix="capacity"),
    }


def _plan(plan: Plan) -> Sheet:
    text = codec_for(str)
    return Sheet(
        name=PLAN,
        description="Settings, provenance and sums of the plan",
        geometry="",
        columns=(("key", text), ("value", text)),
        rows=tuple(_plan_texts(plan).items()),
    )


def sheets_of(plan: Plan) -> tuple[Sheet, ...]:
    """Return every layer and table of a plan, layers first."""
    places = _Places(plan)
    keys = _extra_keys(plan)
    table = TABLES["sites"]
    taken = [
        "fid",
        "geom",
        "geometry",
        *table.added,
        *(column.name for column in columns_of(table)),
    ]
    names = _free_names(keys, taken)
    bases = plan.programme.bases
    return (
        _sites(plan, places, names),
        _stops(plan, places),
        _legs(plan, places),
        _days(plan, places),
        _sheet("bases", bases, shapes=[places.point(base.base_id) for base in bases]),
        _sheet(
            ROAD_POINTS,
            plan.road_points,
            shapes=[(((point.lon_deg, point.lat_deg),),) for point in plan.road_points],
        ),
        _sheet(BACKDROP, plan.backdrop, shapes=[_way(line.path) for line in plan.backdrop]),
        _visits(plan),
        _unplaced(plan),
        _sheet("inspectors", plan.programme.inspectors),
        _sheet("exchanges", plan.exchanges),
        _sheet("stages", plan.stages),
        _extra_columns(keys, names),
        _plan(plan),
    )
