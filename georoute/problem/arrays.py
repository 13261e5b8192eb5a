"""THE array problem, and a solution of it.

Everything a search needs, and nothing else, in flat arrays: built by ``georoute.problem.pack``
from a programme and a register, or directly by anyone who has arrays (benchmark readers do).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.kernels.arrays import Shifts, Travel, Visits

__all__ = ["MICRO", "Problem", "Solution"]

MICRO = 1_000_000
"""Micro-units of money in one unit of the currency."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Problem:
    """What has to be planned. See ``georoute.kernels.arrays`` for every array, shape and unit.

    ``plane_x_m`` and ``plane_y_m`` (float64, (P,)) place the P places on a plane, for clusters
    and neighbours only; costs never come from them unless ``travel`` says so.
    """

    travel: Travel
    visits: Visits
    shifts: Shifts
    plane_x_m: NDArray[np.float64]
    plane_y_m: NDArray[np.float64]

    @property
    def visit_count(self) -> int:
        """Number of visits."""
        return int(self.visits.place.shape[0])

    @property
    def shift_count(self) -> int:
        """Number of shifts."""
        return int(self.shifts.open_ms.shape[0])


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Solution:
    """One order of visits (int64) for each shift, empty where the shift stays at its base.

    Visits in no order are not placed.
    """

    orders: tuple[NDArray[np.int64], ...]

    def unplaced(self, visit_count: int) -> NDArray[np.int64]:
        """Return the visits that are in no order, ascending."""
        missing = np.ones(visit_count, np.bool_)
        for order in self.orders:
            missing[order] = False
        return np.flatnonzero(missing)
