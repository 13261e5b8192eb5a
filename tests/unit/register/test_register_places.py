"""Coordinate systems: published points, pyproj as reference, and what is refused."""

from __future__ import annotations

from pathlib import Path

import geopandas
import pyproj
import pytest
import shapely

from georoute.domain.findings import Finding
from georoute.register import check_register, read_register
from tests import register_helpers as helpers
from tests.spine_helpers import small_programme


def table(path: Path, places: list[tuple[float, float]], *, headers: str = "site_id,x,y") -> Path:
    lines = [f"S{k},{x!r},{y!r}" for k, (x, y) in enumerate(places)]
    path.write_text("\n".join([headers, *lines]), encoding="utf-8")
    return path


def faults(findings: tuple[Finding, ...]) -> list[tuple[int | None, str, str]]:
    return [(f.row, f.column, f.code) for f in findings if f.is_fault]


# IOGP Publication 373-7-2 (EPSG Guidance Note 7-2), example of the method Popular Visualisation
# Pseudo-Mercator: 24°22'54.433"N 100°20'00.000"W is E -11 169 055.58 m, N 2 800 000.00 m.
def test_the_published_example_of_a_projected_system(tmp_path: Path) -> None:
    path = table(tmp_path / "r.csv", [(-11_169_055.58, 2_800_000.00)])
    register, findings = read_register(path, crs="EPSG:3857")
    assert register.sites[0].lat_deg == pytest.approx(24 + 22 / 60 + 54.433 / 3600, abs=2e-7)
    assert register.sites[0].lon_deg == pytest.approx(-(100 + 20 / 60), abs=2e-7)
    assert [finding.code for finding in findings] == ["converted_to_wgs84"]


@pytest.mark.parametrize("crs", ["EPSG:32719", "EPSG:5361", "EPSG:4674", "EPSG:3857"])
def test_any_system_is_converted_as_pyproj_does(crs: str, tmp_path: Path) -> None:
    rows = helpers.plain_rows(helpers.seeded(1))
    lon = [float(row["lon"]) for row in rows]
    lat = [float(row["lat"]) for row in rows]
    to_crs = pyproj.Transformer.from_crs("EPSG:4326", crs, always_xy=True)
    places = [to_crs.transform(a, b) for a, b in zip(lon, lat, strict=True)]
    from_table, _ = read_register(table(tmp_path / "r.csv", places), crs=crs)
    from_layer, _ = read_register(helpers.write_gpkg(tmp_path / "r.gpkg", rows, crs=crs))
    for register in (from_table, from_layer):
        assert [site.lon_deg for site in register.sites] == pytest.approx(lon, abs=1e-9)
        assert [site.lat_deg for site in register.sites] == pytest.approx(lat, abs=1e-9)


def test_faults_in_a_projected_system(tmp_path: Path) -> None:
    rng = helpers.seeded(4)
    places = [(280_000 + rng.uniform(0, 5e3), 6.69e6 + rng.uniform(0, 5e3)) for _ in range(40)]
    for k in (3, 4, 5):
        places[k] = places[k][::-1]
    for k in (7, 8, 9):
        places[k] = (0.0, 0.0)
    for k in (11, 12, 13):
        places[k] = (2.8e12, 6.69e13)
    findings = check_register(table(tmp_path / "r.csv", places), crs="EPSG:32719")
    assert faults(findings) == [
        *((k + 2, "y, x", "swapped_axes") for k in (3, 4, 5)),
        *((k + 2, "y, x", "zero_coordinate") for k in (7, 8, 9)),
        *((k + 2, "y, x", "coordinate_outside_crs") for k in (11, 12, 13)),
    ]


@pytest.mark.parametrize("headers", ["site_id,x,y", "site_id,easting,northing", "site_id,lon,lat"])
def test_metres_without_a_system_are_one_fault(headers: str, tmp_path: Path) -> None:
    places = [(280_000.0 + 10 * k, 6.69e6) for k in range(20)]
    (finding,) = check_register(table(tmp_path / "r.csv", places, headers=headers))
    assert (finding.row, finding.code) == (None, "coordinates_not_degrees")
    assert "EPSG" in finding.remedy


@pytest.mark.parametrize(
    "crs",
    [
        "EPSG:999999",
        "Mars",
        "EPSG:5703",  # heights
        "EPSG:4978",  # geocentric
        "IAU_2015:30100",  # the Moon
        "{}",
    ],
)
def test_unknown_systems_are_refused(crs: str, tmp_path: Path) -> None:
    path = table(tmp_path / "r.csv", [(1.0, 2.0)])
    assert faults(check_register(path, crs=crs)) == [(None, "crs", "unknown_crs")]


def test_a_layer_without_a_system_needs_the_setting(tmp_path: Path) -> None:
    points = [shapely.Point(282_000.0 + k, 6.69e6) for k in range(9)]
    frame = geopandas.GeoDataFrame({"site_id": list("abcdefghi")}, geometry=points)
    path = tmp_path / "r.shp"
    with pytest.warns(UserWarning, match="'crs' was not provided"):
        frame.to_file(path)
    assert faults(check_register(path)) == [(None, "crs", "unknown_crs")]
    register, _ = read_register(path, crs="EPSG:32719")
    assert register.sites[0].lon_deg == pytest.approx(-71.256, abs=0.01)


def test_a_system_the_file_states_wins_over_the_setting(tmp_path: Path) -> None:
    path = helpers.write_gpkg(tmp_path / "r.gpkg", helpers.plain_rows(helpers.seeded(1)))
    _, findings = read_register(path, crs="EPSG:32719")
    assert [(f.code, f.value) for f in findings] == [("setting_not_used", "EPSG:32719")]


def test_axes_exchanged_throughout_are_one_fault(tmp_path: Path) -> None:
    """Latitudes beyond 90 degrees give it away; else the bases do."""
    beyond = [(-33.0 - k / 100, 151.0) for k in range(20)]  # lon, lat of a place at 151 E
    path = table(tmp_path / "r.csv", beyond, headers="site_id,lon,lat")
    assert faults(check_register(path)) == [(None, "lat, lon", "swapped_axes")]

    programme = small_programme()
    base = programme.bases[0]
    within = [(base.lat_deg + k / 1000, base.lon_deg) for k in range(20)]
    path = table(tmp_path / "q.csv", within, headers="site_id,lon,lat")
    assert faults(check_register(path)) == []
    findings = check_register(path, programme=programme)
    assert faults(findings) == [(None, "lat, lon", "swapped_axes")]


def test_a_register_on_both_sides_of_the_date_line_has_no_outlier(tmp_path: Path) -> None:
    rng = helpers.seeded(2)
    places = [
        ((180 + rng.uniform(-0.3, 0.3) + 180) % 360 - 180, -17 + rng.uniform(-0.3, 0.3))
        for _ in range(60)
    ]
    assert {x > 0 for x, _ in places} == {True, False}
    assert check_register(table(tmp_path / "r.csv", places)) == ()
