"""Places put on roads: which stretch, where on it, and what is told."""

from __future__ import annotations

import time

import numpy as np
import pytest

from georoute.roads.model import Access
from georoute.roads.network import RoadNetwork, Standing, build_network
from georoute.roads.snap_report import snap_notes
from georoute.roads.snapping import Snapped, plain_name, road_index, snap
from tests.roads_helpers import GEOD, LAT0, LON0, RoadDraft, town

M = 1 / 110_860
"""About a metre of latitude there, in degrees."""


def block() -> RoadDraft:
    """Draw the four sides of a block of about 100 m."""
    draft = RoadDraft([*town(2, 2), *((lat + 30 * M, lon) for lat, lon in town(1, 2)), *town(3, 3)])
    for a, b in ((0, 1), (1, 3), (3, 2), (2, 0)):
        draft.road(a, b, name="Calle Norte" if (a, b) == (3, 2) else "Calle Sur")
    return draft


def put(network: RoadNetwork, *places: tuple[float, float], **how: object) -> Snapped:
    lat, lon = np.array(places).T
    return snap(network, lat, lon, **how)  # type: ignore[arg-type]  # passed through


def test_a_place_is_put_at_its_foot_and_not_at_a_junction() -> None:
    network = build_network(block().table())
    snapped = put(network, (LAT0 - 20 * M, LON0 + 0.0003))
    assert snapped.stretch.tolist() == [0]
    assert snapped.road_lat_deg[0] == pytest.approx(LAT0, abs=1e-7)
    assert snapped.road_lon_deg[0] == pytest.approx(LON0 + 0.0003, abs=1e-7)
    along = GEOD.line_length([LON0, LON0 + 0.0003], [LAT0, LAT0])
    assert snapped.offset_mm[0] == pytest.approx(1000 * along, abs=2)
    assert snapped.distance_m[0] == pytest.approx(20, abs=0.1)
    assert snapped.skipped.tolist() == [-1]


def test_feet_are_those_of_a_dense_search_along_the_ellipsoid() -> None:
    # Source: pyproj's Geod, which measures from each place to points every 0.1 m of the road.
    draw = np.random.default_rng(3)
    draft = RoadDraft(town(1, 2))
    bends = [(LAT0 + draw.uniform(-3e-4, 3e-4), LON0 + 1e-4 * k) for k in range(1, 10)]
    draft.road(0, 1, via=bends)
    table = draft.table()
    network = build_network(table)
    lat, lon = LAT0 + draw.uniform(-6e-4, 6e-4, 50), LON0 + draw.uniform(-2e-4, 1.2e-3, 50)
    snapped = snap(network, lat, lon)
    share = np.linspace(0, 1, 700)
    dense_lat = np.concatenate(
        [a + share * (b - a) for a, b in zip(table.point_lat, table.point_lat[1:], strict=False)]
    )
    dense_lon = np.concatenate(
        [a + share * (b - a) for a, b in zip(table.point_lon, table.point_lon[1:], strict=False)]
    )
    for k in range(50):
        ones = np.ones(dense_lat.size)
        metres = GEOD.inv(ones * lon[k], ones * lat[k], dense_lon, dense_lat)[2]
        assert snapped.distance_m[k] == pytest.approx(metres.min(), abs=0.05)


def test_islands_are_passed_over_and_told() -> None:
    draft = block()
    draft.road(4, 5, name="Pasaje Solo")
    network = build_network(draft.table())
    place = (LAT0 + 25 * M, LON0 + 0.0005)
    snapped = put(network, place)
    assert snapped.stretch.tolist() == [0]
    assert snapped.skipped.tolist() == [4]
    assert snapped.skipped_m[0] == pytest.approx(5, abs=0.1)
    assert network.standing[4] == Standing.ISLAND
    there = put(network, place, index=road_index(network, islands=True))
    assert there.stretch.tolist() == [4]
    assert there.skipped.tolist() == [-1]


def test_ships_and_motorways_are_no_places_to_stop() -> None:
    draft = block()
    draft.road(0, 3, access=Access.FERRY)
    draft.road(1, 2, road_class="motorway")
    network = build_network(draft.table())
    middle = (LAT0 + 0.00051, LON0 + 0.0005)
    for index in (None, road_index(network, islands=True)):
        snapped = put(network, middle, index=index)
        assert snapped.stretch[0] < 4
        assert snapped.skipped[0] in {4, 5}


def test_places_beyond_the_limit_get_none() -> None:
    network = build_network(block().table())
    snapped = put(network, (LAT0 - 200 * M, LON0), (LAT0 - 90 * M, LON0), (89.0, 10.0), limit_m=100)
    assert snapped.is_far.tolist() == [True, False, True]
    assert np.isnan(snapped.distance_m[[0, 2]]).all()
    assert snapped.distance_m[1] == pytest.approx(90, abs=0.2)


def test_the_street_of_the_address_is_preferred_when_it_is_near() -> None:
    network = build_network(block().table())
    corner = (LAT0 + 0.001 - 30 * M, LON0 - 5 * M)
    streets = [None, "calle  NÓRTE", "Calle Norte", "Avenida Otra"]
    snapped = put(network, *4 * [corner], street=streets)
    assert snapped.stretch.tolist() == [3, 2, 2, 3]
    assert snapped.is_on_street.tolist() == [False, True, True, False]
    assert snapped.skipped.tolist() == [-1, 3, 3, -1]
    # 110 m away, on the far side of the block: too far to be meant.
    assert put(network, (LAT0, LON0 + 0.0005), street=["Calle Norte"]).stretch.tolist() == [0]


def test_names_are_compared_without_accents_case_and_blanks() -> None:
    assert plain_name("  Avenida  JOSÉ Peña ") == plain_name("avenida jose pena")
    assert plain_name("Straße") == "strasse"


def test_before_a_junction_the_road_that_may_be_driven_both_ways_is_taken() -> None:
    draft = RoadDraft(town(2, 2))
    draft.road(0, 1, one_way=True)
    draft.road(0, 2, access=Access.LOCAL)
    both = draft.road(0, 3)
    draft.road(1, 3)
    network = build_network(draft.table())
    assert put(network, (LAT0 - 10 * M, LON0 - 10 * M)).stretch.tolist() == [both]


def test_ten_thousand_places_take_half_a_second() -> None:
    draft = RoadDraft(town(40, 40))
    for k in range(40 * 40 - 1):
        if k % 40 < 39:
            draft.road(k, k + 1)
        if k < 40 * 39:
            draft.road(k, k + 40)
    network = build_network(draft.table())
    index = road_index(network)
    draw = np.random.default_rng(1)
    lat, lon = LAT0 + draw.uniform(0, 0.039, 10_000), LON0 + draw.uniform(0, 0.039, 10_000)
    snapped = snap(network, lat, lon, index=index)
    best = np.inf
    for _ in range(3):
        begin = time.process_time()
        snap(network, lat, lon, index=index)
        best = min(best, time.process_time() - begin)
    assert not snapped.is_far.any()
    assert best <= 0.5


def test_what_is_worth_telling_is_told() -> None:
    draft = block()
    draft.road(4, 5, name="Pasaje Solo")
    network = build_network(draft.table())
    near_island, far = (LAT0 + 25 * M, LON0 + 0.0005), (LAT0 - 0.1, LON0)
    long, good = (LAT0 - 150 * M, LON0 + 0.0005), (LAT0 - 5 * M, LON0 + 0.0005)
    other = (LAT0 + 0.001 - 30 * M, LON0 - 6 * M)
    streets = [None, None, None, None, "Calle Norte"]
    snapped = put(network, near_island, far, long, good, other, street=streets)
    assert [(note.place, note.is_far, note.text) for note in snap_notes(network, snapped)] == [
        (
            0,
            False,
            (
                "put on Calle Sur, 25 m away; Pasaje Solo is nearer (5 m), but no way leads from "
                "it to the main roads or back; 2 junctions hang together there"
            ),
        ),
        (1, True, "no road that trips can use within 500 m"),
        (2, False, "put on Calle Sur, 150 m away"),
        (
            4,
            False,
            (
                "put on Calle Norte, 30 m away; Calle Sur is nearer (5 m), but the address is on "
                "another street"
            ),
        ),
    ]
