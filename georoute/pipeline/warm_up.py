"""Compile the kernels before the clock of a search starts."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.run import never_stop, no_progress
from georoute.improve import improve, relocate
from georoute.problem import Problem, Solution
from georoute.sequence import sequence_tour

if TYPE_CHECKING:
    from georoute.domain.run import Effort
    from georoute.kernels.arrays import Shifts, Visits

__all__ = ["warm_up"]

FEW_VISITS = 4
FEW_SHIFTS = 2


def _few_visits(visits: Visits, shifts: int) -> Visits:
    windows = int(visits.window_ptr[: FEW_VISITS + 1][-1])
    return type(visits)(
        place=visits.place[:FEW_VISITS],
        work_ms=visits.work_ms[:FEW_VISITS],
        load=visits.load[:FEW_VISITS],
        window_ptr=visits.window_ptr[: FEW_VISITS + 1],
        window_open_ms=visits.window_open_ms[:windows],
        window_close_ms=visits.window_close_ms[:windows],
        worth=visits.worth[:FEW_VISITS],
        level=visits.level[:FEW_VISITS],
        # A strided slice would be another type to the compiler.
        eligible=np.ascontiguousarray(visits.eligible[:FEW_VISITS, :shifts]),
    )


def _few_shifts(shifts: Shifts) -> Shifts:
    return type(shifts)._make(array[:FEW_SHIFTS] for array in shifts)


def warm_up(problem: Problem, effort: Effort) -> None:
    """Run every search kernel once on a corner of the problem.

    The first run on a machine compiles the kernels, which takes far longer than a search;
    later runs find them in the cache. A search limited in seconds must not pay for it.
    """
    if problem.visit_count == 0 or problem.shift_count == 0:
        return  # there is nothing to search
    shifts = _few_shifts(problem.shifts)
    count = int(shifts.open_ms.shape[0])
    corner = replace(problem, shifts=shifts, visits=_few_visits(problem.visits, count))
    everything = np.arange(corner.visit_count)
    nothing = np.empty(0, np.int64)
    solution = Solution(orders=(everything, *(nothing for _ in range(count - 1))))
    sequence_tour(corner, 0, everything, kicks=2, seed=0, keep_log=True, should_stop=never_stop)
    relocate(
        corner,
        solution,
        effort=replace(effort, relocation_rounds=1),
        seed=0,
        progress=no_progress,
        should_stop=never_stop,
    )
    improve(
        corner,
        Solution(orders=tuple(nothing for _ in range(count))),
        effort=replace(effort, improve_steps=2),
        seed=0,
        progress=no_progress,
        should_stop=never_stop,
    )
