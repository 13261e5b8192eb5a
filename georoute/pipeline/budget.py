"""When a search ends: effort used, seconds used, or the caller's wish."""

from __future__ import annotations

import time
from typing import TYPE_CHECKING

from georoute.domain.plan import StopRule

if TYPE_CHECKING:
    from georoute.domain.run import ShouldStop

__all__ = ["Budget"]


class Budget:
    """Wraps the caller's stop signal with a deadline and remembers which of them fired.

    A budget is itself a ``ShouldStop``: hand it to the stages. The clock starts when the budget
    is made, so make it after the kernels are compiled.
    """

    def __init__(self, should_stop: ShouldStop, *, seconds: float | None) -> None:
        self._should_stop = should_stop
        self._begin = time.perf_counter()
        self._seconds = seconds
        self.stop_rule = StopRule.EFFORT_USED

    @property
    def timed(self) -> bool:
        """Whether there is a limit in seconds."""
        return self._seconds is not None

    def share_spent(self) -> float:
        """Return the share of the seconds that is used, from 0 up; 0 without a limit."""
        if self._seconds is None:
            return 0.0
        if self._seconds <= 0:
            return 1.0
        return (time.perf_counter() - self._begin) / self._seconds

    def __call__(self) -> bool:
        """Tell whether the search has to end now."""
        if self.stop_rule is StopRule.EFFORT_USED:
            if self._should_stop():
                self.stop_rule = StopRule.INTERRUPTED
            elif self.share_spent() >= 1.0:
                self.stop_rule = StopRule.SECONDS_USED
        return self.stop_rule is not StopRule.EFFORT_USED
