"""Times, lengths and legs between places, drawn by hand."""

from __future__ import annotations

import numpy as np
import pytest

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.cache import build_roads
from georoute.roads.legs import RoadLeg
from georoute.roads.model import Access
from georoute.roads.snapping import road_index, snap
from georoute.roads.travel import RoadTravel
from tests.roads_helpers import GEOD, LAT0, LON0, RoadDraft, town

M = 1 / 110_860


def travel_on(draft: RoadDraft, *places: tuple[float, float]) -> RoadTravel:
    built = build_roads(draft.table())
    lat, lon = np.array(places).T
    snapped = snap(built.network, lat, lon, index=road_index(built.network, islands=True))
    return RoadTravel(built.network, snapped, built.search)


def leg_of(travel: RoadTravel, i: int, j: int) -> RoadLeg:
    leg = travel.leg(i, j)
    assert leg is not None
    return leg


def one_way_block() -> RoadDraft:
    """Draw a block driven round in one sense: 0 → 1 → 3 → 2 → 0, 10 s a side."""
    draft = RoadDraft(town(2, 2))
    for a, b, name in ((0, 1, "Sur"), (1, 3, "Este"), (3, 2, "Norte"), (2, 0, "Oeste")):
        draft.road(a, b, seconds=10, one_way=True, name=name)
    return draft


def test_on_a_one_way_street_back_is_round_the_block() -> None:
    travel = travel_on(one_way_block(), (LAT0, LON0 + 0.0002), (LAT0, LON0 + 0.0007))
    ms, mm = travel.matrix()
    assert ms.tolist() == [[0, 5000], [35_000, 0]]
    there, back = leg_of(travel, 0, 1), leg_of(travel, 1, 0)
    assert [name for name, _ in there.names] == ["Sur"]
    assert [name for name, _ in back.names] == ["Sur", "Este", "Norte", "Oeste", "Sur"]
    assert there.lat_deg.size == 2
    assert back.lat_deg.size == 6
    assert there.length_m + back.length_m == pytest.approx(travel.network.mm.sum() / 1000)
    assert mm[1, 0] == round(1000 * back.length_m)


def test_along_the_street_where_both_ways_are_open() -> None:
    draft = RoadDraft(town(1, 2))
    draft.road(0, 1, seconds=10, via=[(LAT0, LON0 + 0.0005)])
    travel = travel_on(draft, (LAT0, LON0 + 0.0002), (LAT0, LON0 + 0.0007))
    ms, mm = travel.matrix()
    assert ms.tolist() == [[0, 5000], [5000, 0]]
    assert mm[0, 1] == mm[1, 0]
    there, back = leg_of(travel, 0, 1), leg_of(travel, 1, 0)
    assert there.lon_deg.tolist() == back.lon_deg[::-1].tolist()
    assert there.lon_deg.size == 3
    assert there.arcs.tolist() == [0]
    assert back.arcs.tolist() == [1]


def test_a_quicker_way_round_beats_the_slow_street_itself() -> None:
    draft = RoadDraft(town(1, 2))
    draft.road(0, 1, seconds=1000, name="Adoquines")
    draft.road(0, 1, seconds=10, name="Avenida", via=[(LAT0 - 0.002, LON0)])
    travel = travel_on(draft, (LAT0, LON0 + 0.0001), (LAT0, LON0 + 0.0009))
    assert travel.matrix()[0][0, 1] == 210_000
    assert [name for name, _ in leg_of(travel, 0, 1).names] == ["Adoquines", "Avenida", "Adoquines"]


def test_both_pieces_of_a_cut_add_up_to_the_stretch() -> None:
    draft = RoadDraft(town(1, 3))
    draft.road(0, 1, seconds=7.001)
    draft.road(1, 2, seconds=7.001)
    ends = ((LAT0, LON0), (LAT0, LON0 + 0.002))
    inner = [(LAT0, LON0 + 1e-5 * k) for k in range(3, 100, 7)]
    ms, mm = travel_on(draft, *ends, *inner).matrix()
    assert set((ms[0, 2:] + ms[2:, 1]).tolist()) == {14_002}
    assert len(set((mm[0, 2:] + mm[2:, 1]).tolist())) == 1


def test_a_trip_may_begin_and_end_in_local_zones_but_not_pass_one() -> None:
    draft = RoadDraft(town(3, 4))
    for k in range(3):
        draft.road(k, k + 1, seconds=10)
        draft.road(8 + k, 9 + k, seconds=10)
    draft.road(3, 7, seconds=30)
    draft.road(7, 11, seconds=30)
    # Two local roads that would shorten the way from the south row to the north row.
    for a, b in ((0, 4), (4, 8), (4, 5), (5, 1)):
        draft.road(a, b, seconds=2, access=Access.LOCAL)
    yard, next_door = (LAT0 + 0.0005, LON0), (LAT0 + 0.001, LON0 + 0.0005)
    south, north = (LAT0, LON0 + 0.0005), (LAT0 + 0.002, LON0 + 0.0005)
    ms, _ = travel_on(draft, yard, next_door, south, north).matrix()
    # Source of the figures: added up by hand from the drawing.
    assert ms.tolist() == [
        [0, 2000, 6000, 8000],
        [2000, 0, 8000, 8000],
        [6000, 8000, 0, 110_000],
        [8000, 8000, 110_000, 0],
    ]


def test_a_leg_by_ship_says_so() -> None:
    draft = RoadDraft(town(1, 4))
    draft.road(0, 1)
    draft.road(1, 2, seconds=900, access=Access.FERRY, name="Balsa")
    draft.road(2, 3)
    travel = travel_on(draft, (LAT0, LON0 + 0.0003), (LAT0, LON0 + 0.0027), (LAT0, LON0 + 0.0006))
    assert leg_of(travel, 0, 1).ferry
    assert dict(leg_of(travel, 0, 1).names)["Balsa"] == pytest.approx(96.5, abs=0.2)
    assert not leg_of(travel, 0, 2).ferry


def test_neighbouring_stretches_of_one_name_are_one_entry() -> None:
    draft = RoadDraft(town(1, 5))
    for k, name in enumerate(("Larga", "Larga", "", "Larga")):
        draft.road(k, k + 1, name=name)
    leg = leg_of(travel_on(draft, (LAT0, LON0), (LAT0, LON0 + 0.004)), 0, 1)
    assert [name for name, _ in leg.names] == ["Larga", "", "Larga"]
    assert sum(metres for _, metres in leg.names) == pytest.approx(leg.length_m)


def test_gaps_are_told_and_not_driven() -> None:
    travel = travel_on(one_way_block(), (LAT0 - 30 * M, LON0 + 0.0002), (LAT0, LON0 + 0.0007))
    leg = leg_of(travel, 0, 1)
    assert leg.start_gap_m == pytest.approx(30, abs=0.1)
    assert leg.end_gap_m == pytest.approx(0, abs=1e-6)
    assert leg.length_m == pytest.approx(GEOD.line_length(leg.lon_deg, leg.lat_deg), abs=0.002)


def test_islands_and_far_places_are_reached_from_nowhere() -> None:
    draft = one_way_block()
    draft.junctions = [*draft.junctions, (LAT0 + 0.01, LON0), (LAT0 + 0.01, LON0 + 0.001)]
    draft.road(4, 5)
    places = [(LAT0, LON0 + 0.0002), (LAT0 + 0.01, LON0 + 0.0005), (LAT0 + 0.5, LON0)]
    travel = travel_on(draft, *places)
    ms, mm = travel.matrix()
    expected = np.where(np.eye(3) > 0, 0, UNREACHABLE)
    assert np.array_equal(ms, expected)
    assert np.array_equal(mm, expected)
    assert travel.leg(0, 1) is None
    assert travel.leg(2, 0) is None


def test_a_leg_to_where_one_is_has_no_length() -> None:
    leg = leg_of(travel_on(one_way_block(), (LAT0, LON0 + 0.0002)), 0, 0)
    assert (leg.length_m, leg.time_s, leg.lat_deg.size) == (0, 0, 2)
    assert leg.names == (("Sur", 0.0),)
