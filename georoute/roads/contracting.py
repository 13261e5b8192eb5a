"""Build the hierarchy: pack the arcs, contract in steps that can be watched, gather the result."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.run import no_progress
from georoute.kernels.contraction import ARCS, FOUND, LINKS, Order, contract, estimate
from georoute.kernels.hierarchy_store import (
    Hierarchy,
    count_links,
    gather,
    lay_links,
    move_links,
)
from georoute.kernels.road_cost import FAR, MM_BITS, MOST_MM, MOST_MS
from georoute.kernels.witness import ARC_BITS, IN, LOW, OUT, Local, Remaining

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.domain.run import Progress

__all__ = ["build_hierarchy", "pack_costs"]

STAGE = "road hierarchy"

RULE = (2, 1, 2, 50, 5, 20, 3)
"""Edge difference twice, contracted neighbours once, depth twice; 50 nodes and 5 hops for a
witness, 20 and 3 for the first look."""

STEPS = 4096
"""Nodes looked at between two reports of progress: some hundredths of a second."""


def pack_costs(ms: NDArray[np.int64], mm: NDArray[np.int64]) -> NDArray[np.int64]:
    """Return times and lengths as costs; ``FAR`` where the time is out of reach.

    Raises
    ------
    ValueError
        If a time or a length is negative, or a length is beyond what a cost holds.
    """
    closed = ms > MOST_MS
    if np.any(ms < 0) or np.any(mm < 0) or np.any(mm[~closed] > MOST_MM):
        msg = f"times and lengths are 0 or more, lengths at most {MOST_MM} mm"
        raise ValueError(msg)
    return np.where(closed, FAR, (np.where(closed, 0, ms) << MM_BITS) | np.where(closed, 0, mm))


def build_hierarchy(
    tail: NDArray[np.int64],
    head: NDArray[np.int64],
    ms: NDArray[np.int64],
    mm: NDArray[np.int64],
    *,
    nodes: int,
    progress: Progress = no_progress,
) -> Hierarchy:
    """Return the contraction hierarchy of a network of arcs.

    Parameters
    ----------
    tail, head
        Nodes 0 to ``nodes - 1`` where each arc begins and ends. Arcs may be parallel (the
        fastest counts, then the shortest, then the first) or begin where they end.
    ms, mm
        Time and length of each arc; ``UNREACHABLE`` time: closed.
    nodes
        The number of nodes.
    progress
        Told about the share of the nodes done.

    Raises
    ------
    ValueError
        If arrays differ in length, a node is out of range, or a time or length is negative.
    """
    builder = _Builder(tail, head, ms, mm, nodes)
    estimated = 0
    while estimated < nodes:
        last = min(nodes, estimated + STEPS)
        estimate(builder.net, builder.local, builder.order, estimated, last)
        estimated = last
    while builder.left:
        builder.step()
        progress(STAGE, fraction=1.0 - builder.left / nodes)
    return builder.result()


def _needed_arcs(
    tail: NDArray[np.int64], head: NDArray[np.int64], cost: NDArray[np.int64]
) -> NDArray[np.int64]:
    """Return the numbers of the cheapest arc of each pair of different nodes, by tail and head."""
    some = np.flatnonzero((tail != head) & (cost < FAR))
    order = some[np.lexsort((some, cost[some], head[some], tail[some]))]
    keep = np.ones(order.size, np.bool_)
    keep[1:] = (np.diff(tail[order]) != 0) | (np.diff(head[order]) != 0)
    return order[keep]


class _Builder:
    """A network on its way to a hierarchy."""

    def __init__(
        self,
        tail: NDArray[np.int64],
        head: NDArray[np.int64],
        ms: NDArray[np.int64],
        mm: NDArray[np.int64],
        nodes: int,
    ) -> None:
        if not tail.shape == head.shape == ms.shape == mm.shape:
            msg = "tail, head, ms and mm must have one entry an arc"
            raise ValueError(msg)
        if tail.size and not (
            min(tail.min(), head.min()) >= 0 and max(tail.max(), head.max()) < nodes
        ):
            msg = f"arcs must begin and end at nodes 0 to {nodes - 1}"
            raise ValueError(msg)
        cost = pack_costs(ms, mm)
        needed = _needed_arcs(tail, head, cost)
        self.net = _empty_net(nodes, links=3 * needed.size + 2 * nodes, arcs=needed.size)
        self.net.arc[: needed.size, 0] = needed
        self.net.arc[: needed.size, 1] = -1
        self.net.arc[: needed.size, 2] = 1
        self.net.used[1] = needed.size
        ends = np.column_stack((tail[needed], head[needed]))
        lay_links(self.net, ends, cost[needed], 1)
        self.local = _scratch(nodes, 256)
        self.order = _empty_order(nodes)
        self.label = np.arange(nodes, dtype=np.int64)
        self.taken: list[NDArray[np.int64]] = []
        self.counts: list[NDArray[np.int32]] = []
        self.links: tuple[list[NDArray[np.int64]], ...] = ([], [])

    @property
    def left(self) -> int:
        """The number of nodes still to be taken out."""
        return int(self.order.left[0])

    def step(self) -> None:
        """Take out some nodes; make room where there is too little."""
        lacking = contract(self.net, self.local, self.order, STEPS)
        if lacking == FOUND:
            self.local = _scratch(self.label.size, 2 * int(self.net.used[2]))
        elif lacking == ARCS:
            arc = self.net.arc
            more = np.empty((arc.shape[0] // 2 + self.local.found.shape[0], 3), np.int32)
            self.net = self.net._replace(arc=np.concatenate((arc, more)))
        if lacking == LINKS or 2 * self.left < self.label.size:
            self.shrink()

    def shrink(self) -> None:
        """Put the nodes taken out aside, and those that remain close together."""
        net, order = self.net, self.order
        taken = order.taken[: self.label.size - self.left]
        counts = np.empty((taken.size, 2), np.int32)
        count_links(net, order, counts)
        self.counts.append(counts)
        self.taken.append(self.label[taken])
        for side, (first, links) in enumerate(zip((OUT, IN), self.links, strict=True)):
            rows = np.empty((int(counts[:, side].sum()), 2), np.int64)
            gather(net, order, self.label, first, rows)
            links.append(rows)
        stays = np.ones(self.label.size, np.bool_)
        stays[taken] = False
        new = np.where(stays, np.cumsum(stays) - 1, -1)
        room = int((net.node[stays, OUT + 1] + net.node[stays, IN + 1]).sum())
        small = _empty_net(self.left, links=3 * room + 2 * self.left + 2 * int(net.used[2]), arcs=0)
        small = small._replace(arc=net.arc)
        small_order = _empty_order(self.left)
        move_links(net, order, small, small_order, new)
        self.net, self.order = small, small_order
        self.local = _scratch(self.left, self.local.found.shape[0])
        self.label = self.label[stays]

    def result(self) -> Hierarchy:
        """Return what was put aside, the nodes by rank."""
        if self.label.size:
            self.shrink()
        taken = np.concatenate([*self.taken, np.empty(0, np.int64)])
        rank = np.empty(taken.size, np.int32)
        rank[taken] = np.arange(taken.size)
        counts = np.concatenate([*self.counts, np.empty((0, 2), np.int32)])
        ptr = np.zeros((2, taken.size + 1), np.int64)
        ptr[:, 1:] = np.cumsum(counts, axis=0, dtype=np.int64).T
        sides = []
        for links in self.links:
            rows = np.concatenate([*links, np.empty((0, 2), np.int64)])
            links.clear()
            rows[:, 0] = (rows[:, 0] >> ARC_BITS << ARC_BITS) | rank[rows[:, 0] & LOW]
            sides.append(rows)
        return Hierarchy(
            rank=rank,
            up_ptr=ptr[0],
            up=sides[0],
            down_ptr=ptr[1],
            down=sides[1],
            arc=self.net.arc[: self.net.used[1]].copy(),
        )


def _empty_net(nodes: int, *, links: int, arcs: int) -> Remaining:
    return Remaining(
        node=np.zeros((nodes, 8), np.int32),
        link=np.empty((links, 2), np.int64),
        arc=np.empty((2 * arcs + 16, 3), np.int32),
        used=np.zeros(3, np.int64),
    )


def _scratch(nodes: int, found: int) -> Local:
    state = np.full((nodes, 4), -1, np.int64)
    state[:, 0] = FAR
    return Local(
        state=state,
        heap=np.empty((nodes, 2), np.int64),
        seen=np.empty(nodes, np.int64),
        found=np.empty((found, 5), np.int64),
        last_leg=np.empty(found, np.int64),
    )


def _empty_order(nodes: int) -> Order:
    return Order(
        state=np.full((nodes, 2), -1, np.int64),
        heap=np.empty((nodes, 2), np.int64),
        rule=np.array(RULE, np.int64),
        left=np.zeros(1, np.int64),
        taken=np.empty(nodes, np.int64),
    )
