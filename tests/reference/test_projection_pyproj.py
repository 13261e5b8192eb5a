"""The plane against PROJ: round trip, distances, and the scale error it claims."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray
from pyproj import CRS, Geod, Proj, Transformer

from georoute.projection import LocalPlane, local_plane

GEOD = Geod(ellps="WGS84")

Degrees = tuple[NDArray[np.float64], NDArray[np.float64]]


def around(lon: float, lat: float, spread_deg: float, *, n: int = 400) -> Degrees:
    rng = np.random.default_rng(31)
    lons = lon + rng.uniform(-spread_deg, spread_deg, n) / np.cos(np.radians(lat))
    return (lons + 180) % 360 - 180, lat + rng.uniform(-spread_deg, spread_deg, n)


def cap(pole: float, spread_deg: float, *, n: int = 400) -> Degrees:
    rng = np.random.default_rng(32)
    lat = pole - np.sign(pole) * rng.uniform(0, spread_deg, n)
    lat[0] = pole
    return rng.uniform(-180, 180, n), lat


SETS: dict[str, Degrees] = {
    "a town": around(-71.3, -29.9, 0.1),
    "a region": around(-71.0, -30.0, 2.0),
    "across 180": around(179.9, -17.0, 2.0),
    "the north pole": cap(90.0, 3.0),
    "the south pole": cap(-90.0, 3.0),
    "a country": (np.linspace(-68, -75, 400), np.linspace(-17, -55, 400)),
    "one point": (np.array([12.5]), np.array([41.9])),
    "a pole alone": (np.array([45.0]), np.array([90.0])),
}


def factors(plane: LocalPlane, degrees: Degrees) -> tuple[float, float]:
    """Return the largest and the smallest scale PROJ finds among the points."""
    proj = Proj(proj="aeqd", lat_0=plane.lat0_deg, lon_0=plane.lon0_deg, ellps="WGS84")
    # The finite differences behind the factors fail on a pole itself.
    keep = np.abs(degrees[1]) < 89.99
    found = proj.get_factors(degrees[0][keep], degrees[1][keep])
    return float(np.max(found.tissot_semimajor)), float(np.min(found.tissot_semiminor))


@pytest.mark.source("pyproj.Geod.inv (PROJ): distance between each point and its round trip")
@pytest.mark.parametrize("name", SETS)
def test_the_round_trip_is_within_a_millimetre(name: str) -> None:
    lon, lat = SETS[name]
    plane = local_plane(lon, lat)
    lon_back, lat_back = plane.inverse(*plane.forward(lon, lat))
    assert np.max(GEOD.inv(lon, lat, lon_back, lat_back)[2]) <= 1e-3


@pytest.mark.source("pyproj.Proj.get_factors (PROJ): Tissot's axes at each point")
@pytest.mark.parametrize("name", [name for name in SETS if name != "a pole alone"])
def test_the_scale_error_is_the_one_claimed(name: str) -> None:
    plane = local_plane(*SETS[name])
    largest, smallest = factors(plane, SETS[name])
    assert smallest == pytest.approx(1.0, abs=1e-7)
    # The claim is made on the mean sphere: within the flattening of the figure itself.
    assert largest - 1 == pytest.approx(plane.scale_error, rel=0.02, abs=1e-7)


@pytest.mark.source("pyproj.Geod.inv (PROJ): geodesic from the centre, and between points")
@pytest.mark.parametrize("name", ["a region", "across 180", "the north pole", "the south pole"])
def test_distances_on_the_plane(name: str) -> None:
    lon, lat = SETS[name]
    plane = local_plane(lon, lat)
    x, y = plane.forward(lon, lat)
    n = lon.size
    centre = GEOD.inv(np.full(n, plane.lon0_deg), np.full(n, plane.lat0_deg), lon, lat)[2]
    np.testing.assert_allclose(np.hypot(x, y), centre, rtol=0, atol=1e-3)
    between = np.asarray(GEOD.inv(lon[:-1], lat[:-1], lon[1:], lat[1:])[2])
    ratio = np.hypot(np.diff(x), np.diff(y)) / between
    assert ratio.min() > 1 - 1e-6
    assert ratio.max() < 1 + plane.scale_error * 1.02


@pytest.mark.source("UTM zone 19S as defined by EPSG:32719, through pyproj.Transformer")
def test_a_town_is_congruent_with_its_utm_zone() -> None:
    lon, lat = SETS["a town"]
    x, y = local_plane(lon, lat).forward(lon, lat)
    utm = Transformer.from_crs(4326, CRS.from_epsg(32719), always_xy=True)
    east, north = utm.transform(lon, lat)
    own = np.hypot(np.diff(x), np.diff(y))
    theirs = np.hypot(np.diff(east), np.diff(north))
    # 0.04 % is the scale a UTM zone gives away on its central meridian, by definition.
    np.testing.assert_allclose(own, theirs, rtol=5e-4)


@pytest.mark.source("from memory: Earth is a ball; 180 degrees and the poles are no edges")
@pytest.mark.parametrize("name", ["across 180", "the north pole", "the south pole"])
def test_the_centre_lies_amid_the_data(name: str) -> None:
    plane = local_plane(*SETS[name])
    assert plane.radius_m < 500_000
