"""Lower bounds on the travel of any set of tours."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.arrays import UNREACHABLE, Travel
from georoute.kernels.board import leg

__all__ = ["half_legs_ms", "spanning_tree_ms"]


@kernel
def _plane_of(travel: Travel) -> NDArray[np.float64]:
    return np.array([travel.time_scale, travel.length_scale, float(travel.step)])


@kernel
def spanning_tree_ms(travel: Travel, places: NDArray[np.int64], bases: NDArray[np.int64]) -> Int:
    """Return the weight of a least spanning tree over ``places`` and the joined ``bases``.

    An edge costs the cheaper of its two directions. Places that no edge reaches are left out.
    Prim's algorithm on the whole table.
    """
    time, x, y, plane = travel.time_ms, travel.x, travel.y, _plane_of(travel)
    n = places.shape[0]
    gap = np.full(n, UNREACHABLE, np.int64)
    inside = np.zeros(n, np.bool_)
    for b in bases:
        for k in range(n):
            p = places[k]
            gap[k] = min(gap[k], leg(time, x, y, plane, 0, p, b), leg(time, x, y, plane, 0, b, p))
    total = np.int64(0)
    for _ in range(n):
        pick = -1
        for k in range(n):
            if not inside[k] and (pick < 0 or gap[k] < gap[pick]):
                pick = k
        if gap[pick] >= UNREACHABLE:
            break
        inside[pick] = True
        total += gap[pick]
        p = places[pick]
        for k in range(n):
            if not inside[k]:
                q = places[k]
                way = leg(time, x, y, plane, 0, p, q)
                if time.shape[0] > 0:
                    way = min(way, time[q, p])
                gap[k] = min(gap[k], way)
    return total


@kernel
def half_legs_ms(travel: Travel, places: NDArray[np.int64], bases: NDArray[np.int64]) -> Int:
    """Return half the sum of the shortest leg into and the shortest leg out of each place.

    From and to the other ``places`` and the ``bases``; legs that do not exist count nothing.
    """
    time, x, y, plane = travel.time_ms, travel.x, travel.y, _plane_of(travel)
    n = places.shape[0]
    into = np.full(n, UNREACHABLE, np.int64)
    out = np.full(n, UNREACHABLE, np.int64)
    for i in range(n):
        p = places[i]
        for b in bases:
            into[i] = min(into[i], leg(time, x, y, plane, 0, b, p))
            out[i] = min(out[i], leg(time, x, y, plane, 0, p, b))
        for k in range(n):
            if k != i:
                way = leg(time, x, y, plane, 0, p, places[k])
                out[i] = min(out[i], way)
                into[k] = min(into[k], way)
    twice = np.int64(0)
    for i in range(n):
        if into[i] < UNREACHABLE:
            twice += into[i]
        if out[i] < UNREACHABLE:
            twice += out[i]
    return twice // 2
