"""Days together by slack induction: strings of stops out, greedy insertion back, annealed."""

from __future__ import annotations

import time
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from georoute.improve.fewer_tours import FewestDays
from georoute.improve.guide import FEWER_TOURS
from georoute.improve.search_state import SearchState
from georoute.timetable import solution_cost

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from georoute.domain.run import Effort, Progress, ShouldStop
    from georoute.problem import Problem, Solution

__all__ = ["ImproveResult", "improve"]

HOT = 1.0
COLD = 0.01
"""Temperatures at the start and at the end, as multiples of the mean leg."""
LEAST_VISITS = 50
"""A smaller register is searched as long as one of so many visits: it costs next to nothing."""
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


def _value(
    problem: Problem, solution: Solution, loss: NDArray[np.int64], *, fewest_days: bool
) -> tuple[int, int, int]:
    lost = int(loss[solution.unplaced(problem.visit_count)].sum())
    tours = sum(order.shape[0] > 0 for order in solution.orders)
    money = solution_cost(problem, solution) + tours * FEWER_TOURS
    return lost, tours if fewest_days else 0, money


def improve(  # noqa: PLR0913 - a budget is several plain values
    problem: Problem,
    solution: Solution,
    *,
    effort: Effort,
    seed: int,
    progress: Progress,
    should_stop: ShouldStop,
    share_spent: Callable[[], float] | None = None,
    fewest_days: bool = False,
) -> ImproveResult:
    """Improve all days together, from any feasible solution, never to a worse one.

    What is left out comes first, by rank and then by worth; then, with ``fewest_days``, the
    number of tours; then money decides. The search does ``effort.improve_steps`` steps per visit
    and is the same on every run; with ``share_spent``, which tells the share, 0 to 1, of a budget
    in time that is used, it cools and ends by that instead. ``should_stop`` ends it at once with
    the best so far.

    J. Christiaens, G. Vanden Berghe, "Slack induction by string removals for vehicle routing
    problems", Transportation Science 54 (2020) 417-433.
    """
    if problem.visit_count == 0 or problem.shift_count == 0:
        return ImproveResult(solution=solution, steps=0)
    state = SearchState(problem, solution, seed)
    visits = max(problem.visit_count, LEAST_VISITS)
    schedule = _Schedule(effort.improve_steps * visits, share_spent)
    days = FewestDays(problem, state) if fewest_days else None
    state.step(1, 0.0)
    hot = HOT * state.mean_leg
    while (share := schedule.share) < 1.0 and not should_stop():
        progress("days", fraction=share, cost=state.cost, best_cost=state.best_cost)
        if days is not None:
            days.steer(share)
        steps = schedule.next_chunk()
        begin = time.perf_counter()
        state.step(steps, hot * (COLD / HOT) ** share)
        schedule.took(steps, time.perf_counter() - begin)
    found = state.best()
    better = _value(problem, found, state.loss, fewest_days=fewest_days)
    if better < _value(problem, solution, state.loss, fewest_days=fewest_days):
        solution = found
    return ImproveResult(solution=solution, steps=schedule.done)
