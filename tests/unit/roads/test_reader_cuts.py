"""Where ways are cut: junctions, missing nodes, the edge of the box; and files that are none."""

from __future__ import annotations

import bz2
import gzip
from pathlib import Path

import numpy as np
import pytest
from pyproj import Geod

from georoute.errors import RoadError
from georoute.roads import osm_passes
from georoute.roads.box import Box
from georoute.roads.extract import read_extract
from tests.reader_helpers import (
    FLAT,
    ROAD,
    Way,
    lat_lon,
    local,
    open_arcs,
    osm_text,
    read_map,
    remarks,
)

HELSINKI = Path(__file__).parents[2] / "data" / "Helsinki.osm.pbf"


def both(*pairs: tuple[int, int]) -> set[tuple[int, int]]:
    return {*pairs, *(pair[::-1] for pair in pairs)}


def test_ways_are_cut_at_junctions_only(tmp_path: Path) -> None:
    ways: list[Way] = [(1, (11, 12, 13, 14), ROAD), (2, (13, 23), ROAD)]
    table = read_map(tmp_path, ways)
    assert open_arcs(table) == both((11, 13), (13, 14), (13, 23))
    assert table.way.tolist() == [1, 1, 2]
    assert np.diff(table.point_ptr).tolist() == [3, 2, 2]


def test_a_way_on_foot_makes_no_junction(tmp_path: Path) -> None:
    ways: list[Way] = [(1, (11, 12, 13), ROAD), (2, (12, 22), {"highway": "footway"})]
    assert open_arcs(read_map(tmp_path, ways)) == both((11, 13))


def test_rings_and_ways_that_cross_themselves(tmp_path: Path) -> None:
    ways: list[Way] = [(1, (11, 12, 22, 11), ROAD), (2, (31, 32, 42, 41, 32, 33), ROAD)]
    table = read_map(tmp_path, ways)
    assert open_arcs(table) == {(11, 11), (32, 32)} | both((31, 32), (32, 33))


def test_a_node_twice_running_is_there_once(tmp_path: Path) -> None:
    table = read_map(tmp_path, [(1, (11, 11, 12, 12, 13), ROAD)])
    assert open_arcs(table) == both((11, 13))
    assert table.point_lat.size == 3


@pytest.mark.parametrize(
    ("missing", "expected"),
    [
        ((11,), both((12, 15))),
        ((13,), both((11, 12), (14, 15))),
        ((12, 14), set()),
        ((11, 15), both((12, 14))),
    ],
)
def test_a_clipped_way_is_cut_where_nodes_are_missing(
    tmp_path: Path, missing: tuple[int, ...], expected: set[tuple[int, int]]
) -> None:
    ways: list[Way] = [(1, (11, 12, 13, 14, 15), ROAD), (2, (21, 22), ROAD)]
    table = read_map(tmp_path, ways, missing=missing)
    assert open_arcs(table) == expected | both((21, 22))
    assert remarks(table) == {"way_cut": 1}
    for values in (table.point_lat, table.point_lon, table.node_lat, table.node_lon):
        assert np.isfinite(values).all()


def test_lengths_are_geodesics_along_the_shape(tmp_path: Path) -> None:
    table = read_map(tmp_path, [(1, (11, 12, 22, 35), ROAD)])
    lat, lon = zip(*(lat_lon(node) for node in (11, 12, 22, 35)), strict=True)
    expected = Geod(ellps="WGS84").line_length(lon, lat)
    assert table.length_mm[0] / 1000 == pytest.approx(expected, rel=1e-6)


def test_names_and_classes(tmp_path: Path) -> None:
    odd = "Strada „Ștefan, cel=Mare” 5%@ \u00a0x"
    ways: list[Way] = [
        (1, (11, 12), {**ROAD, "name": odd}),
        (2, (12, 13), {"highway": "primary", "ref": "DN 1"}),
        (3, (13, 14), {**ROAD, "name": "B", "ref": "C"}),
        (4, (14, 15), ROAD),
    ]
    table = read_map(tmp_path, ways)
    assert [table.names[number] for number in table.name] == [odd, "DN 1", "B", ""]
    assert table.names[0] == ""
    assert table.classes[table.road_class[1]] == "primary"
    assert table.source == "tiny.osm"
    assert "OpenStreetMap" in table.credit


def test_pieces_that_miss_the_box_are_left_out(tmp_path: Path) -> None:
    ways: list[Way] = [
        (1, (11, 12, 13, 14, 15, 16), {**ROAD, "name": "in part"}),
        (2, (81, 82), {**ROAD, "name": "far"}),
    ]
    path = tmp_path / "tiny.osm"
    path.write_text(osm_text(ways), encoding="utf-8")
    box = Box(south_deg=10.0, north_deg=10.02, west_deg=20.0025, east_deg=20.0035)
    table = read_extract(path, profile=FLAT, within=box)
    assert open_arcs(table) == both((12, 14))
    assert table.names == ("", "in part")


def test_a_box_around_places() -> None:
    box = Box.around([60.0, 60.1], [24.0, 24.2], margin_km=11.12)
    assert box.south_deg == pytest.approx(59.9)
    assert box.north_deg == pytest.approx(60.2)
    assert box.west_deg == pytest.approx(23.8, abs=0.01)  # cos 60.2 degrees is about one half
    across = Box.around([0.0, 0.0], [179.9, -179.9], margin_km=11.12)
    assert (across.west_deg, across.east_deg) == pytest.approx((179.8, -179.8))
    low, high = np.array([-0.1, -0.1, -0.1]), np.array([0.1, 0.1, 0.1])
    west, east = np.array([179.85, -179.99, 0.0]), np.array([179.86, -179.95, 1.0])
    assert across.overlaps(low, high, west, east).tolist() == [True, True, False]


@pytest.mark.parametrize("sides", [(1, 0, 0, 1), (0, 0, 91, 1), (0, float("nan"), 1, 1)])
def test_what_is_no_box_is_refused(sides: tuple[float, float, float, float]) -> None:
    south, west, north, east = sides
    with pytest.raises(RoadError, match="south"):
        Box(south_deg=south, west_deg=west, north_deg=north, east_deg=east)


@pytest.mark.parametrize("suffix", [".osm", ".osm.bz2", ".osm.gz"])
def test_packed_files_read_the_same(tmp_path: Path, suffix: str) -> None:
    text = osm_text([(1, (11, 12), ROAD)]).encode()
    packed = {".osm": text, ".osm.bz2": bz2.compress(text), ".osm.gz": gzip.compress(text)}
    path = tmp_path / f"map{suffix}"
    path.write_bytes(packed[suffix])
    assert open_arcs(read_extract(path, profile=FLAT)) == both((11, 12))


def test_ways_before_nodes_read_the_same(tmp_path: Path) -> None:
    lines = osm_text([(1, (12, 11), ROAD)]).splitlines()
    path = tmp_path / "map.osm"
    nodes = [line for line in lines if "<node" in line]
    rest = [line for line in lines if "<node" not in line]
    path.write_text("\n".join([*rest[:-1], *reversed(nodes), rest[-1]]), encoding="utf-8")
    assert open_arcs(read_extract(path, profile=FLAT)) == both((11, 12))


def test_node_locations_of_large_files_go_to_the_disk(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    ways: list[Way] = [(1, (11, 12, 13), {**ROAD, "access": "private"})]
    expected = read_map(tmp_path, ways)
    monkeypatch.setattr(osm_passes, "LOCATIONS_IN_MEMORY_UP_TO", 0)
    table = read_map(tmp_path, ways)
    assert local(table) == {(11, 13)}
    assert table.point_lon.tolist() == expected.point_lon.tolist()


def test_ways_are_read_in_chunks(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    ways: list[Way] = [(n, (10 * n + 1, 10 * n + 2), ROAD) for n in range(1, 6)]
    ways.insert(2, (9, (91, 92), {"highway": "pedestrian"}))
    expected = open_arcs(read_map(tmp_path, ways))
    monkeypatch.setattr(osm_passes, "LINES_AT_ONCE", 2)
    assert open_arcs(read_map(tmp_path, ways)) == expected
    assert len(expected) == 10


BAD = [
    ("gone.osm.pbf", None, "does not exist"),
    ("empty.osm.pbf", b"", "is empty"),
    ("half.osm.pbf", "half", "ends too early"),
    ("page.osm.pbf", b"<html>Not found</html>" * 9, "no OpenStreetMap file"),
    ("half.osm", b'<osm version="0.6"><node id="1" lat="1"', "ends too early"),
    ("table.osm", b"id,lat\n1,2\n", "no OpenStreetMap file"),
    ("track.osm", b'<?xml version="1.0"?><gpx></gpx>', "no OpenStreetMap file"),
    ("bad.osm.bz2", b"BZh9nothing", "no OpenStreetMap file"),
    ("map.csv", b"a,b\n", "name does not tell the format"),
    ("none.osm", b'<osm version="0.6"></osm>', "holds no road for cars"),
]


@pytest.mark.parametrize(("name", "content", "found"), BAD, ids=[name for name, *_ in BAD])
def test_bad_files_are_named_with_what_was_found_and_what_to_do(
    tmp_path: Path, name: str, content: bytes | str | None, found: str
) -> None:
    path = tmp_path / name
    if content == "half":
        whole = HELSINKI.read_bytes()
        path.write_bytes(whole[: len(whole) // 2])
    elif isinstance(content, bytes):
        path.write_bytes(content)
    with pytest.raises(RoadError) as caught:
        read_extract(path, profile=FLAT)
    message = str(caught.value)
    assert message.startswith(f"{path}: ")
    assert found in message
    assert any(remedy in message for remedy in ("give an extract", "fetch it again"))


def test_a_folder_is_no_extract(tmp_path: Path) -> None:
    with pytest.raises(RoadError, match="is a folder"):
        read_extract(tmp_path, profile=FLAT)


def test_a_file_without_roads_tells_what_it_holds(tmp_path: Path) -> None:
    with pytest.raises(RoadError, match=r"no way that its tags make a road for cars"):
        read_map(tmp_path, [(1, (11, 12), {"highway": "steps"})])
    with pytest.raises(RoadError, match=r"found: 1 pedestrian streets"):
        read_map(tmp_path, [(1, (11, 12), {"highway": "pedestrian"})])
    with pytest.raises(RoadError, match=r"no two neighbouring nodes"):
        read_map(tmp_path, [(1, (11, 12, 13), ROAD)], missing=(12,))


def test_a_box_elsewhere_tells_where_the_roads_are(tmp_path: Path) -> None:
    path = tmp_path / "tiny.osm"
    path.write_text(osm_text([(1, (11, 12), ROAD)]), encoding="utf-8")
    box = Box.around([47.0], [26.0], margin_km=5)
    with pytest.raises(RoadError, match=r"touches the wanted area.*latitude 10\.0010 to 10\.0010"):
        read_extract(path, profile=FLAT, within=box)
