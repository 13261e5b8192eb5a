"""The open road extract: what the script does to links, and what lies in the repository."""

from __future__ import annotations

import itertools
import math
import sqlite3
import struct
import zipfile
from importlib.metadata import PackageNotFoundError
from pathlib import Path

import osmium
import pytest

from data import make_extract as script
from tests.house_checks import ROOT

EXTRACT = ROOT / "data" / "la_serena_coquimbo.osm.pbf"
CLASSES = {
    "living_street",
    "motorway",
    "primary",
    "residential",
    "secondary",
    "tertiary",
    "trunk",
    "unclassified",
}


def spatialite_line(points: list[tuple[float, float]], *, srid: int = 4326) -> bytes:
    """Return a line string as SpatiaLite stores it (its "BLOB-Geometry" format)."""
    lons, lats = zip(*points, strict=True)
    head = struct.pack("<BBi4d", 0, 1, srid, min(lons), min(lats), max(lons), max(lats))
    body = b"".join(struct.pack("<2d", *point) for point in points)
    return head + struct.pack("<Bii", 0x7C, 2, len(points)) + body + b"\xfe"


def link(way: int, *points: tuple[int, int], tags: script.Tags = ()) -> script.Link:
    return script.Link(way=way, tags=tags, points=points)


def test_a_line_is_decoded() -> None:
    blob = spatialite_line([(-71.25, -29.9), (-71.2500001, -29.95)])
    assert script.decode_linestring(blob) == (
        (-712_500_000, -299_000_000),
        (-712_500_001, -299_500_000),
    )


@pytest.mark.parametrize(
    "blob",
    [
        spatialite_line([(0.0, 0.0), (1.0, 1.0)], srid=3857),
        spatialite_line([(0.0, 0.0), (1.0, 1.0)])[:-1] + b"\x00",
        spatialite_line([(0.0, 0.0), (1.0, 1.0)]) + b"\xfe",
    ],
    ids=["another coordinate system", "no end mark", "too long"],
)
def test_another_shape_is_refused(blob: bytes) -> None:
    with pytest.raises(ValueError, match="expected a SpatiaLite line string"):
        script.decode_linestring(blob)


def test_links_of_a_way_are_joined_in_travel_direction() -> None:
    a, b, c, d = (0, 0), (1, 0), (2, 0), (3, 0)
    joined = script.join([link(7, b, c), link(7, a, b), link(7, c, d), link(8, c, d)])
    assert [(way.way, way.points) for way in joined] == [(7, (a, b, c, d)), (8, (c, d))]


def test_links_with_other_tags_or_heads_together_stay_apart() -> None:
    a, b, c = (0, 0), (1, 0), (2, 0)
    fast = (("maxspeed", "60"),)
    assert len(script.join([link(7, a, b), link(7, b, c, tags=fast)])) == 2
    assert len(script.join([link(7, a, b), link(7, c, b)])) == 2


def test_a_ring_is_joined_once() -> None:
    a, b, c = (0, 0), (1, 0), (1, 1)
    (ring,) = script.join([link(7, a, b), link(7, b, c), link(7, c, a)])
    assert ring.points == (a, b, c, a)


def make_archive(folder: Path) -> Path:
    """Write a small database in the form of the source, zipped."""
    database = folder / script.DATABASE
    connection = sqlite3.connect(database)
    connection.execute(
        "CREATE TABLE links (link_id, osm_id, link_type, name, direction, speed_ab, speed_ba,"
        " lanes_ab, lanes_ba, geometry)"
    )
    line = spatialite_line([(-71.25, -29.9), (-71.26, -29.9)])
    connection.executemany(
        "INSERT INTO links VALUES (?,?,?,?,?,?,?,?,?,?)",
        [
            (1, 10, "primary", "Ñandú", 0, 60, 60, 1, 1, line),
            (2, 11, "residential", None, 1, 30, None, 2, 1, line),
            (3, 12, "residential", "Sur", -1, None, None, None, None, line),
            (4, 13, "centroid_connector", None, 0, None, None, None, None, line),
            (5, 14, "tertiary", "Dos", 0, 50, 40, 1.5, 1, line),
        ],
    )
    connection.commit()
    connection.close()
    archive = folder / "coquimbo.zip"
    with zipfile.ZipFile(archive, "w") as zipped:
        zipped.write(database, script.DATABASE)
    return archive


def test_tags_are_written_and_connectors_left_out(tmp_path: Path) -> None:
    output = tmp_path / "small.osm.pbf"
    assert script.make_extract(make_archive(tmp_path), output) == (2, 4)
    ways = [
        dict(entity.tags)
        for entity in osmium.FileProcessor(str(output))
        if isinstance(entity, osmium.osm.Way)
    ]
    assert ways == [
        {"highway": "primary", "name": "Ñandú", "maxspeed": "60", "lanes": "2"},
        {"highway": "residential", "oneway": "yes", "maxspeed": "30", "lanes": "2"},
        {"highway": "residential", "name": "Sur", "oneway": "-1"},
        {
            "highway": "tertiary",
            "name": "Dos",
            "maxspeed:forward": "50",
            "maxspeed:backward": "40",
        },
    ]


def test_the_same_source_gives_the_same_bytes(tmp_path: Path) -> None:
    archive = make_archive(tmp_path)
    one, two = tmp_path / "one.osm.pbf", tmp_path / "two.osm.pbf"
    script.make_extract(archive, one)
    script.make_extract(archive, two)
    assert one.read_bytes() == two.read_bytes()


def test_the_extract_is_whole_and_carries_its_attribution() -> None:
    with osmium.io.Reader(str(EXTRACT)) as reader:
        header = reader.header()
    assert header.get("generator").startswith("georoute data script")
    assert "OpenStreetMap contributors" in header.get("generator")
    box = header.box()
    nodes: dict[int, tuple[float, float]] = {}
    used: set[int] = set()
    classes: set[str] = set()
    length_m = 0.0
    for entity in osmium.FileProcessor(str(EXTRACT)):
        if isinstance(entity, osmium.osm.Node):
            nodes[entity.id] = (entity.location.lon, entity.location.lat)
            assert box.contains(entity.location)
        elif isinstance(entity, osmium.osm.Way):
            refs = [node.ref for node in entity.nodes]
            used.update(refs)
            classes.add(entity.tags["highway"])
            length_m += sum(
                111_195.0
                * math.hypot(
                    (nodes[b][0] - nodes[a][0]) * math.cos(math.radians(nodes[a][1])),
                    nodes[b][1] - nodes[a][1],
                )
                for a, b in itertools.pairwise(refs)
            )
    assert used == set(nodes)
    assert classes == CLASSES
    # The lengths that the source itself gives add up to 1,468.4 km (all links but connectors).
    assert length_m == pytest.approx(1_468_391, rel=0.005)


def content(path: Path) -> list[object]:
    """Return all that a file says, apart from how it is compressed."""
    found: list[object] = []
    for entity in osmium.FileProcessor(str(path)):
        if isinstance(entity, osmium.osm.Node):
            found.append((entity.id, entity.location.x, entity.location.y))
        elif isinstance(entity, osmium.osm.Way):
            refs = [node.ref for node in entity.nodes]
            found.append((entity.id, refs, dict(entity.tags)))
    return found


def test_the_extract_is_what_the_script_makes_of_the_source(tmp_path: Path) -> None:
    try:
        source = script.find_source()
    except PackageNotFoundError:
        pytest.skip("the wheel with the source is not installed; see data/make_extract.py")
    output = tmp_path / "again.osm.pbf"
    script.make_extract(source, output)

    assert content(output) == content(EXTRACT)
