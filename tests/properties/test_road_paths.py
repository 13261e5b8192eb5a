"""Properties of fastest paths that hold on every network."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.hierarchy import build_hierarchy, matrix, paths
from georoute.roads.one_shot import build_streets, search_matrix
from tests.hierarchy_helpers import Net, at_nodes, draw_seeds, slow_matrix


@st.composite
def nets(draw: st.DrawFn) -> Net:
    nodes = draw(st.integers(1, 12))
    node = st.integers(0, nodes - 1)
    time = st.one_of(st.integers(0, 4), st.integers(0, 10**6), st.just(UNREACHABLE))
    arcs = draw(st.lists(st.tuples(node, node, time, st.integers(0, 9)), max_size=50))
    table = np.array(arcs, np.int64).reshape(-1, 4)
    tail, head, ms, mm = (table[:, column].copy() for column in range(4))
    return Net(tail=tail, head=head, ms=ms, mm=mm, nodes=nodes)


@given(net=nets(), seed=st.integers(0, 1000))
def test_matrix_and_paths_equal_the_slow_twin(net: Net, seed: int) -> None:
    sources, targets = draw_seeds(net, 3, seed), draw_seeds(net, 4, seed)
    ms, mm = slow_matrix(net, sources, targets)
    hierarchy = build_hierarchy(*net.arcs, nodes=net.nodes)
    found_ms, found_mm = matrix(hierarchy, sources, targets)
    assert np.array_equal(found_ms, ms)
    assert np.array_equal(found_mm, mm)
    pairs = np.argwhere(ms < UNREACHABLE)
    legs = paths(hierarchy, sources, targets, pairs)
    for q, (i, j) in enumerate(pairs):
        arcs, first, last, leg_ms, leg_mm = legs[q]
        assert (leg_ms, leg_mm) == (ms[i, j], mm[i, j])
        assert sources.ptr[i] <= first < sources.ptr[i + 1]
        assert targets.ptr[j] <= last < targets.ptr[j + 1]
        assert net.ms[arcs].sum() + sources.ms[first] + targets.ms[last] == leg_ms
        assert net.mm[arcs].sum() + sources.mm[first] + targets.mm[last] == leg_mm
        way = [int(sources.node[first]), *net.head[arcs].tolist()]
        assert way == [*net.tail[arcs].tolist(), int(targets.node[last])]


@given(net=nets())
def test_no_detour_over_a_third_node_is_faster(net: Net) -> None:
    everywhere = at_nodes(np.arange(net.nodes))
    ms, _ = matrix(build_hierarchy(*net.arcs, nodes=net.nodes), everywhere, everywhere)
    assert np.all(np.diag(ms) == 0)
    for middle in range(net.nodes):
        detour = ms[:, [middle]] + ms[[middle], :]
        assert np.all(ms <= detour)


@given(net=nets(), data=st.data())
def test_renumbered_nodes_give_the_same_matrix(net: Net, data: st.DataObject) -> None:
    new = np.array(data.draw(st.permutations(range(net.nodes))), np.int64)
    sources = at_nodes(np.arange(net.nodes))
    targets = at_nodes(new)
    other = build_hierarchy(new[net.tail], new[net.head], net.ms, net.mm, nodes=net.nodes)
    same = matrix(build_hierarchy(*net.arcs, nodes=net.nodes), sources, sources)
    assert np.array_equal(matrix(other, targets, targets), same)


@given(net=nets())
def test_arcs_turned_round_give_the_matrix_turned_over(net: Net) -> None:
    everywhere = at_nodes(np.arange(net.nodes))
    there = build_hierarchy(*net.arcs, nodes=net.nodes)
    back = build_hierarchy(net.head, net.tail, net.ms, net.mm, nodes=net.nodes)
    found = np.array(matrix(there, everywhere, everywhere))
    assert np.array_equal(np.array(matrix(back, everywhere, everywhere)).transpose(0, 2, 1), found)
    streets = build_streets(*net.arcs, nodes=net.nodes, backward=True)
    assert np.array_equal(search_matrix(streets, everywhere, everywhere, backward=True), found)
