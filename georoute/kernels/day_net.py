"""What it costs to go from one node of a day to another.

The nodes of a day are its visits and its base. A day that starts and ends at different places
has two base nodes, joined by a link no search can gain by breaking: the best closed tour
through the link is the best open tour.

Kernels take the arrays of a net one by one, ``table, points, price``: a tuple of arrays costs
reference counting at every call, more than the look-up itself.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel

__all__ = ["BLOCKED", "LINK", "Net", "leg_money", "money_of_pairs", "tour_money"]

BLOCKED = 1 << 50
"""Money of a leg that does not exist; sums of thousands of them fit an int64."""

LINK = -(1 << 54)
"""Money of the link between end and start: below anything a few blocked legs can offset."""


class Net(NamedTuple):
    """Money between the n nodes of a day, int64 micro-units.

    ``table``: int64 (n, n), or (0, 0): then a leg is priced by the distance of ``points``
    (float64, (n, 2)) as in ``Travel``. ``price`` (float64, (7,)): time_scale, length_scale,
    step of ``Travel``, micro-units per ms and per mm, and the two base nodes joined by the
    link, or -1.
    """

    table: NDArray[np.int64]
    points: NDArray[np.float64]
    price: NDArray[np.float64]


@kernel
def leg_money(
    table: NDArray[np.int64],
    points: NDArray[np.float64],
    price: NDArray[np.float64],
    i: Int,
    j: Int,
) -> Int:
    """Return the money of going from node ``i`` to node ``j``."""
    if table.shape[0] > 0:
        return table[i, j]
    if (i == price[5] and j == price[6]) or (i == price[6] and j == price[5]):
        return np.int64(LINK)
    dx = points[i, 0] - points[j, 0]
    dy = points[i, 1] - points[j, 1]
    distance = np.sqrt(dx * dx + dy * dy)
    step = price[2]
    money = price[3] * (np.floor(distance * price[0] / step + 0.5) * step)
    if price[4] != 0.0:
        money += price[4] * (np.floor(distance * price[1] / step + 0.5) * step)
    return np.int64(np.floor(money + 0.5))


@kernel
def money_of_pairs(
    table: NDArray[np.int64],
    points: NDArray[np.float64],
    price: NDArray[np.float64],
    near: NDArray[np.int64],
) -> NDArray[np.int64]:
    """Return the money of going from each node to each of its ``near`` (int64, (n, K))."""
    money = np.empty_like(near)
    for i in range(near.shape[0]):
        for k in range(near.shape[1]):
            money[i, k] = leg_money(table, points, price, i, near[i, k])
    return money


@kernel
def tour_money(
    table: NDArray[np.int64],
    points: NDArray[np.float64],
    price: NDArray[np.float64],
    order: NDArray[np.int64],
) -> Int:
    """Return the money of the closed tour through ``order`` (node numbers, each once)."""
    total = np.int64(0)
    for k in range(order.shape[0] - 1):
        total += leg_money(table, points, price, order[k], order[k + 1])
    return total + leg_money(table, points, price, order[-1], order[0])
