"""All costs from many places to many: every target leaves word in buckets, every source reads it.

Knopp, Sanders, Schultes, Schulz, Wagner, "Computing many-to-many shortest paths using highway
hierarchies", ALENEX 2007, section 4, on a contraction hierarchy.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.hierarchy_store import Hierarchy
from georoute.kernels.node_heap import KEY, PLACE
from georoute.kernels.road_cost import FAR, MM_BITS, MOST_MM
from georoute.kernels.upward import STALLED, Reached, Starts, climb, forget
from georoute.kernels.witness import LOW

__all__ = ["LANES", "Buckets", "Lanes", "leave_word", "read_word", "sort_word"]

NODE_BITS = 32

LANES = 8
"""Sources that read word together: one look at a bucket serves all of them."""


class Buckets(NamedTuple):
    """Word of targets ``base`` to ``base + many``, by node.

    That of node v is at ``ptr[v]:ptr[v + 1]`` (int64, (N + 2,)): ``target`` (uint32, less
    ``base``) and ``cost`` (int64) from the node to it.
    """

    ptr: NDArray[np.int64]
    target: NDArray[np.uint32]
    cost: NDArray[np.int64]
    base: int
    many: int


class Lanes(NamedTuple):
    """Costs from the sources that read together, at the nodes that any of them reached.

    ``slot``: int32 (N,), row of a node, -1: none. ``node``: int64 (N,), the node of a row.
    ``cost``: int64 (N, LANES).
    """

    slot: NDArray[np.int32]
    node: NDArray[np.int64]
    cost: NDArray[np.int64]


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
    """Sort word into the arrays of ``Buckets``.

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
def _collect(
    hierarchy: Hierarchy,
    reached: Reached,
    sources: Starts,
    p: Int,
    lane: Int,
    ptr: NDArray[np.int64],
    lanes: Lanes,
    nodes: Int,
) -> Int:
    """Note the costs from source ``p`` to all nodes with word in one lane; return nodes noted."""
    count = climb(
        reached,
        sources,
        p,
        hierarchy.up_ptr,
        hierarchy.up,
        hierarchy.down_ptr,
        hierarchy.down,
    )
    for s in range(count):
        v = reached.seen[s]
        if reached.state[v, PLACE] == STALLED or ptr[v] == ptr[v + 1]:
            continue
        if lanes.slot[v] < 0:
            lanes.slot[v] = nodes
            lanes.node[nodes] = v
            lanes.cost[nodes, :] = FAR
            nodes += 1
        lanes.cost[lanes.slot[v], lane] = reached.state[v, KEY]
    forget(reached, count)
    return nodes


@kernel
def _lower(
    block: NDArray[np.int64],
    target: NDArray[np.uint32],
    cost: NDArray[np.int64],
    here: NDArray[np.int64],
) -> None:
    """Lower the costs of all lanes to all targets with word at one node."""
    for k in range(target.shape[0]):
        row = block[target[k]]
        more = cost[k]
        for lane in range(LANES):
            row[lane] = min(row[lane], here[lane] + more)


@kernel
def read_word(
    hierarchy: Hierarchy,
    reached: Reached,
    sources: Starts,
    order: NDArray[np.int64],
    buckets: Buckets,
    lanes: Lanes,
    ms: NDArray[np.int64],
    mm: NDArray[np.int64],
) -> None:
    """Search forward from the sources of ``order``; fill their rows of ``ms`` and ``mm``.

    Sources that follow one another read together: the better the nearer they are. The columns
    filled are those of the targets with word, from ``buckets.base`` on.
    """
    ptr = buckets.ptr
    block = np.empty((buckets.many, LANES), np.int64)
    for first in range(0, order.shape[0], LANES):
        last = min(first + LANES, order.shape[0])
        nodes: Int = 0
        for k in range(first, last):
            nodes = _collect(hierarchy, reached, sources, order[k], k - first, ptr, lanes, nodes)
        block[:] = FAR
        for m in range(nodes):
            v = lanes.node[m]
            lanes.slot[v] = -1
            word = slice(ptr[v], ptr[v + 1])
            _lower(block, buckets.target[word], buckets.cost[word], lanes.cost[m])
        for t in range(buckets.many):
            for k in range(first, last):
                value = block[t, k - first]
                p = order[k]
                far = value >= FAR
                ms[p, buckets.base + t] = UNREACHABLE if far else value >> MM_BITS
                mm[p, buckets.base + t] = UNREACHABLE if far else value & MOST_MM
