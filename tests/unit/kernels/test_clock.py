"""The tour clock against arithmetic by hand and against a clock that tries every departure."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from georoute.kernels.arrays import Travel, leg_mm, leg_ms
from georoute.kernels.clock import TourTimes, clock_tour, latest_arrivals, time_tour, tour_cost
from georoute.problem import Problem
from tests.spine_helpers import Day

MINUTE = 60_000


def run(
    day: Day, order: list[int]
) -> tuple[Problem, TourTimes, NDArray[np.int64], NDArray[np.int64]]:
    problem = day.problem()
    arrive = np.empty(len(order), np.int64)
    start = np.empty(len(order), np.int64)
    times = clock_tour(
        problem.travel,
        problem.visits,
        problem.shifts,
        0,
        np.array(order, np.int64),
        arrive,
        start,
    )
    return problem, times, arrive // MINUTE, start // MINUTE


ROUND = [[0, 10, 20], [11, 0, 5], [21, 6, 0]]


def test_a_day_without_windows_leaves_at_the_start_of_the_shift() -> None:
    _, times, arrive, start = run(Day(ROUND, [30, 40], opens=480, write_up=15), [0, 1])
    assert times.depart_ms == 480 * MINUTE
    assert arrive.tolist() == [490, 525]
    assert start.tolist() == [490, 525]
    assert times.back_ms == (525 + 40 + 21) * MINUTE
    assert times.finish_ms == times.back_ms + 15 * MINUTE
    assert times.drive_ms == (10 + 5 + 21) * MINUTE
    assert times.work_ms == 70 * MINUTE
    assert times.wait_ms == 0


def test_direction_counts_where_travel_is_asymmetric() -> None:
    _, there, _, _ = run(Day(ROUND, [30, 40]), [0, 1])
    _, back, _, _ = run(Day(ROUND, [30, 40]), [1, 0])
    assert there.drive_ms == 36 * MINUTE
    assert back.drive_ms == (20 + 6 + 11) * MINUTE


def test_departure_is_put_off_to_save_waiting_but_not_the_return() -> None:
    day = Day(ROUND, [30, 40], windows={0: [(600, 660)]}, opens=480)
    _, times, arrive, start = run(day, [0, 1])
    assert times.depart_ms == 590 * MINUTE
    assert arrive[0] == start[0] == 600
    assert times.wait_ms == 0


def test_departure_is_not_put_off_beyond_an_earlier_window() -> None:
    day = Day(ROUND, [30, 40], windows={0: [(480, 495)], 1: [(600, 700)]}, opens=480)
    _, times, arrive, start = run(day, [0, 1])
    assert times.depart_ms == 485 * MINUTE
    assert arrive[0] == 495
    assert start[1] == 600
    assert times.wait_ms == (600 - (495 + 30 + 5)) * MINUTE


def test_the_second_window_is_taken_when_the_first_has_closed() -> None:
    day = Day(ROUND, [30, 40], windows={1: [(480, 500), (560, 600)]}, opens=480)
    _, times, arrive, start = run(day, [0, 1])
    assert start[1] == 560
    assert arrive[1] == 560
    assert times.late_ms == 0


def test_lateness_is_counted_against_the_last_window() -> None:
    day = Day(ROUND, [30, 40], windows={1: [(480, 500)]}, opens=480)
    _, times, _, start = run(day, [0, 1])
    assert start[1] == 525
    assert times.late_ms == 25 * MINUTE


def test_excess_is_the_worse_of_shift_end_and_longest_duration() -> None:
    work = [30, 40]
    assert run(Day(ROUND, work, opens=480, closes=580), [0, 1])[1].excess_ms == 6 * MINUTE
    assert run(Day(ROUND, work, opens=480, limit=100), [0, 1])[1].excess_ms == 6 * MINUTE
    assert run(Day(ROUND, work, opens=480, closes=586, limit=106), [0, 1])[1].excess_ms == 0


def test_load_beyond_the_limit_is_told() -> None:
    assert run(Day(ROUND, [1, 1], load=[3, 4], load_limit=5), [0, 1])[1].over_load == 2
    assert run(Day(ROUND, [1, 1], load=[3, 4], load_limit=7), [0, 1])[1].over_load == 0


def test_money_is_paid_time_overtime_length_and_the_day() -> None:
    day = Day(ROUND, [30, 40], paid=60, opens=480)
    problem, times, _, _ = run(day, [0, 1])
    minutes = 36 + 70
    expected = 60 * MINUTE + 2 * (minutes - 60) * MINUTE + 0.5 * 36 * MINUTE + 7
    assert tour_cost(problem.shifts, 0, times) == expected


@st.composite
def days(draw: st.DrawFn) -> tuple[Day, list[int]]:
    n = draw(st.integers(1, 4))
    leg = st.integers(0, 30)
    drive = [[0 if i == j else draw(leg) for j in range(n + 1)] for i in range(n + 1)]
    work = [draw(st.integers(0, 40)) for _ in range(n)]
    windows = {}
    for v in range(n):
        edges = sorted(draw(st.lists(st.integers(0, 200), min_size=0, max_size=4, unique=True)))
        pairs = [(edges[k], edges[k + 1]) for k in range(0, len(edges) - 1, 2)]
        if pairs:
            windows[v] = pairs
    closes = draw(st.integers(60, 400))
    return Day(drive, work, windows=windows, closes=closes), list(range(n))


def slow_clock(day: Day, order: list[int], depart: int) -> tuple[int, int] | None:
    """Return (finish, wait) of leaving at ``depart``, or None where a window is missed."""
    here, now, wait = 0, depart, 0
    for v in order:
        now += day.drive[here][v + 1]
        windows = day.windows.get(v, [(0, 10**9)])
        starts = [max(now, opens) for opens, closes in windows if now <= closes]
        if not starts:
            return None
        wait += starts[0] - now
        now = starts[0] + day.work[v]
        here = v + 1
    return now + day.drive[here][0], wait


@given(days())
def test_no_departure_returns_earlier_nor_waits_less(sample: tuple[Day, list[int]]) -> None:
    day, order = sample
    _, times, _, _ = run(day, order)
    tried = {depart: slow_clock(day, order, depart) for depart in range(400)}
    first = tried[0]
    if first is None:
        assert times.late_ms > 0
        return
    assert times.late_ms == 0
    assert times.finish_ms == first[0] * MINUTE
    best_wait = min(found[1] for found in tried.values() if found and found[0] == first[0])
    assert times.wait_ms == best_wait * MINUTE


@given(days())
def test_the_latest_arrival_is_the_last_minute_that_works(sample: tuple[Day, list[int]]) -> None:
    day, order = sample
    problem, times, arrive, _ = run(day, order)
    if times.late_ms or times.excess_ms:
        return
    latest = np.empty(len(order), np.int64)
    latest_arrivals(
        problem.travel,
        problem.visits,
        problem.shifts,
        0,
        np.array(order, np.int64),
        times.depart_ms,
        latest,
    )
    for k in range(len(order)):
        rest = order[k:]

        def works(minute: int, rest: list[int] = rest) -> bool:
            moved = Day(day.drive, day.work, windows=day.windows)
            moved.drive = [row.copy() for row in day.drive]
            moved.drive[0][rest[0] + 1] = 0
            found = slow_clock(moved, rest, minute)
            return found is not None and found[0] <= day.closes

        minute = int(latest[k]) // MINUTE
        assert minute >= arrive[k]
        assert works(minute)
        assert not works(minute + 1)


def test_a_tour_without_stops_takes_no_time() -> None:
    problem = Day(ROUND, [30, 40]).problem()
    times = time_tour(problem.travel, problem.visits, problem.shifts, 0, np.empty(0, np.int64))
    assert times.drive_ms == 0
    assert times.finish_ms == times.depart_ms


@pytest.mark.parametrize(("x", "expected"), [(1.0, 1_000_000), (1.4, 1_000_000), (1.5, 2_000_000)])
def test_plane_legs_round_half_up_to_whole_steps(x: float, expected: int) -> None:
    none = np.zeros((0, 0), np.int64)
    travel = Travel(0, none, none, np.array([0.0, x]), np.zeros(2), 1e6, 1e6, 1_000_000)
    assert leg_ms(travel, 0, 1) == expected
    assert leg_mm(travel, 1, 0) == expected
