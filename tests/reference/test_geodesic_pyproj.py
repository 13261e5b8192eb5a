"""Geodesics and great circles against reference libraries."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray
from pyproj import Geod

from georoute.kernels.geodesic import geodesic_pairs, parametric_points
from georoute.measure import (
    geodesic_m,
    geodesic_matrix_m,
    great_circle_m,
    great_circle_matrix_m,
)

GEOD = Geod(ellps="WGS84")
GEOD_SOURCE = "pyproj.Geod.inv (PROJ; Karney, Journal of Geodesy 87 (2013) 43-55)"
PAIRS = 25_000

Pairs = tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]


def starts(kind: str, rng: np.random.Generator) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    lat = np.degrees(np.arcsin(rng.uniform(-1, 1, PAIRS)))
    lon = rng.uniform(-180, 180, PAIRS)
    if kind == "polar":
        lat = rng.choice([-90, 90], PAIRS) * (
            1 - rng.choice([0, 1], PAIRS) * 10 ** rng.uniform(-9, -1, PAIRS)
        )
    elif kind == "equatorial":
        lat = rng.uniform(-1, 1, PAIRS) * rng.choice([0, 1e-6, 1], PAIRS)
    elif kind == "across 180":
        lon = rng.choice([-180, 180], PAIRS) * (1 - 10 ** rng.uniform(-9, -2, PAIRS))
    return lat, lon


def seeded_pairs(kind: str, seed: int) -> Pairs:
    """Return pairs 1 m to 1000 km apart, the lengths spread evenly over the powers of ten."""
    rng = np.random.default_rng(seed)
    lat, lon = starts(kind, rng)
    length = 10 ** rng.uniform(0, 6, PAIRS)
    azimuth = rng.choice([0.0, 90.0, 180.0, 270.0, -1.0], PAIRS)
    azimuth = np.where(azimuth < 0, rng.uniform(0, 360, PAIRS), azimuth)
    lon2, lat2, _ = GEOD.fwd(lon, lat, azimuth, length)
    return lat, lon, np.asarray(lat2), np.asarray(lon2)


@pytest.mark.source(GEOD_SOURCE)
@pytest.mark.parametrize("kind", ["anywhere", "polar", "equatorial", "across 180"])
def test_a_hundred_thousand_pairs_without_fallback(kind: str) -> None:
    lat1, lon1, lat2, lon2 = seeded_pairs(kind, 20_240_601)
    expected = np.asarray(GEOD.inv(lon1, lat1, lon2, lat2)[2])
    assert expected.min() < 1.1
    assert expected.max() > 990_000
    got = geodesic_pairs(parametric_points(lat1, lon1), parametric_points(lat2, lon2))
    error = np.abs(got - expected)
    assert np.all(error <= np.maximum(1e-3, 2e-6 * expected))
    assert np.all(error <= 1e-7 + 5e-9 * expected)


@pytest.mark.source(GEOD_SOURCE)
def test_any_pair_on_earth() -> None:
    rng = np.random.default_rng(7)
    lat1, lat2 = np.degrees(np.arcsin(rng.uniform(-1, 1, (2, PAIRS))))
    lon1, lon2 = rng.uniform(-180, 180, (2, PAIRS))
    lat2[:500] = -lat1[:500] + rng.normal(0, 0.1, 500)
    lon2[:500] = lon1[:500] + 180 + rng.normal(0, 0.1, 500)
    expected = np.asarray(GEOD.inv(lon1, lat1, lon2, lat2)[2])
    error = np.abs(geodesic_m(lat1, lon1, lat2, lon2) - expected)
    assert np.all(error <= 1e-6 + 5e-9 * expected)


@pytest.mark.source(GEOD_SOURCE)
@pytest.mark.parametrize("spread_deg", [0.01, 3.0, 89.0])
def test_a_matrix_is_right_near_and_far(spread_deg: float) -> None:
    rng = np.random.default_rng(11)
    lat = np.clip(rng.uniform(-spread_deg, spread_deg, 60), -90, 90)
    lon = 180 + 2 * rng.uniform(-spread_deg, spread_deg, 60)
    expected = np.array(
        [
            GEOD.inv(np.full(60, x), np.full(60, y), lon, lat)[2]
            for x, y in zip(lon, lat, strict=True)
        ]
    )
    got = geodesic_matrix_m(lat, lon)
    assert np.all(np.abs(got - expected) <= 1e-6 + 5e-9 * expected)
    np.testing.assert_array_equal(got, got.T)
    assert np.all(got.diagonal() == 0)


@pytest.mark.source("sklearn.metrics.pairwise.haversine_distances x 6,371,008.7714 m")
def test_great_circles_agree_with_another_haversine() -> None:
    metrics = pytest.importorskip("sklearn.metrics.pairwise")
    rng = np.random.default_rng(5)
    lat = rng.uniform(-90, 90, 200)
    lon = rng.uniform(-180, 180, 200)
    lat[0], lat[1] = 90, -90
    expected = 6_371_008.7714 * metrics.haversine_distances(np.radians(np.column_stack([lat, lon])))
    got = great_circle_matrix_m(lat, lon)
    np.testing.assert_allclose(got, expected, rtol=1e-9, atol=1e-6)
    np.testing.assert_array_equal(got, got.T)


@pytest.mark.source("pyproj.Geod on the sphere of radius 6,371,008.7714 m")
def test_great_circles_agree_near_the_antipode_too() -> None:
    sphere = Geod(a=6_371_008.7714, b=6_371_008.7714)
    rng = np.random.default_rng(6)
    lat1, lon1 = rng.uniform(-89, 89, 2000), rng.uniform(-180, 180, 2000)
    off = 10 ** rng.uniform(-6, 1, 2000)
    lat2, lon2 = np.clip(-lat1 + off, -90, 90), lon1 + 180 - off
    expected = np.asarray(sphere.inv(lon1, lat1, lon2, lat2)[2])
    np.testing.assert_allclose(great_circle_m(lat1, lon1, lat2, lon2), expected, rtol=0, atol=1e-6)


@pytest.mark.source(
    "from memory: quarter of a WGS 84 meridian 10,001,965.729 m; of the equator a pi / 2"
)
def test_a_quarter_of_the_meridian() -> None:
    assert geodesic_m(0.0, 0.0, 90.0, 0.0) == pytest.approx(10_001_965.7293, abs=1e-3)
    assert geodesic_m(0.0, 0.0, 0.0, 90.0) == pytest.approx(np.pi / 2 * 6_378_137.0, abs=1e-6)
