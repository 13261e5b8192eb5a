"""What the plane refuses, and what it warns of."""

from __future__ import annotations

import pickle

import numpy as np
import pytest

from georoute.domain.findings import Severity
from georoute.errors import InputError
from georoute.projection import local_plane


@pytest.mark.parametrize(
    ("lon", "lat"),
    [([], []), ([np.nan], [1.0]), ([1.0], [np.inf]), ([1.0], [91.0])],
    ids=["empty", "nan", "inf", "beyond the pole"],
)
def test_no_plane_without_places_on_earth(lon: list[float], lat: list[float]) -> None:
    with pytest.raises(InputError, match="Check the coordinates"):
        local_plane(lon, lat)


@pytest.mark.parametrize(
    ("lon", "lat"),
    [([0, 180], [0, 0]), ([0, 120, -120], [0, 0, 0]), ([0, 0, 170], [80, -80, 0])],
)
def test_no_plane_for_places_all_round(lon: list[float], lat: list[float]) -> None:
    with pytest.raises(InputError, match="all round"):
        local_plane(lon, lat)


def test_a_wide_span_is_a_warning_with_its_size() -> None:
    plane = local_plane([-70, -70], [-55, -17])
    (warning,) = plane.findings()
    assert warning.severity is Severity.WARNING
    assert warning.code == "span_too_wide_for_plane"
    assert "2,1" in warning.message
    assert warning.remedy


def test_a_region_is_no_warning() -> None:
    assert local_plane([-72, -70], [-31, -29]).findings() == ()


def test_a_crowd_on_one_side_does_not_widen_the_plane() -> None:
    lat = np.r_[np.full(999, -30.0), -34.0]
    plane = local_plane(np.full(1000, -71.0), lat)
    assert plane.lat0_deg == pytest.approx(-32.0, abs=0.01)
    assert plane.radius_m == pytest.approx(222_000, rel=0.01)


def test_north_is_up_and_east_is_right_in_any_shape() -> None:
    plane = local_plane([10.0, 11.0], [50.0, 51.0])
    x, y = plane.forward(np.array([[10.0, 11.0]]), np.array([[50.0, 51.0]]))
    assert x.shape == y.shape == (1, 2)
    assert x[0, 0] < 0 < x[0, 1]
    assert y[0, 0] < 0 < y[0, 1]
    lon, _ = plane.inverse(x[0, 1], y[0, 1])
    assert float(lon) == pytest.approx(11.0)


def test_a_plane_can_be_sent_to_another_process() -> None:
    plane = local_plane([10.0, 11.0], [50.0, 51.0])
    copy = pickle.loads(pickle.dumps(plane))  # noqa: S301 - our own bytes
    assert copy.forward(10.0, 50.0) == plane.forward(10.0, 50.0)
