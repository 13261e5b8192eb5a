"""Recreate: put absent visits back one by one where they cost least, blinking now and then.

J. Christiaens, G. Vanden Berghe, "Slack induction by string removals for vehicle routing
problems", Transportation Science 54 (2020) 417-433, section 4.2: greedy insertion with blinks.
Differences from the paper: money decides, and an empty shift competes with the others at the
price of its day. A blink is drawn only for places that would be taken: at any other it changes
nothing.
"""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.random_stream import uniform
from georoute.kernels.slack_state import (
    COUNT,
    DAY_COST,
    DRIVE,
    HOUR,
    KIND,
    LEG,
    LOAD,
    LOAD_LIMIT,
    LOADED,
    MONEY,
    PAID,
    PLACE,
    RATE_CLASS,
    ROOM,
    SEAT,
    SURCHARGE,
    TIMED,
    WINDOWED,
    WORK,
    WORKED,
    WRITE_UP,
    Facts,
    Rows,
    insert,
    save_row,
)
from georoute.kernels.windowed_rows import INFEASIBLE, Clockwork, best_column

__all__ = ["recreate"]

Found: TypeAlias = tuple[Int, Int, Int]
"""Rise of money, shift, column."""

# Columns of meter
BLINK, MOST_TOURS, SPARE_TOURS = 0, 1, 2

LOG_KEPT = np.log(0.99)
"""Log of the share of places looked at: one in a hundred is blinked away."""


@kernel
def _next_blink(stream: NDArray[np.uint64]) -> Int:
    """Return how many places are taken before the next is blinked away."""
    return np.int64(np.log(1.0 - uniform(stream)) / LOG_KEPT)


@kernel
def _plain_place(
    facts: Facts,
    rows: Rows,
    v: Int,
    seen: NDArray[np.int64],
    meter: NDArray[np.int64],
    stream: NDArray[np.uint64],
) -> Found:
    """Return (rise, shift, column) of the cheapest place for a visit without windows.

    Only tours without windows are looked at; shift -1 where it fits nowhere. One long loop on
    purpose: a call for each tour would cost more than what it computes. ``seen`` (kinds,):
    the last visit that looked at an empty shift of this kind.
    """
    fare, ms, total, seats, into = facts.fare, facts.ms, rows.sum, rows.cell[SEAT], rows.cell[LEG]
    shift, rate, eligible = facts.shift, facts.rate, facts.eligible
    p = facts.visit[v, PLACE]
    work = facts.visit[v, WORK]
    load = facts.visit[v, LOAD]
    best = np.int64(INFEASIBLE)
    best_shift = np.int64(-1)
    column = np.int64(-1)
    for s in range(total.shape[0]):
        n = total[s, COUNT]
        if n == 0:
            if meter[SPARE_TOURS] == 0 or seen[shift[s, KIND]] == v:
                continue
            seen[shift[s, KIND]] = v
        if total[s, WINDOWED] > 0 or total[s, LOADED] + load > shift[s, LOAD_LIMIT]:
            continue
        if not eligible[v, s]:
            continue
        c = shift[s, RATE_CLASS]
        room = shift[s, ROOM]
        paid = shift[s, PAID]
        surcharge = rate[s, SURCHARGE]
        now = total[s, DRIVE] + total[s, WORKED] + shift[s, WRITE_UP]
        old_extra = surcharge * max(np.int64(0), now - paid)
        if n == 0:
            old_extra = 0.0
            still = work + shift[s, WRITE_UP]
            fixed = np.int64(rate[s, HOUR] * still + 0.5) + shift[s, DAY_COST]
        else:
            fixed = np.int64(rate[s, HOUR] * work + 0.5)
        here = seats[s, 0]
        for k in range(1, n + 2):
            there = seats[s, k]
            rise = fare[c, here, p] + fare[c, p, there] - into[s, k] + fixed
            # Overtime only adds, unless it is cheaper than an ordinary hour.
            if rise < best or surcharge < 0.0:
                gone = ms[here, there] if n > 0 else np.int64(0)
                then = now + work - gone + ms[here, p] + ms[p, there]
                if then <= room:
                    over = max(np.int64(0), then - paid)
                    rise += np.int64(surcharge * over - old_extra)
                    if rise < best:
                        if meter[BLINK] == 0:
                            meter[BLINK] = _next_blink(stream)
                        else:
                            meter[BLINK] -= 1
                            best = rise
                            best_shift = np.int64(s)
                            column = np.int64(k)
            here = there
    return best, best_shift, column


@kernel
def _windowed_place(
    clockwork: Clockwork,
    facts: Facts,
    rows: Rows,
    v: Int,
    found: Found,
    seen: NDArray[np.int64],
    meter: NDArray[np.int64],
) -> Found:
    """Improve on ``found`` in the tours where the visit or a stop has windows."""
    best, best_shift, column = found
    for s in range(rows.sum.shape[0]):
        if rows.sum[s, WINDOWED] == 0 and facts.visit[v, TIMED] == 0:
            continue
        if rows.sum[s, COUNT] == 0:
            if meter[SPARE_TOURS] == 0 or seen[facts.shift[s, KIND]] == v:
                continue
            seen[facts.shift[s, KIND]] = v
        heavy = rows.sum[s, LOADED] + facts.visit[v, LOAD] > facts.shift[s, LOAD_LIMIT]
        if heavy or not facts.eligible[v, s]:
            continue
        rise, k = best_column(clockwork, rows, s, v, best)
        if k >= 0:
            best = rise
            best_shift = np.int64(s)
            column = k
    return best, best_shift, column


@kernel
def _by_key(absent: NDArray[np.int64], n: Int, key: NDArray[np.float64]) -> None:
    """Sort the first ``n`` absent visits by ascending key (insertion sort: n is small)."""
    for i in range(1, n):
        v = absent[i]
        j = i - 1
        while j >= 0 and key[absent[j]] > key[v]:
            absent[j + 1] = absent[j]
            j -= 1
        absent[j + 1] = v


@kernel
def _draw_order(
    keys: NDArray[np.float64],
    weights: NDArray[np.float64],
    absent: NDArray[np.int64],
    n_absent: Int,
    stream: NDArray[np.uint64],
) -> None:
    """Sort the absent visits by a rule drawn by weight; rule 0 is a random order."""
    draw = uniform(stream) * weights[-1]
    rule = 0
    while draw >= weights[rule]:
        rule += 1
    if rule == 0:
        for i in range(n_absent):
            keys[0, absent[i]] = uniform(stream)
    _by_key(absent, n_absent, keys[rule])


@kernel
def recreate(
    clockwork: Clockwork | None,
    facts: Facts,
    rows: Rows,
    keys: NDArray[np.float64],
    weights: NDArray[np.float64],
    absent: NDArray[np.int64],
    n_absent: Int,
    touch: NDArray[np.int64],
    backup: Rows,
    seen: NDArray[np.int64],
    meter: NDArray[np.int64],
    stream: NDArray[np.uint64],
) -> Int:
    """Put absent visits back; return how many stay absent (moved to the front of ``absent``).

    ``clockwork`` is ``None`` where no visit has windows: the compiler then leaves that part out.
    ``keys`` (float64, (R, V)): orders to take the visits in, drawn with the cumulative
    ``weights`` (R,). ``meter`` (3,): places to the next blink, the most tours there may be, and
    how many more may be opened. ``seen``: scratch, one per kind of shift and pass.
    """
    _draw_order(keys, weights, absent, n_absent, stream)
    meter[SPARE_TOURS] = meter[MOST_TOURS]
    for s in range(rows.sum.shape[0]):
        if rows.sum[s, COUNT] > 0:
            meter[SPARE_TOURS] -= 1
    left = np.int64(0)
    for i in range(n_absent):
        v = absent[i]
        found: Found = (np.int64(INFEASIBLE), np.int64(-1), np.int64(-1))
        seen[:] = -1
        if facts.visit[v, TIMED] == 0:
            found = _plain_place(facts, rows, v, seen, meter, stream)
        if clockwork is not None:
            found = _windowed_place(clockwork, facts, rows, v, found, seen, meter)
        rise, row, column = found
        if row < 0:
            absent[left] = v
            left += 1
        else:
            save_row(rows, backup, touch, row)
            if rows.sum[row, COUNT] == 0:
                meter[SPARE_TOURS] -= 1
            insert(facts, rows, row, column, v)
            rows.sum[row, MONEY] += rise
    return left
