"""Tiny maps as OpenStreetMap XML for the tests of the reader of roads.

Node ``n`` of a tiny map lies at latitude 10 + row / 1000 and longitude 20 + column / 1000, where
row and column are the tens and the ones of ``n``: ``11 12 13`` runs east, ``11 21 31`` north.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from xml.sax.saxutils import quoteattr

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.extract import read_extract
from georoute.roads.model import Access, RoadTable
from georoute.roads.speeds import SpeedProfile, default_profile

Way = tuple[int, Sequence[int], Mapping[str, str]]
Member = tuple[str, int, str]
Relation = tuple[int, Sequence[Member], Mapping[str, str]]

ROAD = {"highway": "residential"}
FLAT = replace(default_profile("RO"), real_factor=1.0)
"""A profile that drives at the limit, so that speeds in tests are those of the tags."""


def lat_lon(node: int) -> tuple[float, float]:
    return 10 + node // 10 / 1000, 20 + node % 10 / 1000


def _tags(tags: Mapping[str, str]) -> str:
    return "".join(f"<tag k={quoteattr(k)} v={quoteattr(v)}/>" for k, v in tags.items())


def osm_text(
    ways: Iterable[Way],
    *,
    relations: Iterable[Relation] = (),
    node_tags: Mapping[int, Mapping[str, str]] | None = None,
    missing: Iterable[int] = (),
) -> str:
    ways = list(ways)
    absent = set(missing)
    nodes = sorted({node for _, refs, _ in ways for node in refs} - absent)
    parts = ['<?xml version="1.0" encoding="UTF-8"?><osm version="0.6">']
    for node in nodes:
        lat, lon = lat_lon(node)
        inner = _tags((node_tags or {}).get(node, {}))
        place = f'lat="{lat:.7f}" lon="{lon:.7f}"'
        parts.append(f'<node id="{node}" version="1" {place}>{inner}</node>')
    for number, refs, tags in ways:
        points = "".join(f'<nd ref="{ref}"/>' for ref in refs)
        parts.append(f'<way id="{number}" version="1">{points}{_tags(tags)}</way>')
    kinds = {"n": "node", "w": "way", "r": "relation"}
    for number, members, tags in relations:
        inner = "".join(
            f'<member type="{kinds[kind]}" ref="{ref}" role="{role}"/>'
            for kind, ref, role in members
        )
        parts.append(f'<relation id="{number}" version="1">{inner}{_tags(tags)}</relation>')
    return "\n".join([*parts, "</osm>"])


def read_map(
    folder: Path,
    ways: Iterable[Way],
    *,
    profile: SpeedProfile = FLAT,
    relations: Iterable[Relation] = (),
    node_tags: Mapping[int, Mapping[str, str]] | None = None,
    missing: Iterable[int] = (),
) -> RoadTable:
    path = folder / "tiny.osm"
    text = osm_text(ways, relations=relations, node_tags=node_tags, missing=missing)
    path.write_text(text, encoding="utf-8")
    return read_extract(path, profile=profile)


def node_number(table: RoadTable, node: int) -> int:
    """Return the number a node of the table has in the tiny map."""
    row = round((table.node_lat[node] - 10) * 1000)
    return int(10 * row + round((table.node_lon[node] - 20) * 1000))


def arc_ends(table: RoadTable, arc: int) -> tuple[int, int]:
    ends = table.start[arc // 2], table.end[arc // 2]
    first, last = ends if arc % 2 == 0 else ends[::-1]
    return node_number(table, int(first)), node_number(table, int(last))


def arc_ms(table: RoadTable, arc: int) -> int:
    return int((table.backward_ms if arc % 2 else table.forward_ms)[arc // 2])


def open_arcs(table: RoadTable) -> set[tuple[int, int]]:
    """Return all that can be driven, as pairs of nodes of the tiny map."""
    arcs = range(2 * table.start.size)
    return {arc_ends(table, arc) for arc in arcs if arc_ms(table, arc) < UNREACHABLE}


def bans(table: RoadTable) -> set[tuple[tuple[int, int], ...]]:
    return {
        tuple(arc_ends(table, int(arc)) for arc in table.ban_arc[low:high])
        for low, high in zip(table.ban_ptr[:-1], table.ban_ptr[1:], strict=True)
    }


def remarks(table: RoadTable) -> dict[str, int]:
    return {remark.code: remark.count for remark in table.remarks}


def kmh(table: RoadTable, stretch: int = 0, *, backward: bool = False) -> float:
    """Return the speed of a stretch, from its length and its time."""
    time = (table.backward_ms if backward else table.forward_ms)[stretch]
    return float(table.length_mm[stretch] / time * 3.6)


def local(table: RoadTable) -> set[tuple[int, int]]:
    return {
        arc_ends(table, 2 * stretch)
        for stretch in range(table.start.size)
        if table.access[stretch] & Access.LOCAL
    }
