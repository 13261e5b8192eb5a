"""Estimates of travel time before there are tours."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.spatial import cKDTree

from georoute.kernels.alone import direct_ways
from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.first_order import shortest_legs

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.problem import Problem

__all__ = ["Estimate", "estimate"]

TOUR_PER_NEAREST = 0.7124 / 0.5
"""A long tour of random points has 0.7124 times the root of area x number (Beardwood, Halton and
Hammersley, Mathematical Proceedings of the Cambridge Philosophical Society 55 (1959) 299-327; the
figure: Johnson, McGeoch and Rothberg, SODA 1996); their distances to the nearest other point sum
to 0.5 times that. So each point brings about 1.42 times its nearest distance to the tour."""
NEIGHBOURS = 6


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Estimate:
    """What the split assumes of travel, in ms; arrays are int64 or float64.

    ``busy_ms`` (V,): work of each visit with its share of the travel between stops.
    ``round_ms`` (E, V): way out and back for each pair of start and end place; ``pair_of`` (S,)
    says which pair a shift has. ``ms_per_m``: travel time for a metre on the plane. ``x_m``,
    ``y_m`` (V,): where the visits are.
    """

    busy_ms: NDArray[np.float64]
    round_ms: NDArray[np.int64]
    pair_of: NDArray[np.int64]
    ms_per_m: float
    x_m: NDArray[np.float64]
    y_m: NDArray[np.float64]


def _round_trips(problem: Problem) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    ends = np.column_stack([problem.shifts.start_place, problem.shifts.end_place])
    pairs, pair_of = np.unique(ends, axis=0, return_inverse=True)
    trips = np.zeros((pairs.shape[0], problem.visit_count), np.int64)
    back = np.zeros(problem.visit_count, np.int64)
    for row, (start, end) in enumerate(pairs):
        direct_ways(problem.travel, start, problem.visits.place, 1, trips[row])
        direct_ways(problem.travel, end, problem.visits.place, 0, back)
        trips[row] += back
    return np.minimum(trips, UNREACHABLE), pair_of.reshape(-1).astype(np.int64)


def estimate(problem: Problem) -> Estimate:
    """Estimate the travel of each visit from its nearest neighbours."""
    place = problem.visits.place
    x_m, y_m = problem.plane_x_m[place], problem.plane_y_m[place]
    count = min(NEIGHBOURS, problem.visit_count - 1)
    legs_ms = np.zeros(problem.visit_count, np.int64)
    gap_m = np.zeros(problem.visit_count)
    if count > 0:
        points = np.column_stack([x_m, y_m])
        found = cKDTree(points).query(points, k=count + 1)
        gaps, near = np.asarray(found[0], np.float64), np.asarray(found[1], np.int64)
        # The first one found is the visit itself, or another at the very same spot.
        shortest_legs(problem.travel, place, near, legs_ms)
        gap_m = gaps[:, 1]
    trips, pair_of = _round_trips(problem)
    apart = float(gap_m.sum())
    return Estimate(
        busy_ms=problem.visits.work_ms + TOUR_PER_NEAREST * legs_ms,
        round_ms=trips,
        pair_of=pair_of,
        ms_per_m=float(legs_ms.sum()) / apart if apart > 0.0 else 0.0,
        x_m=x_m,
        y_m=y_m,
    )
