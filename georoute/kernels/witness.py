"""What the contraction of a node would cost: the search for ways around it.

Geisberger, Sanders, Schultes, Vetter, "Exact routing in large road networks using contraction
hierarchies", Transportation Science 46 (2012) 388-404, section 3.2 (limited local searches).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.node_heap import KEY, NODE, PLACE, drop_first, heap_up
from georoute.kernels.road_cost import FAR

__all__ = [
    "ARC_BITS",
    "DEPTH",
    "ENOUGH",
    "GONE",
    "IN",
    "LOW",
    "OUT",
    "Local",
    "Remaining",
    "find_shortcuts",
]

OUT = 0
IN = 3
"""First of three columns of ``Remaining.node``: first link, number of links, room for links."""
DEPTH = 6
GONE = 7
"""How high the node is already, and how many neighbours it lost."""

ENOUGH = 2
HOPS = 3
"""Columns of ``Local.state`` beside the two of ``node_heap``."""

ARC_BITS = 32
LOW = (1 << ARC_BITS) - 1


class Remaining(NamedTuple):
    """The network while nodes are taken out of it one by one.

    ``node``: int32 (N, 8), see the columns above. ``link``: int64 (L, 2), the node at the other
    end with the arc above it (``arc << ARC_BITS | node``), and the cost. A node that was taken
    out keeps its links: they are the hierarchy. ``arc``: int32 (M, 3): the two arcs that a
    shortcut replaces, or the number of an original arc and -1; then the number of original arcs.
    ``used``: int64 (3,), links and arcs in use, and the room for links that was asked for last.
    """

    node: NDArray[np.int32]
    link: NDArray[np.int64]
    arc: NDArray[np.int32]
    used: NDArray[np.int64]


class Local(NamedTuple):
    """Scratch of the search around a node.

    ``state``: int64 (N, 4), the two columns of ``node_heap``, then the cost of a way to an end
    that is good enough (-1: not an end, or found), and the number of arcs to the node.
    ``heap``: int64 (N, 2), see ``node_heap``. ``seen``: int64 (N,), nodes reached. ``found``:
    int64 (F, 5), the shortcuts needed: tail, head, cost, and the two arcs they replace.
    ``last_leg``: int64 (F,), the cheapest link into each end.
    """

    state: NDArray[np.int64]
    heap: NDArray[np.int64]
    seen: NDArray[np.int64]
    found: NDArray[np.int64]
    last_leg: NDArray[np.int64]


@kernel
def _fill_last_legs(net: Remaining, local: Local, v: Int) -> None:
    """Find the cheapest link into each neighbour of ``v`` that does not come from ``v``."""
    node, link = net.node, net.link
    first = node[v, OUT]
    for q in range(first, first + node[v, OUT + 1]):
        end = link[q, 0] & LOW
        least = np.int64(FAR)
        for k in range(node[end, IN], node[end, IN] + node[end, IN + 1]):
            if link[k, 0] & LOW != v:
                least = min(least, link[k, 1])
        local.last_leg[q - first] = least


@kernel
def _reach(net: Remaining, local: Local, v: Int) -> Int:
    """Return the highest cost from where an end could still be reached in time, or less than 0."""
    reach = np.int64(-1)
    first = net.node[v, OUT]
    for q in range(first, first + net.node[v, OUT + 1]):
        end = net.link[q, 0] & LOW
        reach = max(reach, local.state[end, ENOUGH] - local.last_leg[q - first])
    return reach


@kernel
def _search(
    net: Remaining, local: Local, start: Int, avoid: Int, settle: Int, most_hops: Int
) -> Int:
    """Search around ``avoid`` for ways to all its heads; return the nodes seen."""
    node, link = net.node, net.link
    state, heap, seen = local.state, local.heap, local.seen
    reach = _reach(net, local, avoid)
    heap_up(heap, state, 0, 0, start)
    state[start, HOPS] = 0
    seen[0] = start
    count = 1
    size: Int = 1
    for _ in range(settle):
        if size == 0 or heap[0, KEY] > reach:
            break
        here = heap[0, NODE]
        cost = heap[0, KEY]
        size = drop_first(heap, state, size)
        step = state[here, HOPS] + 1
        if step > most_hops:
            continue
        begin = node[here, OUT]
        for k in range(begin, begin + node[here, OUT + 1]):
            there = link[k, 0] & LOW
            new = cost + link[k, 1]
            old = state[there, KEY]
            if new >= old or there == avoid:
                continue
            enough = state[there, ENOUGH]
            if new <= enough:
                state[there, ENOUGH] = -1
                reach = _reach(net, local, avoid)
            if new > reach:
                continue
            state[there, HOPS] = step
            if old == FAR:
                seen[count] = there
                count += 1
                heap_up(heap, state, size, new, there)
                size += 1
            else:
                heap_up(heap, state, state[there, PLACE], new, there)
    return count


@kernel
def find_shortcuts(net: Remaining, local: Local, v: Int, settle: Int, most_hops: Int) -> Int:
    """Fill ``local.found`` with the shortcuts that the loss of ``v`` asks for; return how many.

    Where they might not fit nothing is filled in, and all thinkable ones are counted.
    """
    node, link = net.node, net.link
    state, found = local.state, local.found
    count = 0
    first = node[v, OUT]
    last = first + node[v, OUT + 1]
    most = np.int64(node[v, OUT + 1]) * node[v, IN + 1]
    if most > found.shape[0]:
        return most
    if most > 0:
        _fill_last_legs(net, local, v)
    for k in range(node[v, IN], node[v, IN] + node[v, IN + 1]):
        start = link[k, 0] & LOW
        via = link[k, 1]
        for q in range(first, last):
            end = link[q, 0] & LOW
            cost = via + link[q, 1]
            if end != start and cost < FAR:
                state[end, ENOUGH] = cost
        seen = _search(net, local, start, v, settle, most_hops)
        for q in range(first, last):
            end = link[q, 0] & LOW
            if state[end, ENOUGH] >= 0:
                found[count, 0] = start
                found[count, 1] = end
                found[count, 2] = state[end, ENOUGH]
                found[count, 3] = link[k, 0] >> ARC_BITS
                found[count, 4] = link[q, 0] >> ARC_BITS
                count += 1
                state[end, ENOUGH] = -1
        for s in range(seen):
            state[local.seen[s], KEY] = FAR
            state[local.seen[s], PLACE] = -1
    return count
