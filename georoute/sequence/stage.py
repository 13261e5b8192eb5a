"""Put the visits of each shift in the best order found."""

from __future__ import annotations

from itertools import permutations
from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.run import never_stop, no_progress
from georoute.kernels.clock import TourTimes, time_tour, tour_cost
from georoute.kernels.day_net import tour_money
from georoute.kernels.random_stream import new_stream
from georoute.problem import Solution
from georoute.sequence.budget import KickBudget
from georoute.sequence.day import Rates, gather
from georoute.sequence.directed import order_directed
from georoute.sequence.result import SequencedTour, SequenceResult, Step
from georoute.sequence.symmetric import order_symmetric
from georoute.sequence.timed import by_closing, order_timed
from georoute.sequence.trail import Trail

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from georoute.domain.run import Effort, Progress, ShouldStop
    from georoute.problem import Problem

__all__ = ["sequence", "sequence_tour"]

TRIED_WHOLE = 3
"""Visits up to which every order is tried."""


LARGEST_BY_CLOCK = 2_000
"""Visits up to which a day is searched by its times: its tables take 16 bytes a pair."""

SHARE_BY_CLOCK = 0.1
"""Share of the kicks made when days are searched by their times: each takes far longer."""


def _nothing_spent() -> float:
    """Tell that there is no budget in time."""
    return 0.0


def sequence_tour(  # noqa: PLR0913 - a budget is several plain values
    problem: Problem,
    shift: int,
    order: NDArray[np.int64],
    *,
    kicks: int,
    seed: int,
    keep_log: bool = False,
    should_stop: ShouldStop = never_stop,
    share_spent: Callable[[], float] = _nothing_spent,
) -> SequencedTour:
    """Order the visits of one shift.

    Parameters
    ----------
    problem
        The array problem.
    shift
        Index of the shift.
    order
        Its visits (int64), in any order; the one handed in is a start, and is returned
        unchanged unless a better one is found.
    kicks
        Number of random exchanges, each followed by repair.
    seed
        Seed of the random stream; each shift has its own, so that shifts can be ordered in any
        sequence.
    keep_log
        Whether to return the steps that led from ``order`` to the result.
    should_stop
        Asked every few milliseconds of work.
    share_spent
        Share, 0 to 1, of a budget in time that is used: the search cools with it.

    Returns
    -------
    SequencedTour
        Never later, never further beyond the shift's limits, and never dearer than ``order``.
    """
    attempt = _Attempt(problem, shift, np.ascontiguousarray(order, np.int64), keep_log=keep_log)
    if order.shape[0] <= TRIED_WHOLE:
        attempt.try_all()
        return attempt.result()
    stream = new_stream(seed, shift)

    def budget(share: float) -> KickBudget:
        return KickBudget(
            int(kicks * share), stream=stream, should_stop=should_stop, share_spent=share_spent
        )

    attempt.run(budget)
    return attempt.result()


def sequence(  # noqa: PLR0913 - as sequence_tour
    problem: Problem,
    solution: Solution,
    *,
    effort: Effort,
    seed: int,
    progress: Progress = no_progress,
    should_stop: ShouldStop = never_stop,
    keep_log: bool = True,
) -> SequenceResult:
    """Order the visits of every shift; ``effort`` sets the kicks for each stop."""
    orders: list[NDArray[np.int64]] = []
    steps: list[tuple[Step, ...]] = []
    for shift, order in enumerate(solution.orders):
        progress("order", fraction=shift / len(solution.orders))
        found = sequence_tour(
            problem,
            shift,
            order,
            kicks=effort.kicks_per_stop * order.shape[0],
            seed=seed,
            keep_log=keep_log,
            should_stop=should_stop,
        )
        orders.append(found.order)
        steps.append(found.steps)
    progress("order", fraction=1.0)
    return SequenceResult(solution=Solution(orders=tuple(orders)), steps=tuple(steps))


class _Attempt:
    """The best order so far of one shift, what it is worth by the clock, and the steps to it."""

    def __init__(
        self, problem: Problem, shift: int, order: NDArray[np.int64], *, keep_log: bool
    ) -> None:
        self.problem = problem
        self.shift = shift
        self.order = order
        self.keep_log = keep_log
        self.steps: list[Step] = []
        self.kicks = 0
        self.at_cheapest = False
        self.times = self._clock(order)
        self.worth = self._worth(self.times)

    def result(self) -> SequencedTour:
        """Return the best order found."""
        return SequencedTour(order=self.order, steps=tuple(self.steps), kicks=self.kicks)

    def _clock(self, order: NDArray[np.int64]) -> TourTimes:
        problem = self.problem
        return time_tour(problem.travel, problem.visits, problem.shifts, self.shift, order)

    def _worth(self, times: TourTimes) -> tuple[int, int]:
        """Return lateness and excess in ms, then money: the less the better."""
        money = tour_cost(self.problem.shifts, self.shift, times)
        return int(times.late_ms) + int(times.excess_ms), int(money)

    def offer(self, order: NDArray[np.int64], steps: list[Step]) -> None:
        """Take ``order`` if the clock says it is better."""
        times = self._clock(order)
        worth = self._worth(times)
        if worth < self.worth:
            self.order, self.times, self.worth = order, times, worth
            self.steps.extend(steps)

    def try_all(self) -> None:
        """Offer every order of the visits."""
        given, before = self.order, self.worth[1]
        for way in permutations(given.tolist()):
            self.offer(np.array(way, np.int64), [])
        if self.keep_log and self.order is not given:
            step = Step(
                kind="start",
                order_before=given,
                order_after=self.order,
                cost_before=before,
                cost_after=self.worth[1],
            )
            self.steps.append(step)

    def run(self, budget: Callable[[float], KickBudget]) -> None:
        """Search by the money of travel, and further where that is not the whole story."""
        shifts, shift = self.problem.shifts, self.shift
        hour, overtime = float(shifts.hour_rate[shift]), float(shifts.overtime_rate[shift])
        length = float(shifts.length_rate[shift])
        if hour == 0.0 and length == 0.0:
            self._by_travel(Rates(time=1.0, length=0.0), budget(1.0))
        else:
            self._by_travel(Rates(time=hour, length=length), budget(1.0))
        duration = self.times.finish_ms - self.times.depart_ms
        if length > 0.0 and duration > shifts.paid_ms[shift] and overtime != hour:
            self._by_travel(Rates(time=overtime, length=length), budget(1.0))
        if length > 0.0 and self.worth[0] > 0:
            self._by_travel(Rates(time=1.0, length=0.0), budget(1.0))
        on_time = self.times.wait_ms == 0 and self.times.late_ms == 0
        if not (on_time and self.at_cheapest) and self.order.shape[0] <= LARGEST_BY_CLOCK:
            self._by_clock(budget(SHARE_BY_CLOCK))

    def _by_travel(self, rates: Rates, budget: KickBudget) -> None:
        """Offer the cheapest order by the money of legs alone, in both directions.

        An order that is cheapest by travel and waits nowhere cannot be bettered by its times:
        ``at_cheapest`` tells whether the best order so far is as cheap to travel.
        """
        day = gather(self.problem, self.shift, self.order, rates=rates)
        start = day.tour_of(self.order)
        trail = Trail(day.order_of, day.money, kept=self.keep_log)
        search = order_symmetric if day.symmetric else order_directed
        found = day.order_of(search(day, start, budget=budget, trail=trail))
        self.kicks += budget.used
        self.offer(found, trail.steps)
        if day.symmetric and not day.linked:
            self.offer(np.ascontiguousarray(found[::-1]), trail.steps)
        least, here = (tour_money(*day.net, day.tour_of(way)) for way in (found, self.order))
        self.at_cheapest = bool(here <= least)

    def _by_clock(self, budget: KickBudget) -> None:
        """Offer the best order found by the clock, from the better of two starts."""
        trail = Trail(lambda order: order, kept=self.keep_log)
        trail.begin(self.order, self.worth[1])
        first = by_closing(self.problem, self.order)
        times = self._clock(first)
        if self._worth(times) >= self.worth:
            first = self.order
        trail.note("start", first, self._worth(self._clock(first))[1])
        found = order_timed(self.problem, self.shift, first, budget=budget, trail=trail)
        self.kicks += budget.used
        self.offer(found, trail.steps)
