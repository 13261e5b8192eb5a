"""How many kicks are left, how warm the search still is, and whether the caller wants an end."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable

    import numpy as np
    from numpy.typing import NDArray

    from georoute.domain.run import ShouldStop

__all__ = ["KickBudget"]


class KickBudget:
    """Counts the kicks of one day and asks the caller, between chunks, whether to go on.

    ``share_spent`` tells which share, 0 to 1, of a budget in time is used; the search cools
    with the kicks or with the time, whichever is further on.
    """

    def __init__(
        self,
        kicks: int,
        *,
        stream: NDArray[np.uint64],
        should_stop: ShouldStop,
        share_spent: Callable[[], float],
    ) -> None:
        self.kicks = kicks
        self.used = 0
        self.stream = stream
        self._should_stop = should_stop
        self._share_spent = share_spent
        self._stopped = False

    def stopped(self) -> bool:
        """Ask the caller whether to end; once true, true for good."""
        self._stopped = self._stopped or bool(self._should_stop())
        return self._stopped

    def next_kicks(self, most: int) -> int:
        """Return how many kicks to make before asking again, 0 for none."""
        if self.used >= self.kicks or self.stopped():
            return 0
        return min(most, self.kicks - self.used)

    @property
    def spent(self) -> float:
        """Share of the caller's budget in time that is used."""
        return min(1.0, max(0.0, self._share_spent()))
