"""Slow, obvious twins of the roads: every rule obeyed by remembering what was driven."""

from __future__ import annotations

import heapq
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from georoute.domain.run import Progress, no_progress
from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.hierarchy import RoadPath, RoadPaths
from georoute.roads.model import Access, RoadTable, Seeds
from georoute.roads.network import RoadNetwork
from georoute.roads.snapping import Snapped

FIRST, OPEN, LAST = 0, 1, 2
Way = tuple[int, ...]


class RoadTwin:
    """Trips over arcs: what was driven last is remembered whole, bans are looked up in it.

    A trip is local arcs, then arcs open to all, then local arcs; each of the three may be none.
    """

    def __init__(self, table: RoadTable) -> None:
        ends = list(zip(table.start.tolist(), table.end.tolist(), strict=True))
        self.tail = [end for pair in ends for end in pair]
        self.head = [end for pair in ends for end in pair[::-1]]
        times = zip(table.forward_ms.tolist(), table.backward_ms.tolist(), strict=True)
        self.ms = [time for pair in times for time in pair]
        self.mm = [length for length in table.length_mm.tolist() for _ in range(2)]
        self.local = [bool(a & Access.LOCAL) for a in table.access.tolist() for _ in range(2)]
        self.out = {
            node: [arc for arc, tail in enumerate(self.tail) if tail == node]
            for node in set(self.tail)
        }
        self.open = [time < UNREACHABLE for time in self.ms]
        bans = [
            tuple(table.ban_arc[a:b].tolist())
            for a, b in zip(table.ban_ptr[:-1], table.ban_ptr[1:], strict=True)
        ]
        # Sequences that cannot be driven forbid nothing.
        self.bans = {
            ban for ban in bans if all(self.head[a] == self.tail[b] for a, b in pairwise(ban))
        }
        self.memory = max((len(ban) - 1 for ban in self.bans), default=1)

    def onward(self, way: Way, level: int, arc: int) -> tuple[Way, int] | None:
        """Return what is remembered after driving an arc, or ``None`` where that is banned."""
        if not self.open[arc] or self.tail[arc] != self.head[way[-1]]:
            return None
        driven = (*way, arc)
        if any(driven[-len(ban) :] == ban for ban in self.bans):
            return None
        if self.local[arc]:
            level = FIRST if level == FIRST else LAST
        elif level == LAST:
            return None
        else:
            level = OPEN
        return driven[-self.memory :], level

    def part(self, arc: int, offset: int, *, before: bool) -> tuple[int, int]:
        """Return time and length on an arc before or after the cut of its stretch."""
        first_ms = round(self.ms[arc] * (offset / max(self.mm[arc], 1)))
        first = (first_ms, offset)
        rest = (self.ms[arc] - first_ms, self.mm[arc] - offset)
        return first if before == (arc % 2 == 0) else rest

    def costs(self, snapped: Snapped, source: int) -> list[tuple[int, int]]:
        """Return the least time and, with it, the least length from one place to all."""
        best = [(UNREACHABLE, UNREACHABLE)] * snapped.places
        best[source] = (0, 0)
        stretch, offset = int(snapped.stretch[source]), int(snapped.offset_mm[source])
        if stretch < 0:
            return best
        waiting: list[tuple[int, int, Way, int]] = []
        for arc in (2 * stretch, 2 * stretch + 1):
            if self.open[arc]:
                level = FIRST if self.local[arc] else OPEN
                ms, mm = self.part(arc, offset, before=False)
                waiting.append((ms, mm, (arc,), level))
                self._along(snapped, source, arc, best)
        heapq.heapify(waiting)
        done = set()
        goals = _by_stretch(snapped)
        while waiting:
            ms, mm, way, level = heapq.heappop(waiting)
            if (way, level) in done:
                continue
            done.add((way, level))
            for arc in self.out[self.head[way[-1]]]:
                then = self.onward(way, level, arc)
                if then is not None:
                    self._arrive(goals.get(arc // 2, []), arc, (ms, mm), best)
                    heapq.heappush(waiting, (ms + self.ms[arc], mm + self.mm[arc], *then))
        return best

    def _along(self, snapped: Snapped, source: int, arc: int, best: list[tuple[int, int]]) -> None:
        begin = self.part(arc, int(snapped.offset_mm[source]), before=True)
        for place in np.flatnonzero(snapped.stretch == arc // 2):
            end = self.part(arc, int(snapped.offset_mm[place]), before=True)
            if end[1] >= begin[1]:
                best[place] = min(best[place], (end[0] - begin[0], end[1] - begin[1]))

    def _arrive(
        self,
        goals: list[tuple[int, int]],
        arc: int,
        so_far: tuple[int, int],
        best: list[tuple[int, int]],
    ) -> None:
        for place, offset in goals:
            ms, mm = self.part(arc, offset, before=True)
            best[place] = min(best[place], (so_far[0] + ms, so_far[1] + mm))

    def drives(self, arcs: list[int]) -> bool:
        """Tell whether a trip over whole arcs obeys every rule."""
        if not self.open[arcs[0]]:
            return False
        state: tuple[Way, int] | None = ((arcs[0],), FIRST if self.local[arcs[0]] else OPEN)
        for arc in arcs[1:]:
            if state is None:
                return False
            state = self.onward(*state, arc)
        return state is not None


def _by_stretch(snapped: Snapped) -> dict[int, list[tuple[int, int]]]:
    """Return the places on each stretch, with their offsets."""
    found: dict[int, list[tuple[int, int]]] = {}
    offsets = zip(snapped.stretch.tolist(), snapped.offset_mm.tolist(), strict=True)
    for place, (stretch, offset) in enumerate(offsets):
        found.setdefault(stretch, []).append((place, offset))
    return found


class PlainSearch:
    """Shortest paths on the nodes of a network by one search from each source, in plain Python."""

    def __init__(self, network: RoadNetwork) -> None:
        self.network = network
        self.out: list[list[int]] = [[] for _ in range(network.nodes)]
        for arc, tail in enumerate(network.tail.tolist()):
            self.out[tail].append(arc)

    def _tree(self, seeds: Seeds, place: int) -> dict[int, tuple[int, int, int, int]]:
        """Return time, length, arc and seed by which each node is reached best."""
        network, found = self.network, dict[int, tuple[int, int, int, int]]()
        waiting = [
            (int(seeds.ms[s]), int(seeds.mm[s]), int(seeds.node[s]), -1, s)
            for s in range(seeds.ptr[place], seeds.ptr[place + 1])
        ]
        heapq.heapify(waiting)
        while waiting:
            ms, mm, node, by, seed = heapq.heappop(waiting)
            if node in found:
                continue
            found[node] = (ms, mm, by, seed)
            for arc in self.out[node]:
                then = (ms + int(network.ms[arc]), mm + int(network.mm[arc]))
                heapq.heappush(waiting, (*then, int(network.head[arc]), arc, seed))
        return found

    @staticmethod
    def _best(
        tree: dict[int, tuple[int, int, int, int]], seeds: Seeds, place: int
    ) -> tuple[int, int, int]:
        """Return time, length and seed of the best end."""
        best = (UNREACHABLE, UNREACHABLE, -1)
        for t in range(seeds.ptr[place], seeds.ptr[place + 1]):
            if int(seeds.node[t]) in tree:
                ms, mm, _, _ = tree[int(seeds.node[t])]
                best = min(best, (ms + int(seeds.ms[t]), mm + int(seeds.mm[t]), t))
        return best

    def matrix(
        self,
        sources: Seeds,
        targets: Seeds,
        *,
        progress: Progress = no_progress,
    ) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
        del progress
        shape = (sources.ptr.size - 1, targets.ptr.size - 1)
        ms, mm = np.zeros(shape, np.int64), np.zeros(shape, np.int64)
        for i in range(shape[0]):
            tree = self._tree(sources, i)
            for j in range(shape[1]):
                ms[i, j], mm[i, j], _ = self._best(tree, targets, j)
        return ms, mm

    def paths(
        self,
        sources: Seeds,
        targets: Seeds,
        pairs: NDArray[np.int64],
        *,
        progress: Progress = no_progress,
    ) -> RoadPaths:
        del progress
        found = [self._path(sources, int(i), targets, int(j)) for i, j in pairs]

        def column(name: str) -> NDArray[np.int64]:
            return np.array([getattr(path, name) for path in found], np.int64)

        return RoadPaths(
            ptr=np.cumsum([0, *(path.arcs.size for path in found)]),
            arcs=np.concatenate([np.zeros(0, np.int64), *(path.arcs for path in found)]),
            source_seed=column("source_seed"),
            target_seed=column("target_seed"),
            ms=column("ms"),
            mm=column("mm"),
        )

    def _path(self, sources: Seeds, i: int, targets: Seeds, j: int) -> RoadPath:
        tree = self._tree(sources, i)
        ms, mm, target = self._best(tree, targets, j)
        arcs: list[int] = []
        if target < 0:
            return RoadPath(np.array(arcs, np.int64), -1, -1, ms, mm)
        node = int(targets.node[target])
        while tree[node][2] >= 0:
            arcs.append(tree[node][2])
            node = int(self.network.tail[tree[node][2]])
        return RoadPath(np.array(arcs[::-1], np.int64), tree[node][3], target, ms, mm)
