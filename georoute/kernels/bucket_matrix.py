"""All costs from many places to many: every target leaves word in buckets, every source reads it.

Knopp, Sanders, Schultes, Schulz, Wagner, "Computing many-to-many shortest paths using highway
hierarchies", ALENEX 2007, section 4, on a contraction hierarchy.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.hierarchy_store import Hierarchy
from georoute.kernels.node_heap import KEY, PLACE
from georoute.kernels.upward import STALLED, Reached, Starts, climb, forget
from georoute.kernels.witness import LOW

__all__ = ["leave_word", "read_word", "sort_word"]

NODE_BITS = 32


@kernel
def leave_word(
    hierarchy: Hierarchy,
    reached: Reached,
    targets: Starts,
    first: Int,
    last: Int,
    word: NDArray[np.int64],
    used: NDArray[np.int64],
) -> Int:
    """Search backward from targets ``first`` to ``last``; return the first that was left out.

    ``word``: int64 (W, 2), node and target (``node << 32 | target - base``), and cost; filled
    from ``used[0]`` on, as long as the word of one more target surely fits. ``base`` is
    ``used[1]``.
    """
    nodes = hierarchy.rank.shape[0]
    for t in range(first, last):
        if used[0] + nodes > word.shape[0]:
            return t
        count = climb(
            reached,
            targets,
            t,
            hierarchy.down_ptr,
            hierarchy.down,
            hierarchy.up_ptr,
            hierarchy.up,
        )
        n = used[0]
        for s in range(count):
            v = reached.seen[s]
            if reached.state[v, PLACE] != STALLED:
                word[n, 0] = (v << NODE_BITS) | (t - used[1])
                word[n, 1] = reached.state[v, KEY]
                n += 1
        used[0] = n
        forget(reached, count)
    return last


@kernel
def sort_word(
    word: NDArray[np.int64],
    ptr: NDArray[np.int64],
    target: NDArray[np.uint32],
    cost: NDArray[np.int64],
) -> None:
    """Sort word by node: ``target`` and ``cost`` of that of node v are at ``ptr[v]:ptr[v + 1]``.

    ``ptr``: int64 (N + 2,), zeros; its last entry is scratch.
    """
    for k in range(word.shape[0]):
        ptr[(word[k, 0] >> NODE_BITS) + 2] += 1
    for v in range(2, ptr.shape[0]):
        ptr[v] += ptr[v - 1]
    for k in range(word.shape[0]):
        v = word[k, 0] >> NODE_BITS
        at = ptr[v + 1]
        ptr[v + 1] = at + 1
        target[at] = word[k, 0] & LOW
        cost[at] = word[k, 1]


@kernel
def read_word(
    hierarchy: Hierarchy,
    reached: Reached,
    sources: Starts,
    first: Int,
    last: Int,
    ptr: NDArray[np.int64],
    target: NDArray[np.uint32],
    word_cost: NDArray[np.int64],
    cost: NDArray[np.int64],
) -> None:
    """Search forward from sources ``first`` to ``last``; lower their rows of ``cost``."""
    state = reached.state
    for p in range(first, last):
        count = climb(
            reached,
            sources,
            p,
            hierarchy.up_ptr,
            hierarchy.up,
            hierarchy.down_ptr,
            hierarchy.down,
        )
        row = cost[p]
        for s in range(count):
            v = reached.seen[s]
            if state[v, PLACE] == STALLED:
                continue
            here = state[v, KEY]
            for k in range(ptr[v], ptr[v + 1]):
                new = here + word_cost[k]
                if new < row[target[k]]:  # noqa: PLR1730  # a store each time takes longer
                    row[target[k]] = new
        forget(reached, count)
