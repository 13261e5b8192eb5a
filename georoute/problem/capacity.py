"""The sum that comes before any tour: hours needed against hours of shifts."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.plan import Capacity
from georoute.kernels.spanning import half_legs_ms, spanning_tree_ms

if TYPE_CHECKING:
    from georoute.problem.arrays import Problem

__all__ = ["capacity", "least_travel_ms"]

MS_PER_HOUR = 3_600_000
MOST_VISITS = 20_000
"""Beyond so many visits the table of all legs is not gone through; 0 is a bound all the same."""


def least_travel_ms(problem: Problem) -> int:
    """Return a travel time (ms) that no plan of all visits can be below.

    The larger of two lower bounds. (1) Spanning tree: every tour starts and ends at a base, so
    the legs of all tours, with the bases joined into one, connect every visit to the bases; they
    contain a spanning tree, and no spanning tree weighs less than the least one when an edge
    costs the cheaper of its directions. It holds for any number of tours. (2) Half legs: each
    visit has one leg in and one leg out, and each leg belongs to at most two visits, so half
    the sum of the shortest legs in and out of each visit is never more than all legs together.
    Neither needs symmetry or the triangle inequality. Visits that cannot be reached count
    nothing; beyond ``MOST_VISITS`` visits the bound is 0.
    """
    if problem.visit_count > MOST_VISITS or problem.shift_count == 0:
        return 0
    bases = np.unique(np.concatenate([problem.shifts.start_place, problem.shifts.end_place]))
    places = problem.visits.place
    return max(
        int(spanning_tree_ms(problem.travel, places, bases)),
        int(half_legs_ms(problem.travel, places, bases)),
    )


def capacity(problem: Problem) -> Capacity:
    """Return the work and the least travel of all visits against the hours of all shifts.

    Work includes access. The hours of a shift are its paid length, cut where it must end
    sooner, less the write-up; overtime is what may be worked beyond. A positive ``short_h``
    proves that not everything can be done; 0 proves nothing. The travel is a lower bound: see
    ``least_travel_ms``.
    """
    shifts = problem.shifts
    usable_ms = np.minimum(shifts.limit_ms, shifts.close_ms - shifts.open_ms)
    paid_ms = np.minimum(shifts.paid_ms, usable_ms)
    free_ms = np.maximum(0, paid_ms - shifts.write_up_ms)
    # Where the write-up is longer than the paid length, the rest of it eats up overtime.
    overtime_ms = np.maximum(0, usable_ms - np.maximum(paid_ms, shifts.write_up_ms))
    return Capacity(
        visits=problem.visit_count,
        shifts=problem.shift_count,
        work_h=float(problem.visits.work_ms.sum()) / MS_PER_HOUR,
        least_travel_h=least_travel_ms(problem) / MS_PER_HOUR,
        shift_h=float(free_ms.sum(dtype=np.float64)) / MS_PER_HOUR,
        overtime_h=float(overtime_ms.sum(dtype=np.float64)) / MS_PER_HOUR,
    )
