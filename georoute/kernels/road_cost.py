"""Time and length of a path in one number, so that the faster, then the shorter one is less.

``cost = ms << MM_BITS | mm``. Sums of costs are sums of both. Two costs below ``FAR`` add up
without overflow; a path of ``FAR`` or more, three days of driving without a rest, counts as none.
Lengths would spill into times beyond 17,000 km, which in three days takes 230 km/h.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import kernel
from georoute.kernels.arrays import UNREACHABLE

__all__ = ["FAR", "MM_BITS", "MOST_MM", "MOST_MS", "split_costs"]

FAR = 1 << 62
"""A cost that no path has."""

MM_BITS = 34
MOST_MM = (1 << MM_BITS) - 1
MOST_MS = (1 << (62 - MM_BITS)) - 1
"""The longest length and time that one cost holds."""


@kernel
def split_costs(cost: NDArray[np.int64], mm: NDArray[np.int64]) -> None:
    """Turn costs of a table into times in place, and put the lengths into ``mm``."""
    for i in range(cost.shape[0]):
        for j in range(cost.shape[1]):
            value = cost[i, j]
            if value >= FAR:
                cost[i, j] = UNREACHABLE
                mm[i, j] = UNREACHABLE
            else:
                cost[i, j] = value >> MM_BITS
                mm[i, j] = value & MOST_MM
