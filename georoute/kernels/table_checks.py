"""Triangle check of a travel table: which ways are shorter over a third place than directly."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Float, Int, kernel

__all__ = ["TriangleBreaks", "triangle_breaks"]


class TriangleBreaks(NamedTuple):
    """What the triangle check found.

    ``breaks``: ordered pairs with a quicker way over a third place. ``worst_from``,
    ``worst_over``, ``worst_to``: the pair with the largest excess, -1 where there is none, and
    ``worst_excess`` that excess. ``gaps``: pairs without a direct way that have one over a
    third place; ``gap_from`` and ``gap_to`` name the first of them, -1 where there is none.
    """

    breaks: Int
    worst_from: Int
    worst_over: Int
    worst_to: Int
    worst_excess: Float
    gaps: Int
    gap_from: Int
    gap_to: Int


@kernel
def triangle_breaks(
    cost: NDArray[np.float64], over: NDArray[np.int64], tolerance: float
) -> TriangleBreaks:
    """Compare each direct way of ``cost`` (n, n) with the ways over the places ``over``.

    An excess up to ``tolerance`` is taken for rounding. ``inf`` is no way, NaN is unknown; the
    diagonal must be zero.
    """
    n = cost.shape[0]
    best = np.empty(n, np.float64)
    count = gaps = 0
    worst_from = worst_over = worst_to = gap_from = gap_to = -1
    worst = worst_way = 0.0
    for i in range(n):
        best[:] = np.inf
        for j in over:
            first = cost[i, j]
            if j == i or not np.isfinite(first):
                continue
            # k = j adds the zero of the diagonal: the direct way itself, never a break.
            for k in range(n):
                way = first + cost[j, k]
                best[k] = min(best[k], way)
        for k in range(n):
            if k == i or np.isnan(cost[i, k]) or best[k] == np.inf:
                continue
            if cost[i, k] == np.inf:
                gaps += 1
                if gap_from < 0:
                    gap_from, gap_to = i, k
            elif cost[i, k] - best[k] > tolerance:
                count += 1
                if cost[i, k] - best[k] > worst:
                    worst_way = best[k]
                    worst = cost[i, k] - worst_way
                    worst_from, worst_to = i, k
    if worst_from >= 0:
        for j in over:
            if cost[worst_from, j] + cost[j, worst_to] == worst_way:
                worst_over = j
                break
    return TriangleBreaks(count, worst_from, worst_over, worst_to, worst, gaps, gap_from, gap_to)
