"""The hierarchy as flat arrays; and how the links of a network get into them while it shrinks."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.contraction import Order, put_link
from georoute.kernels.witness import ARC_BITS, DEPTH, GONE, IN, LOW, OUT, Remaining

__all__ = ["Hierarchy", "count_links", "gather", "lay_links", "move_links"]


class Hierarchy(NamedTuple):
    """A network in which every cheapest path goes up, then down. N nodes numbered by rank.

    ``rank``: int32 (N,), rank of each original node. ``up_ptr`` (int64, (N + 1,)): links to
    higher nodes by the rank of their tail; ``up``: int64 (U, 2), rank of the head with the arc
    above it (``arc << 32 | head``), and the cost, ms and mm in one (see ``road_cost``).
    ``down_ptr``, ``down``: links from higher nodes, by the rank of their head. ``arc``: int32
    (M, 3): the two arcs a shortcut stands for, or the number of an original arc and -1; then the
    number of original arcs.
    """

    rank: NDArray[np.int32]
    up_ptr: NDArray[np.int64]
    up: NDArray[np.int64]
    down_ptr: NDArray[np.int64]
    down: NDArray[np.int64]
    arc: NDArray[np.int32]


@kernel
def lay_links(net: Remaining, ends: NDArray[np.int64], cost: NDArray[np.int64], spare: Int) -> None:
    """Lay the links of arcs into an empty net, arc a from ``ends[a, 0]`` to ``ends[a, 1]``."""
    node = net.node
    for a in range(cost.shape[0]):
        node[ends[a, 0], OUT + 2] += 1
        node[ends[a, 1], IN + 2] += 1
    used = 0
    for v in range(node.shape[0]):
        for side in (OUT, IN):
            node[v, side] = used
            node[v, side + 2] += spare
            used += node[v, side + 2]
    net.used[0] = used
    for a in range(cost.shape[0]):
        put_link(net, ends[a, 0], OUT, ends[a, 1], a, cost[a])
        put_link(net, ends[a, 1], IN, ends[a, 0], a, cost[a])


@kernel
def count_links(net: Remaining, order: Order, many: NDArray[np.int32]) -> None:
    """Fill ``many`` (int32 (T, 2)) with the links up and down of each node taken out."""
    for k in range(many.shape[0]):
        many[k, 0] = net.node[order.taken[k], OUT + 1]
        many[k, 1] = net.node[order.taken[k], IN + 1]


@kernel
def gather(
    net: Remaining, order: Order, label: NDArray[np.int64], side: Int, out: NDArray[np.int64]
) -> None:
    """Copy the links of the nodes taken out, in that order, their other ends by ``label``."""
    node, link = net.node, net.link
    n = 0
    for k in range(node.shape[0] - order.left[0]):
        v = order.taken[k]
        for q in range(node[v, side], node[v, side] + node[v, side + 1]):
            out[n, 0] = (link[q, 0] >> ARC_BITS << ARC_BITS) | label[link[q, 0] & LOW]
            out[n, 1] = link[q, 1]
            n += 1


@kernel
def move_links(
    net: Remaining, order: Order, small: Remaining, small_order: Order, new: NDArray[np.int64]
) -> None:
    """Copy what remains into a smaller net; ``new`` gives the new number of a node, or -1."""
    used = np.int64(0)
    for v in range(new.shape[0]):
        if new[v] < 0:
            continue
        w = new[v]
        small.node[w, DEPTH] = net.node[v, DEPTH]
        small.node[w, GONE] = net.node[v, GONE]
        for side in (OUT, IN):
            at, count = net.node[v, side], net.node[v, side + 1]
            small.node[w, side] = used
            small.node[w, side + 1] = count
            small.node[w, side + 2] = count + (count >> 1) + 1
            for k in range(count):
                old = net.link[at + k, 0]
                small.link[used + k, 0] = (old >> ARC_BITS << ARC_BITS) | new[old & LOW]
                small.link[used + k, 1] = net.link[at + k, 1]
            used += small.node[w, side + 2]
    small.used[0] = used
    small.used[1] = net.used[1]
    for k in range(order.left[0]):
        w = new[order.heap[k, 1]]
        small_order.heap[k, 0] = order.heap[k, 0]
        small_order.heap[k, 1] = w
        small_order.state[w, 0] = order.heap[k, 0]
        small_order.state[w, 1] = k
    small_order.left[0] = order.left[0]
