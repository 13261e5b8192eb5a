"""Fewest days first: close one tour after the other while the rest can take its visits.

J. Christiaens, G. Vanden Berghe, "Slack induction by string removals for vehicle routing
problems", Transportation Science 54 (2020) 417-433, section 4.3: the tour whose visits were
absent least often is closed, and absences decide until every visit is placed again.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.slack_state import COUNT, WHERE

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.improve.search_state import SearchState
    from georoute.problem import Problem

__all__ = ["FewestDays", "least_tours"]

PLACING_END = 0.1
CLOSING_END = 0.4
REOPENING = 0.9
"""Shares of a search at which its phases end or begin."""
NEVER = -1


def least_tours(problem: Problem) -> int:
    """Return a number of tours below which not all visits fit: by work and by load alone."""
    shifts, visits = problem.shifts, problem.visits
    if problem.visit_count == 0:
        return 0
    span = np.minimum(shifts.limit_ms, shifts.close_ms - shifts.open_ms) - shifts.write_up_ms
    needs = ((visits.work_ms, span), (visits.load, shifts.load_limit))
    return max(1, *(_enough(int(need.sum()), room) for need, room in needs))


def _enough(total: int, room: NDArray[np.int64]) -> int:
    """Return how many of the largest rooms hold ``total``."""
    largest = np.minimum(np.sort(room)[::-1], UNREACHABLE).astype(np.float64)
    return int(np.searchsorted(np.cumsum(largest), total)) + 1 if total > 0 else 0


class FewestDays:
    """Steers a search through its phases, by the share of it that is done.

    Place all visits; close tours; lower the money of the tours that are left; and where visits
    are still left out, allow every tour again, for more visits only.
    """

    def __init__(self, problem: Problem, state: SearchState) -> None:
        self._state = state
        self._least = least_tours(problem)
        self._improvements = NEVER
        """Improvements when the last tour was closed."""
        self._closing = True
        self._reopened = False

    def steer(self, share: float) -> None:
        """Take the step that is due when ``share`` of the search, 0 to 1, is done."""
        state = self._state
        if self._closing:
            if share >= CLOSING_END:
                self._closing = False
                state.back_to_best()
            elif state.all_placed or share >= PLACING_END:
                self._close()
        elif share >= REOPENING and not self._reopened and not state.all_placed:
            self._reopened = True
            state.reopen()

    def _close(self) -> None:
        """Close a tour when the last one proved not to be needed."""
        state = self._state
        if state.improvements == self._improvements:
            return
        state.back_to_best()
        if state.best_tours <= (self._least if state.all_placed else 1):
            self._closing = False
            return
        state.close_tour(self._least_missed())
        self._improvements = state.improvements

    def _least_missed(self) -> int:
        """Return the tour whose visits were absent least often; of equals, one with few stops."""
        rows, book = self._state.rows, self._state.book
        counts = rows.sum[:, COUNT]
        absences = np.zeros(counts.shape[0])
        placed = rows.link[WHERE] >= 0
        np.add.at(absences, rows.link[WHERE][placed], book.absences[placed])
        used = np.flatnonzero(counts > 0)
        return int(used[np.lexsort((counts[used], absences[used]))[0]])
