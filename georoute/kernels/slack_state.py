"""The tours of a slack-induction search, packed for speed.

A compiled call copies every array it is handed, one by one, so the state is few wide arrays
whose columns have names here, and the tour clock is called only where windows matter.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel

__all__ = [
    "Facts",
    "Rows",
    "close_row",
    "insert",
    "is_touched",
    "plain_money",
    "rows_of",
    "save_row",
    "take_back_row",
    "write_row",
]

# Columns of Facts.visit
PLACE, WORK, LOAD, LOSS, TIMED = 0, 1, 2, 3, 4
# Columns of Facts.shift
START, END, ROOM, PAID, WRITE_UP, LOAD_LIMIT, DAY_COST, RATE_CLASS, KIND = 0, 1, 2, 3, 4, 5, 6, 7, 8
# Columns of Facts.rate
HOUR, SURCHARGE = 0, 1
# Tables of Rows.cell
SEAT, STOP, LEG = 0, 1, 2
# Columns of Rows.sum
COUNT, DRIVE, LENGTH, WORKED, LOADED, FARE, WINDOWED, MONEY = 0, 1, 2, 3, 4, 5, 6, 7
# Tables of Rows.link
WHERE, AT = 0, 1


class Facts(NamedTuple):
    """What does not change. All int64 unless said otherwise.

    ``fare`` (C, P, P): money of a leg by class of rates. ``ms``, ``mm`` (P, P): its time and
    length. ``visit`` (V, 5): place, work, load, loss when absent, 1 where it has windows.
    ``shift`` (S, 9): start, end, longest duration, paid length, write-up, load limit, cost of
    the day, class of rates, and kind (empty shifts of one kind are worth the same to any visit).
    ``rate`` (float64, (S, 2)): price of a ms, and what overtime adds to it. ``eligible``:
    bool (V, S).
    """

    fare: NDArray[np.int64]
    ms: NDArray[np.int64]
    mm: NDArray[np.int64]
    visit: NDArray[np.int64]
    shift: NDArray[np.int64]
    rate: NDArray[np.float64]
    eligible: NDArray[np.bool_]


class Rows(NamedTuple):
    """S tours, W + 2 columns. All int64.

    ``cell`` (3, S, W + 2): places (start in column 0, stops in 1 .. count, end behind), visits,
    and money of the leg into a column. ``sum`` (S, 8): count, drive, length, work, load, money
    of the legs, stops with windows, money of the tour (0 where empty). ``link`` (2, V): shift
    (-1: absent) and column of each visit.
    """

    cell: NDArray[np.int64]
    sum: NDArray[np.int64]
    link: NDArray[np.int64]


def rows_of(shifts: int, visits: int, width: int) -> Rows:
    """Return empty rows, ``width`` stops wide."""
    link = np.zeros((2, visits), np.int64)
    link[WHERE] = -1
    return Rows(np.zeros((3, shifts, width + 2), np.int64), np.zeros((shifts, 8), np.int64), link)


@kernel
def plain_money(facts: Facts, rows: Rows, s: Int) -> Int:
    """Return the money of row ``s`` from its sums; right where no stop has windows."""
    if rows.sum[s, COUNT] == 0:
        return np.int64(0)
    still = rows.sum[s, WORKED] + facts.shift[s, WRITE_UP]
    over = max(np.int64(0), rows.sum[s, DRIVE] + still - facts.shift[s, PAID])
    extra = facts.rate[s, HOUR] * still + facts.rate[s, SURCHARGE] * over
    return rows.sum[s, FARE] + np.int64(np.floor(extra + 0.5)) + facts.shift[s, DAY_COST]


@kernel
def close_row(facts: Facts, rows: Rows, s: Int) -> None:
    """Bring places, legs and sums of row ``s`` up to date with its visits and their count."""
    n = rows.sum[s, COUNT]
    c = facts.shift[s, RATE_CLASS]
    seat = rows.cell[SEAT, s]
    stop = rows.cell[STOP, s]
    leg = rows.cell[LEG, s]
    total = rows.sum[s]
    for k in range(1, 8):
        total[k] = 0
    seat[0] = facts.shift[s, START]
    seat[n + 1] = facts.shift[s, END]
    for k in range(1, n + 1):
        v = stop[k]
        seat[k] = facts.visit[v, PLACE]
        rows.link[WHERE, v] = s
        rows.link[AT, v] = k
        total[WORKED] += facts.visit[v, WORK]
        total[LOADED] += facts.visit[v, LOAD]
        total[WINDOWED] += facts.visit[v, TIMED]
    leg[1] = 0
    if n > 0:
        for k in range(1, n + 2):
            i = seat[k - 1]
            j = seat[k]
            leg[k] = facts.fare[c, i, j]
            total[FARE] += leg[k]
            total[DRIVE] += facts.ms[i, j]
            total[LENGTH] += facts.mm[i, j]
    total[MONEY] = plain_money(facts, rows, s)


@kernel
def write_row(facts: Facts, rows: Rows, s: Int, order: NDArray[np.int64]) -> None:
    """Put the visits of ``order`` (int64, in order) into row ``s``."""
    n = order.shape[0]
    for k in range(n):
        rows.cell[STOP, s, k + 1] = order[k]
    rows.sum[s, COUNT] = n
    close_row(facts, rows, s)


@kernel
def insert(facts: Facts, rows: Rows, s: Int, k: Int, v: Int) -> None:
    """Put visit ``v`` into column ``k`` (1 .. count + 1) of row ``s``, but for its money."""
    total = rows.sum[s]
    n = total[COUNT]
    c = facts.shift[s, RATE_CLASS]
    seat = rows.cell[SEAT, s]
    stop = rows.cell[STOP, s]
    leg = rows.cell[LEG, s]
    p = facts.visit[v, PLACE]
    a = seat[k - 1]
    b = seat[k]
    if n > 0:
        total[DRIVE] -= facts.ms[a, b]
        total[LENGTH] -= facts.mm[a, b]
        total[FARE] -= leg[k]
    for col in range(n + 2, k, -1):
        seat[col] = seat[col - 1]
        leg[col] = leg[col - 1]
    for col in range(n + 1, k, -1):
        stop[col] = stop[col - 1]
        rows.link[AT, stop[col]] = col
    seat[k] = p
    stop[k] = v
    leg[k] = facts.fare[c, a, p]
    leg[k + 1] = facts.fare[c, p, b]
    total[FARE] += leg[k] + leg[k + 1]
    total[DRIVE] += facts.ms[a, p] + facts.ms[p, b]
    total[LENGTH] += facts.mm[a, p] + facts.mm[p, b]
    total[WORKED] += facts.visit[v, WORK]
    total[LOADED] += facts.visit[v, LOAD]
    total[WINDOWED] += facts.visit[v, TIMED]
    total[COUNT] = n + 1
    rows.link[WHERE, v] = s
    rows.link[AT, v] = k


@kernel
def is_touched(touch: NDArray[np.int64], s: Int) -> bool:
    """Tell whether row ``s`` was saved already; ``touch[0]`` counts the rows that follow."""
    found = False
    for k in range(1, touch[0] + 1):
        found = found or touch[k] == s
    return found


@kernel
def _copy_row(source: Rows, target: Rows, s: Int) -> None:
    n = source.sum[s, COUNT]
    for table in range(3):
        for k in range(n + 2):
            target.cell[table, s, k] = source.cell[table, s, k]
    for k in range(8):
        target.sum[s, k] = source.sum[s, k]


@kernel
def save_row(rows: Rows, backup: Rows, touch: NDArray[np.int64], s: Int) -> None:
    """Copy row ``s`` to ``backup`` before it changes, once."""
    if not is_touched(touch, s):
        touch[0] += 1
        touch[touch[0]] = s
        _copy_row(rows, backup, s)


@kernel
def take_back_row(rows: Rows, backup: Rows, s: Int) -> None:
    """Restore row ``s`` from ``backup``."""
    _copy_row(backup, rows, s)
    for k in range(1, rows.sum[s, COUNT] + 1):
        v = rows.cell[STOP, s, k]
        rows.link[WHERE, v] = s
        rows.link[AT, v] = k
