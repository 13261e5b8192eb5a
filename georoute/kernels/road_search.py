"""One-shot searches on the plain network, for few places.

Dijkstra, "A note on two problems in connexion with graphs", Numerische Mathematik 1 (1959)
269-271, from one place to many, ended as soon as the last of them is reached.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.node_heap import KEY, NODE, PLACE, drop_first, heap_up
from georoute.kernels.road_cost import FAR
from georoute.kernels.road_paths import ARCS, COST, SOURCE_SEED, TARGET_SEED
from georoute.kernels.upward import CAME_BY, CAME_FROM, Reached, Starts, forget, start_search
from georoute.kernels.witness import ARC_BITS, LOW

__all__ = ["Streets", "lay_streets", "search_paths", "search_rows"]


class Streets(NamedTuple):
    """A plain network: the links of node v are ``link[ptr[v]:ptr[v + 1]]``.

    ``ptr``: int64 (N + 1,). ``link``: int64 (A, 2), the node at the other end with the number of
    the arc above it (``arc << 32 | node``), and the cost.
    """

    ptr: NDArray[np.int64]
    link: NDArray[np.int64]


@kernel
def lay_streets(streets: Streets, ends: NDArray[np.int64], cost: NDArray[np.int64]) -> None:
    """Fill ``streets`` with the arcs from ``ends[a, 0]`` to ``ends[a, 1]`` that are open.

    ``streets.ptr`` comes as zeros with one entry more than it will be used with.
    """
    ptr = streets.ptr
    for a in range(cost.shape[0]):
        if cost[a] < FAR:
            ptr[ends[a, 0] + 2] += 1
    for v in range(2, ptr.shape[0]):
        ptr[v] += ptr[v - 1]
    for a in range(cost.shape[0]):
        if cost[a] < FAR:
            at = ptr[ends[a, 0] + 1]
            ptr[ends[a, 0] + 1] = at + 1
            streets.link[at, 0] = (a << ARC_BITS) | ends[a, 1]
            streets.link[at, 1] = cost[a]


@kernel
def _spread(
    streets: Streets, reached: Reached, starts: Starts, p: Int, wanted: NDArray[np.uint8], left: Int
) -> Int:
    """Search from place ``p`` until ``left`` nodes that are ``wanted`` were reached for good."""
    ptr, link = streets.ptr, streets.link
    state, heap, seen = reached.state, reached.heap, reached.seen
    size = start_search(reached, starts, p)
    count = size
    while size > 0 and left > 0:
        here = heap[0, NODE]
        cost = heap[0, KEY]
        size = drop_first(heap, state, size)
        left -= wanted[here]
        for k in range(ptr[here], ptr[here + 1]):
            there = link[k, 0] & LOW
            new = cost + link[k, 1]
            old = state[there, KEY]
            if new >= old:
                continue
            state[there, CAME_BY] = link[k, 0] >> ARC_BITS
            state[there, CAME_FROM] = here
            if old == FAR:
                seen[count] = there
                count += 1
                heap_up(heap, state, size, new, there)
                size += 1
            else:
                heap_up(heap, state, state[there, PLACE], new, there)
    return count


@kernel
def _want(ends: Starts, first: Int, last: Int, wanted: NDArray[np.uint8]) -> Int:
    """Mark the nodes of places ``first`` to ``last``; return how many they are."""
    left: Int = 0
    for s in range(ends.ptr[first], ends.ptr[last]):
        if ends.cost[s] < FAR and not wanted[ends.node[s]]:
            wanted[ends.node[s]] = 1
            left += 1
    return left


@kernel
def _best_end(reached: Reached, ends: Starts, place: Int) -> tuple[Int, Int]:
    """Return the least cost to a place and the number of the seed it comes over."""
    best: Int = np.int64(FAR)
    seed: Int = np.int64(-1)
    for s in range(ends.ptr[place], ends.ptr[place + 1]):
        if ends.cost[s] >= FAR:  # the sum of two that are out of reach would run over
            continue
        cost = reached.state[ends.node[s], KEY] + ends.cost[s]
        if cost < best:
            best = cost
            seed = s
    return best, seed


@kernel
def search_rows(
    streets: Streets,
    reached: Reached,
    starts: Starts,
    ends: Starts,
    first: Int,
    last: Int,
    cost: NDArray[np.int64],
) -> None:
    """Fill rows ``first`` to ``last`` of ``cost`` with the costs from starts to all ends."""
    wanted = np.zeros(reached.state.shape[0], np.uint8)
    places = ends.ptr.shape[0] - 1
    left = _want(ends, 0, places, wanted)
    for p in range(first, last):
        count = _spread(streets, reached, starts, p, wanted, left)
        for q in range(places):
            cost[p, q] = _best_end(reached, ends, q)[0]
        forget(reached, count)


@kernel
def search_paths(
    streets: Streets,
    reached: Reached,
    sources: Starts,
    targets: Starts,
    pair: NDArray[np.int64],
    told: NDArray[np.int64],
    out: NDArray[np.int64],
) -> Int:
    """As ``find_paths`` of the hierarchy, on the plain network."""
    wanted = np.zeros(reached.state.shape[0], np.uint8)
    used = 0
    for q in range(pair.shape[0]):
        j = pair[q, 1]
        count = _spread(
            streets, reached, sources, pair[q, 0], wanted, _want(targets, j, j + 1, wanted)
        )
        for s in range(targets.ptr[j], targets.ptr[j + 1]):
            wanted[targets.node[s]] = 0
        told[q, COST], seed = _best_end(reached, targets, j)
        told[q, TARGET_SEED] = seed
        told[q, ARCS] = 0
        if seed >= 0:
            v = targets.node[seed]
            arcs = 0
            while reached.state[v, CAME_BY] >= 0:
                arcs += 1
                v = reached.state[v, CAME_FROM]
            told[q, ARCS] = arcs
            told[q, SOURCE_SEED] = reached.state[v, CAME_FROM]
            if used + arcs > out.shape[0]:
                forget(reached, count)
                return q
            v = targets.node[seed]
            for k in range(used + arcs - 1, used - 1, -1):
                out[k] = reached.state[v, CAME_BY]
                v = reached.state[v, CAME_FROM]
            used += arcs
        forget(reached, count)
    return pair.shape[0]
