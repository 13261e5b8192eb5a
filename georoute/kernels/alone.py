"""Whether a visit fits a shift on its own, and what is in the way where it does not."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.arrays import UNREACHABLE, Shifts, Travel, Visits, leg_ms

__all__ = [
    "CLOSED",
    "FITS",
    "LOAD",
    "TOO_LONG",
    "UNREACHED",
    "WAITS",
    "direct_ways",
    "judge_alone",
    "shortest_ways",
]

FITS, UNREACHED, LOAD, CLOSED, WAITS, TOO_LONG = range(6)
"""Fits; no way out or back; load; reached after the last closing; not back in time because of
waiting for the opening; out, work, back and write-up take too long."""


@kernel
def direct_ways(
    travel: Travel, base: Int, places: NDArray[np.int64], outward: Int, ways: NDArray[np.int64]
) -> None:
    """Fill ``ways`` with the leg from ``base`` to each of ``places`` (``outward`` 0: back)."""
    for k in range(places.shape[0]):
        p = places[k]
        ways[k] = leg_ms(travel, base, p) if outward == 1 else leg_ms(travel, p, base)


@kernel
def shortest_ways(travel: Travel, base: Int, outward: Int, ways: NDArray[np.int64]) -> None:
    """Fill ``ways`` (int64, (P,)) with the shortest time from ``base`` to every place.

    Through any other places, without stopping there; ``outward`` 0: to ``base`` instead.
    Dijkstra on the whole table.
    """
    n = ways.shape[0]
    done = np.zeros(n, np.bool_)
    ways[:] = UNREACHABLE
    ways[base] = 0
    for _ in range(n):
        here = -1
        for p in range(n):
            if not done[p] and (here < 0 or ways[p] < ways[here]):
                here = p
        done[here] = True
        reached = ways[here]
        if reached >= UNREACHABLE:
            return
        for p in range(n):
            if not done[p]:
                if outward == 1:
                    way = reached + leg_ms(travel, here, p)
                else:
                    way = reached + leg_ms(travel, p, here)
                ways[p] = min(ways[p], way)


@kernel
def judge_alone(
    visits: Visits,
    shifts: Shifts,
    outs: NDArray[np.int64],
    backs: NDArray[np.int64],
    out_row: NDArray[np.int64],
    back_row: NDArray[np.int64],
    kind: NDArray[np.int8],
    short: NDArray[np.int64],
) -> None:
    """Judge every visit as the only stop of every shift.

    ``outs[out_row[s], v]`` and ``backs[back_row[s], v]`` are the ways out and back in ms. Fills
    ``kind`` (int8, (V, S)) with one of the codes above and ``short`` (int64, (V, S)) with what
    is missing: ms, or load. Eligibility is not looked at.
    """
    open_ms, close_ms, limit_ms = shifts.open_ms, shifts.close_ms, shifts.limit_ms
    write_up_ms, load_limit = shifts.write_up_ms, shifts.load_limit
    work_ms, load, pointer = visits.work_ms, visits.load, visits.window_ptr
    opens, closes = visits.window_open_ms, visits.window_close_ms
    for v in range(kind.shape[0]):
        for s in range(kind.shape[1]):
            out = outs[out_row[s], v]
            back = backs[back_row[s], v]
            kind[v, s] = FITS
            short[v, s] = 0
            if out >= UNREACHABLE or back >= UNREACHABLE:
                kind[v, s] = UNREACHED
                short[v, s] = UNREACHABLE
                continue
            needed = out + work_ms[v] + back + write_up_ms[s]
            room = min(limit_ms[s], close_ms[s] - open_ms[s])
            arrive = open_ms[s] + out
            start = arrive
            w = pointer[v]
            last = pointer[v + 1]
            if w < last:
                while w < last and closes[w] < arrive:
                    w += 1
                start = max(arrive, opens[w]) if w < last else arrive
            finish = start + work_ms[v] + back + write_up_ms[s]
            if needed > room:
                kind[v, s] = TOO_LONG
                short[v, s] = needed - room
            elif pointer[v] < last and w == last:
                kind[v, s] = CLOSED
                short[v, s] = arrive - closes[last - 1]
            elif finish > close_ms[s]:
                kind[v, s] = WAITS
                short[v, s] = finish - close_ms[s]
            elif load[v] > load_limit[s]:
                kind[v, s] = LOAD
                short[v, s] = load[v] - load_limit[s]
