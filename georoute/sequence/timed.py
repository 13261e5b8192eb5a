"""Order of a day with opening windows."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.kernels.node_queue import empty_queue, new_queue, waiting
from georoute.kernels.timed import (
    descend_timed,
    kick_and_repair_timed,
    price_timed,
)
from georoute.kernels.timed_moves import refresh_timed
from georoute.sequence.day import leg_tables

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.problem import Problem
    from georoute.sequence.budget import KickBudget
    from georoute.sequence.trail import Trail

__all__ = ["by_closing", "order_timed"]

HEAT = 0.1
"""Temperature at the start, as a share of the day's travel money per leg."""
KICKS_A_CALL = 10
STEPS_A_CALL = 20
NO_LIMIT = 1 << 60
KINDS = {1: "two_opt", 2: "or_opt"}


def by_closing(problem: Problem, order: NDArray[np.int64]) -> NDArray[np.int64]:
    """Return the visits by the close of their last window, those without one last."""
    visits = problem.visits
    last = visits.window_ptr[order + 1]
    closed = visits.window_ptr[order] < last
    closes = np.full(order.shape[0], np.iinfo(np.int64).max)
    closes[closed] = visits.window_close_ms[last[closed] - 1]
    return order[np.argsort(closes, kind="stable")]


def order_timed(
    problem: Problem,
    shift: int,
    order: NDArray[np.int64],
    *,
    budget: KickBudget,
    trail: Trail,
) -> NDArray[np.int64]:
    """Return the best order found, beginning with ``order`` (at least 4 visits)."""
    search = _Search(problem, shift, order)
    while waiting(search.queue) > 0 and not budget.stopped():
        steps = 1 if trail.kept else STEPS_A_CALL
        kind = search.descend(steps)
        if kind > 0:
            trail.note(KINDS[kind], search.order, int(search.worth[1]))
    search.kick(budget, trail)
    return search.order


class _Search:
    """One day in the arrays that ``kernels.timed`` describes."""

    def __init__(self, problem: Problem, shift: int, order: NDArray[np.int64]) -> None:
        self.names = order.copy()
        m = order.shape[0]
        shifts = problem.shifts
        self.legs = _legs(problem, shift, order)
        self.stops, self.spans = _stops(problem, order)
        write_up = shifts.write_up_ms[shift]
        fixed = self.stops[:, 0].sum() + write_up
        ends = (shifts.open_ms[shift], shifts.close_ms[shift], shifts.limit_ms[shift])
        self.limits = np.array([fixed, *ends, write_up], np.int64)
        rates = (shifts.hour_rate[shift], shifts.overtime_rate[shift], shifts.length_rate[shift])
        tariff = (*rates, shifts.paid_ms[shift], shifts.day_cost[shift])
        self.tariff = np.array(tariff, np.float64)
        self.seq = np.array([[m, *range(m), m + 1]] * 2, np.int64)
        self.sums = np.zeros((4, m + 2), np.int64)
        self.worth = np.zeros(4, np.int64)
        self.trial = self.seq.copy()
        self.queue = new_queue(np.arange(m))
        refresh_timed(self.legs, self.seq, self.sums)
        day = (self.legs, self.stops, self.spans, self.limits)
        price_timed(*day, self.tariff, self.seq, NO_LIMIT, self.worth)
        travel_money = float(rates[0] * self.worth[2] + rates[2] * self.worth[3])
        self.heat = HEAT * travel_money / (m + 1)
        self.late_rate = travel_money / max(1.0, float(self.worth[2]))

    @property
    def order(self) -> NDArray[np.int64]:
        """The visits in sequence."""
        order: NDArray[np.int64] = self.names[self.seq[0, 1:-1]]
        return order

    def descend(self, steps: int) -> int:
        """Make up to ``steps`` better exchanges; return the kind of the last, 0 for none."""
        made = descend_timed(
            self.legs,
            self.stops,
            self.spans,
            self.limits,
            self.tariff,
            self.seq,
            self.sums,
            self.worth,
            self.trial,
            self.queue,
            steps,
        )
        return int(made)

    def kick(self, budget: KickBudget, trail: Trail) -> None:
        """Kick and repair until the budget is used; end at the best sequence."""
        kept, best = self.seq[0].copy(), self.seq[0].copy()
        kept_worth, best_worth = self.worth.copy(), self.worth.copy()
        self.queue[:] = empty_queue(self.names.shape[0])
        while (kicks := budget.next_kicks(KICKS_A_CALL)) > 0:
            before = best_worth.copy()
            made = kick_and_repair_timed(
                self.legs,
                self.stops,
                self.spans,
                self.limits,
                self.tariff,
                self.seq,
                self.sums,
                self.worth,
                self.trial,
                self.queue,
                budget.stream,
                kept,
                kept_worth,
                best,
                best_worth,
                kicks,
                self.heat,
                self.late_rate,
                budget.used,
                budget.kicks,
                budget.spent,
                int(trail.kept),
            )
            budget.used += int(made)
            if not np.array_equal(best_worth, before):
                trail.note("kick", self.names[best[1:-1]], int(best_worth[1]))
        self.seq[0] = best
        self.worth[:] = best_worth


def _stops(
    problem: Problem, order: NDArray[np.int64]
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return work and windows of the visits, as ``kernels.timed`` wants them."""
    visits = problem.visits
    first, last = visits.window_ptr[order], visits.window_ptr[order + 1]
    each = [np.arange(a, b) for a, b in zip(first, last, strict=True)]
    chosen = np.concatenate([np.empty(0, np.int64), *each]).astype(np.int64)
    spans = np.column_stack((visits.window_open_ms[chosen], visits.window_close_ms[chosen]))
    until = np.cumsum(last - first)
    return np.column_stack((visits.work_ms[order], until - (last - first), until)), spans


def _legs(problem: Problem, shift: int, order: NDArray[np.int64]) -> NDArray[np.int64]:
    """Return ms and mm between the visits, the start and the end, int64 (2, m + 2, m + 2)."""
    ends = (problem.shifts.start_place[shift], problem.shifts.end_place[shift])
    places = np.concatenate((problem.visits.place[order], ends))
    return np.stack(leg_tables(problem.travel, places))
