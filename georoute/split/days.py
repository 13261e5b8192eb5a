"""Split the visits over the shifts: how many days, which visits together, on which shift."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from georoute.kernels.first_order import nearest_first
from georoute.problem import Solution
from georoute.problem.reasons import fits_alone
from georoute.split.estimate import estimate
from georoute.split.groups import Group, cluster_group

if TYPE_CHECKING:
    from collections.abc import Iterator

    from numpy.typing import NDArray

    from georoute.problem import Problem

__all__ = ["split"]


def _suitable(problem: Problem) -> NDArray[np.bool_]:
    """Return where each visit may go (V, S): shifts it fits on its own, else any eligible one."""
    alone = fits_alone(problem)
    hopeless = ~alone.any(axis=1)
    alone[hopeless] = problem.visits.eligible[hopeless]
    return alone


def _groups(suitable: NDArray[np.bool_]) -> Iterator[tuple[NDArray[np.int64], NDArray[np.int64]]]:
    """Yield visits and shifts that have to do with each other, and with no others."""
    patterns, pattern_of = np.unique(np.packbits(suitable, axis=1), axis=0, return_inverse=True)
    pattern_of = pattern_of.reshape(-1)
    n_patterns, n_shifts = patterns.shape[0], suitable.shape[1]
    rows, columns = np.nonzero(np.unpackbits(patterns, axis=1, count=n_shifts))
    size = n_patterns + n_shifts
    graph = coo_array((np.ones(rows.size), (rows, columns + n_patterns)), shape=(size, size))
    _, label = connected_components(graph, directed=False)
    usable = suitable.any(axis=1)
    for one in np.unique(label[n_patterns:]):
        shifts = np.flatnonzero(label[n_patterns:] == one)
        visits = np.flatnonzero(usable & (label[pattern_of] == one))
        if visits.size > 0:
            yield visits, shifts


def _orders(problem: Problem, shift_of: NDArray[np.int64]) -> Solution:
    by_shift = np.argsort(shift_of, kind="stable").astype(np.int64)
    bounds = np.searchsorted(shift_of[by_shift], np.arange(problem.shift_count + 1))
    starts = problem.shifts.start_place
    return Solution(
        orders=tuple(
            nearest_first(
                problem.travel,
                problem.visits.place,
                starts[s],
                by_shift[bounds[s] : bounds[s + 1]],
            )
            for s in range(problem.shift_count)
        )
    )


def split(problem: Problem, *, seed: int) -> Solution:
    """Split the visits over the shifts by clusters on the plane, balanced by work time.

    As many days are opened as the work, the estimated travel and the write-up need; their
    clusters are matched to shifts of near bases, earlier dates first where nothing else
    differs. Each order is that of the nearest neighbour from the base.

    Parameters
    ----------
    problem
        The array problem.
    seed
        Same problem and seed: same split, bit by bit.

    Returns
    -------
    Solution
        Every visit that is eligible for some shift is in exactly one order. Limits of shifts
        may be exceeded; eligibility is not.
    """
    shift_of = np.full(problem.visit_count, -1, np.int64)
    if problem.shift_count > 0 and problem.visit_count > 0:
        suitable = _suitable(problem)
        figures = estimate(problem)
        for visits, shifts in _groups(suitable):
            group = Group(
                problem=problem,
                figures=figures,
                visits=visits,
                shifts=shifts,
                suitable=suitable[np.ix_(visits, shifts)],
            )
            shift_of[visits] = shifts[cluster_group(group, seed=seed)]
    return _orders(problem, shift_of)
