"""Where opening windows matter, the tour clock judges the rows of a slack-induction search."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.arrays import Shifts, Travel, Visits
from georoute.kernels.clock import time_tour, tour_cost
from georoute.kernels.slack_state import COUNT, MONEY, STOP, WINDOWED, Rows

__all__ = ["INFEASIBLE", "Clockwork", "best_column", "breaks_a_limit", "price_by_clock"]

INFEASIBLE = 1 << 60
"""Money of what breaks a limit."""


class Clockwork(NamedTuple):
    """The arrays the tour clock needs."""

    travel: Travel
    visits: Visits
    shifts: Shifts


@kernel
def _price(clockwork: Clockwork, s: Int, order: NDArray[np.int64]) -> Int:
    """Return the money of an order, or ``INFEASIBLE``."""
    times = time_tour(clockwork.travel, clockwork.visits, clockwork.shifts, s, order)
    if times.late_ms > 0 or times.excess_ms > 0 or times.over_load > 0:
        return np.int64(INFEASIBLE)
    return tour_cost(clockwork.shifts, s, times)


@kernel
def price_by_clock(clockwork: Clockwork, rows: Rows, s: Int) -> None:
    """Set the money of row ``s`` by the clock where a stop has windows."""
    n = rows.sum[s, COUNT]
    if n > 0 and rows.sum[s, WINDOWED] > 0:
        order = rows.cell[STOP, s, 1 : n + 1].copy()
        times = time_tour(clockwork.travel, clockwork.visits, clockwork.shifts, s, order)
        rows.sum[s, MONEY] = tour_cost(clockwork.shifts, s, times)


@kernel
def breaks_a_limit(clockwork: Clockwork, rows: Rows, s: Int) -> bool:
    """Tell whether row ``s`` is late, too long or too heavy."""
    order = rows.cell[STOP, s, 1 : rows.sum[s, COUNT] + 1].copy()
    return _price(clockwork, s, order) == INFEASIBLE


@kernel
def best_column(clockwork: Clockwork, rows: Rows, s: Int, v: Int, best: Int) -> tuple[Int, Int]:
    """Return (rise, column) of the cheapest place for visit ``v`` in row ``s``.

    Column -1 where nothing is below ``best``.
    """
    n = rows.sum[s, COUNT]
    order = np.empty(n + 1, np.int64)
    for k in range(n):
        order[k + 1] = rows.cell[STOP, s, k + 1]
    column = np.int64(-1)
    for k in range(1, n + 2):
        if k > 1:
            order[k - 2] = rows.cell[STOP, s, k - 1]
        order[k - 1] = v
        price = _price(clockwork, s, order)
        if price < INFEASIBLE and price - rows.sum[s, MONEY] < best:
            best = price - rows.sum[s, MONEY]
            column = np.int64(k)
    return best, column
