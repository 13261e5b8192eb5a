"""Rules of tags, each on a tiny map.

The source of each rule is the page of the OpenStreetMap wiki named at it; the pages were quoted
from memory, no page was fetched.
"""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from georoute.errors import RoadError
from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.model import Access
from georoute.roads.speeds import REAL_FACTORS, default_profile, read_maxspeed
from georoute.roads.tags import read_duration
from tests.reader_helpers import FLAT, ROAD, kmh, local, open_arcs, read_map, remarks

LINE = (11, 12, 13)
BESIDE = (900, (21, 22), ROAD)  # so that the map has a road even where the tested one is none
THERE, BACK = {(11, 13)}, {(13, 11)}


def arcs_of(folder: Path, tags: dict[str, str]) -> set[tuple[int, int]]:
    table = read_map(folder, [(1, LINE, tags), BESIDE])
    return open_arcs(table) - {(21, 22), (22, 21)}


@pytest.mark.source("OpenStreetMap wiki, Key:oneway and Key:oneway:motor_vehicle (from memory)")
@pytest.mark.parametrize(
    ("tags", "expected"),
    [
        ({}, THERE | BACK),
        ({"oneway": "yes"}, THERE),
        ({"oneway": "true"}, THERE),
        ({"oneway": "1"}, THERE),
        ({"oneway": "no"}, THERE | BACK),
        ({"oneway": "-1"}, BACK),
        ({"oneway": "reverse"}, BACK),
        ({"oneway": "alternating"}, THERE | BACK),
        ({"oneway": "reversible"}, set()),
        ({"oneway": "perhaps"}, THERE | BACK),
        ({"highway": "motorway"}, THERE),
        ({"highway": "motorway_link"}, THERE),
        ({"highway": "motorway", "oneway": "no"}, THERE | BACK),
        ({"highway": "trunk"}, THERE | BACK),
        ({"junction": "roundabout"}, THERE),
        ({"junction": "circular"}, THERE),
        ({"oneway": "yes", "oneway:motor_vehicle": "no"}, THERE | BACK),
        ({"oneway:motor_vehicle": "yes"}, THERE),
        ({"oneway": "no", "oneway:motorcar": "-1"}, BACK),
        ({"oneway": "no", "oneway:bicycle": "yes"}, THERE | BACK),
        ({"motor_vehicle:backward": "no"}, THERE),
        ({"motor_vehicle:forward": "no", "oneway": "yes"}, set()),
        ({"vehicle:forward": "no", "motor_vehicle:forward": "yes"}, THERE | BACK),
    ],
)
def test_one_ways(tmp_path: Path, tags: dict[str, str], expected: set[tuple[int, int]]) -> None:
    assert arcs_of(tmp_path, {**ROAD, **tags}) == expected


@pytest.mark.source("OpenStreetMap wiki, Key:access, transport mode hierarchy (from memory)")
@pytest.mark.parametrize(
    ("tags", "is_local"),
    [
        ({}, False),
        ({"access": "yes"}, False),
        ({"access": "permissive"}, False),
        ({"access": "private"}, True),
        ({"access": "no"}, True),
        ({"access": "destination"}, True),
        ({"access": "customers"}, True),
        ({"access": "no", "motor_vehicle": "yes"}, False),
        ({"access": "yes", "vehicle": "no"}, True),
        ({"vehicle": "no", "motor_vehicle": "destination", "motorcar": "yes"}, False),
        ({"motor_vehicle": "yes", "motorcar": "no"}, True),
        ({"motor_vehicle": "delivery;yes"}, False),
        ({"motorcar": "strange", "access": "private"}, True),
        ({"access": "strange"}, False),
        ({"access": "private", "bicycle": "yes"}, True),
    ],
)
def test_access_is_by_the_most_specific_tag(
    tmp_path: Path, tags: dict[str, str], *, is_local: bool
) -> None:
    table = read_map(tmp_path, [(1, LINE, {**ROAD, **tags})])
    assert bool(table.access[0] & Access.LOCAL) is is_local
    assert open_arcs(table) == THERE | BACK


@pytest.mark.source("OpenStreetMap wiki, Key:highway (from memory)")
@pytest.mark.parametrize(
    ("tags", "is_road"),
    [
        ({"highway": "service"}, True),
        ({"highway": "track"}, True),
        ({"highway": "footway"}, False),
        ({"highway": "footway", "access": "yes"}, False),
        ({"highway": "footway", "motor_vehicle": "yes"}, True),
        ({"highway": "pedestrian"}, False),
        ({"highway": "pedestrian", "motor_vehicle": "destination"}, True),
        ({"highway": "pedestrian", "motor_vehicle": "no"}, False),
        ({"highway": "steps"}, False),
        ({"highway": "construction"}, False),
        ({"highway": "proposed"}, False),
        ({"highway": "service", "area": "yes"}, False),
        ({"route": "tram"}, False),
    ],
)
def test_what_is_a_road_for_cars(tmp_path: Path, tags: dict[str, str], *, is_road: bool) -> None:
    assert bool(arcs_of(tmp_path, tags)) is is_road


@pytest.mark.source("OpenStreetMap wiki, Key:maxspeed (from memory); mile and knot: SI brochure")
@pytest.mark.parametrize(
    ("text", "expected", "remark"),
    [
        ("50", 50, ""),
        ("50 km/h", 50, ""),
        ("30 mph", 48.28032, ""),
        ("30mph", 48.28032, ""),
        ("10 knots", 18.52, ""),
        ("RO:urban", 50, ""),
        ("RO:rural", 90, ""),
        ("RO:motorway", 130, ""),
        ("DE:zone30", 30, ""),
        ("DE:zone:30", 30, ""),
        ("GB:nsl_single", 96.56064, ""),
        ("urban", 50, ""),
        ("walk", 6, ""),
        ("50;30", 30, "speed_several"),
        ("80|60", 60, "speed_several"),
        ("none", None, ""),
        ("signals", None, "speed_signals"),
        ("variable", None, "speed_signals"),
        ("0", None, "speed_implausible"),
        ("999", None, "speed_implausible"),
        ("fast", None, "speed_unread"),
        ("-50", None, "speed_unread"),
        ("50 furlongs", None, "speed_unread"),
        ("", None, "speed_unread"),
        ("XX:rural", 90, "speed_country_unknown"),
    ],
)
def test_limits_in_all_forms(text: str, expected: float | None, remark: str) -> None:
    limit = read_maxspeed(text, profile=FLAT, road_class="residential")
    assert limit.remark == remark
    assert limit.kmh == (None if expected is None else pytest.approx(expected))


def test_no_limit_means_fast_roads_only() -> None:
    assert read_maxspeed("none", profile=FLAT, road_class="motorway").kmh == 130


@pytest.mark.source("OpenStreetMap wiki, Key:maxspeed, forward and backward (from memory)")
@pytest.mark.parametrize(
    ("tags", "there", "back"),
    [
        ({"maxspeed": "40"}, 40, 40),
        ({"maxspeed": "40", "maxspeed:backward": "20"}, 40, 20),
        ({"maxspeed:forward": "20 mph", "maxspeed:backward": "30"}, 32.18688, 30),
        ({"maxspeed:type": "RO:rural"}, 90, 90),
        ({"maxspeed": "40", "source:maxspeed": "RO:rural"}, 40, 40),
        ({"source:maxspeed": "sign"}, 50, 50),
        ({"maxspeed": "soon"}, 50, 50),
        ({}, 50, 50),
    ],
)
def test_the_limit_that_counts(
    tmp_path: Path, tags: dict[str, str], there: float, back: float
) -> None:
    table = read_map(tmp_path, [(1, LINE, {**ROAD, **tags})])
    assert kmh(table) == pytest.approx(there, rel=1e-4)
    assert kmh(table, backward=True) == pytest.approx(back, rel=1e-4)


def test_what_cannot_be_read_is_counted_with_an_example(tmp_path: Path) -> None:
    ways = [
        (1, (11, 12), {**ROAD, "maxspeed": "soon"}),
        (2, (12, 13), {**ROAD, "maxspeed": "soon"}),
        (3, (13, 14), {**ROAD, "maxspeed": "0", "access": "odd"}),
        (4, (14, 15), {**ROAD, "motor_vehicle:conditional": "no @ (Mo-Fr 08:00-20:00)"}),
        (5, (15, 16), {**ROAD, "oneway": "perhaps", "maxspeed:conditional": "30 @ (wet)"}),
    ]
    table = read_map(tmp_path, ways)
    expected = {
        "speed_unread": 2,
        "speed_implausible": 1,
        "access_unknown": 1,
        "access_conditional": 1,
        "oneway_unknown": 1,
        "speed_conditional": 1,
    }
    assert remarks(table) == expected
    unread = next(remark for remark in table.remarks if remark.code == "speed_unread")
    assert unread.example == "way 1 maxspeed=soon"


def test_real_driving_is_the_limit_times_the_factor_of_the_class(tmp_path: Path) -> None:
    profile = default_profile("RO")
    ways = [(1, (11, 12), ROAD), (2, (12, 13), {"highway": "motorway", "maxspeed": "100"})]
    table = read_map(tmp_path, ways, profile=profile)
    assert kmh(table, 0) == pytest.approx(50 * REAL_FACTORS["residential"], rel=1e-4)
    assert kmh(table, 1) == pytest.approx(100 * REAL_FACTORS["motorway"], rel=1e-4)


def test_the_users_own_table_replaces_class_by_class(tmp_path: Path) -> None:
    profile = default_profile(
        "RO", class_speeds_kmh={"residential": 31}, real_factor={"residential": 0.5}
    )
    table = read_map(tmp_path, [(1, LINE, ROAD)], profile=profile)
    assert kmh(table) == pytest.approx(15.5, rel=1e-4)
    assert profile.class_kmh("motorway") == 130
    assert profile.fingerprint() != default_profile("RO").fingerprint()
    assert default_profile("ro").fingerprint() == default_profile("RO").fingerprint()


@pytest.mark.parametrize("table", [{"boulevard": 50.0}, {"primary": 0.0}, {"primary": np.nan}])
def test_a_table_of_speeds_with_faults_is_refused(table: dict[str, float]) -> None:
    with pytest.raises(RoadError, match=next(iter(table))):
        default_profile("RO", class_speeds_kmh=table)


@pytest.mark.source("OpenStreetMap wiki, Key:duration; ISO 8601 durations (from memory)")
@pytest.mark.parametrize(
    ("text", "seconds"),
    [
        ("00:20", 1200),
        ("1:30", 5400),
        ("01:30:15", 5415),
        ("45", 2700),
        ("PT20M", 1200),
        ("PT1H30M", 5400),
        ("P1DT2H", 93600),
        ("PT90S", 90),
        ("P", None),
        ("0", None),
        ("20 min", None),
        ("", None),
    ],
)
def test_durations(text: str, seconds: float | None) -> None:
    assert read_duration(text) == seconds


FERRY = {"route": "ferry", "motor_vehicle": "yes"}


@pytest.mark.source("OpenStreetMap wiki, Tag:route=ferry and Key:duration (from memory)")
def test_a_ferry_takes_its_duration_wherever_it_is_cut(tmp_path: Path) -> None:
    ways = [(1, (11, 12, 14), {**FERRY, "duration": "00:02"}), (2, (12, 22), ROAD)]
    table = read_map(tmp_path, ways)
    ships = table.access == Access.FERRY
    assert np.count_nonzero(ships) == 2
    assert table.forward_ms[ships].sum() == pytest.approx(120_000, abs=2)
    assert {table.classes[number] for number in table.road_class[ships]} == {"ferry"}
    assert remarks(table)["ferry"] == 1


@pytest.mark.parametrize(
    ("tags", "remark"),
    [
        ({}, "ferry_speed_assumed"),
        ({"duration": "soon"}, "ferry_duration_unread"),
        ({"duration": "00:00:01"}, "ferry_duration_unread"),
    ],
)
def test_a_ferry_without_a_usable_duration(
    tmp_path: Path, tags: dict[str, str], remark: str
) -> None:
    table = read_map(tmp_path, [(1, LINE, {**FERRY, **tags})])
    assert kmh(table) == pytest.approx(20, rel=1e-4)
    assert remarks(table)[remark] == 1


@pytest.mark.parametrize(
    ("tags", "told"),
    [
        ({}, {"ferry_cars_unsaid": 1}),
        ({"access": "yes"}, {"ferry_cars_unsaid": 1}),
        ({"motor_vehicle": "no"}, {"way_not_for_cars": 1}),
    ],
)
def test_a_ferry_that_does_not_say_it_carries_cars_is_left_out(
    tmp_path: Path, tags: dict[str, str], told: dict[str, int]
) -> None:
    table = read_map(tmp_path, [(1, LINE, {"route": "ferry", **tags}), BESIDE])
    assert open_arcs(table) == {(21, 22), (22, 21)}
    assert remarks(table) == told


@pytest.mark.source("OpenStreetMap wiki, Key:maxheight, Key:maxweight, Key:maxwidth (from memory)")
@pytest.mark.parametrize(
    ("tags", "passes"),
    [
        ({"maxheight": "2.5"}, False),
        ({"maxheight": "3.2 m"}, True),
        ({"maxheight": "8'10\""}, False),  # 2.69 m
        ({"maxheight": "12 ft"}, True),
        ({"maxheight": "default"}, True),
        ({"maxheight": "low"}, True),
        ({"maxweight": "3.5"}, False),
        ({"maxweight": "7.5 t"}, True),
        ({"maxweight": "4000 kg"}, False),
        ({"maxweight": "7 st"}, True),  # 6.35 t
        ({"maxwidth": "2"}, False),
        ({"maxwidth:physical": "2.4"}, True),
    ],
)
def test_the_vehicle_against_the_road(
    tmp_path: Path, tags: dict[str, str], *, passes: bool
) -> None:
    lorry = replace(FLAT, height_m=2.9, weight_t=5.0, width_m=2.3)
    ways = [(1, LINE, {**ROAD, **tags}), BESIDE]
    assert ((11, 13) in open_arcs(read_map(tmp_path, ways, profile=lorry))) is passes
    assert (11, 13) in open_arcs(read_map(tmp_path, ways))


def test_a_limit_that_cannot_be_read_is_told(tmp_path: Path) -> None:
    profile = replace(FLAT, height_m=2.9)
    table = read_map(tmp_path, [(1, LINE, {**ROAD, "maxheight": "low"})], profile=profile)
    assert remarks(table) == {"vehicle_limit_unread": 1}


@pytest.mark.source("OpenStreetMap wiki, Key:barrier and Tag:barrier=gate (from memory)")
@pytest.mark.parametrize(
    ("tags", "effect"),
    [
        ({"barrier": "bollard"}, "closed"),
        ({"barrier": "block"}, "closed"),
        ({"barrier": "bollard", "motor_vehicle": "yes"}, "open"),
        ({"barrier": "gate"}, "open"),
        ({"barrier": "lift_gate"}, "open"),
        ({"barrier": "gate", "access": "private"}, "local"),
        ({"barrier": "gate", "access": "no"}, "local"),
        ({"barrier": "gate", "access": "private", "motorcar": "yes"}, "open"),
        ({"barrier": "toll_booth"}, "open"),
        ({"barrier": "mystery"}, "unknown"),
    ],
)
def test_barriers(tmp_path: Path, tags: dict[str, str], effect: str) -> None:
    table = read_map(tmp_path, [(1, LINE, ROAD)], node_tags={12: tags})
    pieces = 2 if effect in {"closed", "local"} else 1
    assert table.start.size == pieces
    assert table.node_lat.size == (4 if effect == "closed" else pieces + 1)
    assert local(table) == ({(11, 12), (12, 13)} if effect == "local" else set())
    assert remarks(table) == ({} if effect == "open" else {f"barrier_{effect}": 1})


def test_a_bollard_where_two_ways_meet_parts_them(tmp_path: Path) -> None:
    ways = [(1, (11, 12), ROAD), (2, (12, 13), ROAD)]
    table = read_map(tmp_path, ways, node_tags={12: {"barrier": "bollard"}})
    assert set(table.start) & set(table.end) == set()
    assert table.node_lat.size == 4


def test_a_gate_on_a_junction_is_passed_over_and_told(tmp_path: Path) -> None:
    ways = [(1, LINE, ROAD), (2, (12, 22), ROAD)]
    gate = {"barrier": "gate", "access": "private"}
    table = read_map(tmp_path, ways, node_tags={12: gate})
    assert local(table) == set()
    assert remarks(table) == {"local_on_junction": 1}


def test_times_are_whole_and_closed_directions_unreachable(tmp_path: Path) -> None:
    table = read_map(tmp_path, [(1, LINE, {**ROAD, "oneway": "yes", "maxspeed": "36"})])
    assert table.forward_ms[0] == round(table.length_mm[0] / 10)  # 36 km/h is 10 mm/ms
    assert table.backward_ms[0] == UNREACHABLE
