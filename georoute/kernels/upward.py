"""The search that only climbs: from a place to higher and higher nodes of a hierarchy.

Geisberger, Sanders, Schultes, Vetter, "Exact routing in large road networks using contraction
hierarchies", Transportation Science 46 (2012) 388-404, section 3.3, with stall-on-demand.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.node_heap import KEY, NODE, PLACE, drop_first, heap_up
from georoute.kernels.road_cost import FAR
from georoute.kernels.witness import ARC_BITS, LOW

__all__ = [
    "CAME_BY",
    "CAME_FROM",
    "STALLED",
    "Reached",
    "Starts",
    "climb",
    "forget",
    "start_search",
]

STALLED = -2
"""Place in the heap of a node to which a cheaper way goes over a higher node."""

CAME_BY = 2
CAME_FROM = 3
"""Columns of ``Reached.state``: the arc to the node (-1: it is a start) and the node before it,
or the number of the start."""


class Starts(NamedTuple):
    """Where searches of P places begin: ``ptr`` int64 (P + 1,); ``node``, ``cost`` int64 each."""

    ptr: NDArray[np.int64]
    node: NDArray[np.int64]
    cost: NDArray[np.int64]


class Reached(NamedTuple):
    """What a search reached: ``state`` int64 (N, 4), ``heap`` int64 (N, 2), ``seen`` int64 (N,).

    The first two columns of ``state`` are those of ``node_heap``; the cost is ``FAR`` at nodes
    that were not reached.
    """

    state: NDArray[np.int64]
    heap: NDArray[np.int64]
    seen: NDArray[np.int64]


@kernel
def start_search(reached: Reached, starts: Starts, p: Int) -> Int:
    """Put the nodes of place ``p`` into the heap; return how many."""
    state = reached.state
    size = 0
    for s in range(starts.ptr[p], starts.ptr[p + 1]):
        v, cost = starts.node[s], starts.cost[s]
        if cost >= state[v, KEY]:
            continue
        if state[v, KEY] == FAR:
            reached.seen[size] = v
            heap_up(reached.heap, state, size, cost, v)
            size += 1
        else:
            heap_up(reached.heap, state, state[v, PLACE], cost, v)
        state[v, CAME_BY] = -1
        state[v, CAME_FROM] = s
    return size


@kernel
def _stalls(
    state: NDArray[np.int64], ptr: NDArray[np.int64], link: NDArray[np.int64], v: Int, cost: Int
) -> bool:
    """Tell whether a higher node leads down to ``v`` for less."""
    for k in range(ptr[v], ptr[v + 1]):  # noqa: SIM110  # any() of a generator does not compile
        if state[link[k, 0] & LOW, KEY] + link[k, 1] < cost:
            return True
    return False


@kernel
def climb(
    reached: Reached,
    starts: Starts,
    p: Int,
    ptr: NDArray[np.int64],
    link: NDArray[np.int64],
    against_ptr: NDArray[np.int64],
    against: NDArray[np.int64],
) -> Int:
    """Search upward from place ``p``; return the number of nodes in ``reached.seen``.

    ``ptr``, ``link`` are the links to follow, ``against_ptr``, ``against`` those of the other
    direction, from higher nodes. Call ``forget`` before the next search.
    """
    state, heap, seen = reached.state, reached.heap, reached.seen
    size = start_search(reached, starts, p)
    count = size
    while size > 0:
        here = heap[0, NODE]
        cost = heap[0, KEY]
        size = drop_first(heap, state, size)
        if _stalls(state, against_ptr, against, here, cost):
            state[here, PLACE] = STALLED
            continue
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
def forget(reached: Reached, count: Int) -> None:
    """Make the first ``count`` nodes seen unreached again."""
    for s in range(count):
        v = reached.seen[s]
        reached.state[v, KEY] = FAR
        reached.state[v, PLACE] = -1
