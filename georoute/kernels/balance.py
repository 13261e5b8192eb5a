"""Deal visits out to days that have room, the ones with most to lose first."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel

__all__ = ["deal_out"]


@kernel
def _choose(
    distance: NDArray[np.float64],
    takes: NDArray[np.float64],
    load: NDArray[np.int64],
    used: NDArray[np.float64],
    carried: NDArray[np.int64],
    room: NDArray[np.float64],
    carry: NDArray[np.int64],
    v: Int,
) -> Int:
    """Return the nearest day with room for ``v``; else the one that is least overfull then."""
    best = -1
    fallback = -1
    least = np.inf
    for j in range(room.shape[0]):
        if np.isinf(distance[v, j]):
            continue
        fill = (used[j] + takes[v, j]) / max(room[j], 1.0)
        if carried[j] + load[v] > carry[j]:
            fill += 1.0
        elif fill <= 1.0 and (best < 0 or distance[v, j] < distance[v, best]):
            best = j
        if fill < least:
            least = fill
            fallback = j
    return best if best >= 0 else fallback


@kernel
def deal_out(
    distance: NDArray[np.float64],
    queue: NDArray[np.int64],
    takes: NDArray[np.float64],
    load: NDArray[np.int64],
    used: NDArray[np.float64],
    room: NDArray[np.float64],
    carry: NDArray[np.int64],
    day_of: NDArray[np.int64],
) -> None:
    """Give each visit of ``queue`` in turn to the nearest day that has room for it.

    ``distance`` (float64, (V, D)): inf where a visit may not go. ``takes`` (float64, (V, D)) and
    ``load`` (V,): what it takes; ``room``, ``carry`` (D,): what there is; ``used`` (D,): what is
    taken, updated.
    Where no day has room, the one that is least overfull is taken. ``day_of`` (V,) is filled;
    -1 where a visit may go nowhere.
    """
    carried = np.zeros(room.shape[0], np.int64)
    for v in queue:
        j = _choose(distance, takes, load, used, carried, room, carry, v)
        day_of[v] = j
        if j >= 0:
            used[j] += takes[v, j]
            carried[j] += load[v]
