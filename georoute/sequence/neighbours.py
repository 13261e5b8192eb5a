"""The few legs worth trying from each node: its nearest neighbours."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy.spatial import cKDTree

if TYPE_CHECKING:
    from numpy.typing import NDArray

__all__ = ["candidate_legs", "nearest_by_table", "nearest_on_plane"]

BLOCK = 512
"""Rows of the table sorted at a time, so that memory stays small."""


def nearest_by_table(table: NDArray[np.int64], count: int) -> NDArray[np.int64]:
    """Return the ``count`` cheapest nodes to go to from each node, cheapest first.

    ``table`` is int64 (n, n); the result int64 (n, min(count, n - 1)). Among those found, ties
    go to the smaller node number.
    """
    n = table.shape[0]
    count = min(count, n - 1)
    found = np.empty((n, count), np.int64)
    for start in range(0, n, BLOCK):
        rows = table[start : start + BLOCK].copy()
        here = np.arange(rows.shape[0])
        rows[here, here + start] = np.iinfo(np.int64).max
        if count < n - 1:
            kept = np.sort(np.argpartition(rows, count - 1, axis=1)[:, :count], axis=1)
        else:
            kept = np.broadcast_to(np.arange(n), rows.shape)
        by_cost = np.argsort(np.take_along_axis(rows, kept, 1), axis=1, kind="stable")
        found[start : start + BLOCK] = np.take_along_axis(kept, by_cost, 1)[:, :count]
    return found


def nearest_on_plane(
    x: NDArray[np.float64], y: NDArray[np.float64], count: int
) -> NDArray[np.int64]:
    """Return the ``count`` nearest other points of each point on a plane, nearest first.

    ``x`` and ``y`` are float64 (n,); the result int64 (n, min(count, n - 1)).
    """
    n = x.shape[0]
    count = min(count, n - 1)
    points = np.column_stack((x, y))
    found = np.asarray(cKDTree(points).query(points, k=count + 1)[1], np.int64)
    others = found != np.arange(n)[:, None]
    # Of more than count + 1 points on one spot, a point may not find itself: drop the last.
    full = others.all(axis=1)
    others[full, -1] = False
    near: NDArray[np.int64] = found[others].reshape(n, count)
    return near


def candidate_legs(
    near: NDArray[np.int64], *, symmetric: bool
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return tails and heads of all neighbour legs, cheapest first; one way if ``symmetric``.

    ``near`` is int64 (n, K, 2): neighbours and what they cost.
    """
    n, count, _ = near.shape
    tail = np.repeat(np.arange(n, dtype=np.int64), count)
    head = near[:, :, 0].ravel()
    cost = near[:, :, 1].ravel()
    if symmetric:
        low, high = np.minimum(tail, head), np.maximum(tail, head)
        _, kept = np.unique(low * n + high, return_index=True)
        tail, head, cost = low[kept], high[kept], cost[kept]
    by_cost = np.argsort(cost, kind="stable")
    return tail[by_cost], head[by_cost]
