"""Make ``la_serena_coquimbo.osm.pbf`` from a street network that a wheel carries as data.

The wheel ``aequilibrae`` 1.7.2 holds a reference file, ``coquimbo.zip``, with a street network
of La Serena and Coquimbo (Chile) derived from OpenStreetMap. Only that data file is read; the
wheel's code is neither imported nor used. Get the wheel without its dependencies and run::

    pip install --no-deps aequilibrae==1.7.2
    python data/make_extract.py

What happens to the data, and nothing else:

- Links of the type ``centroid_connector`` are left out: they are no roads.
- Link ends and bends at the same coordinates (rounded to 1e-7 degree) become one node.
- Links of the same way with the same tags that follow one another are joined to one way again.
- ``direction`` becomes ``oneway`` (1 → yes, -1 → -1, 0 → no tag), the speeds ``maxspeed``,
  whole numbers of lanes ``lanes``; ``link_type`` is ``highway`` and ``name`` is ``name``.
- Nodes and ways are numbered from 1 in a fixed order: the ids are not those of OpenStreetMap.

The same input gives the same bytes. The licence of the result is the Open Database License 1.0;
see ``LICENCES.md`` beside this script.
"""

from __future__ import annotations

import argparse
import sqlite3
import struct
import tempfile
import zipfile
from dataclasses import dataclass
from importlib.metadata import distribution
from pathlib import Path
from typing import TYPE_CHECKING

import osmium
import osmium.osm.mutable

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator, Sequence

SOURCE = "aequilibrae"
SOURCE_FILE = "aequilibrae/reference_files/coquimbo.zip"
DATABASE = "project_database.sqlite"
OUTPUT = Path(__file__).with_name("la_serena_coquimbo.osm.pbf")
GENERATOR = (
    "georoute data script; data (c) OpenStreetMap contributors, Open Database License (ODbL) 1.0"
)
UNITS_PER_DEGREE = 10_000_000  # OpenStreetMap stores coordinates in steps of 1e-7 degree

# A point is (longitude, latitude) in steps of 1e-7 degree.
Point = tuple[int, int]
Tags = tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Link:
    """A stretch of street: the way it belongs to, its tags and its points in order."""

    way: int
    tags: Tags
    points: tuple[Point, ...]


def find_source() -> Path:
    """Return the path of the reference file inside the installed wheel."""
    return Path(str(distribution(SOURCE).locate_file(SOURCE_FILE)))


def decode_linestring(blob: bytes) -> tuple[Point, ...]:
    """Read the points of a line string from a SpatiaLite geometry.

    The layout (SpatiaLite's "BLOB-Geometry") is: 0x00, byte order (1 = little endian), srid as
    int32, bounding box as 4 doubles, 0x7C, geometry type as int32 (2 = line string), number of
    points as int32, x and y of each point as doubles, 0xFE.

    Raises
    ------
    ValueError
        If the blob is not a little-endian line string in WGS 84.
    """
    head = struct.Struct("<BBi4dBii")
    start, order, srid, *_, mark, kind, count = head.unpack_from(blob)
    length = head.size + 16 * count + 1
    shape = (start, order, srid, mark, kind, len(blob), blob[-1])
    if shape != (0x00, 1, 4326, 0x7C, 2, length, 0xFE):
        msg = f"expected a SpatiaLite line string in WGS 84, got {blob[:48].hex()}"
        raise ValueError(msg)
    flat = struct.unpack_from(f"<{2 * count}d", blob, head.size)
    return tuple(
        (round(x * UNITS_PER_DEGREE), round(y * UNITS_PER_DEGREE))
        for x, y in zip(flat[::2], flat[1::2], strict=True)
    )


def speed_tags(forward: float | None, backward: float | None) -> Iterator[tuple[str, str]]:
    """Yield ``maxspeed`` tags from the speeds (km/h) along and against the link."""
    if forward is not None and backward in {None, forward}:
        yield "maxspeed", f"{forward:g}"
        return
    if forward is not None:
        yield "maxspeed:forward", f"{forward:g}"
    if backward is not None:
        yield "maxspeed:backward", f"{backward:g}"


def link_tags(row: sqlite3.Row) -> Tags:
    """Return the OpenStreetMap tags of a row of the table ``links``, sorted by key."""
    tags = {"highway": str(row["link_type"])}
    if row["name"]:
        tags["name"] = str(row["name"])
    oneway = {1: "yes", -1: "-1"}.get(row["direction"])
    if oneway:
        tags["oneway"] = oneway
    lanes = row["lanes_ab"] if oneway else (row["lanes_ab"] or 0) + (row["lanes_ba"] or 0)
    if lanes and float(lanes).is_integer():
        tags["lanes"] = f"{lanes:g}"
    tags |= speed_tags(row["speed_ab"], row["speed_ba"] if not oneway else None)
    return tuple(sorted(tags.items()))


def read_links(database: Path) -> list[Link]:
    """Read all streets of a SpatiaLite database, in the order of their link ids."""
    query = (
        "SELECT osm_id, link_type, name, direction, speed_ab, speed_ba, lanes_ab, lanes_ba,"
        " geometry FROM links WHERE link_type <> 'centroid_connector' ORDER BY link_id"
    )
    connection = sqlite3.connect(f"file:{database}?mode=ro", uri=True)
    connection.row_factory = sqlite3.Row
    try:
        return [
            Link(
                way=row["osm_id"],
                tags=link_tags(row),
                points=decode_linestring(row["geometry"]),
            )
            for row in connection.execute(query)
        ]
    finally:
        connection.close()


def chain(links: Sequence[Link]) -> list[tuple[Point, ...]]:
    """Join links that follow one another, head to tail, into lines; never turn a link round.

    Links are taken in order; where several could follow, the first one does.
    """
    left = dict.fromkeys(range(len(links)))
    starts: dict[Point, list[int]] = {}
    for index, link in enumerate(links):
        starts.setdefault(link.points[0], []).append(index)
    followed = {link.points[-1] for link in links}
    # Lines begin where nothing leads to; what is left after that are rings.
    order = [index for index in left if links[index].points[0] not in followed]
    lines = []
    for first in [*order, *range(len(links))]:
        if first not in left:
            continue
        del left[first]
        line = links[first].points
        while following := [index for index in starts.get(line[-1], ()) if index in left]:
            del left[following[0]]
            line += links[following[0]].points[1:]
        lines.append(line)
    return lines


def join(links: Iterable[Link]) -> list[Link]:
    """Make whole ways of the links that were cut from them, in the order of first appearance."""
    groups: dict[tuple[int, Tags], list[Link]] = {}
    for link in links:
        groups.setdefault((link.way, link.tags), []).append(link)
    return [
        Link(way=way, tags=tags, points=line)
        for (way, tags), members in groups.items()
        for line in chain(members)
    ]


def write_extract(ways: Sequence[Link], output: Path) -> tuple[int, int]:
    """Write nodes, then ways, numbered from 1; return how many of each there are."""
    # West to east in steps of 0.01 degree, south to north in each: near nodes get near ids.
    points = sorted(
        {point for way in ways for point in way.points},
        key=lambda point: (point[0] // 100_000, point[1], point[0]),
    )
    ids = {point: number for number, point in enumerate(points, start=1)}
    header = osmium.io.Header()
    header.set("generator", GENERATOR)
    header.set("sorting", "Type_then_ID")
    lons, lats = zip(*points, strict=True)
    header.add_box(
        osmium.osm.Box(
            min(lons) / UNITS_PER_DEGREE,
            min(lats) / UNITS_PER_DEGREE,
            max(lons) / UNITS_PER_DEGREE,
            max(lats) / UNITS_PER_DEGREE,
        )
    )
    with osmium.SimpleWriter(str(output), header=header, overwrite=True) as writer:
        for point, number in ids.items():
            place = (point[0] / UNITS_PER_DEGREE, point[1] / UNITS_PER_DEGREE)
            writer.add_node(osmium.osm.mutable.Node(id=number, location=place))
        for number, way in enumerate(ways, start=1):
            nodes = [ids[point] for point in way.points]
            writer.add_way(osmium.osm.mutable.Way(id=number, nodes=nodes, tags=dict(way.tags)))
    return len(points), len(ways)


def make_extract(archive: Path, output: Path) -> tuple[int, int]:
    """Make the extract from the zip of the wheel; return the numbers of nodes and ways."""
    with tempfile.TemporaryDirectory() as folder, zipfile.ZipFile(archive) as zipped:
        database = Path(zipped.extract(DATABASE, folder))
        return write_extract(join(read_links(database)), output)


def main() -> None:
    """Make the extract where the package expects it, or where the caller says."""
    parser = argparse.ArgumentParser(description="Make the open road extract of the demo.")
    parser.add_argument("--source", type=Path, default=None, help="coquimbo.zip")
    parser.add_argument("--output", type=Path, default=OUTPUT)
    arguments = parser.parse_args()
    nodes, ways = make_extract(arguments.source or find_source(), arguments.output)
    size = arguments.output.stat().st_size
    print(f"{arguments.output.name}: {nodes} nodes, {ways} ways, {size} bytes")


if __name__ == "__main__":
    main()
