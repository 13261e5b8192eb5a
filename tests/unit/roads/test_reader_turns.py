"""Turn restrictions on tiny maps, exact to the arc.

Source of the rules: OpenStreetMap wiki, Relation:restriction (from memory).

The crossing: ways 1 (12-22), 2 (22-32), 3 (21-22), 4 (22-23); node 22 is the middle.
"""

from __future__ import annotations

from pathlib import Path

import pytest

from georoute.kernels.arrays import UNREACHABLE
from tests.reader_helpers import ROAD, Relation, Way, arc_ms, bans, read_map, remarks

SOURCE = pytest.mark.source("OpenStreetMap wiki, Relation:restriction (from memory)")
CROSSING: list[Way] = [
    (1, (12, 22), ROAD),
    (2, (22, 32), ROAD),
    (3, (21, 22), ROAD),
    (4, (22, 23), ROAD),
]


def turn(kind: str, from_: int, to: int, **tags: str) -> Relation:
    members = [("w", to, "to"), ("n", 22, "via"), ("w", from_, "from")]
    return (7, members, {"type": "restriction", "restriction": kind, **tags})


@SOURCE
@pytest.mark.parametrize("kind", ["no_left_turn", "no_straight_on", "no_entry", "no_exit"])
def test_no_bans_the_one_turn(tmp_path: Path, kind: str) -> None:
    table = read_map(tmp_path, CROSSING, relations=[turn(kind, 1, 3)])
    assert bans(table) == {((12, 22), (22, 21))}
    assert remarks(table) == {"restriction_read": 1}


@SOURCE
def test_only_bans_all_other_ways_on_and_the_way_back(tmp_path: Path) -> None:
    table = read_map(tmp_path, CROSSING, relations=[turn("only_straight_on", 1, 2)])
    assert bans(table) == {((12, 22), (22, to)) for to in (21, 23, 12)}


def test_only_bans_no_arc_that_is_closed_anyway(tmp_path: Path) -> None:
    ways: list[Way] = [*CROSSING[:2], (3, (21, 22), {**ROAD, "oneway": "yes"}), CROSSING[3]]
    table = read_map(tmp_path, ways, relations=[turn("only_straight_on", 1, 2)])
    assert bans(table) == {((12, 22), (22, 23)), ((12, 22), (22, 12))}
    assert all(arc_ms(table, int(arc)) < UNREACHABLE for arc in table.ban_arc)


@SOURCE
def test_no_u_turn_bans_turning_back(tmp_path: Path) -> None:
    table = read_map(tmp_path, CROSSING, relations=[turn("no_u_turn", 1, 1)])
    assert bans(table) == {((12, 22), (22, 12))}


@SOURCE
@pytest.mark.parametrize(
    ("tags", "told"),
    [
        ({"except": "motorcar"}, "restriction_except"),
        ({"except": "psv;motor_vehicle"}, "restriction_except"),
        ({"except": "bicycle;psv"}, "restriction_read"),
        ({"day_on": "Mo", "hour_on": "7"}, "restriction_conditional"),
        ({"time": "7:00-9:00"}, "restriction_conditional"),
        ({"restriction": "no_left_turn @ (07:00-09:00)"}, "restriction_conditional"),
        ({"restriction": "no_left_turn_on_red"}, "restriction_unknown"),
    ],
)
def test_when_a_restriction_holds_for_cars(tmp_path: Path, tags: dict[str, str], told: str) -> None:
    relation = turn("no_left_turn", 1, 3)
    table = read_map(tmp_path, CROSSING, relations=[(*relation[:2], {**relation[2], **tags})])
    assert remarks(table) == {told: 1}
    assert (table.ban_ptr.size == 2) is (told == "restriction_read")


@SOURCE
@pytest.mark.parametrize(
    ("tags", "told"),
    [
        ({"restriction:motorcar": "no_left_turn"}, "restriction_read"),
        ({"restriction:hgv": "no_left_turn"}, "restriction_other_vehicle"),
        ({"restriction:conditional": "no_left_turn @ (Mo-Fr)"}, "restriction_conditional"),
        ({}, "restriction_unknown"),
    ],
)
def test_restrictions_by_vehicle_and_hour(tmp_path: Path, tags: dict[str, str], told: str) -> None:
    members = turn("", 1, 3)[1]
    relation = (7, members, {"type": "restriction", **tags})
    table = read_map(tmp_path, CROSSING, relations=[relation])
    assert remarks(table) == {told: 1}


@SOURCE
def test_several_from_of_no_entry_and_several_to_of_no_exit(tmp_path: Path) -> None:
    entry = [("w", 1, "from"), ("w", 3, "from"), ("n", 22, "via"), ("w", 2, "to")]
    leave = [("w", 4, "from"), ("n", 22, "via"), ("w", 1, "to"), ("w", 3, "to")]
    relations: list[Relation] = [
        (7, entry, {"type": "restriction", "restriction": "no_entry"}),
        (8, leave, {"type": "restriction", "restriction": "no_exit"}),
        (9, entry, {"type": "restriction", "restriction": "no_left_turn"}),
    ]
    table = read_map(tmp_path, CROSSING, relations=relations)
    assert bans(table) == {
        ((12, 22), (22, 32)),
        ((21, 22), (22, 32)),
        ((23, 22), (22, 12)),
        ((23, 22), (22, 21)),
    }
    assert remarks(table) == {"restriction_read": 2, "restriction_members": 1}


# A dual road: 1 and 2 northward on the left, 3 and 4 southward on the right, joined by 5 at 22-23
# and by 6, 7 farther on; 8 leaves 23 eastward.
DUAL: list[Way] = [
    (1, (12, 22), {**ROAD, "oneway": "yes"}),
    (2, (22, 32, 42), {**ROAD, "oneway": "yes"}),
    (3, (43, 33, 23), {**ROAD, "oneway": "yes"}),
    (4, (23, 13), {**ROAD, "oneway": "yes"}),
    (5, (22, 23), ROAD),
    (8, (23, 24), ROAD),
]


@SOURCE
def test_no_u_turn_over_a_way_between_two_carriageways(tmp_path: Path) -> None:
    members = [("w", 1, "from"), ("w", 5, "via"), ("w", 4, "to")]
    relation = (7, members, {"type": "restriction", "restriction": "no_u_turn"})
    table = read_map(tmp_path, DUAL, relations=[relation])
    assert bans(table) == {((12, 22), (22, 23), (23, 13))}
    assert remarks(table) == {"restriction_read": 1}


@SOURCE
def test_only_over_a_way_bans_leaving_it_anywhere(tmp_path: Path) -> None:
    members = [("w", 1, "from"), ("w", 5, "via"), ("w", 8, "to")]
    relation = (7, members, {"type": "restriction", "restriction": "only_straight_on"})
    table = read_map(tmp_path, DUAL, relations=[relation])
    assert bans(table) == {
        ((12, 22), (22, 42)),
        ((12, 22), (22, 23), (23, 13)),
        ((12, 22), (22, 23), (23, 22)),
    }


@SOURCE
@pytest.mark.parametrize("order", [(5, 6), (6, 5)])
def test_several_via_ways_in_any_order_and_with_a_junction_within(
    tmp_path: Path, order: tuple[int, int]
) -> None:
    ways: list[Way] = [
        (1, (12, 22), ROAD),
        (5, (22, 23, 24), ROAD),
        (6, (25, 24), ROAD),
        (9, (23, 33), ROAD),
        (2, (25, 35), ROAD),
        (3, (25, 15), ROAD),
    ]
    members = [("w", 1, "from"), *(("w", way, "via") for way in order), ("w", 2, "to")]
    relation = (7, members, {"type": "restriction", "restriction": "no_left_turn"})
    table = read_map(tmp_path, ways, relations=[relation])
    assert bans(table) == {((12, 22), (22, 23), (23, 24), (24, 25), (25, 35))}


@SOURCE
@pytest.mark.parametrize(
    ("members", "told"),
    [
        ([("w", 1, "from"), ("w", 3, "to")], "restriction_members"),
        ([("w", 1, "from"), ("n", 22, "via")], "restriction_members"),
        (
            [("w", 1, "from"), ("n", 22, "via"), ("w", 5, "via"), ("w", 3, "to")],
            "restriction_members",
        ),
        ([("w", 1, "from"), ("n", 22, "via"), ("w", 77, "to")], "restriction_not_here"),
        ([("w", 1, "from"), ("n", 12, "via"), ("w", 3, "to")], "restriction_not_joined"),
        ([("w", 1, "from"), ("n", 99, "via"), ("w", 3, "to")], "restriction_not_joined"),
        ([("w", 1, "from"), ("w", 3, "via"), ("w", 5, "to")], "restriction_not_joined"),
        ([("w", 5, "from"), ("n", 22, "via"), ("w", 6, "to")], "restriction_not_drivable"),
        ([("w", 1, "from"), ("n", 22, "via"), ("w", 8, "to")], "restriction_ambiguous"),
    ],
)
def test_what_cannot_be_applied_is_told(
    tmp_path: Path, members: list[tuple[str, int, str]], told: str
) -> None:
    ways: list[Way] = [
        (1, (12, 22), ROAD),
        (3, (22, 21), ROAD),
        (5, (22, 23), ROAD),
        (6, (33, 22), {**ROAD, "oneway": "yes"}),
        (8, (32, 22, 42), ROAD),  # runs through the node: left or right of it?
    ]
    relation = (7, members, {"type": "restriction", "restriction": "no_left_turn"})
    table = read_map(tmp_path, ways, relations=[relation])
    assert remarks(table) == {told: 1}
    assert table.ban_arc.size == 0
    assert table.remarks[0].example == "relation 7 no_left_turn"


def test_the_same_ban_twice_is_there_once(tmp_path: Path) -> None:
    again = (8, *turn("no_left_turn", 1, 3)[1:])
    table = read_map(tmp_path, CROSSING, relations=[turn("no_left_turn", 1, 3), again])
    assert table.ban_ptr.tolist() == [0, 2]
