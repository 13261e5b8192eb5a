"""The plan file as others read it: GDAL (through pyogrio), and OGC 12-128r18 clause by clause."""

from __future__ import annotations

import sqlite3
import struct
from collections.abc import Iterator
from contextlib import closing
from dataclasses import replace
from pathlib import Path
from types import MappingProxyType

import geopandas as gpd
import pyogrio
import pytest
import shapely
from pyproj import CRS

from georoute.domain.plan import Plan
from georoute.store import read_plan, to_geodataframes, write_plan
from tests.store_helpers import example_plan

LAYERS = {
    "sites": "Point",
    "stops": "Point",
    "legs": "MultiLineString",
    "days": "MultiLineString",
    "bases": "Point",
    "road_points": "Point",
    "backdrop": "MultiLineString",
}
TABLES = {"visits", "unplaced", "inspectors", "exchanges", "stages", "extra_columns", "plan"}


pytestmark = pytest.mark.source(
    "GDAL, through pyogrio and geopandas, reads the file; OGC 12-128r18 (GeoPackage 1.3.1), "
    "requirement numbers from memory"
)


@pytest.fixture(scope="module")
def plan() -> Plan:
    return example_plan()


@pytest.fixture(scope="module")
def path(plan: Plan, tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("gis") / "week.gpkg"
    write_plan(plan, path)
    return path


@pytest.fixture(scope="module")
def database(path: Path) -> Iterator[sqlite3.Connection]:
    with closing(sqlite3.connect(path)) as connection:
        yield connection


def test_gdal_lists_layers_and_tables(path: Path) -> None:
    listed = {str(name): kind for name, kind in pyogrio.list_layers(path)}
    assert {name: kind for name, kind in listed.items() if kind} == LAYERS
    assert {name for name, kind in listed.items() if not kind} == TABLES


@pytest.mark.parametrize("name", [*LAYERS, *sorted(TABLES)])
def test_gdal_reads_every_row(name: str, path: Path, plan: Plan) -> None:
    frame = gpd.read_file(path, layer=name)
    expected = to_geodataframes(plan)[name]
    assert len(frame) == len(expected)
    assert list(frame.columns) == list(expected.columns)


def test_gdal_sees_points_where_sites_are(path: Path, plan: Plan) -> None:
    frame = gpd.read_file(path, layer="sites")
    assert frame.crs == CRS.from_epsg(4326)
    assert list(frame.geometry.x) == [site.lon_deg for site in plan.sites]
    assert list(frame.geometry.y) == [site.lat_deg for site in plan.sites]
    assert list(frame["site_id"]) == [site.site_id for site in plan.sites]
    assert frame.loc[0, "name"] == "Invented house 0 <b>"


def test_gdal_sees_legs_from_place_to_place(path: Path, plan: Plan) -> None:
    frame = gpd.read_file(path, layer="legs")
    spots = {site.site_id: (site.lon_deg, site.lat_deg) for site in plan.sites}
    spots |= {base.base_id: (base.lon_deg, base.lat_deg) for base in plan.programme.bases}
    for row in frame.itertuples():
        (line,) = row.geometry.geoms
        assert list(line.coords) == [spots[row.from_id], spots[row.to_id]]


def test_gdal_reads_dates_figures_and_local_times(path: Path, plan: Plan) -> None:
    frame = gpd.read_file(path, layer="days")
    assert [day.date() for day in frame["day"]] == [tour.day for tour in plan.tours]
    assert list(frame["cost"]) == [tour.cost for tour in plan.tours]
    assert list(frame["depart"]) == [
        "2026-10-23T08:00:00+02:00",
        "2026-10-24T22:00:00+02:00",
        "2026-10-26T08:00:00+01:00",
    ]


def test_schema_number_is_told_in_the_plan_table(path: Path) -> None:
    frame = gpd.read_file(path, layer="plan")
    texts = dict(zip(frame["key"], frame["value"], strict=True))
    assert texts["schema"] == "1"
    assert texts["programme.seed"] == "20261023"
    assert texts["provenance.stop_rule"] == "effort used"
    assert texts["programme.tariff.km"] == "0.53"


def test_line_across_the_antimeridian_is_cut(plan: Plan, tmp_path: Path) -> None:
    east, west = replace(plan.sites[0], lon_deg=179.9), replace(plan.sites[1], lon_deg=-179.9)
    write_plan(replace(plan, sites=(east, west, *plan.sites[2:])), tmp_path / "fiji.gpkg")
    frame = gpd.read_file(tmp_path / "fiji.gpkg", layer="legs")
    first, second = frame.geometry.iloc[1].geoms
    assert first.coords[0] == (179.9, east.lat_deg)
    assert first.coords[1][0] == 180.0
    assert second.coords[0][0] == -180.0
    assert second.coords[1] == (-179.9, west.lat_deg)
    assert first.coords[1][1] == second.coords[0][1]
    assert shapely.box(-180, -90, 180, 90).covers(frame.geometry.iloc[1])


def test_hostile_names_stay_text(plan: Plan, tmp_path: Path) -> None:
    headers = ("<script>alert(1)</script>", 'a"; DROP TABLE sites; --', "FID", "Geom", "`${x}`")
    extra = MappingProxyType(dict.fromkeys(headers, "<img onerror=x>'\"\x07"))
    sites = tuple(replace(site, name=headers[0], extra=extra) for site in plan.sites)
    hostile = replace(plan, sites=sites, extra_columns=headers)
    write_plan(hostile, tmp_path / "a.gpkg")
    assert read_plan(tmp_path / "a.gpkg") == hostile
    frame = gpd.read_file(tmp_path / "a.gpkg", layer="sites")
    assert set(frame["name"]) == {headers[0]}
    assert headers[1] in frame.columns


# OGC 12-128r18, "OGC GeoPackage Encoding Standard", version 1.3.1. R is the number of the
# requirement; the numbers are quoted from memory, what they require is checked by GDAL above too.


def test_file_is_marked_as_geopackage(database: sqlite3.Connection, path: Path) -> None:
    assert path.read_bytes()[:16] == b"SQLite format 3\0"  # R1
    assert path.read_bytes()[68:72] == b"GPKG"  # R2: application_id
    assert database.execute("PRAGMA user_version").fetchone() == (10_300,)  # R2
    assert path.suffix == ".gpkg"  # R3
    assert database.execute("PRAGMA integrity_check").fetchall() == [("ok",)]  # R6
    assert database.execute("PRAGMA foreign_key_check").fetchall() == []  # R7


def test_reference_systems_are_there(database: sqlite3.Connection) -> None:
    rows = database.execute(
        "SELECT srs_id, organization, organization_coordsys_id, definition "
        "FROM gpkg_spatial_ref_sys ORDER BY srs_id"
    ).fetchall()
    assert [row[:3] for row in rows] == [
        (-1, "NONE", -1),
        (0, "NONE", 0),
        (4326, "EPSG", 4326),
    ]  # R11
    assert rows[0][3] == rows[1][3] == "undefined"
    assert CRS.from_wkt(rows[2][3]) == CRS.from_epsg(4326)  # R12


def test_every_table_is_registered(database: sqlite3.Connection) -> None:
    found = dict(database.execute("SELECT table_name, data_type FROM gpkg_contents"))
    assert found == dict.fromkeys(LAYERS, "features") | dict.fromkeys(TABLES, "attributes")
    tables = {
        name
        for (name,) in database.execute("SELECT name FROM sqlite_master WHERE type = 'table'")
        if not name.startswith(("gpkg_", "sqlite_"))
    }
    assert tables == set(found)


def test_columns_have_types_of_the_standard(database: sqlite3.Connection) -> None:
    allowed = {"BOOLEAN", "INTEGER", "REAL", "TEXT", "DATE", "POINT", "MULTILINESTRING"}  # R5
    for name in (*LAYERS, *TABLES):
        columns = database.execute(f"PRAGMA table_info({name})").fetchall()
        assert {column[2] for column in columns} <= allowed
        keys = [column[1:3] for column in columns if column[5]]
        assert keys == [("fid", "INTEGER")]  # R29 features, R119 attributes


def test_geometry_columns_are_registered(database: sqlite3.Connection) -> None:
    rows = database.execute("SELECT * FROM gpkg_geometry_columns").fetchall()
    kinds = {name: kind.upper() for name, kind in LAYERS.items()}
    assert {row[0]: row[2] for row in rows} == kinds  # R21, R22, R25
    assert {row[1:2] + row[3:] for row in rows} == {("geom", 4326, 0, 0)}  # R24, R26, R27, R28


def test_geometries_are_blobs_of_the_standard(database: sqlite3.Connection) -> None:
    for layer, kind in LAYERS.items():
        for (blob,) in database.execute(f"SELECT geom FROM {layer}"):  # noqa: S608 - own names
            magic, version, flags, srs_id = struct.unpack_from("<2sBBi", blob)  # R19
            assert (magic, version, srs_id) == (b"GP", 0, 4326)
            assert flags & 0b1 == 1
            bounds_kind = (flags >> 1) & 0b111
            shape = shapely.from_wkb(blob[8 + (32 if bounds_kind == 1 else 0) :])  # R20
            assert shape.geom_type == kind
            if bounds_kind == 1:
                min_x, max_x, min_y, max_y = struct.unpack_from("<4d", blob, 8)
                assert shape.bounds == (min_x, min_y, max_x, max_y)


def test_bounds_in_contents_hold_all_shapes(database: sqlite3.Connection, path: Path) -> None:
    for layer in LAYERS:
        bounds = database.execute(
            "SELECT min_x, min_y, max_x, max_y FROM gpkg_contents WHERE table_name = ?", [layer]
        ).fetchone()
        if layer in {"road_points", "backdrop"}:  # a plan without roads has none
            assert bounds == (None, None, None, None)
        else:
            assert bounds == tuple(gpd.read_file(path, layer=layer).total_bounds)


def test_time_of_writing_is_nowhere(database: sqlite3.Connection) -> None:
    stamps = database.execute("SELECT DISTINCT last_change FROM gpkg_contents").fetchall()
    assert stamps == [("1970-01-01T00:00:00.000Z",)]  # R15: ISO 8601 with milliseconds, UTC
