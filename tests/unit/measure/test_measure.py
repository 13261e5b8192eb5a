"""The methods of measure: formulas recomputed in plain Python, and what they say of themselves."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from georoute.domain.costs import Places
from georoute.domain.programme import TravelMethod
from georoute.errors import InputError, TableError
from georoute.measure import geodesic_matrix_m, great_circle_matrix_m, measure
from tests.measure_helpers import (
    detour_model,
    long_rows,
    random_places,
    road_like,
    settings,
    write_rows,
)


@pytest.mark.parametrize(
    ("method", "word"),
    [(TravelMethod.GEODESIC, "geodesic"), (TravelMethod.GREAT_CIRCLE, "great circle")],
)
def test_straight_lines_take_circuity_and_speed(method: TravelMethod, word: str) -> None:
    places = random_places(12, 2)
    costs, findings = measure(places, settings(method))
    line = great_circle_matrix_m if method is TravelMethod.GREAT_CIRCLE else geodesic_matrix_m
    straight = line(places.lat_deg, places.lon_deg)
    np.testing.assert_allclose(costs.length_m, 1.4 * straight, rtol=1e-15)
    np.testing.assert_allclose(costs.travel_s, 1.4 * straight / 10.0, rtol=1e-15)
    assert costs.place_ids == places.ids
    assert costs.estimated
    assert (costs.low_factor, costs.high_factor) == (1.0, 1.0)
    assert costs.source.startswith(word)
    assert "36 km/h" in costs.source
    assert findings == ()


def test_the_detour_model_is_the_formula_of_its_docstring() -> None:
    places = random_places(9, 3)
    costs, _ = measure(places, settings(TravelMethod.DETOUR))
    straight = geodesic_matrix_m(places.lat_deg, places.lon_deg)
    for i in range(9):
        for j in range(9):
            km = straight[i, j] / 1000
            length = 1000 * max(km, 1.8 * km**0.93)
            minutes = 2.4 * km**0.74
            assert costs.length_m[i, j] == pytest.approx(length, rel=1e-12)
            assert costs.travel_s[i, j] == pytest.approx(60 * minutes, rel=1e-12)
    assert (costs.low_factor, costs.high_factor) == (0.73, 1.37)
    assert costs.estimated
    assert "-27 % to +37 %" in costs.source


def test_a_detour_is_never_shorter_than_its_straight_line() -> None:
    places = random_places(9, 3, spread_deg=3)
    low = replace(detour_model(), length_at_1km=0.5)
    costs, _ = measure(places, replace(settings(TravelMethod.DETOUR), detour=low))
    straight = geodesic_matrix_m(places.lat_deg, places.lon_deg)
    np.testing.assert_allclose(costs.length_m, straight, rtol=1e-12)


def test_two_places_at_one_point_are_no_travel_apart() -> None:
    places = Places(ids=("a", "b"), lat_deg=np.full(2, 48.1), lon_deg=np.full(2, 11.5))
    for method in (TravelMethod.GEODESIC, TravelMethod.GREAT_CIRCLE, TravelMethod.DETOUR):
        costs, _ = measure(places, settings(method))
        assert not costs.travel_s.any()
        assert not costs.length_m.any()


def test_relabelling_places_relabels_the_matrix() -> None:
    places = random_places(10, 5)
    order = np.random.default_rng(1).permutation(10)
    shuffled = Places(
        ids=tuple(places.ids[k] for k in order),
        lat_deg=places.lat_deg[order],
        lon_deg=places.lon_deg[order],
    )
    for method in (TravelMethod.GEODESIC, TravelMethod.GREAT_CIRCLE, TravelMethod.DETOUR):
        one, _ = measure(places, settings(method))
        other, _ = measure(shuffled, settings(method))
        np.testing.assert_array_equal(one.travel_s[np.ix_(order, order)], other.travel_s)


@pytest.mark.parametrize(
    ("change", "word"),
    [
        ({"speed_kmh": 0.0}, "speed_kmh"),
        ({"speed_kmh": float("nan")}, "speed_kmh"),
        ({"circuity": 0.9}, "circuity"),
        ({"circuity": float("inf")}, "circuity"),
    ],
)
def test_unusable_settings_are_refused(change: dict[str, Any], word: str) -> None:
    with pytest.raises(InputError, match=word):
        measure(random_places(3, 1), replace(settings(TravelMethod.GEODESIC), **change))


@pytest.mark.parametrize(
    ("change", "word"),
    [
        ({"length_at_1km": 0.0}, "length_at_1km"),
        ({"time_exponent": float("nan")}, "time_exponent"),
        ({"low_factor": 1.1}, "low_factor"),
        ({"high_factor": 0.9}, "high_factor"),
    ],
)
def test_unusable_detour_models_are_refused(change: dict[str, float], word: str) -> None:
    model = replace(detour_model(), **change)
    with pytest.raises(InputError, match=word):
        measure(random_places(3, 1), replace(settings(TravelMethod.DETOUR), detour=model))


def test_the_table_is_used_as_given(tmp_path: Path) -> None:
    places = random_places(8, 6)
    drive, dist = road_like(places, 6)
    path = write_rows(tmp_path / "own.csv", long_rows(places, drive, dist, 6))
    costs, findings = measure(places, settings(TravelMethod.TABLE, table_path=str(path)))
    np.testing.assert_array_equal(costs.travel_s, drive)
    assert not costs.estimated
    assert costs.source == "own table own.csv"
    assert {f.code for f in findings} == {"asymmetry"}


def test_the_table_must_be_named() -> None:
    with pytest.raises(TableError, match="table_path"):
        measure(random_places(3, 1), settings(TravelMethod.TABLE))


def test_places_too_far_apart_for_a_plane_are_told_once_measured() -> None:
    far = Places(ids=("a", "b"), lat_deg=np.array([-55.0, 10.0]), lon_deg=np.array([-70.0, -70.0]))
    _, findings = measure(far, settings(TravelMethod.GEODESIC))
    assert [f.code for f in findings] == ["span_too_wide_for_plane"]


def test_places_all_round_the_earth_can_still_be_measured() -> None:
    far = Places(ids=("a", "b"), lat_deg=np.zeros(2), lon_deg=np.array([0.0, 180.0]))
    costs, _ = measure(far, replace(settings(TravelMethod.GEODESIC), circuity=1.0))
    # Half an ellipse over the pole is shorter than half the equator.
    assert costs.length_m[0, 1] == pytest.approx(2 * 10_001_965.729, abs=0.01)
