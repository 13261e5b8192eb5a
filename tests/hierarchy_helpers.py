"""Small networks drawn at random, and slow twins in plain Python of what is asked of them."""

from __future__ import annotations

import heapq
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array
from scipy.sparse.csgraph import dijkstra

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.model import Seeds


@dataclass(frozen=True, kw_only=True, eq=False)
class Net:
    """Arcs between ``nodes`` nodes, int64 each."""

    tail: NDArray[np.int64]
    head: NDArray[np.int64]
    ms: NDArray[np.int64]
    mm: NDArray[np.int64]
    nodes: int

    @property
    def arcs(self) -> tuple[NDArray[np.int64], ...]:
        return self.tail, self.head, self.ms, self.mm


def draw_net(seed: int) -> Net:
    """One-ways, parallel arcs, self-loops, closed arcs, no time or no length, parts cut off."""
    rng = np.random.default_rng(seed)
    nodes = int(rng.integers(1, 40))
    count = int(rng.integers(0, 4 * nodes))
    tail = rng.integers(0, nodes, count)
    # Half of the arcs stay near: chains and dead ends, not only a tangle.
    near = np.clip(tail + rng.integers(-2, 3, count), 0, nodes - 1)
    head = np.where(rng.random(count) < 0.5, near, rng.integers(0, nodes, count))
    # Few different values: many ties in time that the length must decide.
    ms = rng.integers(0, int(rng.choice([3, 20, 10_000])), count)
    mm = rng.integers(0, int(rng.choice([3, 20, 100_000])), count)
    ms[rng.random(count) < 0.05] = UNREACHABLE
    return Net(tail=tail, head=head, ms=ms, mm=mm, nodes=nodes)


def grid_net(side: int, seed: int, *, one_way: float = 0.15, missing: float = 0.2) -> Net:
    """Return a town of streets in a grid: side * side crossings, three classes of speed.

    Crossings are jittered by a third of a block of 150 m; every 8th street is wider and every
    32nd a main road, of which none is missing; streets are up to 30 % longer than straight.
    Nodes are numbered along a curve that keeps neighbours close (Morton).
    """
    rng = np.random.default_rng(seed)
    across, down = (axis.ravel() for axis in np.meshgrid(np.arange(side), np.arange(side)))
    x, y = (150 * axis + rng.uniform(-50, 50, axis.size) for axis in (across, down))
    number = np.empty(side * side, np.int64)
    number[np.argsort(_interleave(across) | _interleave(down) << 1)] = np.arange(side * side)
    index = np.arange(side * side).reshape(side, side)
    start = np.concatenate((index[:, :-1].ravel(), index[:-1].ravel()))
    end = np.concatenate((index[:, 1:].ravel(), index[1:].ravel()))
    street = np.where(start + 1 == end, down[start], across[start])
    road = np.where(street % 32 == 0, 0, np.where(street % 8 == 0, 1, 2))
    kept = (road < 2) | (rng.random(road.size) >= missing)
    start, end, road = start[kept], end[kept], road[kept]
    metres = np.hypot(x[start] - x[end], y[start] - y[end]) * rng.uniform(1, 1.3, road.size)
    kmh = np.array([90.0, 55.0, 30.0])[road] * rng.uniform(0.8, 1.1, road.size)
    mm, ms = (metres * 1000).astype(np.int64), (metres * 3600 / kmh).astype(np.int64)
    both = rng.random(road.size) >= one_way
    return Net(
        tail=number[np.concatenate((start, end[both]))],
        head=number[np.concatenate((end, start[both]))],
        ms=np.concatenate((ms, ms[both])),
        mm=np.concatenate((mm, mm[both])),
        nodes=side * side,
    )


def _interleave(axis: NDArray[np.int64]) -> NDArray[np.int64]:
    """Put a zero bit between all bits of numbers below 2^16."""
    spread = np.zeros_like(axis)
    for bit in range(16):
        spread |= (axis >> bit & 1) << (2 * bit)
    return spread


def draw_seeds(net: Net, places: int, seed: int) -> Seeds:
    """None to three nodes a place, with offsets; one in ten is out of reach."""
    rng = np.random.default_rng([seed, places])
    many = rng.integers(0, 4, places)
    total = int(many.sum())
    ms = rng.integers(0, 50, total)
    ms[rng.random(total) < 0.1] = UNREACHABLE
    return Seeds(
        ptr=np.concatenate(([0], np.cumsum(many))),
        node=rng.integers(0, net.nodes, total),
        ms=ms,
        mm=rng.integers(0, 500, total),
    )


def at_nodes(nodes: NDArray[np.int64]) -> Seeds:
    """One place at each node."""
    nothing = np.zeros(nodes.size, np.int64)
    return Seeds(ptr=np.arange(nodes.size + 1), node=nodes, ms=nothing, mm=nothing)


Pair = tuple[int, int]


def lexicographic(net: Net, seeds: Seeds, place: int) -> dict[int, Pair]:
    """Return (ms, mm) from a place to every node it reaches, by Dijkstra on pairs."""
    leaving: dict[int, list[tuple[int, int, int]]] = {}
    for tail, head, ms, mm in zip(*(a.tolist() for a in net.arcs), strict=True):
        if ms < UNREACHABLE:
            leaving.setdefault(tail, []).append((head, ms, mm))
    heap = [
        (int(seeds.ms[s]), int(seeds.mm[s]), int(seeds.node[s]))
        for s in range(seeds.ptr[place], seeds.ptr[place + 1])
        if seeds.ms[s] < UNREACHABLE
    ]
    heapq.heapify(heap)
    done: dict[int, Pair] = {}
    while heap:
        ms, mm, node = heapq.heappop(heap)
        if node in done:
            continue
        done[node] = (ms, mm)
        for head, more_ms, more_mm in leaving.get(node, []):
            heapq.heappush(heap, (ms + more_ms, mm + more_mm, head))
    return done


def slow_matrix(
    net: Net, sources: Seeds, targets: Seeds
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return times and lengths of all pairs by the search above."""
    rows, columns = sources.ptr.size - 1, targets.ptr.size - 1
    table = np.full((2, rows, columns), UNREACHABLE, np.int64)
    for i in range(rows):
        reached = lexicographic(net, sources, i)
        for j in range(columns):
            found = [
                (reached[v][0] + int(ms), reached[v][1] + int(mm))
                for v, ms, mm in zip(*(a.tolist() for a in _part(targets, j)), strict=True)
                if v in reached and ms < UNREACHABLE
            ]
            if found:
                table[:, i, j] = min(found)
    return table[0], table[1]


def _part(seeds: Seeds, place: int) -> tuple[NDArray[np.int64], ...]:
    part = slice(seeds.ptr[place], seeds.ptr[place + 1])
    return seeds.node[part], seeds.ms[part], seeds.mm[part]


def cheapest_arcs(net: Net) -> NDArray[np.int64]:
    """Return the numbers of the fastest open arc of each pair of different nodes."""
    some = np.flatnonzero((net.ms < UNREACHABLE) & (net.tail != net.head))
    order = some[np.lexsort((net.ms[some], net.head[some], net.tail[some]))]
    first = np.ones(order.size, np.bool_)
    first[1:] = (np.diff(net.tail[order]) != 0) | (np.diff(net.head[order]) != 0)
    return order[first]


def scipy_times(net: Net) -> NDArray[np.int64]:
    """Return the times between all nodes by scipy.

    It drops zeros and adds duplicates up: so the fastest arc of each pair only, and every time
    times 2^20 plus 1, which the division takes off again (paths have far fewer arcs).
    """
    kept = cheapest_arcs(net)
    weights = net.ms[kept].astype(np.float64) * 2**20 + 1
    graph: Any = csr_array(
        (weights, (net.tail[kept], net.head[kept])), shape=(net.nodes, net.nodes)
    )
    found = np.asarray(dijkstra(graph))
    times = np.floor(np.where(np.isinf(found), 0, found) / 2**20).astype(np.int64)
    return np.where(np.isinf(found), UNREACHABLE, times)
