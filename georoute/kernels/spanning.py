"""Lower bounds on the travel of any set of tours."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.arrays import UNREACHABLE, Travel, leg_ms

__all__ = ["half_legs_ms", "spanning_tree_ms"]


@kernel
def _either_way(travel: Travel, i: Int, j: Int) -> Int:
    return min(leg_ms(travel, i, j), leg_ms(travel, j, i))


@kernel
def spanning_tree_ms(travel: Travel, places: NDArray[np.int64], bases: NDArray[np.int64]) -> Int:
    """Return the weight of a least spanning tree over ``places`` and the joined ``bases``.

    An edge costs the cheaper of its two directions. Places that no edge reaches are left out.
    Prim's algorithm on the whole table.
    """
    n = places.shape[0]
    gap = np.full(n, UNREACHABLE, np.int64)
    for k in range(n):
        for b in bases:
            gap[k] = min(gap[k], _either_way(travel, places[k], b))
    total = np.int64(0)
    inside = np.zeros(n, np.bool_)
    for _ in range(n):
        pick = -1
        for k in range(n):
            if not inside[k] and (pick < 0 or gap[k] < gap[pick]):
                pick = k
        if gap[pick] >= UNREACHABLE:
            break
        inside[pick] = True
        total += gap[pick]
        for k in range(n):
            if not inside[k]:
                gap[k] = min(gap[k], _either_way(travel, places[pick], places[k]))
    return total


@kernel
def half_legs_ms(travel: Travel, places: NDArray[np.int64], bases: NDArray[np.int64]) -> Int:
    """Return half the sum of the shortest leg into and the shortest leg out of each place.

    From and to the other ``places`` and the ``bases``; legs that do not exist count nothing.
    """
    n = places.shape[0]
    twice = np.int64(0)
    for k in range(n):
        into: Int = np.int64(UNREACHABLE)
        out: Int = np.int64(UNREACHABLE)
        for b in bases:
            into = min(into, leg_ms(travel, b, places[k]))
            out = min(out, leg_ms(travel, places[k], b))
        for i in range(n):
            if i != k:
                into = min(into, leg_ms(travel, places[i], places[k]))
                out = min(out, leg_ms(travel, places[k], places[i]))
        if into < UNREACHABLE:
            twice += into
        if out < UNREACHABLE:
            twice += out
    return twice // 2
