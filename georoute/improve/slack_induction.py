"""Days together by slack induction: strings of stops out, greedy insertion back, annealed."""

from __future__ import annotations

import time
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from georoute.improve.guide import FEWER_TOURS, facts_of, guide_of
from georoute.kernels.annealing import Book, anneal
from georoute.kernels.random_stream import new_stream
from georoute.kernels.slack_state import COUNT, FARE, LOSS, MONEY, STOP, rows_of, write_row
from georoute.kernels.windowed_rows import Clockwork, price_by_clock
from georoute.problem import MICRO, Problem, Solution
from georoute.problem.board import most_stops
from georoute.timetable import solution_cost

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from georoute.domain.run import Effort, Progress, ShouldStop

__all__ = ["ImproveResult", "improve"]

HOT = 1.0
COLD = 0.01
"""Temperatures at the start and at the end, as multiples of the mean leg."""
CHUNK_S = 0.04
"""Seconds between two looks at the caller's wishes."""
FIRST_CHUNK = 50


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ImproveResult:
    """The best solution found, and how many steps were done."""

    solution: Solution
    steps: int


class _Schedule:
    """How far the search is, 0 to 1: by its steps, or by the caller's budget in time."""

    def __init__(self, steps: int, share_spent: Callable[[], float] | None) -> None:
        self.done = 0
        self._steps = steps
        self._share_spent = share_spent
        self._chunk = FIRST_CHUNK

    @property
    def share(self) -> float:
        if self._share_spent is not None:
            return self._share_spent()
        return self.done / self._steps if self._steps else 1.0

    def next_chunk(self) -> int:
        """Return how many steps to do next.

        The temperature is set per chunk, so without a budget in time all chunks are of one size:
        chunks that depended on the clock would make the result depend on it too.
        """
        if self._share_spent is None:
            return min(FIRST_CHUNK, self._steps - self.done)
        return self._chunk

    def took(self, steps: int, seconds: float) -> None:
        """Count steps that are done, and learn how many fit between two looks at the clock."""
        self.done += steps
        self._chunk = int(np.clip(steps * CHUNK_S / max(seconds, 1e-9), 1, 100_000))


class _Search:
    """Arrays of one search, and their way back to a solution."""

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
        for s, order in enumerate(solution.orders):
            write_row(self.facts, self.rows, s, order)
            if self.clockwork is not None:
                price_by_clock(self.clockwork, self.rows, s)
        absent = solution.unplaced(number)
        money = self.rows.sum[:, MONEY].sum()
        lost = self.loss[absent].sum()
        spare = np.zeros(number, np.int64)
        self.book = Book(
            best_stop=self.rows.cell[STOP].copy(),
            best_count=self.rows.sum[:, COUNT].copy(),
            changed=np.zeros(count, np.int64),
            absent=np.concatenate([absent, spare])[:number],
            absent_before=spare.copy(),
            absences=spare.copy(),
            sums=np.array([money, lost, absent.shape[0], money, lost, 0], np.int64),
            touch=np.zeros(count + 1, np.int64),
            seen=np.zeros(count, np.int64),
            blink=np.full(1, 100, np.int64),
        )

    @property
    def loss(self) -> NDArray[np.int64]:
        return self.facts.visit[:, LOSS]

    @property
    def mean_leg(self) -> float:
        legs = float((self.rows.sum[:, COUNT] + (self.rows.sum[:, COUNT] > 0)).sum())
        return float(self.rows.sum[:, FARE].sum()) / legs if legs else 1.0

    def step(self, steps: int, warmth: float) -> None:
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
        return Solution(
            orders=tuple(
                self.book.best_stop[s, 1 : count + 1].copy()
                for s, count in enumerate(self.book.best_count)
            )
        )


def _value(problem: Problem, solution: Solution, loss: NDArray[np.int64]) -> tuple[int, int]:
    lost = int(loss[solution.unplaced(problem.visit_count)].sum())
    tours = sum(order.shape[0] > 0 for order in solution.orders)
    return lost, solution_cost(problem, solution) + tours * FEWER_TOURS


def improve(  # noqa: PLR0913 - a budget is several plain values
    problem: Problem,
    solution: Solution,
    *,
    effort: Effort,
    seed: int,
    progress: Progress,
    should_stop: ShouldStop,
    share_spent: Callable[[], float] | None = None,
) -> ImproveResult:
    """Improve all days together, from any feasible solution, never to a worse one.

    What is left out comes first, by rank and then by worth; then money decides. The search does
    ``effort.improve_steps`` steps per visit and is the same on every run; with ``share_spent``,
    which tells the share, 0 to 1, of a budget in time that is used, it cools and ends by that
    instead. ``should_stop`` ends it at once with the best so far.

    J. Christiaens, G. Vanden Berghe, "Slack induction by string removals for vehicle routing
    problems", Transportation Science 54 (2020) 417-433.
    """
    if problem.visit_count == 0 or problem.shift_count == 0:
        return ImproveResult(solution=solution, steps=0)
    search = _Search(problem, solution, seed)
    schedule = _Schedule(effort.improve_steps * problem.visit_count, share_spent)
    search.step(1, 0.0)
    hot = HOT * search.mean_leg
    while (share := schedule.share) < 1.0 and not should_stop():
        progress(
            "days",
            fraction=share,
            cost=int(search.book.sums[0]) / MICRO,
            best_cost=int(search.book.sums[3]) / MICRO,
        )
        steps = schedule.next_chunk()
        begin = time.perf_counter()
        search.step(steps, hot * (COLD / HOT) ** share)
        schedule.took(steps, time.perf_counter() - begin)
    found = search.best()
    if _value(problem, found, search.loss) < _value(problem, solution, search.loss):
        solution = found
    return ImproveResult(solution=solution, steps=schedule.done)
