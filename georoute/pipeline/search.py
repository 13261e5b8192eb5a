"""Split, order, and move visits between days until nothing gets better or the effort is used."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.run import Aim
from georoute.improve import improve, relocate
from georoute.pipeline.exchange_log import ExchangeLog
from georoute.problem import MICRO, Solution
from georoute.sequence import sequence_tour
from georoute.split import split
from georoute.timetable import order_cost, passable

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

    from georoute.domain.run import Effort, Progress
    from georoute.pipeline.budget import Budget
    from georoute.problem import Packed, Problem

__all__ = ["Found", "search"]

TOGETHER_SHARE = 0.95
"""Share of a limit in seconds after which days are left as they are, and put in order."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Found:
    """The solution, its log, and ``(stage, money, visits placed)`` after each stage."""

    solution: Solution
    log: ExchangeLog
    stages: tuple[tuple[str, float, int], ...]


class _Search:
    """The state of one search: the solution at hand and what is told about it."""

    def __init__(self, packed: Packed, effort: Effort, seed: int, progress: Progress) -> None:
        self.packed = packed
        self.problem: Problem = packed.problem
        self.effort = effort
        self.seed = seed
        self.progress = progress
        self.log = ExchangeLog(packed)
        self.stages: list[tuple[str, float, int]] = []
        self.orders: list[NDArray[np.int64]] = []

    @property
    def solution(self) -> Solution:
        return Solution(orders=tuple(self.orders))

    def _driven(self, shift: int) -> NDArray[np.int64]:
        """Return the order of a shift without the visits that no way leads to yet."""
        return passable(self.problem, shift, self.orders[shift])

    def _cost(self, shift: int) -> int:
        return order_cost(self.problem, shift, self._driven(shift))

    def note(self, stage: str) -> None:
        shifts = range(len(self.orders))
        placed = sum(self._driven(s).shape[0] for s in shifts)
        self.stages.append((stage, sum(map(self._cost, shifts)) / MICRO, placed))

    def split(self) -> None:
        self.progress("split", fraction=0.0)
        self.orders = list(split(self.problem, seed=self.seed).orders)
        for shift, order in enumerate(self.orders):
            self.log.begin(shift, order)
        self.note("split")

    def order(self, shifts: Iterable[int], *, budget: Budget, round_number: int) -> None:
        """Put the stops of each of ``shifts`` in the best order found."""
        busy = [s for s in shifts if self.orders[s].shape[0] > 0]
        costs = [self._cost(s) for s in range(len(self.orders))]
        for done, shift in enumerate(busy):
            if budget():
                break
            self.progress("order", fraction=done / len(busy), cost=sum(costs) / MICRO)
            found = sequence_tour(
                self.problem,
                shift,
                self.orders[shift],
                kicks=self.effort.kicks_per_stop * self.orders[shift].shape[0],
                seed=self.seed + round_number,
                keep_log=True,
                should_stop=budget,
            )
            for step in found.steps:
                self.log.add(shift, step.kind, step.order_after)
            self.orders[shift] = found.order
            costs[shift] = self._cost(shift)
            self.log.add(shift, "order", found.order)

    def fit(self, *, budget: Budget) -> None:
        """Move visits between days until every limit holds; leave out what fits nowhere."""
        found = relocate(
            self.problem,
            self.solution,
            effort=self.effort,
            seed=self.seed,
            progress=self.progress,
            should_stop=budget,
        )
        self._take(found.solution)

    def together(self, *, budget: Budget) -> list[int]:
        """Improve all days together; return the shifts whose visits changed."""
        if budget():
            return []
        found = improve(
            self.problem,
            self.solution,
            effort=self.effort,
            seed=self.seed,
            progress=self.progress,
            should_stop=budget,
            share_spent=(lambda: budget.share_spent() / TOGETHER_SHARE) if budget.timed else None,
            fewest_days=self.packed.programme.aim is Aim.FEWEST_DAYS,
        )
        return self._take(found.solution)

    def _take(self, solution: Solution) -> list[int]:
        before, self.orders = self.orders, list(solution.orders)
        touched = [
            s
            for s, (old, new) in enumerate(zip(before, self.orders, strict=True))
            if not np.array_equal(old, new)
        ]
        for shift in touched:
            self.log.add(shift, "relocate", self.orders[shift])
        return touched


def search(
    packed: Packed, *, effort: Effort, seed: int, progress: Progress, budget: Budget
) -> Found:
    """Find days and orders for all visits; the result keeps every limit.

    Without a limit in seconds the work is counted in steps and the same on every run. The search
    ends early, with the best found so far, when the budget says so.
    """
    state = _Search(packed, effort, seed, progress)
    state.split()
    state.order(range(len(state.orders)), budget=budget, round_number=0)
    state.note("order")
    state.fit(budget=budget)
    touched = state.together(budget=budget)
    state.order(touched, budget=budget, round_number=1)
    state.note("days together")
    progress("days", fraction=1.0)
    return Found(solution=state.solution, log=state.log, stages=tuple(state.stages))
