"""Travel between places on the roads: the table of times and lengths, and the legs."""

from __future__ import annotations

from typing import TYPE_CHECKING, Protocol

import numpy as np

from georoute.domain.run import no_progress
from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.hierarchy import RoadPath
from georoute.roads.legs import make_leg
from georoute.roads.trip_ends import along_stretch, same_stretch, trip_ends

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from georoute.domain.run import Progress
    from georoute.roads.hierarchy import RoadPaths
    from georoute.roads.legs import RoadLeg
    from georoute.roads.model import Seeds
    from georoute.roads.network import RoadNetwork
    from georoute.roads.snapping import Snapped

__all__ = ["PathSearch", "RoadTravel"]


class PathSearch(Protocol):
    """What finds shortest paths on a network: least time, then least length."""

    def matrix(
        self, sources: Seeds, targets: Seeds, *, progress: Progress
    ) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
        """Return times and lengths, shape (sources, targets)."""

    def paths(
        self, sources: Seeds, targets: Seeds, pairs: NDArray[np.int64], *, progress: Progress
    ) -> RoadPaths:
        """Return the path of each pair (source, target), shape (n, 2)."""


class RoadTravel:
    """Times, lengths and legs between places on a network.

    Parameters
    ----------
    network
        The network.
    snapped
        P places on it. Places without a stretch are reached from nowhere.
    search
        Finds the shortest paths on the nodes and arcs of the network.
    """

    def __init__(self, network: RoadNetwork, snapped: Snapped, search: PathSearch) -> None:
        self.network = network
        self.snapped = snapped
        self._search = search
        self._ends = trip_ends(network, snapped)

    def matrix(
        self, *, progress: Progress = no_progress
    ) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
        """Return times in ms and lengths in mm between all places, int64 (P, P).

        Entry [i, j] is from i to j, ``UNREACHABLE`` where there is no way; the diagonal is 0.
        Length is that of the quickest way, of several equally quick the shortest.
        """
        ms, mm = self._search.matrix(self._ends.sources, self._ends.targets, progress=progress)
        i, j, along_ms, along_mm = same_stretch(self.network, self.snapped)
        better = _is_better(along_ms, along_mm, ms[i, j], mm[i, j])
        i, j = i[better], j[better]
        ms[i, j], mm[i, j] = along_ms[better], along_mm[better]
        np.fill_diagonal(ms, 0)
        np.fill_diagonal(mm, 0)
        return ms, mm

    def leg(self, i: int, j: int) -> RoadLeg | None:
        """Return the leg from place ``i`` to place ``j``, or ``None`` where there is no way."""
        return self.legs([(i, j)])[0]

    def legs(
        self, pairs: Sequence[tuple[int, int]], *, progress: Progress = no_progress
    ) -> list[RoadLeg | None]:
        """Return the legs of many pairs of places, ``None`` where there is no way.

        Time and length are those of ``matrix``.
        """
        wanted = np.array(pairs, np.int64).reshape(-1, 2)
        along = self._along(wanted)
        found = self._search.paths(
            self._ends.sources, self._ends.targets, wanted, progress=progress
        )
        return [self._leg((int(i), int(j)), found[k], along[k]) for k, (i, j) in enumerate(wanted)]

    def _along(self, pairs: NDArray[np.int64]) -> list[RoadPath]:
        """Return what driving along a common stretch takes, for each pair."""
        snapped = self.snapped
        stretch = snapped.stretch[pairs[:, 0]]
        common = (stretch >= 0) & (stretch == snapped.stretch[pairs[:, 1]])
        offsets = snapped.offset_mm[pairs]
        arc, ms, mm = along_stretch(
            self.network, np.maximum(stretch, 0), offsets[:, 0], offsets[:, 1]
        )
        ms, mm = np.where(common, ms, UNREACHABLE), np.where(common, mm, UNREACHABLE)
        return [
            RoadPath(np.array([a]), -1, -1, int(t), int(d))
            for a, t, d in zip(arc, ms, mm, strict=True)
        ]

    def _leg(self, pair: tuple[int, int], path: RoadPath, along: RoadPath) -> RoadLeg | None:
        if min(path.ms, along.ms) >= UNREACHABLE:
            return None
        if (along.ms, along.mm) <= (path.ms, path.mm):
            return make_leg(self.network, self.snapped, pair, along.arcs, ms=along.ms, mm=along.mm)
        driven = self.network.arc[path.arcs]
        arcs = np.concatenate(
            (
                self._ends.source_arc[[path.source_seed]],
                driven[driven >= 0],
                self._ends.target_arc[[path.target_seed]],
            )
        )
        return make_leg(self.network, self.snapped, pair, arcs, ms=path.ms, mm=path.mm)


def _is_better(
    ms: NDArray[np.int64],
    mm: NDArray[np.int64],
    than_ms: NDArray[np.int64],
    than_mm: NDArray[np.int64],
) -> NDArray[np.bool_]:
    return np.asarray((ms < than_ms) | ((ms == than_ms) & (mm <= than_mm)), np.bool_)
