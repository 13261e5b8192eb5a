"""Matrices and paths by Dijkstra's search on the plain network: for few places, once."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.run import no_progress
from georoute.kernels.road_cost import split_costs
from georoute.kernels.road_search import Streets, lay_streets, search_paths, search_rows
from georoute.roads.contracting import pack_costs
from georoute.roads.hierarchy import MATRIX_STAGE, collect_paths, empty_search, pack_seeds

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.domain.run import Progress
    from georoute.roads.hierarchy import RoadPaths
    from georoute.roads.model import Seeds

__all__ = ["build_streets", "search_matrix", "search_pairs"]

CHUNK = 2
"""Searches between two reports of progress: some hundredths of a second on a county."""


def build_streets(
    tail: NDArray[np.int64],
    head: NDArray[np.int64],
    ms: NDArray[np.int64],
    mm: NDArray[np.int64],
    *,
    nodes: int,
    backward: bool = False,
) -> Streets:
    """Return the plain network of the same arcs as ``build_hierarchy`` takes.

    ``backward``: every arc turned round, for searches from targets.
    """
    cost = pack_costs(ms, mm)
    ends = np.column_stack((head, tail) if backward else (tail, head))
    streets = Streets(ptr=np.zeros(nodes + 2, np.int64), link=np.empty((cost.size, 2), np.int64))
    lay_streets(streets, np.ascontiguousarray(ends, np.int64), cost)
    return Streets(ptr=streets.ptr[:-1], link=streets.link[: streets.ptr[-2]])


def search_matrix(
    streets: Streets,
    sources: Seeds,
    targets: Seeds,
    *,
    backward: bool = False,
    progress: Progress = no_progress,
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """As ``georoute.roads.hierarchy.matrix``: one search from each source.

    ``backward``: ``streets`` are turned round, and there is one search from each target.
    """
    nodes = streets.ptr.size - 1
    starts, ends = pack_seeds(sources, nodes), pack_seeds(targets, nodes)
    if backward:
        starts, ends = ends, starts
    rows = starts.ptr.size - 1
    cost = np.empty((rows, ends.ptr.size - 1), np.int64)
    reached = empty_search(nodes)
    for p in range(0, rows, CHUNK):
        stop = min(rows, p + CHUNK)
        search_rows(streets, reached, starts, ends, p, stop, cost)
        progress(MATRIX_STAGE, fraction=stop / rows)
    mm = np.empty_like(cost)
    split_costs(cost, mm)
    if backward:
        return np.ascontiguousarray(cost.T), np.ascontiguousarray(mm.T)
    return cost, mm


def search_pairs(
    streets: Streets,
    sources: Seeds,
    targets: Seeds,
    pairs: NDArray[np.int64],
    *,
    progress: Progress = no_progress,
) -> RoadPaths:
    """As ``georoute.roads.hierarchy.paths``: one search for each pair (int64 (Q, 2))."""
    nodes = streets.ptr.size - 1
    starts, ends = pack_seeds(sources, nodes), pack_seeds(targets, nodes)
    reached = empty_search(nodes)

    def find(pair: NDArray[np.int64], told: NDArray[np.int64], out: NDArray[np.int64]) -> int:
        return int(search_paths(streets, reached, starts, ends, pair, told, out))

    return collect_paths(find, pairs, progress=progress)
