"""Measures of a plan against hand arithmetic; self-crossing against shapely, places from pyproj.

The plan of these tests is told in ``tests/office_helpers.py``. Weeks are those of ISO 8601.
"""

from __future__ import annotations

from dataclasses import replace
from datetime import date

import numpy as np
import pytest
from shapely import LineString

from georoute.publishing.quality import (
    Spread,
    balance,
    cost_parts,
    crosses_itself,
    date_record,
    hours_spent,
    shape,
    spread_of,
    tour_changes,
    undated,
    week_loads,
)
from tests.office_helpers import FRIDAY, HOUR_S, MONDAY, THURSDAY, hand_plan
from tests.publish_helpers import sample_plan

PLAN = hand_plan()


def test_cost_is_hours_overtime_distance_and_days() -> None:
    parts = {part.kind: part for part in cost_parts(PLAN)}
    # 9 h, 6 h and 4 h out, of which 0.5 h beyond the 8.5 h paid
    assert parts["hours"].quantity == pytest.approx(18.5)
    assert parts["hours"].amount == pytest.approx(18.5 * 9000)
    assert parts["overtime"].amount == pytest.approx(0.5 * 13500)
    assert parts["distance"].quantity == pytest.approx(40 + 20 + 60)
    assert parts["distance"].amount == pytest.approx(120 * 250)
    assert parts["days"].amount == 3 * 1000
    assert sum(part.amount for part in parts.values()) == pytest.approx(206_250)


def test_parts_of_the_cost_add_up_to_the_cost_of_the_tours() -> None:
    plan = sample_plan(days=3, people=2)
    assert sum(part.amount for part in cost_parts(plan)) == pytest.approx(plan.cost)


def test_hours_are_told_apart() -> None:
    spent = hours_spent(PLAN)
    assert spent.access_s == pytest.approx(1.0 * HOUR_S)
    assert spent.work_s == pytest.approx(13.5 * HOUR_S)
    assert spent.drive_s == pytest.approx(2.5 * HOUR_S)
    assert spent.wait_s == pytest.approx(0.5 * HOUR_S)
    assert spent.write_up_s == pytest.approx(1.5 * HOUR_S)
    assert spent.total_s == pytest.approx(19 * HOUR_S)
    # wait and write-up are no part of the share
    assert spent.travel_share == pytest.approx(2.5 / 17)
    assert hours_spent(replace(PLAN, tours=())).travel_share == 0


def test_balance_by_day_and_by_inspector() -> None:
    found = balance(PLAN)
    per_day = found.per_day.scaled(1 / HOUR_S)
    assert (per_day.count, per_day.least, per_day.median, per_day.most) == (3, 4, 6, 9)
    assert per_day.spread == 5
    assert [row.total_s / HOUR_S for row in found.inspectors] == [15, 4]
    assert found.inspectors[0].spread.median == 7.5 * HOUR_S
    assert [day for day, _ in found.inspectors[0].days] == [THURSDAY, FRIDAY]
    assert found.per_inspector.median == 9.5 * HOUR_S
    assert found.per_inspector.spread == 11 * HOUR_S


def test_an_inspector_who_stays_in_counts_with_nothing() -> None:
    found = balance(replace(PLAN, tours=PLAN.tours[:2]))
    assert found.inspectors[1].spread == Spread(count=0, least=0, median=0, most=0)
    assert found.per_inspector.least == 0
    assert spread_of([]).spread == 0


def test_weeks_hold_what_falls_due_in_them() -> None:
    first, second = week_loads(PLAN)
    assert (first.year, first.week, first.first, first.last) == (
        2026,
        10,
        THURSDAY,
        date(2026, 3, 8),
    )
    assert (second.week, second.first, second.last) == (11, MONDAY, MONDAY)
    # v1 was due before, v2 on the Friday, v3 on the Sunday; work 1 + 2 + 1.5, access 0.5
    assert first.due_visits == 3
    assert first.due_s == pytest.approx(5.0 * HOUR_S)
    # v4 has no due date but a latest one: work 3, access 0.5
    assert second.due_visits == 1
    assert second.due_s == pytest.approx(3.5 * HOUR_S)
    # two inspectors on Thursday and Friday, then on Monday: 8.5 h less 0.5 h, and 1 h more
    assert (first.shifts, second.shifts) == (4, 2)
    assert first.shift_s == pytest.approx(4 * 8 * HOUR_S)
    assert second.overtime_s == pytest.approx(2 * 1 * HOUR_S)
    assert first.placed_s == pytest.approx(12 * HOUR_S)
    assert second.drive_s == pytest.approx(1 * HOUR_S)


def test_visits_of_no_week_are_counted_apart() -> None:
    rest = undated(PLAN)
    assert (rest.without_date, rest.later) == (1, 1)
    assert rest.without_date_s == pytest.approx(0.5 * HOUR_S)
    assert rest.later_s == pytest.approx(2 * HOUR_S)


def test_a_shift_cut_short_gives_less() -> None:
    people = tuple(
        replace(person, shift_end=person.shift_start.replace(hour=12), write_up_s=5 * HOUR_S)
        for person in PLAN.programme.inspectors
    )
    plan = replace(PLAN, programme=replace(PLAN.programme, inspectors=people))
    first = week_loads(plan)[0]
    # four hours from 08:00 to 12:00, of which the write-up alone would take five
    assert (first.shift_s, first.overtime_s) == (0, 0)


def test_dates_are_kept_or_told() -> None:
    record = date_record(PLAN)
    assert [(entry.visit_id, entry.days) for entry in record.past_due] == [
        ("v1|check|1", 13),  # 20 February to 5 March 2026
        ("v3|check|1", 1),
    ]
    assert (record.overdue_before, record.overdue_left) == (1, 0)
    assert record.left_due == 1  # v2; v6 has no date
    assert record.past_latest == 0
    assert record.late_stops == 1
    assert record.worst_late_s == pytest.approx(20 * 60)  # v5 closed at 11:00, work at 11:20


def test_a_visit_after_its_latest_date_is_counted() -> None:
    visits = tuple(
        replace(visit, latest=THURSDAY) if visit.site_id == "v4" else visit for visit in PLAN.visits
    )
    assert date_record(replace(PLAN, visits=visits)).past_latest == 1


def test_shape_of_the_tours() -> None:
    found = shape(PLAN)
    # v1 and v5 lie 4 km apart, so each 2 km from their middle; the other tours have one stop
    assert found.tours[0].mean_to_centre_m == pytest.approx(2000, rel=1e-3)
    assert [tour.mean_to_centre_m for tour in found.tours[1:]] == [0, 0]
    assert found.mean_to_centre_m == pytest.approx(1000, rel=1e-3)
    # v4 (Friday) is 150 m from v1 (Thursday); v3 (Monday) is 250 m from v4
    assert (found.near_pairs, found.near_stops) == (1, 2)
    assert found.crossing == 0


def test_a_repeat_of_the_same_task_is_no_pair() -> None:
    moved = [
        replace(visit, site_id="v1", task="check") if visit.site_id == "v4" else visit
        for visit in PLAN.visits
    ]
    assert shape(replace(PLAN, visits=tuple(moved))).near_pairs == 0


def test_a_plan_without_tours_has_no_shape() -> None:
    found = shape(replace(PLAN, tours=()))
    assert (found.tours, found.mean_to_centre_m, found.near_pairs) == ((), 0, 0)


@pytest.mark.parametrize(
    ("way", "crosses"),
    [
        ([(0, 0), (1, 1), (1, 0), (0, 1), (0, 0)], True),  # a bow tie
        ([(0, 0), (1, 0), (1, 1), (0, 1), (0, 0)], False),  # a square
        ([(0, 0), (2, 0), (0, 0)], False),  # out and back
        ([(0, 0), (2, 0), (1, 0), (1, 1), (0, 0)], False),  # legs that touch
        ([(0, 0), (0, 0), (1, 1), (1, 1), (0, 0)], False),  # two visits at one site
    ],
)
def test_what_counts_as_crossing(way: list[tuple[float, float]], crosses: bool) -> None:
    assert crosses_itself(np.array(way, np.float64)) is crosses


def test_crossing_agrees_with_shapely() -> None:
    rng = np.random.default_rng(11)
    answers = set()
    for _ in range(300):
        points = rng.random((int(rng.integers(4, 8)), 2))
        ring = np.vstack([points, points[:1]])
        crosses = not LineString(ring).is_simple  # random points are in general position
        answers.add(crosses)
        assert crosses_itself(ring) is crosses
    assert answers == {True, False}


def test_exchange_log_in_short() -> None:
    first, second, third = tour_changes(PLAN)
    assert (first.within, first.between) == (2, 1)
    assert (first.cost_first, first.cost_last) == (900, 950)
    assert (second.within, second.between, second.cost_first, second.cost_last) == (
        0,
        0,
        None,
        None,
    )
    assert (third.within, third.between, third.cost_last) == (0, 1, 300)
