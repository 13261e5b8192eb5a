"""Legs along roads measured again: on the network that is kept, by another library's search.

The network's file holds arrays only; what they mean is written down in ``roads.network``. The
shortest paths here are those of scipy (Dijkstra), one tree for each place.
"""

from __future__ import annotations

import zipfile
from typing import TYPE_CHECKING

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import dijkstra

from georoute.errors import OutputError
from georoute.files import cache_folder

if TYPE_CHECKING:
    from collections.abc import Mapping
    from pathlib import Path

    from numpy.typing import NDArray

    from georoute.audit.report import Report
    from georoute.domain.plan import Plan
    from georoute.domain.roads import RoadPoint

__all__ = ["MeasuredOnRoads"]

MOST_LABELS = 20_000_000
"""Nodes times trees that are searched; of a larger plan a part of the places is measured."""
MM_WEIGHT = 1e-9
"""A millimetre in milliseconds: of equally quick paths the shortest is taken."""
TINY = 1e-7
"""The library takes an arc that costs nothing for none."""
NEVER = float("inf")
MS_PER_S, MM_PER_M = 1_000.0, 1_000.0

Figures = tuple[float, float]


class _Network:
    """The arrays of a kept network that trips need."""

    def __init__(self, path: Path) -> None:
        with np.load(path, allow_pickle=False) as file:
            self.tail: NDArray[np.int64] = file["network.tail"]
            self.head: NDArray[np.int64] = file["network.head"]
            self.ms: NDArray[np.int64] = file["network.ms"]
            self.mm: NDArray[np.int64] = file["network.mm"]
            self.after: NDArray[np.int64] = file["network.after"]
            self.before_ptr: NDArray[np.int64] = file["network.before_ptr"]
            self.before: NDArray[np.int64] = file["network.before"]
            self.length: NDArray[np.int64] = file["table.length_mm"]
            ways = (file["table.forward_ms"], file["table.backward_ms"])
        self.arc_ms: NDArray[np.int64] = np.stack(ways, axis=1).reshape(-1)
        self.nodes = int(max(self.tail.max(), self.head.max())) + 1

    def ends(self, point: RoadPoint) -> list[tuple[int, float, float, float, float]]:
        """Return (arc, ms and mm before the point, ms and mm after it) of each open arc there."""
        found: list[tuple[int, float, float, float, float]] = []
        length = int(self.length[point.stretch])
        offset = round(point.offset_m * MM_PER_M)
        for arc in (2 * point.stretch, 2 * point.stretch + 1):
            if self.after[arc] < 0:
                continue
            from_start = offset / max(length, 1)
            share = from_start if arc % 2 == 0 else 1.0 - from_start
            driven = offset if arc % 2 == 0 else length - offset
            whole = float(self.arc_ms[arc])
            found.append((arc, whole * share, driven, whole * (1.0 - share), length - driven))
        return found


class MeasuredOnRoads:
    """Measures legs between places on roads again."""

    def __init__(self, plan: Plan, network: _Network) -> None:
        self._network = network
        self._points = {point.place_id: point for point in plan.road_points}
        self._rows = self._chosen(plan)
        self._trees()

    @classmethod
    def find(cls, plan: Plan, report: Report) -> MeasuredOnRoads | None:
        """Open the network the plan was made on; warn where it is not at hand."""
        name = plan.travel.network
        try:
            return cls(plan, _Network(cache_folder() / "roads" / name))
        except (OSError, KeyError, ValueError, IndexError, OutputError, zipfile.BadZipFile):
            report.warning(
                "roads_not_at_hand",
                "The road network of this plan is not kept on this machine; times and lengths of "
                "its legs were not measured again.",
                remedy="Run `plan` again here to check them.",
            )
            return None

    def leg(self, from_id: str, to_id: str) -> Figures | None:
        """Return seconds and metres of a leg; ``None`` where it is not among those measured."""
        if from_id == to_id:
            return 0.0, 0.0
        if from_id not in self._points or to_id not in self._points:
            return NEVER, NEVER
        if from_id not in self._rows:
            return None
        start, end = self._points[from_id], self._points[to_id]
        through = [
            (self._ms[row, node] + ms, self._length_to(row, node) + mm)
            for row in [self._rows[from_id]]
            for arc, ms, mm, _, _ in self._network.ends(end)
            for node in self._entries(arc)
            if np.isfinite(self._ms[row, node])
        ]
        ms, mm = min([*through, *self._along(start, end)], default=(NEVER, NEVER))
        return ms / MS_PER_S, mm / MM_PER_M

    def _along(self, start: RoadPoint, end: RoadPoint) -> list[Figures]:
        """Return the drive along the stretch both places lie on, where its direction is open."""
        if start.stretch != end.stretch:
            return []
        network, gap_m = self._network, end.offset_m - start.offset_m
        arcs = (2 * start.stretch, 2 * start.stretch + 1)
        fitting = [arcs[0]] if gap_m > 0 else [arcs[1]] if gap_m < 0 else list(arcs)
        length = max(int(network.length[start.stretch]), 1)
        mm = abs(gap_m) * MM_PER_M
        return [
            (float(network.arc_ms[arc]) * mm / length, mm)
            for arc in fitting
            if network.after[arc] >= 0
        ]

    def _entries(self, arc: int) -> list[int]:
        ptr = self._network.before_ptr
        entries: list[int] = self._network.before[ptr[arc] : ptr[arc + 1]].tolist()
        return entries

    def _chosen(self, plan: Plan) -> Mapping[str, int]:
        """Return a row for each place to search from: those of tours first."""
        driven = [leg.from_id for tour in plan.tours for leg in tour.legs]
        order = [p for p in dict.fromkeys([*driven, *self._points]) if p in self._points]
        most = max(1, MOST_LABELS // self._network.nodes)
        return {place_id: row for row, place_id in enumerate(order[:most])}

    def _trees(self) -> None:
        """Search from every chosen place: an extra node of the graph leads to its ends."""
        network, places = self._network, len(self._rows)
        tail, head, ms, mm = [network.tail], [network.head], [network.ms], [network.mm]
        for place_id, row in self._rows.items():
            for arc, _, _, after_ms, after_mm in network.ends(self._points[place_id]):
                tail.append(np.array([network.nodes + row]))
                head.append(network.after[[arc]])
                ms.append(np.array([after_ms]))
                mm.append(np.array([after_mm]))
        tails, heads = np.concatenate(tail), np.concatenate(head)
        times, lengths = np.concatenate(ms), np.concatenate(mm)
        weight = times + lengths * MM_WEIGHT + TINY
        # Of parallel arcs the best one: the library would add them up.
        order = np.lexsort((weight, heads, tails))
        tails, heads, weight = tails[order], heads[order], weight[order]
        first = np.ones(order.shape[0], np.bool_)
        first[1:] = (tails[1:] != tails[:-1]) | (heads[1:] != heads[:-1])
        kept = order[first]
        size = network.nodes + places
        at = (tails[first], heads[first])
        graph = coo_array((weight[first], at), shape=(size, size)).tocsr()
        self._mm_of = coo_array((lengths[kept], at), shape=(size, size)).tocsr()
        starts = network.nodes + np.arange(places)
        self._ms, self._came_from = dijkstra(graph, indices=starts, return_predecessors=True)

    def _length_to(self, row: int, node: int) -> float:
        """Return the length of the path to a node, arc by arc."""
        length, here = 0.0, node
        while (before := int(self._came_from[row, here])) >= 0:
            length += float(self._mm_of[before, here])
            here = before
        return length
