"""A heap of nodes, each in it at most once, whose keys may fall or rise while they are in it.

``heap``: int64 (C, 2), key and node by position. ``state``: int64 (N, 2), key and position by
node; position -1: not in the heap. Four children each, since a search pushes more than it takes.
Equal keys come out in an order that depends on nothing but what was done before.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel

__all__ = ["KEY", "NODE", "PLACE", "drop_first", "heap_up", "sink"]

KEY = 0
NODE = 1
"""Second column of ``heap``."""
PLACE = 1
"""Second column of ``state``."""


@kernel
def heap_up(heap: NDArray[np.int64], state: NDArray[np.int64], k: Int, key: Int, node: Int) -> None:
    """Put ``node`` with ``key`` at position ``k`` and let it rise to where it belongs."""
    while k > 0:
        parent = (k - 1) >> 2
        above = heap[parent, KEY]
        if above <= key:
            break
        moved = heap[parent, NODE]
        heap[k, KEY] = above
        heap[k, NODE] = moved
        state[moved, PLACE] = k
        k = parent
    heap[k, KEY] = key
    heap[k, NODE] = node
    state[node, KEY] = key
    state[node, PLACE] = k


@kernel
def sink(
    heap: NDArray[np.int64], state: NDArray[np.int64], size: Int, k: Int, key: Int, node: Int
) -> None:
    """Put ``node`` with ``key`` at position ``k`` of ``size`` and let it fall."""
    while True:
        child = 4 * k + 1
        if child >= size:
            break
        least = child
        low = heap[child, KEY]
        for other in range(child + 1, min(child + 4, size)):
            if heap[other, KEY] < low:
                low = heap[other, KEY]
                least = other
        if low >= key:
            break
        moved = heap[least, NODE]
        heap[k, KEY] = low
        heap[k, NODE] = moved
        state[moved, PLACE] = k
        k = least
    heap[k, KEY] = key
    heap[k, NODE] = node
    state[node, KEY] = key
    state[node, PLACE] = k


@kernel
def drop_first(heap: NDArray[np.int64], state: NDArray[np.int64], size: Int) -> Int:
    """Take the first node out; return the size that is left. Its key stays in ``state``."""
    state[heap[0, NODE], PLACE] = -1
    size -= 1
    if size > 0:
        sink(heap, state, size, 0, heap[size, KEY], heap[size, NODE])
    return size
