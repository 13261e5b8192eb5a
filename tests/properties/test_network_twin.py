"""Random tangles of roads against a twin that remembers every arc it drove.

Source of the check: common practice; the twin restates the rules of turns, one-ways and
destination-only roads as OpenStreetMap documents them, without any doubling of junctions.
"""

from __future__ import annotations

import numpy as np
import pytest

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.cache import BuiltRoads
from georoute.roads.hierarchy import build_hierarchy
from georoute.roads.network import RoadNetwork, build_network
from georoute.roads.shortest import ShortestPaths
from georoute.roads.snapping import Snapped, road_index, snap
from georoute.roads.travel import RoadTravel
from tests.examples import at_most
from tests.roads_helpers import GEOD, LAT0, LON0, random_roads
from tests.roads_twin import PlainSearch, RoadTwin

BATCHES = 8
BATCH = at_most(32)


def places_on(network: RoadNetwork, seed: int) -> Snapped:
    draw = np.random.default_rng(seed)
    lat, lon = LAT0 + draw.uniform(0, 2e-3, 7), LON0 + draw.uniform(0, 2e-3, 7)
    return snap(network, lat, lon, index=road_index(network, islands=True))


def hierarchy_of(network: RoadNetwork) -> ShortestPaths:
    arcs = (network.tail, network.head, network.ms, network.mm)
    hierarchy = build_hierarchy(*arcs, nodes=network.nodes)
    return BuiltRoads(network=network, hierarchy=hierarchy).search


@pytest.mark.parametrize("batch", range(BATCHES))
def test_times_and_lengths_are_those_of_the_twin(batch: int) -> None:
    reached = 0
    for seed in range(batch * BATCH, (batch + 1) * BATCH):
        table = random_roads(seed)
        network, twin = build_network(table), RoadTwin(table)
        snapped = places_on(network, seed)
        ms, mm = RoadTravel(network, snapped, PlainSearch(network)).matrix()
        by_hierarchy = RoadTravel(network, snapped, hierarchy_of(network)).matrix()
        assert np.array_equal(ms, by_hierarchy[0])
        assert np.array_equal(mm, by_hierarchy[1])
        for i in range(snapped.places):
            expected = twin.costs(snapped, i)
            assert list(zip(ms[i].tolist(), mm[i].tolist(), strict=True)) == expected, seed
        reached += int(np.count_nonzero(ms < UNREACHABLE)) - snapped.places
    assert reached > 100 * BATCH / 10  # the tangles are no heaps of islands


@pytest.mark.parametrize("batch", range(BATCHES))
def test_legs_obey_the_rules_and_are_as_long_as_they_say(batch: int) -> None:
    for seed in range(batch * BATCH, (batch + 1) * BATCH):
        table = random_roads(seed)
        network, twin = build_network(table), RoadTwin(table)
        snapped = places_on(network, seed)
        travel = RoadTravel(network, snapped, hierarchy_of(network))
        ms, mm = travel.matrix()
        pairs = [(i, j) for i in range(snapped.places) for j in range(snapped.places)]
        for (i, j), leg in zip(pairs, travel.legs(pairs), strict=True):
            assert (leg is None) == (ms[i, j] >= UNREACHABLE)
            if leg is None:
                continue
            assert (leg.time_s, leg.length_m) == (ms[i, j] / 1000, mm[i, j] / 1000)
            assert twin.drives(leg.arcs.tolist())
            ends = [leg.lat_deg[0], leg.lon_deg[0], leg.lat_deg[-1], leg.lon_deg[-1]]
            cuts = [snapped.road_lat_deg[i], snapped.road_lon_deg[i]]
            assert ends == [*cuts, snapped.road_lat_deg[j], snapped.road_lon_deg[j]]
            length = GEOD.line_length(leg.lon_deg, leg.lat_deg)
            # Each stretch and each cut is rounded to a millimetre.
            rounding = 0.0005 * (leg.arcs.size + 4)
            assert leg.length_m == pytest.approx(length, rel=1e-6, abs=rounding), seed
            assert sum(m for _, m in leg.names) == pytest.approx(leg.length_m, abs=1e-6)
