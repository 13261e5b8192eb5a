"""Matrices and paths from a contraction hierarchy: for many places, or many questions."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from georoute.domain.run import no_progress
from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.bucket_matrix import LANES, Buckets, Lanes, leave_word, read_word, sort_word
from georoute.kernels.hierarchy_store import Hierarchy
from georoute.kernels.road_cost import FAR, MM_BITS, MOST_MM
from georoute.kernels.road_paths import ARCS, COST, SOURCE_SEED, TARGET_SEED, find_paths
from georoute.kernels.upward import Reached, Starts
from georoute.roads.contracting import build_hierarchy, pack_costs

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from georoute.domain.run import Progress
    from georoute.roads.model import Seeds

__all__ = [
    "Hierarchy",
    "RoadPath",
    "RoadPaths",
    "build_hierarchy",
    "collect_paths",
    "empty_search",
    "matrix",
    "pack_seeds",
    "path",
    "paths",
]

MATRIX_STAGE = "road matrix"
PATHS_STAGE = "road legs"

CHUNK = 128
"""Searches between two reports of progress: some hundredths of a second on a county."""

WORD = 4_000_000
"""Entries in all buckets at a time; 16 bytes each, and as many again while they are sorted."""


class RoadPath(NamedTuple):
    """One path: numbers of the arcs in order, the seeds it runs between, time and length.

    The seeds are indices into ``Seeds.node``. Where there is no path: no arcs, seeds -1, both
    figures ``UNREACHABLE``.
    """

    arcs: NDArray[np.int64]
    source_seed: int
    target_seed: int
    ms: int
    mm: int


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class RoadPaths:
    """Q paths: the arcs of path q are ``arcs[ptr[q]:ptr[q + 1]]``. All int64; see ``RoadPath``."""

    ptr: NDArray[np.int64]
    arcs: NDArray[np.int64]
    source_seed: NDArray[np.int64]
    target_seed: NDArray[np.int64]
    ms: NDArray[np.int64]
    mm: NDArray[np.int64]

    def __len__(self) -> int:
        """Return the number of paths."""
        return int(self.ms.size)

    def __getitem__(self, q: int) -> RoadPath:
        """Return path ``q``."""
        return RoadPath(
            arcs=self.arcs[self.ptr[q] : self.ptr[q + 1]],
            source_seed=int(self.source_seed[q]),
            target_seed=int(self.target_seed[q]),
            ms=int(self.ms[q]),
            mm=int(self.mm[q]),
        )


def pack_seeds(seeds: Seeds, nodes: int, rank: NDArray[np.int32] | None = None) -> Starts:
    """Return seeds as the kernels take them, their nodes by ``rank``.

    Raises
    ------
    ValueError
        If a node is out of range, or a time or length is negative.
    """
    if seeds.node.size and not (seeds.node.min() >= 0 and seeds.node.max() < nodes):
        msg = f"seeds must be at nodes 0 to {nodes - 1}"
        raise ValueError(msg)
    node = seeds.node if rank is None else rank[seeds.node]
    return Starts(
        ptr=np.ascontiguousarray(seeds.ptr, np.int64),
        node=np.ascontiguousarray(node, np.int64),
        cost=pack_costs(seeds.ms, seeds.mm),
    )


def empty_search(nodes: int) -> Reached:
    """Return the scratch of a search that has reached nothing."""
    state = np.full((nodes, 4), -1, np.int64)
    state[:, 0] = FAR
    return Reached(state=state, heap=np.empty((nodes, 2), np.int64), seen=np.empty(nodes, np.int64))


def matrix(
    hierarchy: Hierarchy, sources: Seeds, targets: Seeds, *, progress: Progress = no_progress
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return time and length of the fastest path from each source to each target.

    Of equally fast paths the shortest counts; both figures are of the same path.

    Returns
    -------
    Times in ms and lengths in mm, int64 (S, T), ``UNREACHABLE`` where there is no path.
    """
    nodes = hierarchy.rank.size
    starts = pack_seeds(sources, nodes, hierarchy.rank)
    ends = pack_seeds(targets, nodes, hierarchy.rank)
    rows, columns = sources.ptr.size - 1, targets.ptr.size - 1
    ms, mm = np.empty((rows, columns), np.int64), np.empty((rows, columns), np.int64)
    reached = empty_search(nodes)
    order = _neighbours(sources)
    lanes = Lanes(
        slot=np.full(nodes, -1, np.int32),
        node=np.empty(nodes, np.int64),
        cost=np.empty((nodes, LANES), np.int64),
    )
    first = 0
    while first < columns:
        buckets = _buckets(hierarchy, reached, ends, first)
        for p in range(0, rows, CHUNK):
            part = order[p : p + CHUNK]
            read_word(hierarchy, reached, starts, part, buckets, lanes, ms, mm)
            done = first * rows + (p + part.size) * buckets.many
            progress(MATRIX_STAGE, fraction=done / ms.size)
        first += buckets.many
    return ms, mm


def _neighbours(seeds: Seeds) -> NDArray[np.int64]:
    """Return all places in the order of their nodes, which is spatial in a road network."""
    if not seeds.node.size:
        return np.arange(seeds.ptr.size - 1)
    node = seeds.node[np.minimum(seeds.ptr[:-1], seeds.node.size - 1)]
    return np.argsort(node, kind="stable").astype(np.int64)


def _buckets(hierarchy: Hierarchy, reached: Reached, ends: Starts, first: int) -> Buckets:
    """Return the buckets of targets from ``first`` on, as many as have room."""
    columns = ends.ptr.size - 1
    nodes = hierarchy.rank.size
    room = min(WORD, (columns - first) * nodes) + nodes
    word = np.empty((room, 2), np.int64)  # pages that are never written take no memory
    used = np.array([0, first], np.int64)
    last = first
    while last < columns:
        wish = min(columns, last + CHUNK)
        last = int(leave_word(hierarchy, reached, ends, last, wish, word, used))
        if last < wish:
            break
    word = word[: used[0]]
    ptr = np.zeros(nodes + 2, np.int64)
    target = np.empty(len(word), np.uint32)
    cost = np.empty(len(word), np.int64)
    sort_word(word, ptr, target, cost)
    return Buckets(ptr=ptr, target=target, cost=cost, base=first, many=last - first)


def path(hierarchy: Hierarchy, sources: Seeds, i: int, targets: Seeds, j: int) -> RoadPath:
    """Return the fastest path from source ``i`` to target ``j``, of equals the shortest."""
    return paths(hierarchy, sources, targets, np.array([[i, j]], np.int64))[0]


def paths(
    hierarchy: Hierarchy,
    sources: Seeds,
    targets: Seeds,
    pairs: NDArray[np.int64],
    *,
    progress: Progress = no_progress,
) -> RoadPaths:
    """Return the fastest path of each pair (int64 (Q, 2), source and target).

    Quickest when pairs of the same source follow one another.
    """
    nodes = hierarchy.rank.size
    starts = pack_seeds(sources, nodes, hierarchy.rank)
    ends = pack_seeds(targets, nodes, hierarchy.rank)
    there, back = empty_search(nodes), empty_search(nodes)

    def find(pair: NDArray[np.int64], told: NDArray[np.int64], out: NDArray[np.int64]) -> int:
        chain = np.empty(max(2 * nodes, out.size), np.int64)
        return int(find_paths(hierarchy, there, back, starts, ends, pair, told, chain, out))

    return collect_paths(find, pairs, progress=progress)


def collect_paths(
    find: Callable[[NDArray[np.int64], NDArray[np.int64], NDArray[np.int64]], int],
    pairs: NDArray[np.int64],
    *,
    progress: Progress,
) -> RoadPaths:
    """Have ``find`` do all pairs, some at a time, with more room where a path needs it."""
    pairs = np.ascontiguousarray(pairs, np.int64).reshape(-1, 2)
    told = np.full((len(pairs), 4), -1, np.int64)
    out = np.empty(1 << 16, np.int64)
    arcs: list[NDArray[np.int64]] = []
    done = 0
    while done < len(pairs):
        stop = min(len(pairs), done + CHUNK)
        found = find(pairs[done:stop], told[done:stop], out)
        used = int(told[done : done + found, ARCS].sum())
        arcs.append(out[:used].copy())
        done += found
        if done < stop and told[done, ARCS] > out.size:
            out = np.empty(2 * int(told[done, ARCS]), np.int64)
        progress(PATHS_STAGE, fraction=done / len(pairs))
    cost = told[:, COST]
    none = cost >= FAR
    told[none, SOURCE_SEED] = -1
    told[none, TARGET_SEED] = -1
    return RoadPaths(
        ptr=np.concatenate(([0], np.cumsum(told[:, ARCS]))),
        arcs=np.concatenate([*arcs, np.empty(0, np.int64)]),
        source_seed=told[:, SOURCE_SEED].copy(),
        target_seed=told[:, TARGET_SEED].copy(),
        ms=np.where(none, UNREACHABLE, cost >> MM_BITS),
        mm=np.where(none, UNREACHABLE, cost & MOST_MM),
    )
