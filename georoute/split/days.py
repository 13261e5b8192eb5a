"""The first split: clusters of about a day's work, each given to a shift of a near base."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy.optimize import linear_sum_assignment

from georoute.kernels.arrays import UNREACHABLE
from georoute.problem import Solution
from georoute.split.clusters import balanced_clusters, tours_needed

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.problem import Problem

__all__ = ["split"]

LATER_DAY_S = 1.0
"""Of shifts that are otherwise alike the earlier one is taken: a second a day decides."""


def _plane(problem: Problem, places: NDArray[np.int64]) -> NDArray[np.float64]:
    return np.column_stack([problem.plane_x_m[places], problem.plane_y_m[places]])


def speed_m_per_ms(problem: Problem) -> float:
    """Return the median speed of travel between places, in plane metres per millisecond."""
    count = problem.plane_x_m.shape[0]
    i, j = np.arange(count), np.roll(np.arange(count), 1)
    metres = np.hypot(
        problem.plane_x_m[i] - problem.plane_x_m[j], problem.plane_y_m[i] - problem.plane_y_m[j]
    )
    if problem.travel.dense:
        time_ms = problem.travel.time_ms[i, j].astype(np.float64)
    else:
        time_ms = metres * problem.travel.time_scale
    usable = (time_ms > 0) & (time_ms < UNREACHABLE) & (metres > 0)
    return float(np.median(metres[usable] / time_ms[usable])) if usable.any() else 0.01


def _match(
    problem: Problem,
    centres: NDArray[np.float64],
    labels: NDArray[np.int64],
    visits: NDArray[np.int64],
    speed: float,
) -> NDArray[np.int64]:
    """Return the shift of each cluster: the nearest base, allowed for its visits, early."""
    shifts = problem.shifts
    starts, ends = _plane(problem, shifts.start_place), _plane(problem, shifts.end_place)
    out = np.linalg.norm(centres[:, None] - starts[None], axis=2)
    back = np.linalg.norm(centres[:, None] - ends[None], axis=2)
    price = (out + back) / speed + shifts.day[None] * LATER_DAY_S * 1_000
    worst = float(price.max(initial=0.0)) + float(shifts.limit_ms.max(initial=0))
    for cluster in range(centres.shape[0]):
        members = visits[labels == cluster]
        barred = ~problem.visits.eligible[members]
        price[cluster] += barred.sum(axis=0) * worst
    rows, columns = linear_sum_assignment(price)
    shift_of = np.full(centres.shape[0], -1, np.int64)
    shift_of[rows] = columns
    return shift_of


def _near_first(problem: Problem, shift: int, visits: NDArray[np.int64]) -> NDArray[np.int64]:
    """Order visits by going from each to the nearest that is left, from the start on."""
    spots = _plane(problem, problem.visits.place[visits])
    here = _plane(problem, problem.shifts.start_place[shift : shift + 1])[0]
    left = np.arange(visits.shape[0])
    order = []
    while left.shape[0]:
        nearest = int(np.argmin(np.linalg.norm(spots[left] - here, axis=1)))
        order.append(int(visits[left[nearest]]))
        here = spots[left[nearest]]
        left = np.delete(left, nearest)
    return np.array(order, np.int64)


def _settle(
    problem: Problem,
    visits: NDArray[np.int64],
    wanted: NDArray[np.int64],
    centres: NDArray[np.float64],
    shift_of: NDArray[np.int64],
) -> NDArray[np.int64]:
    """Return a shift for each visit: the wanted one where allowed, else the nearest allowed."""
    eligible = problem.visits.eligible
    chosen = wanted.copy()
    stray = np.flatnonzero(~eligible[visits, wanted])
    centre_of = {int(s): centres[c] for c, s in enumerate(shift_of) if s >= 0}
    for k in stray:
        spot = _plane(problem, problem.visits.place[visits[k : k + 1]])[0]
        allowed = np.flatnonzero(eligible[visits[k]])
        used = [int(s) for s in allowed if int(s) in centre_of]
        if used:
            chosen[k] = min(
                used, key=lambda s, spot=spot: float(np.linalg.norm(centre_of[s] - spot))
            )
        else:
            chosen[k] = allowed[0]
    return chosen


def split(problem: Problem, *, seed: int) -> Solution:
    """Give every visit that any shift may take to exactly one shift.

    The number of days follows from the work and an estimate of travel; clusters on the plane are
    balanced by time and matched with shifts by the way from and to the base. Limits of a shift
    may be broken: moving visits between days comes later. The orders go from stop to nearest
    stop.
    """
    empty = np.empty(0, np.int64)
    orders = [empty for _ in range(problem.shift_count)]
    visits = np.flatnonzero(problem.visits.eligible.any(axis=1))
    if visits.shape[0] == 0:
        return Solution(orders=tuple(orders))
    speed = speed_m_per_ms(problem)
    spots = _plane(problem, problem.visits.place[visits])
    work_ms = problem.visits.work_ms[visits].astype(np.float64)
    count = tours_needed(problem, spots, work_ms, speed)
    centres, labels = balanced_clusters(spots, work_ms, count=count, seed=seed)
    shift_of = _match(problem, centres, labels, visits, speed)
    chosen = _settle(problem, visits, shift_of[labels], centres, shift_of)
    for shift in np.unique(chosen):
        orders[shift] = _near_first(problem, int(shift), visits[chosen == shift])
    return Solution(orders=tuple(orders))
