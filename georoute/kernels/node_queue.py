"""The nodes still to be looked at: first in, first out, each at most once.

``queue`` is int64 (2, n + 2): row 0 a ring of nodes, then its head and how many are in it;
row 1 tells for each node whether it is in the ring. J. Bentley's don't-look bits, ORSA Journal
on Computing 4 (1992) 387-411, as a queue.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel

__all__ = ["empty_queue", "new_queue", "pop", "push", "waiting"]


def new_queue(nodes: NDArray[np.int64]) -> NDArray[np.int64]:
    """Return a queue of all ``nodes`` (each of 0 .. n-1 once)."""
    n = nodes.shape[0]
    queue = np.ones((2, n + 2), np.int64)
    queue[0, :n] = nodes
    queue[0, n:] = (0, n)
    return queue


def empty_queue(n: int) -> NDArray[np.int64]:
    """Return a queue for nodes 0 .. n-1 in which none waits."""
    return np.zeros((2, n + 2), np.int64)


@kernel
def waiting(queue: NDArray[np.int64]) -> Int:
    """Return how many nodes wait."""
    return queue[0, queue.shape[1] - 1]


@kernel
def push(queue: NDArray[np.int64], node: Int) -> None:
    """Put ``node`` at the end, unless it waits already."""
    if queue[1, node] == 0:
        queue[1, node] = 1
        n = queue.shape[1] - 2
        slot = queue[0, n] + queue[0, n + 1]
        if slot >= n:
            slot -= n
        queue[0, slot] = node
        queue[0, n + 1] += 1


@kernel
def pop(queue: NDArray[np.int64]) -> Int:
    """Take the first node."""
    n = queue.shape[1] - 2
    head = queue[0, n]
    node = queue[0, head]
    head += 1
    if head == n:
        head = 0
    queue[0, n] = head
    queue[0, n + 1] -= 1
    queue[1, node] = 0
    return node
