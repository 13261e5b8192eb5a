"""Hierarchy and one-shot search on 200 random small networks, against scipy and a slow twin."""

from __future__ import annotations

import numpy as np
import pytest

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.hierarchy import RoadPath, build_hierarchy, matrix, path, paths
from georoute.roads.model import Seeds
from georoute.roads.one_shot import build_streets, search_matrix, search_pairs
from tests.examples import at_most
from tests.hierarchy_helpers import Net, at_nodes, draw_net, draw_seeds, scipy_times, slow_matrix

NETS = range(2 * at_most(100))


def check_path(net: Net, sources: Seeds, targets: Seeds, found: RoadPath) -> None:
    """The arcs follow one another from one seed to the other and add up to what is told."""
    start, end = found.source_seed, found.target_seed
    arcs = found.arcs
    nodes = [int(sources.node[start]), *net.head[arcs].tolist()]
    assert nodes[-1] == targets.node[end]
    assert nodes[:-1] == net.tail[arcs].tolist()
    assert len(set(nodes)) == len(nodes), "a node is passed twice"
    assert found.ms == sources.ms[start] + net.ms[arcs].sum() + targets.ms[end]
    assert found.mm == sources.mm[start] + net.mm[arcs].sum() + targets.mm[end]


@pytest.mark.source("scipy.sparse.csgraph.dijkstra")
@pytest.mark.parametrize("seed", NETS)
def test_times_equal_those_of_scipy(seed: int) -> None:
    net = draw_net(seed)
    everywhere = at_nodes(np.arange(net.nodes))
    expected = scipy_times(net)
    hierarchy = build_hierarchy(*net.arcs, nodes=net.nodes)
    assert np.array_equal(matrix(hierarchy, everywhere, everywhere)[0], expected)
    for backward in (False, True):
        streets = build_streets(*net.arcs, nodes=net.nodes, backward=backward)
        found, _ = search_matrix(streets, everywhere, everywhere, backward=backward)
        assert np.array_equal(found, expected)


@pytest.mark.parametrize("seed", NETS)
def test_times_and_lengths_between_places_equal_the_slow_twin(seed: int) -> None:
    net = draw_net(seed)
    sources, targets = draw_seeds(net, 7, seed), draw_seeds(net, 9, seed)
    ms, mm = slow_matrix(net, sources, targets)
    pairs = np.argwhere(np.ones_like(ms, np.bool_))
    hierarchy = build_hierarchy(*net.arcs, nodes=net.nodes)
    streets = build_streets(*net.arcs, nodes=net.nodes)
    by_rank = matrix(hierarchy, sources, targets), paths(hierarchy, sources, targets, pairs)
    plain = search_matrix(streets, sources, targets), search_pairs(streets, sources, targets, pairs)
    for (found_ms, found_mm), legs in (by_rank, plain):
        assert np.array_equal(found_ms, ms)
        assert np.array_equal(found_mm, mm)
        assert np.array_equal(legs.ms, ms.ravel())
        assert np.array_equal(legs.mm, mm.ravel())
        assert len(legs) == ms.size
        for q in range(len(legs)):
            if legs[q].ms < UNREACHABLE:
                check_path(net, sources, targets, legs[q])
            else:
                assert legs[q][1:] == (-1, -1, UNREACHABLE, UNREACHABLE)
                assert legs[q].arcs.size == 0


def test_one_path_is_that_of_the_batch() -> None:
    net = draw_net(5)
    everywhere = at_nodes(np.arange(net.nodes))
    hierarchy = build_hierarchy(*net.arcs, nodes=net.nodes)
    pairs = np.argwhere(np.ones((net.nodes, net.nodes), np.bool_))
    batch = paths(hierarchy, everywhere, everywhere, pairs)
    for q in range(0, len(batch), 7):
        alone = path(hierarchy, everywhere, int(pairs[q, 0]), everywhere, int(pairs[q, 1]))
        assert alone.arcs.tolist() == batch[q].arcs.tolist()
        assert alone[1:] == batch[q][1:]
