"""Start tours by greedy legs: the cheapest leg first that closes no ring too early.

The stretches left when the candidate legs are used up are joined by going to the nearest free
end each time. J. Bentley, "Fast algorithms for geometric traveling salesman problems", ORSA
Journal on Computing 4 (1992) 387-411, section 3.2, describes both.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.day_net import leg_money

__all__ = ["greedy_directed", "greedy_symmetric"]


@kernel
def _root(parent: NDArray[np.int64], node: Int) -> Int:
    while parent[node] != node:
        parent[node] = parent[parent[node]]
        node = parent[node]
    return node


@kernel
def _fragments(
    beside: NDArray[np.int64], first: NDArray[np.int64], second: NDArray[np.int64]
) -> None:
    """Fill ``beside`` (n, 2): the neighbours of each node along its stretch, -1 for none."""
    n = beside.shape[0]
    parent = np.arange(n)
    beside[:] = -1
    joined = 0
    for k in range(first.shape[0]):
        a = first[k]
        b = second[k]
        if beside[a, 1] >= 0 or beside[b, 1] >= 0:
            continue
        root_a = _root(parent, a)
        root_b = _root(parent, b)
        if root_a == root_b:
            continue
        parent[root_a] = root_b
        beside[a, 1 if beside[a, 0] >= 0 else 0] = b
        beside[b, 1 if beside[b, 0] >= 0 else 0] = a
        joined += 1
        if joined == n - 1:
            break


@kernel
def _nearest_end(
    table: NDArray[np.int64],
    points: NDArray[np.float64],
    price: NDArray[np.float64],
    here: Int,
    ends: NDArray[np.int64],
    count: Int,
    done: NDArray[np.bool_],
) -> tuple[Int, Int]:
    """Return the cheapest free end to go to, or -1, and how many of ``ends`` are still free."""
    chosen = np.int64(-1)
    cheapest: Int = np.int64(0)
    k = 0
    while k < count:
        if done[ends[k]]:
            count -= 1
            ends[k] = ends[count]
            continue
        cost = leg_money(table, points, price, here, ends[k])
        if chosen < 0 or cost < cheapest or (cost == cheapest and ends[k] < chosen):
            chosen = ends[k]
            cheapest = cost
        k += 1
    return chosen, count


@kernel
def greedy_symmetric(
    table: NDArray[np.int64],
    points: NDArray[np.float64],
    price: NDArray[np.float64],
    first: NDArray[np.int64],
    second: NDArray[np.int64],
) -> NDArray[np.int64]:
    """Return the greedy tour (int64, (n,)) that starts at an end of node 0's stretch.

    ``first`` and ``second`` (int64, (m,)) are the ends of the candidate legs, cheapest first.
    """
    n = max(table.shape[0], points.shape[0])
    beside = np.empty((n, 2), np.int64)
    _fragments(beside, first, second)
    ends = np.flatnonzero(beside[:, 1] < 0)
    count: Int = ends.shape[0]
    done = np.zeros(n, np.bool_)
    order = np.empty(n, np.int64)
    here: Int = ends[0]
    for k in range(n):
        order[k] = here
        done[here] = True
        onward = beside[here, 0]
        if onward < 0 or done[onward]:
            onward = beside[here, 1]
        if onward < 0 or done[onward]:
            onward, count = _nearest_end(table, points, price, here, ends, count, done)
        here = onward
    return order


@kernel
def greedy_directed(
    table: NDArray[np.int64],
    points: NDArray[np.float64],
    price: NDArray[np.float64],
    tail: NDArray[np.int64],
    head: NDArray[np.int64],
) -> NDArray[np.int64]:
    """Return the greedy tour (int64, (n,)) of a net whose costs depend on the direction.

    ``tail`` and ``head`` (int64, (m,)) are the candidate legs from tail to head, cheapest
    first. The tour starts at the beginning of node 0's stretch.
    """
    n = table.shape[0]
    after = np.full(n, -1, np.int64)
    before = np.full(n, -1, np.int64)
    parent = np.arange(n)
    for k in range(tail.shape[0]):
        a = tail[k]
        b = head[k]
        if after[a] >= 0 or before[b] >= 0 or _root(parent, a) == _root(parent, b):
            continue
        parent[_root(parent, a)] = _root(parent, b)
        after[a] = b
        before[b] = a
    ends = np.flatnonzero(before < 0)
    count: Int = ends.shape[0]
    done = np.zeros(n, np.bool_)
    order = np.empty(n, np.int64)
    here: Int = np.int64(0)
    while before[here] >= 0:
        here = before[here]
    for k in range(n):
        order[k] = here
        done[here] = True
        onward = after[here]
        if onward < 0:
            onward, count = _nearest_end(table, points, price, here, ends, count, done)
        here = onward
    return order
