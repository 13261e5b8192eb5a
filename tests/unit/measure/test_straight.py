"""Straight lines: shapes, edges of the kernel, refusals."""

from __future__ import annotations

import numpy as np
import pytest

from georoute.errors import InputError
from georoute.kernels.geodesic import geodesic_pairs, parametric_points
from georoute.measure import (
    geodesic_m,
    geodesic_matrix_m,
    great_circle_m,
    great_circle_matrix_m,
)
from georoute.measure.straight import KERNEL_LIMIT_M


def test_operands_broadcast_to_one_shape() -> None:
    lat = np.linspace(-60, 60, 6).reshape(2, 3)
    assert geodesic_m(0.0, 0.0, lat, 5.0).shape == (2, 3)
    assert great_circle_m(lat, 0.0, lat[:, :1], np.zeros(3)).shape == (2, 3)
    assert geodesic_m(1, 2, 3, 4).shape == ()
    assert geodesic_m([], [], [], []).shape == (0,)


@pytest.mark.parametrize("function", [geodesic_m, great_circle_m])
@pytest.mark.parametrize(
    "point", [(91.0, 0.0), (np.nan, 0.0), (0.0, np.nan), (0.0, np.inf), (-90.1, 5.0)]
)
def test_what_is_no_place_is_refused(function: object, point: tuple[float, float]) -> None:
    assert callable(function)
    for operands in ((*point, 0.0, 0.0), (0.0, 0.0, *point)):
        with pytest.raises(InputError, match="swapped"):
            function(*operands)


@pytest.mark.parametrize("function", [geodesic_matrix_m, great_circle_matrix_m])
def test_a_matrix_refuses_it_too(function: object) -> None:
    assert callable(function)
    with pytest.raises(InputError, match=r"point 1 of 2"):
        function([0.0, 95.0], [0.0, 0.0])


def test_the_kernel_says_inf_where_it_does_not_know() -> None:
    start = parametric_points(np.zeros(3), np.zeros(3))
    end = parametric_points(np.array([0.0, 0.0, 89.0]), np.array([89.0, 91.0, 180.0]))
    length = geodesic_pairs(start, end)
    assert np.isfinite(length[0])
    assert np.isinf(length[1:]).all()


def test_one_point_is_no_way_apart_even_on_a_pole() -> None:
    assert geodesic_m(90.0, 10.0, 90.0, -120.0) == pytest.approx(0.0, abs=1e-8)
    assert geodesic_m(5.0, 180.0, 5.0, -180.0) == pytest.approx(0.0, abs=1e-8)
    assert great_circle_m(5.0, 180.0, 5.0, -180.0) == pytest.approx(0.0, abs=1e-8)
    assert geodesic_m(-30.1, -71.2, -30.1, -71.2) == 0.0
    assert geodesic_m(1e-200, 0.0, 0.0, 1e-180) == 0.0


def test_there_is_no_step_where_the_exact_method_takes_over() -> None:
    along_equator = np.linspace(KERNEL_LIMIT_M - 2, KERNEL_LIMIT_M + 2, 401)
    length = geodesic_m(0.0, 0.0, 0.0, np.degrees(along_equator / 6_378_137.0))
    np.testing.assert_allclose(length, along_equator, rtol=0, atol=5e-3)
    assert np.all(np.diff(length) > 0)


def test_progress_runs_up_to_one() -> None:
    seen: list[float] = []

    def watch(
        stage: str, *, fraction: float, cost: float | None = None, best_cost: float | None = None
    ) -> None:
        assert (stage, cost, best_cost) == ("measure", None, None)
        seen.append(fraction)

    geodesic_matrix_m(np.zeros(300), np.linspace(0, 1, 300), progress=watch)
    great_circle_matrix_m(np.zeros(3), np.linspace(0, 1, 3), progress=watch)
    assert seen == [*sorted(seen[:-1]), 1.0]
    assert len(seen) == 3
