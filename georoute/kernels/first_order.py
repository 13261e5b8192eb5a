"""A first order of stops: from the start always to the nearest one left."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.arrays import UNREACHABLE, Travel, leg_ms

__all__ = ["nearest_first", "shortest_legs"]


@kernel
def nearest_first(
    travel: Travel, place: NDArray[np.int64], start: Int, members: NDArray[np.int64]
) -> NDArray[np.int64]:
    """Return the visits ``members`` as the nearest neighbour rule orders them from ``start``.

    By travel time; ties go to the visit that comes first in ``members``.
    """
    left = members.copy()
    n = left.shape[0]
    here: Int = start
    for k in range(n):
        pick = k
        gap = leg_ms(travel, here, place[left[k]])
        for i in range(k + 1, n):
            way = leg_ms(travel, here, place[left[i]])
            if way < gap:
                gap = way
                pick = i
        v = left[pick]
        for i in range(pick, k, -1):
            left[i] = left[i - 1]
        left[k] = v
        here = place[v]
    return left


@kernel
def shortest_legs(
    travel: Travel, place: NDArray[np.int64], near: NDArray[np.int64], legs: NDArray[np.int64]
) -> None:
    """Fill ``legs`` with the shortest travel time from each visit to one of ``near``, in ms.

    ``near`` (int64, (V, K)): visits to look at; a leg counts as the mean of both directions.
    """
    for v in range(near.shape[0]):
        best: Int = np.int64(UNREACHABLE)
        for k in range(near.shape[1]):
            if near[v, k] == v:
                continue
            i = place[v]
            j = place[near[v, k]]
            both = (leg_ms(travel, i, j) + leg_ms(travel, j, i)) // 2
            best = min(best, both)
        legs[v] = best if best < UNREACHABLE else 0
