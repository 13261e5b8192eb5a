"""What a slack-induction search needs to know beforehand, made from the problem's arrays."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.kernels.annealing import Guide
from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.slack_state import KIND, Facts
from georoute.problem.board import losses

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.problem import Problem

__all__ = ["FEWER_TOURS", "facts_of", "guide_of", "ranked_loss"]

NO_LEG = 1 << 52
"""Money of a leg that does not exist: dearer than any tour, and safe to add up."""
FEWER_TOURS = 100
"""Micro-units added to the price of a day, so that of equal plans the one with fewer tours wins."""
NEAREST = 500
HANDOVER_SHARE = 0.05
"""Share of the steps that hand whole tours over, where shifts differ."""
RULE_WEIGHTS = {"random": 4.0, "demand": 4.0, "far": 2.0, "close": 1.0}
WINDOW_WEIGHTS = {"window_length": 2.0, "opens": 2.0, "closes": 2.0}
"""Orders of insertion and how often they are drawn: the weights of the paper."""


def _fares(problem: Problem) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return the money of every leg for each class of rates, and the class of each shift."""
    shifts, travel = problem.shifts, problem.travel
    rates = np.stack([shifts.hour_rate, shifts.length_rate], axis=1)
    classes, rate_class = np.unique(rates, axis=0, return_inverse=True)
    gone = travel.time_ms >= UNREACHABLE
    tables = []
    for hour_rate, length_rate in classes:
        money = np.rint(hour_rate * travel.time_ms + length_rate * travel.length_mm)
        tables.append(np.where(gone, NO_LEG, np.minimum(money, NO_LEG)).astype(np.int64))
    return np.stack(tables), rate_class.reshape(-1)


def facts_of(problem: Problem) -> Facts:
    """Pack a problem for the slack-induction kernels."""
    visits, shifts = problem.visits, problem.shifts
    fare, rate_class = _fares(problem)
    has_windows = visits.window_ptr[:-1] < visits.window_ptr[1:]
    shift_columns = (
        shifts.start_place,
        shifts.end_place,
        np.minimum(shifts.limit_ms, shifts.close_ms - shifts.open_ms),
        shifts.paid_ms,
        shifts.write_up_ms,
        shifts.load_limit,
        shifts.day_cost + FEWER_TOURS,
        rate_class,
        _kinds(problem),
    )
    visit_columns = (
        visits.place,
        visits.work_ms,
        visits.load,
        ranked_loss(problem),
        has_windows,
    )
    return Facts(
        fare=fare,
        ms=problem.travel.time_ms,
        mm=problem.travel.length_mm,
        visit=np.column_stack(visit_columns).astype(np.int64),
        shift=np.column_stack(shift_columns).astype(np.int64),
        rate=np.column_stack([shifts.hour_rate, shifts.overtime_rate - shifts.hour_rate]),
        eligible=visits.eligible,
    )


def ranked_loss(problem: Problem) -> NDArray[np.int64]:
    """Return what is lost with each visit, in one figure whose sums keep the ranks.

    The classes of ``losses`` share the bits of an int64: all of one class together weigh less
    than one visit of the class before it. Where the worths of a class need more bits than its
    share they are told apart more coarsely.
    """
    kind, amount, _ = losses(problem).T
    classes = int(kind.max(initial=0)) + 1
    bits = 60 // classes
    loss = np.zeros(kind.shape[0], np.int64)
    for rank in range(classes):
        of_class = kind == rank
        total = int(amount[of_class].sum())
        coarser = max(0, total.bit_length() - (bits - 1))
        loss[of_class] = np.maximum(1, amount[of_class] >> coarser) << (bits * (classes - 1 - rank))
    return loss


def _near(problem: Problem, facts: Facts) -> NDArray[np.int32]:
    place = problem.visits.place
    kept = min(place.shape[0], NEAREST)
    near = np.empty((place.shape[0], kept), np.int32)
    for v, p in enumerate(place):
        both_ways = facts.fare[0, p, place] + facts.fare[0, place, p]
        both_ways[v] = -1
        near[v] = np.argsort(both_ways, kind="stable")[:kept]
    return near


def _kinds(problem: Problem) -> NDArray[np.int64]:
    """Return a number for each shift; empty ones of one number are worth the same to any visit."""
    shifts, visits = problem.shifts, problem.visits
    columns = [array.astype(np.float64) for array in shifts[:-2]]
    if visits.window_open_ms.shape[0] == 0:
        # Without windows only the room between open and close matters, not when it is.
        columns[2] = (shifts.close_ms - shifts.open_ms).astype(np.float64)
        columns[3] = np.zeros_like(columns[2])
    table = np.column_stack([*columns, visits.eligible.T.astype(np.float64)])
    _, kinds = np.unique(table, axis=0, return_inverse=True)
    return kinds.reshape(-1).astype(np.int64)


def _keys(problem: Problem, facts: Facts) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    visits = problem.visits
    starts = np.unique(problem.shifts.start_place)
    far = facts.fare[0][np.ix_(starts, visits.place)].min(axis=0).astype(np.float64)
    loaded = bool(visits.load.any()) and not bool(visits.work_ms.any())
    demand = (visits.load if loaded else visits.work_ms).astype(np.float64)
    rows = [np.zeros_like(far), -demand, -far, far]
    weights = list(RULE_WEIGHTS.values())
    first, last = visits.window_ptr[:-1], visits.window_ptr[1:]
    has = first < last
    if has.any():
        opens = np.where(has, np.append(visits.window_open_ms, 0)[first], -np.inf)
        closes = np.where(has, np.append(visits.window_close_ms, 0)[last - 1], np.inf)
        rows += [closes - opens, opens, -closes]
        weights += list(WINDOW_WEIGHTS.values())
    return np.array(rows), np.cumsum(np.array(weights))


def guide_of(problem: Problem, facts: Facts) -> Guide:
    """Return neighbours and orders of insertion."""
    keys, weights = _keys(problem, facts)
    alike = np.ptp(facts.shift[:, KIND]) == 0
    return Guide(
        near=_near(problem, facts),
        keys=keys,
        weights=weights,
        handover_share=0.0 if alike else HANDOVER_SHARE,
    )
