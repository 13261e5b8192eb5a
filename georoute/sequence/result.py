"""What ordering a day gives back."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from georoute.problem import Solution

__all__ = ["SequenceResult", "SequencedTour", "Step"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Step:
    """One accepted change of the order of a day's visits.

    ``kind`` is ``start`` (a start tour replaced the order handed in), ``two_opt`` (two legs
    exchanged), ``or_opt`` (up to three stops moved together), ``or_3opt`` (two neighbouring
    stretches exchanged, or another exchange of three legs), ``lin_kernighan`` (more legs in one
    chain) or ``kick`` (a random exchange and its repair, together a gain). ``order_before`` and
    ``order_after`` are visits (int64). ``cost_before`` and ``cost_after`` are the money of
    travel in micro-units; on days with opening windows, of the whole day.
    """

    kind: str
    order_before: NDArray[np.int64]
    order_after: NDArray[np.int64]
    cost_before: int
    cost_after: int


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SequencedTour:
    """The best order found for one day, how it came about, and how many kicks were made."""

    order: NDArray[np.int64]
    steps: tuple[Step, ...]
    kicks: int = 0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SequenceResult:
    """A solution with every day in order, and the steps of each shift."""

    solution: Solution
    steps: tuple[tuple[Step, ...], ...]
