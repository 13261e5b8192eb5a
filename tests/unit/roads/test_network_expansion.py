"""Turn bans as doubled junctions, drawn by hand; the tangles are in tests/properties."""

from __future__ import annotations

import numpy as np
import pytest

from georoute.errors import RoadError
from georoute.roads.expansion import CONNECTOR
from georoute.roads.model import Access
from georoute.roads.network import RoadNetwork, Standing, build_network
from tests.roads_helpers import RoadDraft, town


def street(count: int = 6) -> RoadDraft:
    """Draw one long street of ``count`` stretches, all open both ways."""
    draft = RoadDraft(town(1, count + 1))
    for k in range(count):
        draft.road(k, k + 1)
    return draft


def may_drive(network: RoadNetwork, arcs: list[int]) -> bool:
    """Tell whether some path of the network drives just these arcs of the table."""
    nodes = {int(network.after[arcs[0]])}
    for arc in arcs[1:]:
        # From the first leg to the roads open to all, and from these to the last leg.
        nodes |= over(network, nodes, CONNECTOR)
        nodes |= over(network, nodes, CONNECTOR)
        nodes = over(network, nodes, arc)
    return bool(nodes)


def over(network: RoadNetwork, nodes: set[int], arc: int) -> set[int]:
    """Return the nodes to which an arc of the table leads from some nodes."""
    rows = zip(network.tail.tolist(), network.head.tolist(), network.arc.tolist(), strict=True)
    return {head for tail, head, driven in rows if driven == arc and tail in nodes}


def test_without_bans_the_network_is_the_table() -> None:
    network = build_network(street().table())
    assert network.nodes == 7
    assert network.tail.size == 12
    assert sorted(network.arc.tolist()) == list(range(12))


def test_only_the_junction_of_a_ban_is_doubled() -> None:
    draft = street()
    draft.ban(2, 4)
    network = build_network(draft.table())
    assert network.nodes == 8
    assert np.bincount(network.junction).tolist() == [1, 1, 2, 1, 1, 1, 1]
    assert not may_drive(network, [0, 2, 4])
    assert may_drive(network, [2, 3])
    assert may_drive(network, [4, 6])


def test_a_ban_by_way_of_ways_forbids_the_whole_sequence_only() -> None:
    draft = street()
    draft.ban(0, 2, 4, 6)
    network = build_network(draft.table())
    assert not may_drive(network, [0, 2, 4, 6])
    assert may_drive(network, [2, 4, 6, 8])
    assert may_drive(network, [0, 2, 4, 5])
    # Turning round and coming again is another way.
    assert may_drive(network, [0, 2, 3, 2, 4, 6])


def test_a_short_ban_within_a_long_one_holds() -> None:
    draft = street()
    draft.ban(0, 2, 4, 6)
    draft.ban(2, 4)
    network = build_network(draft.table())
    assert not may_drive(network, [0, 2, 4])
    assert not may_drive(network, [2, 4])


def test_a_ban_that_begins_within_another_is_remembered() -> None:
    draft = street()
    draft.ban(0, 2, 3)
    draft.ban(2, 4, 6)
    network = build_network(draft.table())
    assert not may_drive(network, [0, 2, 3])
    assert not may_drive(network, [0, 2, 4, 6])
    assert may_drive(network, [0, 2, 4, 5])
    assert may_drive(network, [2, 3])


def test_a_banned_turn_round_holds_on_its_own_side_only() -> None:
    draft = street(2)
    draft.ban(0, 1)
    network = build_network(draft.table())
    assert not may_drive(network, [0, 1])
    assert may_drive(network, [1, 0])


def test_bans_that_make_no_sense_are_told_and_forbid_nothing() -> None:
    draft = street()
    draft.ban(0, 6)
    draft.ban(2)
    draft.ban(0, 999)
    network = build_network(draft.table())
    assert network.nodes == 7
    assert [(r.code, r.count) for r in network.remarks] == [("ban_unusable", 3)]


def test_a_local_road_is_no_short_cut() -> None:
    draft = RoadDraft(town(1, 4))
    first = draft.road(0, 1)
    gate = draft.road(1, 2, access=Access.LOCAL)
    last = draft.road(2, 3)
    network = build_network(draft.table())
    assert may_drive(network, [2 * first, 2 * gate])
    assert may_drive(network, [2 * gate, 2 * last])
    assert not may_drive(network, [2 * first, 2 * gate, 2 * last])


def test_each_stretch_knows_whether_trips_can_use_it() -> None:
    draft = RoadDraft([*town(2, 3), *((lat + 1, lon) for lat, lon in town(1, 3))])
    expected = {
        draft.road(0, 1): Standing.MAIN,
        draft.road(1, 4): Standing.MAIN,
        draft.road(0, 4): Standing.MAIN,
        draft.road(1, 2, one_way=True): Standing.NO_WAY_OUT,
        draft.road(3, 0, one_way=True): Standing.NO_WAY_IN,
        draft.road(6, 7): Standing.ISLAND,
        draft.road(0, 1, access=Access.FERRY): Standing.FERRY,
        draft.road(0, 1, road_class="motorway"): Standing.NO_STOPPING,
        draft.road(4, 4, access=Access.LOCAL, via=town(1, 3)[1:]): Standing.MAIN,
        draft.road(7, 8, access=Access.LOCAL): Standing.ISLAND,
    }
    network = build_network(draft.table())
    assert dict(enumerate(network.standing.tolist())) == expected
    assert network.nodes_around(5) == 2


def test_a_table_without_open_roads_is_refused() -> None:
    draft = street(1)
    table = draft.table()
    table.forward_ms[:] = table.backward_ms[:] = 1 << 50
    with pytest.raises(RoadError, match=r"drawn by hand: expected roads .* got none among 1"):
        build_network(table)


def test_neighbours_are_near_in_memory() -> None:
    draw = np.random.default_rng(7)
    junctions = [town(20, 20)[k] for k in draw.permutation(400)]
    where = {place: k for k, place in enumerate(junctions)}
    draft = RoadDraft(junctions)
    grid = np.array([where[place] for place in town(20, 20)]).reshape(20, 20)
    for a, b in zip(grid[:, :-1].ravel(), grid[:, 1:].ravel(), strict=True):
        draft.road(int(a), int(b))
    network = build_network(draft.table())
    step = np.abs(network.tail - network.head)
    before = np.abs(network.junction[network.tail] - network.junction[network.head])
    assert np.median(step) < np.median(before) / 10
