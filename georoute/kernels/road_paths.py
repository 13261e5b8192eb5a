"""One path of a hierarchy at a time, down to the arcs of the network it was built from."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.hierarchy_store import Hierarchy
from georoute.kernels.node_heap import KEY
from georoute.kernels.road_cost import FAR
from georoute.kernels.upward import CAME_BY, CAME_FROM, Reached, Starts, climb, forget

__all__ = ["ARCS", "COST", "SOURCE_SEED", "TARGET_SEED", "find_paths"]

COST = 0
ARCS = 1
SOURCE_SEED = 2
TARGET_SEED = 3
"""Columns of what is told of each path."""


@kernel
def _meet(there: Reached, back: Reached, count: Int) -> Int:
    """Return the node where the two searches meet at least cost, or -1."""
    best = np.int64(FAR)
    node = np.int64(-1)
    for s in range(count):
        v = there.seen[s]
        cost = there.state[v, KEY] + back.state[v, KEY]
        if cost < best:
            best = cost
            node = v
    return node


@kernel
def _trace(reached: Reached, v: Int, chain: NDArray[np.int64], n: Int) -> tuple[Int, Int]:
    """Append the arcs from ``v`` back to a start; return their end in ``chain`` and the start."""
    while reached.state[v, CAME_BY] >= 0:
        chain[n] = reached.state[v, CAME_BY]
        n += 1
        v = reached.state[v, CAME_FROM]
    return n, reached.state[v, CAME_FROM]


@kernel
def _unpack(
    arc: NDArray[np.int32], chain: NDArray[np.int64], n: Int, out: NDArray[np.int64], at: Int
) -> None:
    """Write the original arcs of the last ``n`` in ``chain``, the last of them first.

    ``chain`` has room for as many entries as there are original arcs.
    """
    while n > 0:
        n -= 1
        a = chain[n]
        if arc[a, 1] < 0:
            out[at] = arc[a, 0]
            at += 1
        else:
            chain[n] = arc[a, 1]
            chain[n + 1] = arc[a, 0]
            n += 2


@kernel
def find_paths(
    hierarchy: Hierarchy,
    there: Reached,
    back: Reached,
    sources: Starts,
    targets: Starts,
    pair: NDArray[np.int64],
    told: NDArray[np.int64],
    chain: NDArray[np.int64],
    out: NDArray[np.int64],
) -> Int:
    """Find the path of each pair (int64 (Q, 2), source and target); return how many were found.

    ``told``: int64 (Q, 4), see the columns above; a cost of ``FAR``: there is no path.
    ``out`` gets the original arcs of all paths, one after the other. It may end early, where the
    next path does not fit into what is left of ``out``; ``told`` says how long that one is.
    ``chain``: int64, scratch, N entries and as many as ``out``.
    """
    used: Int = 0
    forward: Int = 0
    done = 0
    for q in range(pair.shape[0]):
        if q == 0 or pair[q, 0] != pair[q - 1, 0]:
            forget(there, forward)
            forward = climb(
                there,
                sources,
                pair[q, 0],
                hierarchy.up_ptr,
                hierarchy.up,
                hierarchy.down_ptr,
                hierarchy.down,
            )
        backward = climb(
            back,
            targets,
            pair[q, 1],
            hierarchy.down_ptr,
            hierarchy.down,
            hierarchy.up_ptr,
            hierarchy.up,
        )
        v = _meet(there, back, forward)
        told[q, COST] = FAR
        told[q, ARCS] = 0
        if v >= 0:
            told[q, COST] = there.state[v, KEY] + back.state[v, KEY]
            down, told[q, TARGET_SEED] = _trace(back, v, chain, 0)
            chain[:down] = chain[:down][::-1].copy()
            end, told[q, SOURCE_SEED] = _trace(there, v, chain, down)
            arcs = 0
            for k in range(end):
                arcs += hierarchy.arc[chain[k], 2]
            told[q, ARCS] = arcs
            if used + arcs <= out.shape[0]:
                _unpack(hierarchy.arc, chain, end, out, used)
                used += arcs
            else:
                forget(back, backward)
                break
        forget(back, backward)
        done += 1
    forget(there, forward)
    return done
