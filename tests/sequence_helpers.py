"""Small array problems for the tests of ordering, and slow, obvious twins of the search."""

from __future__ import annotations

from itertools import pairwise, permutations
from typing import TYPE_CHECKING

import numpy as np

from georoute.kernels.arrays import MUST, Shifts, Travel, Visits
from georoute.kernels.clock import time_tour, tour_cost
from georoute.problem import Problem

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from numpy.typing import NDArray

FAR = 1 << 60
HOUR_RATE = 7.5
LENGTH_RATE = 0.4


def day_problem(
    time_ms: NDArray[np.int64],
    *,
    length_mm: NDArray[np.int64] | None = None,
    end_place: int = 0,
    windows: Sequence[Sequence[tuple[int, int]]] = (),
    work_ms: int = 0,
    hour_rate: float = HOUR_RATE,
    overtime_rate: float | None = None,
    length_rate: float = LENGTH_RATE,
    paid_ms: int = FAR,
    limit_ms: int = FAR,
) -> Problem:
    """Return one shift from place 0 to ``end_place``, with a visit at every other place."""
    places = time_ms.shape[0]
    at = np.array([p for p in range(places) if p not in (0, end_place)], np.int64)
    m = at.shape[0]
    spans = [*windows, *([()] * (m - len(windows)))]
    flat = [span for visit in spans for span in visit]
    zeros = np.zeros(m, np.int64)
    visits = Visits(
        at,
        zeros + work_ms,
        zeros,
        np.cumsum([0, *map(len, spans)]).astype(np.int64),
        np.array([opens for opens, _ in flat], np.int64),
        np.array([closes for _, closes in flat], np.int64),
        zeros + MUST,
        zeros,
        np.ones((m, 1), np.bool_),
    )
    overtime = hour_rate if overtime_rate is None else overtime_rate
    return Problem(
        travel=dense_travel(time_ms, time_ms if length_mm is None else length_mm),
        visits=visits,
        shifts=one_shift(
            end_place, (hour_rate, overtime, length_rate), paid_ms=paid_ms, limit_ms=limit_ms
        ),
        plane_x_m=np.zeros(places),
        plane_y_m=np.zeros(places),
    )


def dense_travel(time_ms: NDArray[np.int64], length_mm: NDArray[np.int64]) -> Travel:
    """Return travel by two tables."""
    none = np.zeros(0)
    return Travel(1, time_ms, length_mm, none, none, 0.0, 0.0, 1)


def one_shift(
    end_place: int, rates: tuple[float, float, float], *, paid_ms: int, limit_ms: int
) -> Shifts:
    """Return one shift without a load limit; ``rates`` are per hour, overtime, length."""

    def one(value: int) -> NDArray[np.int64]:
        return np.array([value], np.int64)

    return Shifts(
        one(0),
        one(end_place),
        one(0),
        one(FAR),
        one(paid_ms),
        one(limit_ms),
        one(0),
        one(FAR),
        np.array([rates[0]]),
        np.array([rates[1]]),
        np.array([rates[2]]),
        one(0),
        one(0),
        one(0),
    )


def plane_table(rng: np.random.Generator, places: int, *, side: int = 1000) -> NDArray[np.int64]:
    """Return rounded straight-line distances between random points: symmetric."""
    xy = rng.integers(0, side, (places, 2))
    d = xy[:, None, :] - xy[None, :, :]
    table: NDArray[np.int64] = np.floor(np.sqrt((d * d).sum(axis=2)) + 0.5).astype(np.int64)
    return table


def one_way_table(rng: np.random.Generator, places: int, *, most: int = 1000) -> NDArray[np.int64]:
    """Return random costs without any symmetry."""
    table: NDArray[np.int64] = rng.integers(1, most, (places, places), np.int64)
    np.fill_diagonal(table, 0)
    return table


def plain_money(problem: Problem, order: Iterable[int]) -> int:
    """Return the travel money of an order, each leg rounded once: a loop over the tables."""
    shifts, travel = problem.shifts, problem.travel
    places = [int(shifts.start_place[0]), *(int(problem.visits.place[v]) for v in order)]
    places.append(int(shifts.end_place[0]))
    total = 0
    for a, b in pairwise(places):
        money = float(shifts.hour_rate[0]) * int(travel.time_ms[a, b])
        money += float(shifts.length_rate[0]) * int(travel.length_mm[a, b])
        total += int(np.floor(money + 0.5))
    return total


def clock_worth(problem: Problem, order: Iterable[int]) -> tuple[int, int]:
    """Return (ms late or in excess, money) of an order by the clock of the product."""
    tour = np.array(list(order), np.int64)
    times = time_tour(problem.travel, problem.visits, problem.shifts, 0, tour)
    money = int(tour_cost(problem.shifts, 0, times))
    return int(times.late_ms) + int(times.excess_ms), money


def best_by_trying_all(problem: Problem) -> int:
    """Return the least travel money over all orders; for up to 8 visits."""
    return min(plain_money(problem, way) for way in permutations(range(problem.visit_count)))


def best_by_dynamic_programming(problem: Problem) -> int:
    """Return the least travel money: M. Held, R. Karp, J. SIAM 10 (1962) 196-210; to 12 visits."""
    m = problem.visit_count

    def leg(a: int, b: int) -> int:
        places = problem.visits.place
        ends = (int(problem.shifts.start_place[0]), int(problem.shifts.end_place[0]))
        i = ends[0] if a < 0 else int(places[a])
        j = ends[1] if b < 0 else int(places[b])
        money = float(problem.shifts.hour_rate[0]) * int(problem.travel.time_ms[i, j])
        money += float(problem.shifts.length_rate[0]) * int(problem.travel.length_mm[i, j])
        return int(np.floor(money + 0.5))

    cost = {(1 << k, k): leg(-1, k) for k in range(m)}
    for mask in range(1, 1 << m):
        for last in range(m):
            if (mask, last) not in cost:
                continue
            for to in range(m):
                if not mask >> to & 1:
                    new = cost[mask, last] + leg(last, to)
                    state = (mask | 1 << to, to)
                    cost[state] = min(cost.get(state, new), new)
    return min(cost[(1 << m) - 1, k] + leg(k, -1) for k in range(m))
