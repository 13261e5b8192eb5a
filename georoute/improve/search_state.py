"""The arrays of one slack-induction search, and their way back to a solution."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.improve.guide import facts_of, guide_of
from georoute.kernels.annealing import (
    BEST_LOSS,
    BEST_MONEY,
    IMPROVEMENTS,
    LOSS_NOW,
    MISSING,
    MONEY_NOW,
    Book,
    anneal,
)
from georoute.kernels.random_stream import new_stream
from georoute.kernels.recreate import MOST_TOURS
from georoute.kernels.slack_state import COUNT, FARE, LOSS, MONEY, STOP, WHERE, rows_of, write_row
from georoute.kernels.windowed_rows import INFEASIBLE, Clockwork, price_by_clock
from georoute.problem import MICRO, Solution
from georoute.problem.board import most_stops

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

    from georoute.problem import Problem

__all__ = ["SearchState"]

FIRST_BLINK = 100


class SearchState:
    """The tours at hand, the best tours, and the one call that changes them."""

    def __init__(self, problem: Problem, solution: Solution, seed: int) -> None:
        count, number = problem.shift_count, problem.visit_count
        windowed = problem.visits.window_open_ms.shape[0] > 0
        self.clockwork = (
            Clockwork(problem.travel, problem.visits, problem.shifts) if windowed else None
        )
        self.facts = facts_of(problem)
        self.guide = guide_of(problem, self.facts)
        width = max(most_stops(problem), *(order.shape[0] for order in solution.orders))
        self.rows = rows_of(count, number, width)
        self.backup = rows_of(count, 0, width)
        self.stream = new_stream(seed, 0)
        self.book = Book(
            best_stop=np.zeros((count, width + 2), np.int64),
            best_count=np.zeros(count, np.int64),
            changed=np.ones(count, np.int64),
            absent=np.zeros(number, np.int64),
            absent_before=np.zeros(number, np.int64),
            absences=np.zeros(number, np.int64),
            sums=np.zeros(6, np.int64),
            touch=np.zeros(count + 1, np.int64),
            seen=np.zeros(count, np.int64),
            meter=np.array([FIRST_BLINK, count, 0], np.int64),
        )
        self._load(solution.orders)
        self._keep_as_best()

    @property
    def loss(self) -> NDArray[np.int64]:
        """What is lost with each visit, int64 (V,)."""
        return self.facts.visit[:, LOSS]

    @property
    def mean_leg(self) -> float:
        """Mean money of a leg of the tours at hand, micro-units."""
        legs = float((self.rows.sum[:, COUNT] + (self.rows.sum[:, COUNT] > 0)).sum())
        return float(self.rows.sum[:, FARE].sum()) / legs if legs else 1.0

    @property
    def cost(self) -> float:
        """Money of the tours at hand."""
        return int(self.book.sums[MONEY_NOW]) / MICRO

    @property
    def best_cost(self) -> float:
        """Money of the best tours."""
        return int(self.book.sums[BEST_MONEY]) / MICRO

    @property
    def best_tours(self) -> int:
        """How many of the best tours have stops."""
        return int((self.book.best_count > 0).sum())

    @property
    def all_placed(self) -> bool:
        """Whether the best tours leave nothing out."""
        return int(self.book.best_count.sum()) == int(self.loss.shape[0])

    @property
    def improvements(self) -> int:
        """How often the best tours were replaced."""
        return int(self.book.sums[IMPROVEMENTS])

    def step(self, steps: int, warmth: float) -> None:
        """Do ``steps`` rounds of ruin and recreate at temperature ``warmth``."""
        anneal(
            self.clockwork,
            self.facts,
            self.rows,
            self.backup,
            self.guide,
            self.book,
            steps,
            warmth,
            self.stream,
        )

    def best(self) -> Solution:
        """Return the best tours."""
        return Solution(
            orders=tuple(
                self.book.best_stop[s, 1 : count + 1].copy()
                for s, count in enumerate(self.book.best_count)
            )
        )

    def close_tour(self, s: int) -> None:
        """Leave out all visits of tour ``s`` and allow one tour less than there were.

        The next state that leaves out no more than the best so far then counts as the best,
        whatever its money.
        """
        orders = [order if k != s else order[:0] for k, order in enumerate(self._orders())]
        self._load(orders)
        self.book.meter[MOST_TOURS] = sum(order.shape[0] > 0 for order in orders)
        self.book.changed[s] = 1
        self.book.sums[BEST_MONEY] = INFEASIBLE

    def back_to_best(self) -> None:
        """Go on from the best tours, with no more tours than they are."""
        self._load(self.best().orders)
        self.book.meter[MOST_TOURS] = self.best_tours
        self._keep_as_best()

    def reopen(self) -> None:
        """Go on from the best tours with any number of them; best is then only what loses less."""
        self.back_to_best()
        self.book.meter[MOST_TOURS] = self.book.best_count.shape[0]
        self.book.sums[BEST_MONEY] = -INFEASIBLE

    def _orders(self) -> list[NDArray[np.int64]]:
        return [
            self.rows.cell[STOP, s, 1 : count + 1].copy()
            for s, count in enumerate(self.rows.sum[:, COUNT])
        ]

    def _load(self, orders: Iterable[NDArray[np.int64]]) -> None:
        """Write tours into the rows, and bring everything that depends on them up to date."""
        self.rows.link[WHERE] = -1
        for s, order in enumerate(orders):
            write_row(self.facts, self.rows, s, order)
            if self.clockwork is not None:
                price_by_clock(self.clockwork, self.rows, s)
        absent = np.flatnonzero(self.rows.link[WHERE] < 0)
        self.book.absent[: absent.shape[0]] = absent
        self.book.sums[MONEY_NOW] = self.rows.sum[:, MONEY].sum()
        self.book.sums[LOSS_NOW] = self.loss[absent].sum()
        self.book.sums[MISSING] = absent.shape[0]

    def _keep_as_best(self) -> None:
        self.book.best_stop[:] = self.rows.cell[STOP]
        self.book.best_count[:] = self.rows.sum[:, COUNT]
        self.book.changed[:] = 0
        self.book.sums[[BEST_MONEY, BEST_LOSS]] = self.book.sums[[MONEY_NOW, LOSS_NOW]]
