"""GraphML that osmnx saved, tables of edges, downloads, and the one door to all of them."""

from __future__ import annotations

from pathlib import Path

import geopandas as gpd
import networkx as nx
import numpy as np
import osmnx as ox
import pytest
import requests
from pyproj import Geod
from shapely.geometry import LineString, MultiLineString, Point

from georoute.errors import RoadError
from georoute.roads import download
from georoute.roads.box import Box
from georoute.roads.download import download_roads, downloaded_file
from georoute.roads.extract import read_extract
from georoute.roads.graphml_source import read_graphml
from georoute.roads.model import Access
from georoute.roads.sources import read_road_source
from georoute.roads.table_source import EdgeColumns, read_edge_table
from tests.reader_helpers import FLAT, ROAD, Way, kmh, lat_lon, open_arcs, osm_text, remarks

WAYS: list[Way] = [
    (1, (11, 12, 13), {"highway": "primary", "name": "Long", "maxspeed": "40"}),
    (2, (13, 22, 33), {**ROAD, "oneway": "yes", "access": "destination"}),
    (3, (13, 14), ROAD),
    (4, (14, 15, 25, 14), ROAD),
]
AREA = Box(south_deg=9.9, west_deg=19.9, north_deg=10.1, east_deg=20.1)


def osmnx_graph(folder: Path) -> nx.MultiDiGraph:
    path = folder / "osmnx.osm"
    path.write_text(osm_text(WAYS), encoding="utf-8")
    before = ox.settings.useful_tags_way
    ox.settings.useful_tags_way = [*before, "access"]
    try:
        return ox.graph_from_xml(path, retain_all=True, simplify=True)
    finally:
        ox.settings.useful_tags_way = before


@pytest.mark.source("osmnx reading and saving the same map")
def test_graphml_of_osmnx_is_what_the_extract_is(tmp_path: Path) -> None:
    path = tmp_path / "graph.graphml"
    ox.save_graphml(osmnx_graph(tmp_path), path)
    table = read_graphml(path, profile=FLAT)
    extract = read_extract(tmp_path / "osmnx.osm", profile=FLAT)
    assert open_arcs(table) == open_arcs(extract)
    assert table.length_mm.sum() == extract.length_mm.sum()
    assert sorted(table.names) == ["", "Long"]
    speeds = {table.classes[table.road_class[e]]: kmh(table, e) for e in range(table.start.size)}
    assert speeds["primary"] == pytest.approx(40, rel=1e-4)
    assert speeds["residential"] == pytest.approx(50, rel=1e-4)
    closed = table.access == Access.LOCAL
    assert set(table.way[closed].tolist()) == {2}
    assert remarks(table)["source_without_turns"] == 1


def test_graphml_faults_are_told(tmp_path: Path) -> None:
    graph = osmnx_graph(tmp_path)
    path = tmp_path / "graph.graphml"
    ox.save_graphml(ox.project_graph(graph), path)
    with pytest.raises(RoadError, match="unprojected"):
        read_graphml(path, profile=FLAT)
    ox.save_graphml(graph, path)
    whole = path.read_bytes()
    path.write_bytes(whole[: len(whole) // 2])
    with pytest.raises(RoadError, match="is no whole GraphML"):
        read_graphml(path, profile=FLAT)
    path.write_bytes(whole.replace(b'attr.name="x"', b'attr.name="z"'))
    with pytest.raises(RoadError, match="nodes need x and y"):
        read_graphml(path, profile=FLAT)
    path.write_text("<graphml/>", encoding="utf-8")
    with pytest.raises(RoadError, match="holds no edge"):
        read_graphml(path, profile=FLAT)
    with pytest.raises(RoadError, match="cannot be opened"):
        read_graphml(tmp_path / "gone.graphml", profile=FLAT)


def line(*nodes: int) -> LineString:
    return LineString([lat_lon(node)[::-1] for node in nodes])


def edges() -> gpd.GeoDataFrame:
    return gpd.GeoDataFrame(
        {
            "u": ["a", "b", "c", "d", "e", None],
            "v": ["b", "c", "d", "a", "f", "g"],
            "km_h": [36.0, 72.0, np.nan, 0.0, 50.0, 50.0],
            "sec": [np.nan, np.nan, 60.0, np.nan, np.nan, np.nan],
            "dir": ["FT", "TF", "B", None, "B", "B"],
            "street": ["One", "Two", None, "Four", "", ""],
            "kind": ["primary", "residential", "boulevard", "residential", None, None],
            "m": [1000.0, np.nan, np.nan, np.nan, np.nan, np.nan],
        },
        geometry=[
            line(11, 12),
            MultiLineString([line(12, 22), line(22, 32)]),
            line(32, 31),
            line(31, 11),
            Point(20, 10),
            line(41, 42),
        ],
        crs=4326,
    )


COLUMNS = EdgeColumns(
    from_node="u",
    to_node="v",
    length_m="m",
    speed_kmh="km_h",
    time_s="sec",
    oneway="dir",
    name="street",
    road_class="kind",
)


@pytest.mark.parametrize("crs", [4326, 32634])
def test_a_table_of_edges_by_named_columns(tmp_path: Path, crs: int) -> None:
    path = tmp_path / "edges.gpkg"
    edges().to_crs(crs).to_file(path)
    table = read_edge_table(path, columns=COLUMNS, profile=FLAT)
    assert open_arcs(table) == {(11, 12), (32, 12), (32, 31), (31, 32), (31, 11), (11, 31)}
    assert table.length_mm[0] == 1_000_000  # as the table says
    geod = Geod(ellps="WGS84")
    lat, lon = zip(*(lat_lon(node) for node in (12, 22, 32)), strict=True)
    assert table.length_mm[1] / 1000 == pytest.approx(geod.line_length(lon, lat), rel=1e-5)
    assert table.forward_ms[0] == 100_000  # 1 km at 36 km/h
    assert kmh(table, 1, backward=True) == pytest.approx(72, rel=1e-4)
    assert table.forward_ms[2] == table.backward_ms[2] == 60_000
    assert kmh(table, 3) == pytest.approx(50, rel=1e-4)
    assert [table.names[number] for number in table.name] == ["One", "Two", "", "Four"]
    assert "boulevard" in table.classes
    assert remarks(table) == {
        "source_without_turns": 1,
        "row_incomplete": 2,
        "row_speed_missing": 1,
    }


def test_a_table_without_ids_is_joined_where_ends_meet(tmp_path: Path) -> None:
    path = tmp_path / "edges.geojson"
    edges().to_file(path)
    table = read_road_source(path, columns=EdgeColumns(), profile=FLAT)
    assert {(11, 12), (12, 32), (32, 31), (31, 11), (41, 42)} <= open_arcs(table)
    assert table.node_lat.size == 6


def test_faults_of_a_table_are_told(tmp_path: Path) -> None:
    path = tmp_path / "edges.gpkg"
    edges().to_file(path)
    with pytest.raises(RoadError, match=r"lacks the columns name = 'nme'; it has: .*street"):
        read_edge_table(path, columns=EdgeColumns(name="nme"), profile=FLAT)
    with pytest.raises(RoadError, match="both columns"):
        read_edge_table(path, columns=EdgeColumns(from_node="u"), profile=FLAT)
    far = Box.around([50.0], [8.0], margin_km=3)
    with pytest.raises(RoadError, match="touches the wanted area"):
        read_edge_table(path, columns=COLUMNS, profile=FLAT, within=far)
    with pytest.raises(RoadError, match="does not exist"):
        read_edge_table(tmp_path / "gone.gpkg", columns=COLUMNS, profile=FLAT)
    nowhere = tmp_path / "nowhere.shp"
    with pytest.warns(UserWarning, match="crs"):
        edges()[["u", "geometry"]].iloc[:1].set_crs(None, allow_override=True).to_file(nowhere)
    with pytest.raises(RoadError, match="coordinate reference system"):
        read_edge_table(nowhere, columns=EdgeColumns(), profile=FLAT)
    bare = tmp_path / "bare.csv"
    bare.write_text("a,b\n1,2\n", encoding="utf-8")
    with pytest.raises(RoadError, match="has no lines"):
        read_edge_table(bare, columns=EdgeColumns(), profile=FLAT)
    damaged = tmp_path / "damaged.gpkg"
    damaged.write_bytes(b"nothing")
    with pytest.raises(RoadError, match="cannot be read as a table"):
        read_edge_table(damaged, columns=EdgeColumns(), profile=FLAT)
    points = tmp_path / "points.geojson"
    edges().iloc[4:5].to_file(points)
    with pytest.raises(RoadError, match="holds no road"):
        read_edge_table(points, columns=EdgeColumns(), profile=FLAT)


def test_a_box_cuts_a_table_too(tmp_path: Path) -> None:
    path = tmp_path / "edges.gpkg"
    edges().to_file(path)
    box = Box(south_deg=10.0005, west_deg=20.0005, north_deg=10.0015, east_deg=20.0015)
    table = read_edge_table(path, columns=COLUMNS, profile=FLAT, within=box)
    assert {table.names[number] for number in table.name} == {"One", "Four"}


def test_a_download_is_made_once_and_leaves_no_trace_elsewhere(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    graph = osmnx_graph(tmp_path)
    asked: list[tuple[float, ...]] = []

    def answer(sides: tuple[float, ...], **_: object) -> nx.MultiDiGraph:
        asked.append(sides)
        assert ox.settings.use_cache is False
        assert "motor_vehicle" in ox.settings.useful_tags_way
        return graph

    monkeypatch.setattr(ox, "graph_from_bbox", answer)
    folder = tmp_path / "kept"
    first = download_roads(AREA, profile=FLAT, folder=folder)
    again = download_roads(AREA, profile=FLAT, folder=folder)
    assert asked == [(19.9, 9.9, 20.1, 10.1)]
    assert open_arcs(first) == open_arcs(again) == {*open_arcs(first)} != set()
    assert ox.settings.use_cache is True
    assert [path.name for path in folder.iterdir()] == [downloaded_file(AREA, folder=folder).name]


@pytest.mark.parametrize(
    "error", [requests.exceptions.ConnectionError("no route"), ValueError("nothing there")]
)
def test_without_a_network_the_message_says_what_to_do(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, error: Exception
) -> None:
    def fail(*_: object, **__: object) -> None:
        raise error

    monkeypatch.setattr(ox, "graph_from_bbox", fail)
    with pytest.raises(RoadError, match=r"could not be downloaded .*give an extract of the area"):
        download_roads(AREA, profile=FLAT, folder=tmp_path)
    assert list(tmp_path.iterdir()) == []


def test_an_area_across_the_180th_meridian_is_not_asked_for(tmp_path: Path) -> None:
    area = Box.around([0.0, 0.0], [179.9, -179.9], margin_km=1)
    with pytest.raises(RoadError, match="180th meridian"):
        download_roads(area, profile=FLAT, folder=tmp_path)


def test_a_download_of_another_area_is_another_file(tmp_path: Path) -> None:
    other = Box(south_deg=9.9, west_deg=19.9, north_deg=10.1, east_deg=20.2)
    assert downloaded_file(AREA, folder=tmp_path) != downloaded_file(other, folder=tmp_path)
    assert download.FORMAT == 1


def test_the_name_of_a_file_tells_what_it_is(tmp_path: Path) -> None:
    graphml = tmp_path / "graph.graphml"
    ox.save_graphml(osmnx_graph(tmp_path), graphml)
    extract = tmp_path / "osmnx.osm"
    arcs = open_arcs(read_road_source(extract, profile=FLAT))
    assert open_arcs(read_road_source(graphml, profile=FLAT)) == arcs
    with pytest.raises(RoadError, match="name does not tell"):
        read_road_source(tmp_path / "roads.gpkg", profile=FLAT)
