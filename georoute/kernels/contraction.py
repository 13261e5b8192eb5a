"""A contraction hierarchy: nodes taken out one by one, shortcuts put where a shortest path ran.

Geisberger, Sanders, Schultes, Vetter, "Exact routing in large road networks using contraction
hierarchies", Transportation Science 46 (2012) 388-404. The order is by edge difference,
contracted neighbours and depth, brought up to date lazily (section 3.1).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.node_heap import KEY, NODE, PLACE, drop_first, heap_up, sink
from georoute.kernels.witness import (
    ARC_BITS,
    DEPTH,
    GONE,
    IN,
    LOW,
    OUT,
    Local,
    Remaining,
    find_shortcuts,
)

__all__ = ["ARCS", "FOUND", "LINKS", "Order", "contract", "estimate", "put_link"]

LINKS = 1
ARCS = 2
FOUND = 3
"""What there is too little room for."""

EDGE_WEIGHT = 0
GONE_WEIGHT = 1
DEPTH_WEIGHT = 2
SETTLE = 3
HOPS_MOST = 4
FIRST_SETTLE = 5
FIRST_HOPS = 6
"""Columns of ``Order.rule``."""


class Order(NamedTuple):
    """The nodes that remain, the least important first; and what decides.

    ``state``, ``heap``: see ``node_heap``. ``rule``: int64 (7,): weights of edge difference,
    contracted neighbours and depth; nodes settled and hops at most in a search for a witness,
    and in the very first ones. ``left``: int64 (1,), nodes in the heap. ``taken``: int64 (N,),
    the others, in order.
    """

    state: NDArray[np.int64]
    heap: NDArray[np.int64]
    rule: NDArray[np.int64]
    left: NDArray[np.int64]
    taken: NDArray[np.int64]


@kernel
def put_link(net: Remaining, v: Int, side: Int, other: Int, arc: Int, cost: Int) -> None:
    """Append a link to one side of a node, moving its links to the end where room is short."""
    node, link = net.node, net.link
    at, count, room = node[v, side], node[v, side + 1], node[v, side + 2]
    if count == room:
        new = net.used[0]
        net.used[0] += 2 * room + 2
        for k in range(count):
            link[new + k, 0] = link[at + k, 0]
            link[new + k, 1] = link[at + k, 1]
        at = new
        node[v, side] = new
        node[v, side + 2] = 2 * room + 2
    link[at + count, 0] = (arc << ARC_BITS) | other
    link[at + count, 1] = cost
    node[v, side + 1] = count + 1


@kernel
def _find(net: Remaining, v: Int, side: Int, other: Int) -> Int:
    """Return the index of the link between ``v`` and ``other`` on one side of ``v``, or -1."""
    at = net.node[v, side]
    for k in range(at, at + net.node[v, side + 1]):
        if net.link[k, 0] & LOW == other:
            return k
    return -1


@kernel
def _remove(net: Remaining, v: Int, side: Int, other: Int) -> None:
    """Take the link between ``v`` and ``other`` out of one side of ``v``."""
    k = _find(net, v, side, other)
    last = net.node[v, side] + net.node[v, side + 1] - 1
    net.link[k, 0] = net.link[last, 0]
    net.link[k, 1] = net.link[last, 1]
    net.node[v, side + 1] -= 1


@kernel
def _add_shortcut(net: Remaining, found: NDArray[np.int64], s: Int) -> None:
    """Add shortcut ``s``, or make a dearer link of the same two nodes as cheap."""
    start, end, cost = found[s, 0], found[s, 1], found[s, 2]
    arc = net.used[1]
    net.used[1] += 1
    net.arc[arc, 0] = found[s, 3]
    net.arc[arc, 1] = found[s, 4]
    net.arc[arc, 2] = net.arc[found[s, 3], 2] + net.arc[found[s, 4], 2]
    k = _find(net, start, OUT, end)
    if k < 0:
        put_link(net, start, OUT, end, arc, cost)
        put_link(net, end, IN, start, arc, cost)
        return
    q = _find(net, end, IN, start)
    net.link[k, 0] = (arc << ARC_BITS) | end
    net.link[k, 1] = cost
    net.link[q, 0] = (arc << ARC_BITS) | start
    net.link[q, 1] = cost


@kernel
def _importance(net: Remaining, order: Order, v: Int, shortcuts: Int) -> Int:
    node, rule = net.node, order.rule
    lost = node[v, OUT + 1] + node[v, IN + 1]
    return (
        rule[EDGE_WEIGHT] * (shortcuts - lost)
        + rule[GONE_WEIGHT] * node[v, GONE]
        + rule[DEPTH_WEIGHT] * node[v, DEPTH]
    )


@kernel
def estimate(net: Remaining, local: Local, order: Order, first: Int, last: Int) -> None:
    """Put nodes ``first`` to ``last`` into the order."""
    rule = order.rule
    for v in range(first, last):
        shortcuts = find_shortcuts(net, local, v, rule[FIRST_SETTLE], rule[FIRST_HOPS])
        heap_up(order.heap, order.state, order.left[0], _importance(net, order, v, shortcuts), v)
        order.left[0] += 1


@kernel
def _room_needed(net: Remaining, v: Int) -> Int:
    """Return how many links the loss of ``v`` may take at most, moved ones included."""
    node, link = net.node, net.link
    need = np.int64(0)
    for mine, theirs in ((OUT, IN), (IN, OUT)):
        new = node[v, theirs + 1]
        for k in range(node[v, mine], node[v, mine] + node[v, mine + 1]):
            # Each move doubles the room, so that all moves of a node sum up to this.
            need += 4 * (node[link[k, 0] & LOW, theirs + 2] + new) + 8
    return need


@kernel
def _tell(net: Remaining, order: Order, u: Int, depth: Int) -> None:
    """Tell a neighbour that a node was taken out; its own loss is looked at in its turn."""
    node = net.node
    node[u, GONE] += 1
    node[u, DEPTH] = max(node[u, DEPTH], depth)
    key = order.state[u, KEY] + order.rule[GONE_WEIGHT]
    sink(order.heap, order.state, order.left[0], order.state[u, PLACE], key, u)


@kernel
def _take_out(net: Remaining, local: Local, order: Order, v: Int, count: Int) -> None:
    node, link = net.node, net.link
    out_at, out_n = node[v, OUT], node[v, OUT + 1]
    in_at, in_n = node[v, IN], node[v, IN + 1]
    for k in range(out_at, out_at + out_n):
        _remove(net, link[k, 0] & LOW, IN, v)
    for k in range(in_at, in_at + in_n):
        _remove(net, link[k, 0] & LOW, OUT, v)
    for s in range(count):
        _add_shortcut(net, local.found, s)
    order.left[0] = drop_first(order.heap, order.state, order.left[0])
    order.taken[node.shape[0] - order.left[0] - 1] = v
    depth = node[v, DEPTH] + 1
    for k in range(out_at, out_at + out_n):
        _tell(net, order, link[k, 0] & LOW, depth)
    for k in range(in_at, in_at + in_n):
        if _find(net, v, OUT, link[k, 0] & LOW) < 0:
            _tell(net, order, link[k, 0] & LOW, depth)


@kernel
def contract(net: Remaining, local: Local, order: Order, steps: Int) -> Int:
    """Take nodes out until ``steps`` were looked at or none is left; tell what is lacking.

    Returns
    -------
    0, or ``LINKS`` (``net.used[2]`` more of them), ``ARCS`` or ``FOUND`` (as many rows as
    ``net.used[2]``) where there has to be more room before the next node can be taken out.
    """
    heap, state, rule = order.heap, order.state, order.rule
    for _ in range(steps):
        if order.left[0] == 0:
            return 0
        v = heap[0, NODE]
        count = find_shortcuts(net, local, v, rule[SETTLE], rule[HOPS_MOST])
        sink(heap, state, order.left[0], 0, _importance(net, order, v, count), v)
        if heap[0, NODE] != v:
            continue
        if count > local.found.shape[0]:
            net.used[2] = count
            return FOUND
        net.used[2] = _room_needed(net, v)
        if net.used[0] + net.used[2] > net.link.shape[0]:
            return LINKS
        if net.used[1] + count > net.arc.shape[0]:
            return ARCS
        _take_out(net, local, order, v, count)
    return 0
