"""A network of 20,000 nodes, hubs, bad input, progress, and the choice between two ways."""

from __future__ import annotations

from functools import cache
from typing import Any

import numpy as np
import pytest
from scipy.sparse import csr_array
from scipy.sparse.csgraph import dijkstra

from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.hierarchy_store import Hierarchy
from georoute.kernels.road_cost import MM_BITS, MOST_MM, MOST_MS
from georoute.roads import hierarchy as hierarchy_module
from georoute.roads import shortest
from georoute.roads.hierarchy import build_hierarchy, matrix, paths
from georoute.roads.model import Seeds
from georoute.roads.shortest import ShortestPaths
from tests.hierarchy_helpers import Net, at_nodes, draw_seeds, grid_net, slow_matrix

pytestmark = pytest.mark.slow

SIDE = 142


class Told:
    """Reports of progress, kept."""

    def __init__(self) -> None:
        self.stages: list[str] = []
        self.fractions: list[float] = []

    def __call__(
        self,
        stage: str,
        *,
        fraction: float,
        cost: float | None = None,  # noqa: ARG002  # a part of every report
        best_cost: float | None = None,  # noqa: ARG002  # a part of every report
    ) -> None:
        self.stages.append(stage)
        self.fractions.append(fraction)


@cache
def medium() -> tuple[Net, Hierarchy]:
    net = grid_net(SIDE, seed=3)
    return net, build_hierarchy(*net.arcs, nodes=net.nodes)


@pytest.mark.source("scipy.sparse.csgraph.dijkstra")
def test_matrix_and_paths_of_twenty_thousand_nodes_equal_those_of_scipy() -> None:
    net, hierarchy = medium()
    assert net.nodes > 20_000
    rng = np.random.default_rng(9)
    sources, targets = (at_nodes(rng.integers(0, net.nodes, many)) for many in (40, 300))
    # No two arcs of the grid join the same nodes, and none takes no time; time and length in one
    # number would not fit a float, so time alone.
    graph: Any = csr_array((net.ms, (net.tail, net.head)), shape=(net.nodes, net.nodes))
    expected = np.asarray(dijkstra(graph, indices=sources.node))[:, targets.node]
    ms, mm = matrix(hierarchy, sources, targets)
    assert np.array_equal(np.where(ms == UNREACHABLE, np.inf, ms), expected)
    assert np.any(ms == UNREACHABLE)
    pairs = np.column_stack((rng.integers(0, 40, 200), rng.integers(0, 300, 200)))
    legs = paths(hierarchy, sources, targets, pairs)
    assert np.array_equal(legs.ms, ms[tuple(pairs.T)])
    assert np.array_equal(legs.mm, mm[tuple(pairs.T)])
    for q in np.flatnonzero(legs.ms < UNREACHABLE).tolist():
        arcs = legs[q].arcs
        assert (net.ms[arcs].sum(), net.mm[arcs].sum()) == (legs.ms[q], legs.mm[q])
        assert np.array_equal(net.head[arcs[:-1]], net.tail[arcs[1:]])


def test_lengths_of_twenty_thousand_nodes_equal_the_slow_twin() -> None:
    net, hierarchy = medium()
    sources, targets = draw_seeds(net, 4, 1), draw_seeds(net, 60, 2)
    ms, mm = slow_matrix(net, sources, targets)
    found = matrix(hierarchy, sources, targets)
    assert np.array_equal(found[0], ms)
    assert np.array_equal(found[1], mm)


def test_the_same_input_gives_the_same_hierarchy() -> None:
    net, hierarchy = medium()
    again = build_hierarchy(*net.arcs, nodes=net.nodes)
    for name, array in hierarchy._asdict().items():
        assert np.array_equal(array, getattr(again, name))


def test_buckets_that_overflow_are_worked_off_in_parts(monkeypatch: pytest.MonkeyPatch) -> None:
    net, hierarchy = medium()
    targets = draw_seeds(net, 50, 4)
    whole = matrix(hierarchy, targets, targets)
    monkeypatch.setattr(hierarchy_module, "WORD", 1000)
    told = Told()
    parts = matrix(hierarchy, targets, targets, progress=told)
    fractions = told.fractions
    assert np.array_equal(parts[0], whole[0])
    assert np.array_equal(parts[1], whole[1])
    assert len(fractions) > 1
    assert fractions == sorted(fractions)
    assert fractions[-1] == 1.0


def test_a_path_longer_than_the_room_kept_for_paths() -> None:
    nodes = 70_000
    tail, head = np.arange(nodes - 1), np.arange(1, nodes)
    ones = np.ones(nodes - 1, np.int64)
    everywhere = at_nodes(np.array([0, nodes - 1]))
    ways = ShortestPaths(tail, head, ones, ones, nodes=nodes)
    pairs = np.array([[0, 1], [1, 0], [0, 0]])
    for _ in range(2):
        legs = ways.paths(everywhere, everywhere, pairs)
        assert np.array_equal(legs[0].arcs, np.arange(nodes - 1))
        assert legs.ms.tolist() == [nodes - 1, UNREACHABLE, 0]
        ways.hierarchy = build_hierarchy(tail, head, ones, ones, nodes=nodes)


def test_a_hub_of_many_roads_takes_no_square_of_room() -> None:
    spokes = 3000
    hub = np.zeros(spokes, np.int64)
    rim = np.arange(1, spokes + 1)
    tail, head = np.concatenate((hub, rim)), np.concatenate((rim, hub))
    ones = np.ones(2 * spokes, np.int64)
    built = build_hierarchy(tail, head, ones, ones, nodes=spokes + 1)
    assert built.rank[0] >= spokes - 1
    assert len(built.arc) == 2 * spokes
    places = at_nodes(np.array([1, 2, 0]))
    assert matrix(built, places, places)[0].tolist() == [[0, 2, 1], [2, 0, 1], [1, 1, 0]]


def test_an_exchange_that_is_left_for_last_gets_its_shortcuts() -> None:
    # Thirty nodes, each joined to each: shortcuts are asked for until nothing is left.
    tail, head = np.divmod(np.arange(900), 30)
    rng = np.random.default_rng(2)
    ms, mm = rng.integers(1, 1000, 900), rng.integers(1, 1000, 900)
    net = Net(tail=tail, head=head, ms=ms, mm=mm, nodes=30)
    everywhere = at_nodes(np.arange(30))
    found = matrix(build_hierarchy(*net.arcs, nodes=30), everywhere, everywhere)
    expected = slow_matrix(net, everywhere, everywhere)
    assert np.array_equal(found[0], expected[0])
    assert np.array_equal(found[1], expected[1])


def test_progress_of_building_rises_to_all() -> None:
    net, _ = medium()
    told = Told()
    build_hierarchy(*net.arcs, nodes=net.nodes, progress=told)
    fractions = told.fractions
    assert set(told.stages) == {"road hierarchy"}
    assert fractions == sorted(fractions)
    assert fractions[-1] == 1.0
    assert len(fractions) > 3


def test_paths_beyond_three_days_count_as_none() -> None:
    tail, head = np.array([0, 1]), np.array([1, 2])
    ms = np.array([MOST_MS, 1])
    built = build_hierarchy(tail, head, ms, np.array([MOST_MM, 0]), nodes=3)
    places = at_nodes(np.arange(3))
    assert matrix(built, places, places)[0][0].tolist() == [0, MOST_MS, UNREACHABLE]
    assert 3 * 86_400_000 < MOST_MS == (1 << (62 - MM_BITS)) - 1


@pytest.mark.parametrize(
    ("change", "said"),
    [
        ({"head": [3]}, "nodes 0 to 2"),
        ({"tail": [-1]}, "nodes 0 to 2"),
        ({"ms": [-1]}, "0 or more"),
        ({"mm": [-1]}, "0 or more"),
        ({"mm": [MOST_MM + 1]}, "at most"),
        ({"mm": [1, 2]}, "one entry an arc"),
    ],
)
def test_arcs_that_make_no_sense_are_refused(change: dict[str, list[int]], said: str) -> None:
    sound = {"tail": [0], "head": [1], "ms": [5], "mm": [5]}
    tail, head, ms, mm = (np.array(values) for values in (sound | change).values())
    with pytest.raises(ValueError, match=said):
        build_hierarchy(tail, head, ms, mm, nodes=3)


def test_seeds_off_the_network_are_refused() -> None:
    net, hierarchy = medium()
    nothing = np.zeros(1, np.int64)
    off = Seeds(ptr=np.array([0, 1]), node=np.array([net.nodes]), ms=nothing, mm=nothing)
    with pytest.raises(ValueError, match=f"nodes 0 to {net.nodes - 1}"):
        matrix(hierarchy, off, off)


def test_the_hierarchy_is_built_when_it_pays(monkeypatch: pytest.MonkeyPatch) -> None:
    net, hierarchy = medium()
    monkeypatch.setattr(shortest, "BREAK_EVEN", 10)
    ways = ShortestPaths(*net.arcs, nodes=net.nodes)
    few, many = draw_seeds(net, 6, 7), draw_seeds(net, 20, 8)
    expected = matrix(hierarchy, few, many), matrix(hierarchy, many, few)
    for question, right, built in (
        ((few, many), expected[0], False),
        ((many, few), expected[1], True),  # 12 searches from targets by now
        ((few, many), expected[0], True),
    ):
        found = ways.matrix(*question)
        assert np.array_equal(found[0], right[0])
        assert np.array_equal(found[1], right[1])
        assert (ways.hierarchy is not None) == built
    alone = ShortestPaths(*net.arcs, nodes=net.nodes).matrix(many, few)
    assert np.array_equal(alone[0], expected[1][0])
    assert np.array_equal(alone[1], expected[1][1])
