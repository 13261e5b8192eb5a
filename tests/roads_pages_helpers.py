"""Plans on real streets for the tests of the pages: roads of the extract, paths by networkx.

The streets are those of ``data/la_serena_coquimbo.osm.pbf`` (© OpenStreetMap contributors, ODbL);
shore, lake and ferry are invented. Driving ends at the nearest node, which is enough to judge
pages; times stay those of the sample.
"""

from __future__ import annotations

import csv
import functools
import math
from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import networkx as nx
import numpy as np
import osmium
from scipy.spatial import cKDTree

from georoute.domain.plan import DayTour, Leg, Plan, TravelNote
from georoute.domain.roads import BackdropKind, BackdropLine, RoadPoint
from georoute.domain.sites import Base, Site
from tests.publish_helpers import HOSTILE, sample_plan

ROOT = Path(__file__).resolve().parents[1]
EXTRACT = ROOT / "data" / "la_serena_coquimbo.osm.pbf"
REGISTER = ROOT / "data" / "demo" / "register.csv"
KIND_OF = {
    "motorway": BackdropKind.MAIN,
    "trunk": BackdropKind.MAIN,
    "primary": BackdropKind.MAIN,
    "secondary": BackdropKind.MINOR,
    "tertiary": BackdropKind.MINOR,
}
SHORE = (
    (-29.70, -71.330),
    (-29.80, -71.296),
    (-29.87, -71.283),
    (-29.905, -71.2770),
    (-29.93, -71.2850),
    (-29.948, -71.3100),
    (-29.9535, -71.3300),
    (-29.930, -71.3450),
    (-29.9400, -71.3660),
    (-29.98, -71.3750),
    (-30.20, -71.4200),
)
"""Invented, from north to south: the land lies to the left."""
LAKE = ((-29.917, -71.22), (-29.914, -71.214), (-29.919, -71.209), (-29.922, -71.216))
_M_PER_DEG = 111_000.0
Place = tuple[float, float]


def metres(a: Place, b: Place) -> float:
    """Return the length of a short line."""
    east = (b[1] - a[1]) * math.cos(math.radians(a[0]))
    return math.hypot(b[0] - a[0], east) * _M_PER_DEG


class Streets:
    """The streets of the extract as a graph of nodes, and as lines to draw."""

    def __init__(self) -> None:
        self.graph = nx.DiGraph()
        self.lines: list[BackdropLine] = []
        for way in osmium.FileProcessor(
            str(EXTRACT), osmium.osm.NODE | osmium.osm.WAY
        ).with_locations():
            if isinstance(way, osmium.osm.Way) and "highway" in way.tags:
                self._add(way)
        main = max(nx.strongly_connected_components(self.graph), key=len)
        self.graph = self.graph.subgraph(sorted(main)).copy()
        self.nodes = list(self.graph)
        self.tree = cKDTree(self._plane(self.nodes))

    def _add(self, way: osmium.osm.Way) -> None:
        name = way.tags.get("name") or ""
        path = tuple((node.lat, node.lon) for node in way.nodes)
        kind = KIND_OF.get(way.tags["highway"], BackdropKind.LOCAL)
        self.lines.append(BackdropLine(kind=kind, name=name, path=path))
        slow = {BackdropKind.MAIN: 1.0, BackdropKind.MINOR: 1.3}.get(kind, 2.0)
        for a, b in pairwise(path):
            for tail, head in [(a, b)] if way.tags.get("oneway") == "yes" else [(a, b), (b, a)]:
                length = metres(tail, head)
                self.graph.add_edge(tail, head, length=length, cost=length * slow, name=name)

    @staticmethod
    def _plane(places: list[Place]) -> np.ndarray:
        lat, lon = np.array(places).T
        return np.column_stack([lat, lon * math.cos(math.radians(-29.93))]) * _M_PER_DEG

    def nearest(self, place: Place) -> tuple[Place, float]:
        """Return the nearest node, and how many metres off it is."""
        distance, number = self.tree.query(self._plane([place])[0])
        return self.nodes[int(number)], float(distance)

    def way(
        self, start: Place, end: Place
    ) -> tuple[tuple[Place, ...], tuple[tuple[str, float], ...]]:
        """Return the cheapest path between two nodes, and its roads in the order driven."""
        path = nx.shortest_path(self.graph, start, end, weight="cost")
        roads: list[tuple[str, float]] = []
        for a, b in pairwise(path):
            edge = self.graph.edges[a, b]
            if roads and roads[-1][0] == edge["name"]:
                roads[-1] = (edge["name"], roads[-1][1] + edge["length"])
            else:
                roads.append((edge["name"], edge["length"]))
        return tuple(path), tuple(roads)


@functools.cache
def streets() -> Streets:
    """Return the streets, read once."""
    return Streets()


def _demo_places() -> list[Place]:
    with REGISTER.open(encoding="utf-8", newline="") as file:
        return sorted({(float(row["lat"]), float(row["lon"])) for row in csv.DictReader(file)})


def _round_trip(base: Place, places: list[Place]) -> list[Place]:
    """Return places in a round order about their middle, beginning near the base."""
    middle = tuple(np.mean(places, axis=0))
    order = sorted(places, key=lambda p: math.atan2(p[0] - middle[0], p[1] - middle[1]))
    first = min(range(len(order)), key=lambda k: metres(order[k], base))
    return order[first:] + order[:first]


def _moved_sites(plan: Plan) -> Plan:
    """Move the sites of each tour to places of the demo's register that lie together."""
    free = _demo_places()
    moved: dict[str, Place] = {}
    bases = {base.base_id: (base.lat_deg, base.lon_deg) for base in plan.programme.bases}
    for number, tour in enumerate(plan.tours):
        middle = free[(number * 37 + 11) % len(free)]
        here = sorted(free, key=lambda p: metres(p, middle))[: len(tour.stops)]
        free = [place for place in free if place not in here]
        ordered = _round_trip(bases[tour.start_base_id], here)
        moved |= dict(zip([stop.site_id for stop in tour.stops], ordered, strict=True))
    sites = tuple(
        replace(site, lat_deg=moved[site.site_id][0], lon_deg=moved[site.site_id][1])
        if site.site_id in moved
        else site
        for site in plan.sites
    )
    return replace(plan, sites=sites)


def _on_streets(leg: Leg, points: dict[str, RoadPoint]) -> Leg:
    start, end = points[leg.from_id], points[leg.to_id]
    path, roads = streets().way((start.lat_deg, start.lon_deg), (end.lat_deg, end.lon_deg))
    length = sum(metres for _, metres in roads)
    if len(path) == 1:
        path = (path[0], path[0])
    return replace(leg, path=path, roads=roads, dist_m=length)


def _road_point(place: Base | Site, key: str) -> RoadPoint:
    (lat, lon), off = streets().nearest((place.lat_deg, place.lon_deg))
    road = next(iter(streets().graph.edges((lat, lon), data="name")))[2]
    return RoadPoint(
        place_id=key, lat_deg=lat, lon_deg=lon, distance_m=off, road=road, stretch=0, offset_m=0.0
    )


def _tour_on_streets(tour: DayTour, points: dict[str, RoadPoint]) -> DayTour:
    legs = tuple(_on_streets(leg, points) for leg in tour.legs)
    return replace(tour, legs=legs, dist_m=sum(leg.dist_m for leg in legs))


def on_streets(plan: Plan) -> Plan:
    """Return the plan with its legs along the streets of the extract."""
    points = {base.base_id: _road_point(base, base.base_id) for base in plan.programme.bases}
    points |= {site.site_id: _road_point(site, site.site_id) for site in plan.sites}
    return replace(
        plan,
        tours=tuple(_tour_on_streets(tour, points) for tour in plan.tours),
        road_points=tuple(points.values()),
        backdrop=tuple(streets().lines),
        travel=TravelNote(
            source="roads of la_serena_coquimbo.osm.pbf, speeds by class",
            estimated=True,
            low_factor=0.8,
            high_factor=1.3,
        ),
    )


@functools.cache
def roads_plan(*, days: int = 1, people: int = 1, stops: int = 15) -> Plan:
    """Return a plan of ``days`` x ``people`` tours on real streets."""
    return on_streets(_moved_sites(sample_plan(days=days, people=people, stops=stops)))


def with_bay(plan: Plan) -> Plan:
    """Return the plan with an invented shore, a lake, and a ferry that its first leg takes."""
    first = plan.tours[0]
    leg = first.legs[0]
    start, end = leg.path[0], leg.path[-1]
    ferry = ((-29.9525, -71.3290), (-29.93, -71.31), (-29.9055, -71.2775))
    if metres(start, ferry[0]) > metres(end, ferry[0]):
        ferry = ferry[::-1]
    shore = (streets().nearest(ferry[0])[0], streets().nearest(ferry[-1])[0])
    out, roads_out = streets().way(start, shore[0])
    back, roads_back = streets().way(shore[1], end)
    sea_m = sum(metres(a, b) for a, b in pairwise((shore[0], *ferry, shore[1])))
    roads = (*roads_out, ("Transbordador de la bahía", sea_m), *roads_back)
    leg = replace(leg, path=(*out, *ferry, *back), roads=roads, ferry=True)
    tour = replace(first, legs=(leg, *first.legs[1:]))
    more = (
        BackdropLine(kind=BackdropKind.COAST, name="", path=SHORE),
        BackdropLine(kind=BackdropKind.WATER, name="Laguna Seca", path=(*LAKE, LAKE[0])),
        BackdropLine(
            kind=BackdropKind.FERRY,
            name="Transbordador de la bahía",
            path=(shore[0], *ferry, shore[1]),
        ),
    )
    return replace(plan, tours=(tour, *plan.tours[1:]), backdrop=(*plan.backdrop, *more))


def dense_town(plan: Plan, *, spacing_m: float = 45.0, half_m: float = 4500.0) -> Plan:
    """Return the plan over an invented town of crooked streets, far denser than the extract."""
    rng = np.random.default_rng(5)
    lat0, lon0 = plan.road_points[0].lat_deg, plan.road_points[0].lon_deg
    across = np.arange(-half_m, half_m, spacing_m)
    lines = []
    for number, offset in enumerate(across):
        kind = BackdropKind.LOCAL
        if number % 3 == 0:
            kind = BackdropKind.MAIN if number % 9 == 0 else BackdropKind.MINOR
        for turned in (False, True):
            wobble = offset + rng.normal(0, 9, len(across))
            north, east = (across, wobble) if turned else (wobble, across)
            path = zip(
                lat0 + north / _M_PER_DEG,
                lon0 + east / _M_PER_DEG / math.cos(math.radians(lat0)),
                strict=True,
            )
            name = f"Pasaje {'Norte' if turned else 'Oriente'} {number} & <b>"
            lines.append(
                BackdropLine(
                    kind=kind, name=name, path=tuple((float(a), float(b)) for a, b in path)
                )
            )
    return replace(plan, backdrop=tuple(lines))


def with_hostile_streets(plan: Plan) -> Plan:
    """Return the plan with hostile names on every road, in legs, backdrop and road points."""
    evil = dict(enumerate(HOSTILE))

    def name_of(number: int) -> str:
        return evil[number % len(evil)]

    tours = tuple(
        replace(
            tour,
            legs=tuple(
                replace(
                    leg,
                    roads=tuple(
                        (name_of(k), 400.0 + metres) for k, (_, metres) in enumerate(leg.roads)
                    ),
                )
                for leg in tour.legs
            ),
        )
        for tour in plan.tours
    )
    return replace(
        plan,
        tours=tours,
        backdrop=tuple(replace(line, name=name_of(k)) for k, line in enumerate(plan.backdrop)),
        road_points=tuple(
            replace(point, road=name_of(k), distance_m=45.0)
            for k, point in enumerate(plan.road_points)
        ),
    )
