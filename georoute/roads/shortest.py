"""Choose between a hierarchy and one-shot searches: what is asked decides what is quicker."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.domain.run import no_progress
from georoute.roads.contracting import build_hierarchy
from georoute.roads.hierarchy import matrix, paths
from georoute.roads.one_shot import build_streets, search_matrix, search_pairs

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from georoute.domain.run import Progress
    from georoute.kernels.hierarchy_store import Hierarchy
    from georoute.roads.hierarchy import RoadPaths
    from georoute.roads.model import Seeds

__all__ = ["BREAK_EVEN", "ShortestPaths"]

BREAK_EVEN = 100
"""One-shot searches that take as long as building the hierarchy, whatever the size of the network:
measured between 80 and 160 on a town of 10,000 nodes and grids of 22,500 and 490,000."""


class ShortestPaths:
    """Fastest paths of one network, of equals the shortest; the hierarchy is built when it pays.

    One-shot searches are used until their number reaches ``BREAK_EVEN``: so the work is never
    more than twice what it would have been with the better of the two from the start.
    """

    def __init__(
        self,
        tail: NDArray[np.int64],
        head: NDArray[np.int64],
        ms: NDArray[np.int64],
        mm: NDArray[np.int64],
        *,
        nodes: int,
        hierarchy: Hierarchy | None = None,
    ) -> None:
        self._arcs = (tail, head, ms, mm)
        self._nodes = nodes
        self._spent = 0
        self.hierarchy = hierarchy

    def _hierarchy_for(self, searches: int, progress: Progress) -> Hierarchy | None:
        """Return the hierarchy if there is one, or if it pays to have one by now."""
        if self.hierarchy is None and self._spent + searches > BREAK_EVEN:
            self.hierarchy = build_hierarchy(*self._arcs, nodes=self._nodes, progress=progress)
        if self.hierarchy is None:
            self._spent += searches
        return self.hierarchy

    def matrix(
        self, sources: Seeds, targets: Seeds, *, progress: Progress = no_progress
    ) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
        """Return times (ms) and lengths (mm), int64 (S, T), as ``georoute.roads.hierarchy``."""
        rows, columns = sources.ptr.size - 1, targets.ptr.size - 1
        hierarchy = self._hierarchy_for(min(rows, columns), progress)
        if hierarchy is not None:
            return matrix(hierarchy, sources, targets, progress=progress)
        backward = columns < rows
        streets = build_streets(*self._arcs, nodes=self._nodes, backward=backward)
        return search_matrix(streets, sources, targets, backward=backward, progress=progress)

    def paths(
        self,
        sources: Seeds,
        targets: Seeds,
        pairs: NDArray[np.int64],
        *,
        progress: Progress = no_progress,
    ) -> RoadPaths:
        """Return the path of each pair (int64 (Q, 2)), as ``georoute.roads.hierarchy``."""
        hierarchy = self._hierarchy_for(len(pairs), progress)
        if hierarchy is not None:
            return paths(hierarchy, sources, targets, pairs, progress=progress)
        streets = build_streets(*self._arcs, nodes=self._nodes)
        return search_pairs(streets, sources, targets, pairs, progress=progress)
