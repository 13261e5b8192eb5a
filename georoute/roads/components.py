"""Which roads hang together: strongly connected components, and what can be reached from where."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy.sparse import csr_array
from scipy.sparse.csgraph import breadth_first_order, connected_components

if TYPE_CHECKING:
    from numpy.typing import NDArray

__all__ = ["reached", "strong_components"]


def _graph(tail: NDArray[np.int64], head: NDArray[np.int64], nodes: int) -> csr_array:
    return csr_array((np.ones(tail.size, np.int32), (tail, head)), shape=(nodes, nodes))


def strong_components(
    tail: NDArray[np.int64], head: NDArray[np.int64], *, nodes: int
) -> tuple[NDArray[np.int32], NDArray[np.int64]]:
    """Return the component of each node and the number of nodes of each component.

    Within a strongly connected component every node can be reached from every other.
    """
    _, labels = connected_components(_graph(tail, head, nodes), directed=True, connection="strong")
    label = np.asarray(labels, np.int32)
    return label, np.bincount(label, minlength=1).astype(np.int64)


def reached(
    tail: NDArray[np.int64], head: NDArray[np.int64], begin: NDArray[np.bool_]
) -> NDArray[np.bool_]:
    """Return which nodes can be reached by arcs from any node of ``begin`` (shape (nodes,))."""
    nodes = begin.size
    first = np.flatnonzero(begin)
    # One more node with an arc to every beginning makes one search of many.
    tails = np.concatenate((tail, np.full(first.size, nodes, np.int64)))
    heads = np.concatenate((head, first))
    order = breadth_first_order(
        _graph(tails, heads, nodes + 1), nodes, directed=True, return_predecessors=False
    )
    found = np.zeros(nodes + 1, np.bool_)
    found[order] = True
    return found[:nodes]
