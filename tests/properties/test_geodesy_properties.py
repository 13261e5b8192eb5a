"""Properties of straight lines, for any points on Earth."""

from __future__ import annotations

import numpy as np
from hypothesis import assume, given
from hypothesis import strategies as st

from georoute.measure import geodesic_m, great_circle_m
from georoute.projection import local_plane

LAT = st.floats(-90, 90)
LON = st.floats(-180, 180)


@given(LAT, LON, LAT, LON)
def test_lengths_are_symmetric_and_never_negative(
    lat1: float, lon1: float, lat2: float, lon2: float
) -> None:
    for line in (geodesic_m, great_circle_m):
        there = float(line(lat1, lon1, lat2, lon2))
        back = float(line(lat2, lon2, lat1, lon1))
        assert there >= 0
        assert abs(there - back) <= 1e-7


@given(LAT, LON, LAT, LON)
def test_a_great_circle_is_close_to_the_geodesic(
    lat1: float, lon1: float, lat2: float, lon2: float
) -> None:
    geodesic = float(geodesic_m(lat1, lon1, lat2, lon2))
    assume(geodesic > 1)
    assert -0.0045 <= float(great_circle_m(lat1, lon1, lat2, lon2)) / geodesic - 1 <= 0.0057


@given(st.integers(0, 2**32), st.floats(0, 7))
def test_many_great_circles_are_close_to_the_geodesic(seed: int, digits: float) -> None:
    rng = np.random.default_rng(seed)
    lat1 = np.degrees(np.arcsin(rng.uniform(-1, 1, 500)))
    lon1 = rng.uniform(-180, 180, 500)
    step = np.degrees(10**digits / 6_371_000)
    lat2 = np.clip(lat1 + rng.uniform(-step, step, 500), -90, 90)
    lon2 = lon1 + rng.uniform(-step, step, 500)
    geodesic = geodesic_m(lat1, lon1, lat2, lon2)
    ratio = great_circle_m(lat1, lon1, lat2, lon2)[geodesic > 0.1] / geodesic[geodesic > 0.1]
    assert np.all((ratio >= 1 - 0.0045) & (ratio <= 1 + 0.0057))


@given(LAT, LON, LAT, LON, LAT, LON)
def test_the_direct_way_is_the_shortest(
    lat1: float, lon1: float, lat2: float, lon2: float, lat3: float, lon3: float
) -> None:
    direct = geodesic_m(lat1, lon1, lat3, lon3)
    over = geodesic_m(lat1, lon1, lat2, lon2) + geodesic_m(lat2, lon2, lat3, lon3)
    # The kernel is good to 3e-9 of a length of at most 1000 km.
    assert direct <= over + 0.01


@given(
    LAT,
    LON,
    st.lists(st.tuples(st.floats(-5, 5), st.floats(-5, 5)), min_size=1, max_size=8),
)
def test_a_plane_gives_back_what_it_was_given(
    lat: float, lon: float, steps: list[tuple[float, float]]
) -> None:
    lats = np.clip([lat + a for a, _ in steps], -90, 90)
    lons = np.array([lon + b for _, b in steps])
    plane = local_plane(lons, lats)
    lon_back, lat_back = plane.inverse(*plane.forward(lons, lats))
    assert np.max(geodesic_m(lats, lons, lat_back, lon_back)) <= 1e-3
