"""Evaluate one tour: clock times, waits, overtime, load, and money.

The departure is put off as far as it saves waiting without making the return later: the
forward time slack of Savelsbergh, "The vehicle routing problem with time windows: minimizing
route duration", ORSA Journal on Computing 4 (1992) 146-154.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.arrays import Shifts, Travel, Visits, leg_mm, leg_ms

__all__ = ["TourTimes", "clock_tour", "latest_arrivals", "time_tour", "tour_cost"]


class TourTimes(NamedTuple):
    """What a tour comes to. Times in ms since the epoch or ms long, length in mm.

    ``late_ms``: sum over visits reached after their last window. ``excess_ms``: time beyond the
    shift's end or its longest duration, whichever is worse. ``over_load``: load beyond the
    limit. The tour is feasible when these three are 0.
    """

    depart_ms: Int
    back_ms: Int
    finish_ms: Int
    drive_ms: Int
    length_mm: Int
    wait_ms: Int
    work_ms: Int
    load: Int
    late_ms: Int
    excess_ms: Int
    over_load: Int


@kernel
def _start_of_work(visits: Visits, v: Int, arrive: Int) -> tuple[Int, Int, Int]:
    """Return start of work, slack to the window's close, and lateness of visit ``v``."""
    first = visits.window_ptr[v]
    last = visits.window_ptr[v + 1]
    if first == last:
        return arrive, np.int64(1 << 60), np.int64(0)
    for k in range(first, last):
        if arrive <= visits.window_close_ms[k]:
            start = max(arrive, visits.window_open_ms[k])
            return start, visits.window_close_ms[k] - start, np.int64(0)
    return arrive, np.int64(0), arrive - visits.window_close_ms[last - 1]


@kernel
def _walk(
    travel: Travel,
    visits: Visits,
    shifts: Shifts,
    shift: Int,
    order: NDArray[np.int64],
    depart: Int,
    arrive_ms: NDArray[np.int64],
    start_ms: NDArray[np.int64],
) -> tuple[TourTimes, Int]:
    """Go through the stops once, leaving at ``depart``; also return the saving of leaving later."""
    here = shifts.start_place[shift]
    now = np.int64(depart)
    drive = np.int64(0)
    length = np.int64(0)
    wait = np.int64(0)
    work = np.int64(0)
    load = np.int64(0)
    late = np.int64(0)
    slack = np.int64(1 << 60)
    for k in range(order.shape[0]):
        v = order[k]
        there = visits.place[v]
        leg = leg_ms(travel, here, there)
        drive += leg
        length += leg_mm(travel, here, there)
        now += leg
        arrive_ms[k] = now
        start, room, lateness = _start_of_work(visits, v, now)
        wait += start - now
        late += lateness
        slack = min(slack, wait + room)
        start_ms[k] = start
        work += visits.work_ms[v]
        load += visits.load[v]
        now = start + visits.work_ms[v]
        here = there
    leg = leg_ms(travel, here, shifts.end_place[shift])
    drive += leg
    length += leg_mm(travel, here, shifts.end_place[shift])
    back = now + leg
    finish = back + shifts.write_up_ms[shift]
    excess = max(finish - shifts.close_ms[shift], finish - depart - shifts.limit_ms[shift])
    times = TourTimes(
        np.int64(depart),
        back,
        finish,
        drive,
        length,
        wait,
        work,
        load,
        late,
        max(np.int64(0), excess),
        max(np.int64(0), load - shifts.load_limit[shift]),
    )
    return times, min(slack, wait)


@kernel
def clock_tour(
    travel: Travel,
    visits: Visits,
    shifts: Shifts,
    shift: Int,
    order: NDArray[np.int64],
    arrive_ms: NDArray[np.int64],
    start_ms: NDArray[np.int64],
) -> TourTimes:
    """Time the tour of ``shift`` through the visits of ``order``.

    ``arrive_ms`` and ``start_ms`` (int64, at least as long as ``order``) are filled with the
    arrival and the start of work of each stop. A later departure that saves waiting is taken.
    """
    times, saving = _walk(
        travel, visits, shifts, shift, order, shifts.open_ms[shift], arrive_ms, start_ms
    )
    if saving > 0 and times.late_ms == 0:
        later = shifts.open_ms[shift] + saving
        times, _ = _walk(travel, visits, shifts, shift, order, later, arrive_ms, start_ms)
    return times


@kernel
def time_tour(
    travel: Travel, visits: Visits, shifts: Shifts, shift: Int, order: NDArray[np.int64]
) -> TourTimes:
    """Time a tour without keeping the clock times of its stops."""
    n = order.shape[0]
    scratch = np.empty((2, n), np.int64)
    return clock_tour(travel, visits, shifts, shift, order, scratch[0], scratch[1])


@kernel
def tour_cost(shifts: Shifts, shift: Int, times: TourTimes) -> Int:
    """Return the money of a tour with at least one stop, in micro-units, rounded once."""
    duration = times.finish_ms - times.depart_ms
    paid = min(duration, shifts.paid_ms[shift])
    money = (
        shifts.hour_rate[shift] * paid
        + shifts.overtime_rate[shift] * (duration - paid)
        + shifts.length_rate[shift] * times.length_mm
    )
    return np.int64(np.floor(money + 0.5)) + shifts.day_cost[shift]


@kernel
def latest_arrivals(
    travel: Travel,
    visits: Visits,
    shifts: Shifts,
    shift: Int,
    order: NDArray[np.int64],
    depart: Int,
    latest_ms: NDArray[np.int64],
) -> None:
    """Fill ``latest_ms`` with the latest arrival at each stop that keeps all after it in time."""
    end = min(shifts.close_ms[shift], depart + shifts.limit_ms[shift])
    bound = end - shifts.write_up_ms[shift]
    there = shifts.end_place[shift]
    for k in range(order.shape[0] - 1, -1, -1):
        v = order[k]
        bound -= leg_ms(travel, visits.place[v], there) + visits.work_ms[v]
        for w in range(visits.window_ptr[v + 1] - 1, visits.window_ptr[v] - 1, -1):
            if visits.window_open_ms[w] <= bound:
                bound = min(bound, visits.window_close_ms[w])
                break
        latest_ms[k] = bound
        there = visits.place[v]
