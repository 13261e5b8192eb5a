"""How many days are needed, and clusters on the plane that share the work evenly."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from sklearn.cluster import KMeans
from threadpoolctl import threadpool_limits

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.problem import Problem

__all__ = ["balanced_clusters", "tours_needed"]

TOUR_CONSTANT = 0.7124
"""Length of a shortest tour through n random points of an area A: 0.7124 sqrt(nA) for large n
(Johnson, McGeoch & Rothberg 1996); an estimate, used for counting days only."""
ROUNDS = 8
ROOM = 1.1
"""Share of the mean work a cluster may take before its visits look for another."""


def tours_needed(
    problem: Problem, spots: NDArray[np.float64], work_ms: NDArray[np.float64], speed: float
) -> int:
    """Return how many shifts the work is likely to need, at most those there are.

    Work, plus the way out and back of each tour, plus the ways between stops, against the paid
    length of the shifts (C. F. Daganzo, "The distance traveled to visit N points with a maximum
    of C stops per vehicle", Transportation Science 18 (1984) 331-350).
    """
    shifts = problem.shifts
    room = np.minimum(shifts.paid_ms, shifts.close_ms - shifts.open_ms) - shifts.write_up_ms
    span = np.ptp(spots, axis=0) + 1.0
    between = TOUR_CONSTANT * np.sqrt(spots.shape[0] * span[0] * span[1]) / speed
    bases = np.unique(np.concatenate([shifts.start_place, shifts.end_place]))
    base_spots = np.column_stack([problem.plane_x_m[bases], problem.plane_y_m[bases]])
    ways = np.linalg.norm(spots[:, None] - base_spots[None], axis=2).min(axis=1)
    out_and_back = 2.0 * float(ways.mean()) / speed
    supply = np.cumsum(np.sort(room)[::-1].astype(np.float64) - out_and_back)
    enough = np.flatnonzero(supply >= work_ms.sum() + between)
    wanted = int(enough[0]) + 1 if enough.shape[0] else problem.shift_count
    return max(1, min(wanted, problem.shift_count, spots.shape[0]))


def _assign(
    distance: NDArray[np.float64], work_ms: NDArray[np.float64], limit: float
) -> NDArray[np.int64]:
    """Give each spot to its nearest centre with room; who would lose most chooses first."""
    two = np.partition(distance, 1, axis=1)[:, :2] if distance.shape[1] > 1 else None
    regret = np.zeros(distance.shape[0]) if two is None else two[:, 1] - two[:, 0]
    left = np.full(distance.shape[1], limit)
    labels = np.empty(distance.shape[0], np.int64)
    for spot in np.argsort(-regret, kind="stable"):
        ranked = np.argsort(distance[spot], kind="stable")
        fits = ranked[left[ranked] >= work_ms[spot]]
        labels[spot] = fits[0] if fits.shape[0] else int(np.argmax(left))
        left[labels[spot]] -= work_ms[spot]
    return labels


def balanced_clusters(
    spots: NDArray[np.float64], work_ms: NDArray[np.float64], *, count: int, seed: int
) -> tuple[NDArray[np.float64], NDArray[np.int64]]:
    """Return centres (float64, (count, 2)) and the cluster of each spot (int64).

    k-means finds the centres (S. P. Lloyd, IEEE Transactions on Information Theory 28 (1982)
    129-137); then spots are given out with a limit on the work of a cluster and the centres
    moved, in turn. Ways between stops count by an even share.
    """
    load = work_ms + max(1.0, float(work_ms.mean()) * 0.25)
    with threadpool_limits(limits=1):  # threads would change the order of summation
        fitted = KMeans(n_clusters=count, n_init=4, random_state=seed % (1 << 32)).fit(
            spots, sample_weight=load
        )
    centres = np.asarray(fitted.cluster_centers_, np.float64)
    limit = ROOM * float(load.sum()) / count
    labels = np.zeros(spots.shape[0], np.int64)
    for _ in range(ROUNDS):
        distance = np.linalg.norm(spots[:, None] - centres[None], axis=2)
        labels = _assign(distance, load, limit)
        moved = np.array(
            [
                spots[labels == c].mean(axis=0) if (labels == c).any() else centres[c]
                for c in range(count)
            ]
        )
        if np.allclose(moved, centres):
            break
        centres = moved
    return centres, labels
