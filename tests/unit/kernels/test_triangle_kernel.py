"""The triangle check against plain loops."""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.typing import NDArray

from georoute.kernels.table_checks import triangle_breaks


def by_loops(cost: NDArray[np.float64], tolerance: float) -> tuple[int, int, float]:
    """Return breaks, gaps and the worst excess, each way over a third place tried."""
    n = cost.shape[0]
    breaks, gaps, worst = 0, 0, 0.0
    for i in range(n):
        for k in range(n):
            ways = [cost[i, j] + cost[j, k] for j in range(n) if j not in {i, k}]
            ways = [way for way in ways if math.isfinite(way)]
            if i == k or not ways or math.isnan(cost[i, k]):
                continue
            if math.isinf(cost[i, k]):
                gaps += 1
            elif cost[i, k] - min(ways) > tolerance:
                breaks += 1
                worst = max(worst, cost[i, k] - min(ways))
    return breaks, gaps, worst


def random_costs(n: int, seed: int) -> NDArray[np.float64]:
    rng = np.random.default_rng(seed)
    cost = rng.uniform(1, 100, (n, n))
    cost[rng.random((n, n)) < 0.15] = np.inf
    cost[rng.random((n, n)) < 0.05] = np.nan
    np.fill_diagonal(cost, 0.0)
    return cost


@pytest.mark.parametrize("seed", range(20))
def test_the_kernel_agrees_with_loops(seed: int) -> None:
    cost = random_costs(2 + seed % 9, seed)
    found = triangle_breaks(cost, np.arange(cost.shape[0]), 1.5)
    breaks, gaps, worst = by_loops(cost, 1.5)
    assert (found.breaks, found.gaps, found.worst_excess) == (breaks, gaps, worst)
    if breaks:
        i, j, k = int(found.worst_from), int(found.worst_over), int(found.worst_to)
        assert len({i, j, k}) == 3
        assert cost[i, k] - (cost[i, j] + cost[j, k]) == worst
    if gaps:
        assert np.isinf(cost[int(found.gap_from), int(found.gap_to)])


def test_rounding_is_no_break() -> None:
    cost = np.array([[0.0, 5.0, 11.5], [5.0, 0.0, 5.0], [11.5, 5.0, 0.0]])
    assert triangle_breaks(cost, np.arange(3), 1.5).breaks == 0
    assert triangle_breaks(cost, np.arange(3), 1.4).breaks == 2
    assert triangle_breaks(cost, np.array([0, 2]), 1.4).breaks == 0
