"""Clock times of a solution: the typed face of the tour clock."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.instants import later
from georoute.domain.plan import DayTour, Leg, Stop
from georoute.domain.roads import LegShape
from georoute.kernels.arrays import UNREACHABLE, leg_mm, leg_ms
from georoute.kernels.clock import clock_tour, latest_arrivals, time_tour, tour_cost
from georoute.problem import MICRO

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import datetime

    from numpy.typing import NDArray

    from georoute.kernels._jit import Int
    from georoute.kernels.clock import TourTimes
    from georoute.problem import Packed, Problem, Solution

__all__ = ["is_feasible", "order_cost", "passable", "solution_cost", "tours_of"]


def order_cost(problem: Problem, shift: int, order: NDArray[np.int64]) -> int:
    """Return the money (micro-units) of one shift's order; 0 where it has no stop."""
    if order.shape[0] == 0:
        return 0
    times = time_tour(problem.travel, problem.visits, problem.shifts, shift, order)
    return int(tour_cost(problem.shifts, shift, times))


def solution_cost(problem: Problem, solution: Solution) -> int:
    """Return the money (micro-units) of all tours, without the worth of what is left out."""
    return sum(order_cost(problem, s, order) for s, order in enumerate(solution.orders))


def is_feasible(problem: Problem, shift: int, order: NDArray[np.int64]) -> bool:
    """Tell whether an order keeps windows, the shift, its longest duration and its load."""
    times = time_tour(problem.travel, problem.visits, problem.shifts, shift, order)
    allowed = bool(problem.visits.eligible[order, shift].all())
    return allowed and times.late_ms == 0 and times.excess_ms == 0 and times.over_load == 0


def passable(problem: Problem, shift: int, order: NDArray[np.int64]) -> NDArray[np.int64]:
    """Return an order without the visits that no way leads to from the stop before them.

    Nor those at its end from where no way leads to the end of the tour.
    """
    travel, place = problem.travel, problem.visits.place
    start, end = problem.shifts.start_place[shift], problem.shifts.end_place[shift]
    way = np.concatenate(([start], place[order], [end]))
    if not travel.dense or (travel.time_ms[way[:-1], way[1:]] < UNREACHABLE).all():
        return order
    kept: list[int] = []
    here = start
    for v in order.tolist():
        if travel.time_ms[here, place[v]] < UNREACHABLE:
            kept.append(v)
            here = place[v]
    while kept and travel.time_ms[place[kept[-1]], end] >= UNREACHABLE:
        kept.pop()
    return np.array(kept, np.int64)


def _clock(packed: Packed) -> Callable[[Int], datetime]:
    """Return what turns kernel milliseconds into aware datetimes of the programme's zone."""
    epoch = packed.programme.epoch
    return lambda instant_ms: later(epoch, int(instant_ms) / 1_000)


def _stops(
    packed: Packed,
    order: NDArray[np.int64],
    instants: NDArray[np.int64],
    clock: Callable[[Int], datetime],
) -> tuple[Stop, ...]:
    arrive, start, latest = instants
    stops = []
    for k, v in enumerate(order):
        visit = packed.visits[v]
        leave = int(start[k]) + int(packed.problem.visits.work_ms[v])
        stops.append(
            Stop(
                visit_id=visit.visit_id,
                site_id=visit.site_id,
                order=k + 1,
                arrive=clock(arrive[k]),
                start=clock(start[k]),
                leave=clock(leave),
                latest_arrive=clock(latest[k]),
            )
        )
    return tuple(stops)


def _legs(
    packed: Packed, stops: tuple[Stop, ...], depart: datetime, places: list[int]
) -> tuple[Leg, ...]:
    travel = packed.problem.travel
    departures = [depart, *(stop.leave for stop in stops)]
    pairs = list(pairwise(places))
    straight = (LegShape(),) * len(pairs)
    shapes = straight if packed.ways is None else packed.ways.legs(pairs)
    legs = []
    for k, ((i, j), shape) in enumerate(zip(pairs, shapes, strict=True)):
        drive_s = int(leg_ms(travel, i, j)) / 1_000
        legs.append(
            Leg(
                from_id=packed.place_ids[i],
                to_id=packed.place_ids[j],
                order=k + 1,
                depart=departures[k],
                arrive=later(departures[k], drive_s),
                drive_s=drive_s,
                dist_m=int(leg_mm(travel, i, j)) / 1_000,
                path=shape.path,
                roads=shape.roads,
                ferry=shape.ferry,
            )
        )
    return tuple(legs)


def _tour(
    packed: Packed, s: int, order: NDArray[np.int64], clock: Callable[[Int], datetime]
) -> DayTour:
    problem = packed.problem
    shift = packed.shifts[s]
    instants = np.empty((3, order.shape[0]), np.int64)
    times: TourTimes = clock_tour(
        problem.travel, problem.visits, problem.shifts, s, order, instants[0], instants[1]
    )
    latest_arrivals(
        problem.travel, problem.visits, problem.shifts, s, order, times.depart_ms, instants[2]
    )
    stops = _stops(packed, order, instants, clock)
    places = [
        int(problem.shifts.start_place[s]),
        *problem.visits.place[order].tolist(),
        int(problem.shifts.end_place[s]),
    ]
    depart = clock(times.depart_ms)
    duration_s = (int(times.finish_ms) - int(times.depart_ms)) / 1_000
    return DayTour(
        tour_id=shift.shift_id,
        inspector_id=shift.inspector_id,
        day=shift.day,
        start_base_id=shift.start_base_id,
        end_base_id=shift.end_base_id,
        depart=depart,
        back=clock(times.back_ms),
        finish=clock(times.finish_ms),
        stops=stops,
        legs=_legs(packed, stops, depart, places),
        work_s=int(times.work_ms) / 1_000,
        drive_s=int(times.drive_ms) / 1_000,
        wait_s=int(times.wait_ms) / 1_000,
        write_up_s=int(problem.shifts.write_up_ms[s]) / 1_000,
        overtime_s=max(0.0, duration_s - shift.paid_s),
        dist_m=int(times.length_mm) / 1_000,
        load=int(times.load) / 1_000,
        cost=int(tour_cost(problem.shifts, s, times)) / MICRO,
    )


def tours_of(packed: Packed, solution: Solution) -> tuple[DayTour, ...]:
    """Return the tours of a solution with all their clock times; empty shifts have none."""
    clock = _clock(packed)
    return tuple(
        _tour(packed, s, order, clock)
        for s, order in enumerate(solution.orders)
        if order.shape[0] > 0
    )
