"""A real extract against an independent, plain reading of the same file.

The plain reading walks over the file object by object with pyosmium's own classes, way by way and
segment by segment, and shares no code with the reader.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field
from itertools import pairwise
from pathlib import Path

import numpy as np
import osmium
import pytest
from pyproj import Geod

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.extract import read_extract
from georoute.roads.model import Access, RoadTable
from georoute.roads.speeds import default_profile
from tests.reader_helpers import remarks

SOURCE = pytest.mark.source("the same file read object by object with osmium.FileProcessor")
HELSINKI = Path(__file__).parents[2] / "data" / "Helsinki.osm.pbf"
DEMO = Path(__file__).parents[3] / "data" / "la_serena_coquimbo.osm.pbf"
CLASSES = {
    *("motorway", "trunk", "primary", "secondary", "tertiary", "unclassified", "residential"),
    *("living_street", "service", "road", "track"),
    *("motorway_link", "trunk_link", "primary_link", "secondary_link", "tertiary_link"),
}
Point = tuple[float, float]
Turn = tuple[Point, Point, Point]


@dataclass
class Plain:
    """Ways for cars as pieces of (node, lon, lat) in a row; and the restrictions."""

    pieces: dict[int, list[list[tuple[int, float, float]]]] = field(default_factory=dict)
    tags: dict[int, dict[str, str]] = field(default_factory=dict)
    restrictions: list[tuple[dict[str, str], dict[str, int]]] = field(default_factory=list)
    barriers: dict[int, dict[str, str]] = field(default_factory=dict)

    @property
    def one_way(self) -> set[int]:
        signs = {
            ("oneway", "yes"),
            ("oneway:motor_vehicle", "yes"),
            ("motor_vehicle:backward", "no"),
        }
        return {way for way, tags in self.tags.items() if signs & set(tags.items())}

    def steps(self, way: int) -> set[tuple[Point, Point]]:
        """Return the steps from point to point that may be driven."""
        out = set()
        for piece in self.pieces[way]:
            for (_, *a), (_, *b) in pairwise(piece):
                out.add(((a[0], a[1]), (b[0], b[1])))
                if way not in self.one_way:
                    out.add(((b[0], b[1]), (a[0], a[1])))
        return out


def for_cars(tags: dict[str, str]) -> bool:
    """Tell whether a way is a road, or a way on foot that a tag opens to cars."""
    opened = {tags.get("motorcar"), tags.get("motor_vehicle")} & {"yes", "destination"}
    on_foot = tags.get("highway") in {"footway", "pedestrian", "cycleway", "path"}
    road = tags.get("highway") in CLASSES or (on_foot and bool(opened))
    taxis_only = {("oneway:motor_vehicle", "yes"), ("motor_vehicle:forward", "no")} <= {
        *tags.items()
    }
    return road and tags.get("area") != "yes" and not taxis_only


def plain_reading(path: Path) -> Plain:
    plain = Plain()
    for item in osmium.FileProcessor(str(path)).with_locations():
        tags = {tag.k: tag.v for tag in item.tags}
        if isinstance(item, osmium.osm.Node) and "barrier" in tags:
            plain.barriers[item.id] = tags
        if isinstance(item, osmium.osm.Way) and for_cars(tags):
            pieces: list[list[tuple[int, float, float]]] = [[]]
            for node in item.nodes:
                if node.location.valid():
                    pieces[-1].append((node.ref, node.location.lon, node.location.lat))
                else:
                    pieces.append([])
            plain.pieces[item.id] = [piece for piece in pieces if len(piece) > 1]
            plain.tags[item.id] = tags
        if isinstance(item, osmium.osm.Relation) and tags.get("type") == "restriction":
            plain.restrictions.append((tags, {m.role: m.ref for m in item.members}))
    return plain


@pytest.fixture(scope="module")
def plain() -> Plain:
    return plain_reading(HELSINKI)


@pytest.fixture(scope="module")
def table() -> RoadTable:
    return read_extract(HELSINKI, profile=default_profile("FI"))


@SOURCE
def test_the_same_ways(table: RoadTable, plain: Plain) -> None:
    assert set(table.way.tolist()) == {way for way, pieces in plain.pieces.items() if pieces}
    assert len(set(table.way.tolist())) > 500


@SOURCE
def test_the_same_junctions(table: RoadTable, plain: Plain) -> None:
    pieces = [piece for pieces in plain.pieces.values() for piece in pieces]
    times = Counter(node for piece in pieces for node, *_ in piece)
    ends = {piece[end][0] for piece in pieces for end in (0, -1)}
    place = {node: (lat, lon) for piece in pieces for node, lon, lat in piece}
    shut = {
        node
        for node, tags in plain.barriers.items()
        if node in times and (tags["barrier"] in {"bollard", "block"} or "access" in tags)
    }
    expected = {place[n] for n, k in times.items() if k > 1 or n in ends or n in shut}
    assert set(zip(table.node_lat.tolist(), table.node_lon.tolist(), strict=True)) == expected


@SOURCE
def test_each_way_is_as_long(table: RoadTable, plain: Plain) -> None:
    geod = Geod(ellps="WGS84")
    for way, pieces in plain.pieces.items():
        expected = sum(
            geod.line_length([x for _, x, _ in piece], [y for *_, y in piece]) for piece in pieces
        )
        stretches = table.way == way
        own = table.length_mm[stretches].sum() / 1000
        rounding = 0.0005 * np.count_nonzero(stretches)  # lengths are whole millimetres
        assert own == pytest.approx(expected, rel=1e-6, abs=rounding + 1e-9)


def test_each_stretch_is_as_long_as_its_shape(table: RoadTable) -> None:
    geod = Geod(ellps="WGS84")
    for stretch in range(table.start.size):
        points = slice(table.point_ptr[stretch], table.point_ptr[stretch + 1])
        metres = geod.line_length(table.point_lon[points], table.point_lat[points])
        assert table.length_mm[stretch] / 1000 == pytest.approx(metres, rel=1e-6, abs=0.00051)


@SOURCE
def test_the_same_one_ways(table: RoadTable, plain: Plain) -> None:
    shut = set(table.way[table.backward_ms >= UNREACHABLE].tolist())
    assert shut == {way for way in plain.one_way if plain.pieces[way]}
    assert len(shut) > 200
    assert (table.forward_ms < UNREACHABLE).all()


@SOURCE
def test_the_same_ways_without_through_traffic(table: RoadTable, plain: Plain) -> None:
    closed = {"no", "private", "destination"}
    expected = set()
    for way, tags in plain.tags.items():
        keys = ("motorcar", "motor_vehicle", "vehicle", "access")
        first = next((tags[key] for key in keys if key in tags), "yes")
        if first in closed and plain.pieces[way]:
            expected.add(way)
    gates = {
        node
        for node, tags in plain.barriers.items()
        if tags["barrier"] not in {"bollard", "block"} and tags.get("access") in closed
    }
    beside = {
        way
        for way, pieces in plain.pieces.items()
        if any(node in gates for piece in pieces for node, *_ in piece)
    }
    own = set(table.way[(table.access & Access.LOCAL) > 0].tolist())
    assert expected <= own <= expected | beside
    assert len(expected) > 50


def plain_turns(plain: Plain) -> tuple[set[Turn], int]:
    """Return the banned turns at points, from restrictions that hold always; and how many hold."""
    steps = {way: plain.steps(way) for way in plain.pieces}
    place = {n: (x, y) for ps in plain.pieces.values() for p in ps for n, x, y in p}
    everywhere = set().union(*steps.values())
    banned: set[Turn] = set()
    applied = 0
    for tags, members in plain.restrictions:
        hours = {"time", "day_on", "hour_on"} & tags.keys()
        if hours or not all(steps.get(members[role]) for role in ("from", "to")):
            continue
        via = place[members["via"]]
        before = [a for a, b in steps[members["from"]] if b == via]
        after = [b for a, b in steps[members["to"]] if a == via]
        if len(before) != 1 or len(after) != 1:
            continue
        applied += 1
        if tags["restriction"].startswith("no_"):
            banned.add((before[0], via, after[0]))
        else:
            onward = {b for a, b in everywhere if a == via} - {after[0]}
            banned |= {(before[0], via, b) for b in onward}
    return banned, applied


def own_turns(table: RoadTable) -> set[Turn]:
    def points(arc: int) -> list[Point]:
        at = slice(table.point_ptr[arc // 2], table.point_ptr[arc // 2 + 1])
        pairs = list(zip(table.point_lon[at].tolist(), table.point_lat[at].tolist(), strict=True))
        return pairs[::-1] if arc % 2 else pairs

    pairs = table.ban_arc.reshape(-1, 2).tolist()
    return {(points(a)[-2], points(a)[-1], points(b)[1]) for a, b in pairs}


@SOURCE
def test_every_restriction_is_obeyed_or_reported(table: RoadTable, plain: Plain) -> None:
    expected, applied = plain_turns(plain)
    assert np.diff(table.ban_ptr).tolist() == [2] * (table.ban_ptr.size - 1)  # all via a node
    assert own_turns(table) == expected
    told = {code: n for code, n in remarks(table).items() if code.startswith("restriction")}
    assert told["restriction_read"] == applied > 30
    assert sum(told.values()) == len(plain.restrictions)


def test_each_ban_is_a_turn_that_could_be_driven(table: RoadTable) -> None:
    ends = np.column_stack([table.start, table.end])
    times = np.column_stack([table.forward_ms, table.backward_ms]).ravel()
    assert (times[table.ban_arc] < UNREACHABLE).all()
    first, second = table.ban_arc.reshape(-1, 2).T
    assert (ends[first // 2, 1 - first % 2] == ends[second // 2, second % 2]).all()


@SOURCE
def test_the_extract_of_the_demo_reads_too() -> None:
    table = read_extract(DEMO, profile=default_profile("CL"))
    plain = plain_reading(DEMO)
    assert set(table.way.tolist()) == set(plain.pieces)
    assert set(table.way[table.backward_ms >= UNREACHABLE].tolist()) >= plain.one_way
    geod = Geod(ellps="WGS84")
    expected = sum(
        geod.line_length([x for _, x, _ in piece], [y for *_, y in piece])
        for pieces in plain.pieces.values()
        for piece in pieces
    )
    assert table.length_mm.sum() / 1000 == pytest.approx(expected, rel=1e-6)
    assert remarks(table) == {}
