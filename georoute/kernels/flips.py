"""A closed tour as an array with positions, changed by reversing stretches of it.

Every exchange of legs that keeps one tour is a sequence of such reversals; reversing the
stretch or its complement gives the same tour, so the shorter one is taken. A log of them
undoes a search that led nowhere.

``tour`` is int64 (2, n): row 0 the nodes in sequence, row 1 where each node stands. ``log`` is
int64 (m + 1, 2): ``log[0, 0]`` reversals are logged, their first and last position from row 1.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel

__all__ = ["exchange", "new_tour", "next_of", "prev_of", "redo", "reverse", "undo"]


def new_tour(order: NDArray[np.int64]) -> NDArray[np.int64]:
    """Return a tour (int64, (2, n)) standing at ``order``."""
    tour = np.empty((2, order.shape[0]), np.int64)
    tour[0] = order
    tour[1, order] = np.arange(order.shape[0])
    return tour


@kernel
def next_of(tour: NDArray[np.int64], node: Int) -> Int:
    """Return the node after ``node``."""
    p = tour[1, node] + 1
    if p == tour.shape[1]:
        p = 0
    return tour[0, p]


@kernel
def prev_of(tour: NDArray[np.int64], node: Int) -> Int:
    """Return the node before ``node``."""
    p = tour[1, node]
    if p == 0:
        p = tour.shape[1]
    return tour[0, p - 1]


@kernel
def reverse(tour: NDArray[np.int64], first: Int, last: Int) -> None:
    """Reverse positions ``first .. last`` (around the end if need be), or the complement."""
    n = tour.shape[1]
    size = last - first + 1
    if size <= 0:
        size += n
    i = first
    j = last
    if 2 * size > n:
        i = last + 1
        j = first - 1
        size = n - size
        if i == n:
            i = 0
        if j < 0:
            j = n - 1
    for _ in range(size // 2):
        a = tour[0, i]
        b = tour[0, j]
        tour[0, i] = b
        tour[1, b] = i
        tour[0, j] = a
        tour[1, a] = j
        i += 1
        if i == n:
            i = 0
        j -= 1
        if j < 0:
            j = n - 1


@kernel
def exchange(tour: NDArray[np.int64], log: NDArray[np.int64], a: Int, b: Int, c: Int) -> None:
    """Replace legs a-b and c-d by a-c and b-d, where b follows a as d follows c.

    "Follows" is meant in either direction of the tour, the same for both legs; so d is known.
    """
    if next_of(tour, a) == b:
        first = tour[1, b]
        last = tour[1, c]
    else:
        first = tour[1, c]
        last = tour[1, b]
    reverse(tour, first, last)
    k = log[0, 0] + 1
    log[0, 0] = k
    log[k, 0] = first
    log[k, 1] = last


@kernel
def undo(tour: NDArray[np.int64], log: NDArray[np.int64], keep: Int) -> None:
    """Take logged reversals back until ``keep`` of them are left."""
    for k in range(log[0, 0], keep, -1):
        reverse(tour, log[k, 0], log[k, 1])
    log[0, 0] = keep


@kernel
def redo(tour: NDArray[np.int64], log: NDArray[np.int64], count: Int) -> None:
    """Make reversals in the log again after they were undone, until ``count`` are made."""
    for k in range(log[0, 0] + 1, count + 1):
        reverse(tour, log[k, 0], log[k, 1])
    log[0, 0] = count
