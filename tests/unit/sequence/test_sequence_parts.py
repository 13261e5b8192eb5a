"""The parts of the search against plain re-computation."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from georoute.domain.run import EFFORTS
from georoute.kernels.day_net import tour_money
from georoute.kernels.directed import refresh_sums
from georoute.kernels.flips import exchange, new_tour, redo, undo
from georoute.kernels.timed import price_timed
from georoute.kernels.timed_moves import (
    SWAP,
    SWAP_TURN_FIRST,
    SWAP_TURN_SECOND,
    TURN,
    added_travel,
    refresh_timed,
    write_exchanged,
)
from georoute.problem import Problem, Solution
from georoute.sequence import sequence, sequence_tour
from georoute.sequence.day import Rates, gather
from georoute.sequence.neighbours import nearest_by_table, nearest_on_plane
from georoute.sequence.timed import _Search
from tests.benchmarks.tsplib import endless_shift, free_visits
from tests.sequence_helpers import (
    clock_worth,
    day_problem,
    dense_travel,
    one_way_table,
    plain_money,
    plane_table,
)

seeds = st.integers(0, 2**32 - 1)


def _legs_of(tour: np.ndarray) -> set[frozenset[int]]:
    return {frozenset((int(a), int(b))) for a, b in zip(tour, np.roll(tour, -1), strict=True)}


@given(seed=seeds, n=st.integers(5, 40))
def test_an_exchange_swaps_exactly_its_two_legs_and_can_be_undone(seed: int, n: int) -> None:
    rng = np.random.default_rng(seed)
    start = rng.permutation(n)
    tour = new_tour(start)
    log = np.zeros((4, 2), np.int64)
    forward = bool(rng.integers(2))
    step = 1 if forward else -1
    p = int(rng.integers(n))
    q = p + step * int(rng.integers(2, n - 1))
    a, b = start[p], start[(p + step) % n]
    c, d = start[q % n], start[(q + step) % n]
    before = _legs_of(start)
    exchange(tour, log, a, b, c)
    changed = before - {frozenset((a, b)), frozenset((c, d))}
    assert _legs_of(tour[0]) == changed | {frozenset((a, c)), frozenset((b, d))}
    assert np.array_equal(tour[1, tour[0]], np.arange(n))
    after = tour.copy()
    undo(tour, log, 0)
    assert np.array_equal(tour[0], start)
    redo(tour, log, 1)
    assert np.array_equal(tour, after)


@given(seed=seeds, m=st.integers(4, 9))
def test_travel_added_by_an_exchange_is_what_plain_sums_differ_by(seed: int, m: int) -> None:
    rng = np.random.default_rng(seed)
    legs = np.stack((one_way_table(rng, m + 2), one_way_table(rng, m + 2)))
    seq = np.array([[m, *rng.permutation(m), m + 1]] * 2, np.int64)
    sums = np.zeros((4, m + 2), np.int64)
    refresh_timed(legs, seq, sums)
    i, j, k = sorted(int(x) for x in rng.choice(np.arange(1, m + 1), 3, replace=False))
    j = j if k > j else j - 1
    for kind in (TURN, SWAP, SWAP_TURN_FIRST, SWAP_TURN_SECOND):
        trial = seq.copy()
        write_exchanged(seq, trial, kind, i, j, j if kind == TURN else k)
        assert sorted(trial[0, 1:-1]) == list(range(m))
        for unit in (0, 1):
            plain = [int(legs[unit, row[:-1], row[1:]].sum()) for row in (trial[0], seq[0])]
            added = added_travel(legs, seq, sums, unit, kind, i, j, k)
            assert added == plain[0] - plain[1]


@given(seed=seeds, places=st.integers(5, 9), end=st.integers(0, 1))
def test_the_fast_price_of_a_timed_day_is_the_price_of_the_clock(
    seed: int, places: int, end: int
) -> None:
    rng = np.random.default_rng(seed)
    windows = []
    for _ in range(places - 1 - end):
        times = np.sort(rng.choice(4000, 2 * int(rng.integers(0, 3)), replace=False))
        windows.append([(int(a), int(b)) for a, b in times.reshape(-1, 2)])
    problem = day_problem(
        one_way_table(rng, places),
        end_place=end,
        windows=windows,
        work_ms=int(rng.integers(0, 200)),
        overtime_rate=11.0,
        paid_ms=2500,
        limit_ms=int(rng.integers(1000, 6000)),
    )
    order = rng.permutation(problem.visit_count)
    search = _Search(problem, 0, order)
    worth = np.zeros(4, np.int64)
    day = (search.legs, search.stops, search.spans, search.limits)
    price_timed(*day, search.tariff, search.seq, 1 << 60, worth)
    assert (int(worth[0]), int(worth[1])) == clock_worth(problem, order)


@given(seed=seeds, n=st.integers(3, 20))
def test_sums_of_both_directions_are_plain_sums(seed: int, n: int) -> None:
    rng = np.random.default_rng(seed)
    table = one_way_table(rng, n)
    tour = new_tour(rng.permutation(n))
    sums = np.zeros_like(tour)
    refresh_sums(table, tour, sums, 0)
    row = tour[0]
    assert sums[0, -1] == table[row[:-1], row[1:]].sum()
    assert sums[1, -1] == table[row[1:], row[:-1]].sum()


@given(seed=seeds, n=st.integers(2, 30), count=st.integers(1, 9))
def test_nearest_are_the_cheapest(seed: int, n: int, count: int) -> None:
    rng = np.random.default_rng(seed)
    table = one_way_table(rng, n)
    near = nearest_by_table(table, count)
    for i in range(n):
        others = sorted(int(table[i, j]) for j in range(n) if j != i)
        assert i not in near[i]
        assert [int(table[i, j]) for j in near[i]] == others[: near.shape[1]]


def test_nearest_on_plane_with_many_points_on_one_spot() -> None:
    x = np.array([0.0] * 12 + [5.0, 6.0])
    near = nearest_on_plane(x, np.zeros(14), 3)
    assert near.shape == (14, 3)
    for i in range(14):
        assert i not in near[i]
        assert len(set(near[i].tolist())) == 3
    assert near[12, 0] == 13


@pytest.mark.parametrize("linked", [False, True])
def test_points_priced_on_the_fly_cost_what_a_table_costs(
    monkeypatch: pytest.MonkeyPatch, linked: bool
) -> None:
    rng = np.random.default_rng(3)
    problem = _points(rng.random((40, 2)) * 1000.0, end=1 if linked else 0)
    order = np.arange(problem.visit_count)
    table = gather(problem, 0, order, rates=Rates(time=0.7, length=0.2))
    found = sequence_tour(problem, 0, order, kicks=50, seed=4)
    monkeypatch.setattr("georoute.sequence.day.LARGEST_TABLE", 5)
    flying = gather(problem, 0, order, rates=Rates(time=0.7, length=0.2))
    assert flying.net.table.size == 0
    assert table.net.table.size > 0
    assert flying.linked == table.linked == linked
    for _ in range(5):
        tour = table.tour_of(rng.permutation(order))
        assert tour_money(*flying.net, tour) == tour_money(*table.net, tour)
    again = sequence_tour(problem, 0, order, kicks=50, seed=4)
    assert sorted(again.order.tolist()) == order.tolist()
    # Two searches that number the nodes differently need not agree; both have to be good.
    assert clock_worth(problem, again.order)[1] < 1.05 * clock_worth(problem, found.order)[1]


def _points(xy: np.ndarray, *, end: int) -> Problem:
    n = xy.shape[0]
    none = np.zeros((0, 0), np.int64)
    x, y = np.ascontiguousarray(xy[:, 0]), np.ascontiguousarray(xy[:, 1])
    travel = dense_travel(none, none)._replace(
        dense=0, x=x, y=y, time_scale=100.0, length_scale=30.0, step=10
    )
    visits = free_visits(n)
    if end:
        kept = {
            field: getattr(visits, field)[1:]
            for field in ("place", "work_ms", "load", "window_ptr", "worth", "level", "eligible")
        }
        visits = visits._replace(**kept)
    shifts = endless_shift()._replace(
        end_place=np.array([end]), hour_rate=np.array([0.7]), length_rate=np.array([0.2])
    )
    return Problem(travel=travel, visits=visits, shifts=shifts, plane_x_m=x, plane_y_m=y)


@pytest.mark.parametrize("visits", [0, 1, 2, 3])
@pytest.mark.parametrize("end", [0, 1])
def test_days_of_few_visits(visits: int, end: int) -> None:
    rng = np.random.default_rng(visits)
    problem = day_problem(one_way_table(rng, visits + 1 + end), end_place=end)
    found = sequence_tour(problem, 0, np.arange(visits), kicks=10, seed=0, keep_log=True)
    assert sorted(found.order.tolist()) == list(range(visits))
    assert len(found.steps) <= 1


def test_an_order_that_cannot_be_bettered_comes_back_unchanged() -> None:
    problem = day_problem(plane_table(np.random.default_rng(8), 9))
    best = sequence_tour(problem, 0, np.arange(8), kicks=100, seed=0).order
    for given_order in (best, best[::-1].copy()):
        again = sequence_tour(problem, 0, given_order, kicks=100, seed=1, keep_log=True)
        assert np.array_equal(again.order, given_order)
        assert again.steps == ()


def test_the_search_ends_when_it_is_told_to() -> None:
    problem = day_problem(plane_table(np.random.default_rng(8), 60))
    asked = []

    def stop() -> bool:
        asked.append(1)
        return len(asked) > 3

    found = sequence_tour(problem, 0, np.arange(59), kicks=10**9, seed=0, should_stop=stop)
    assert sorted(found.order.tolist()) == list(range(59))


def test_one_way_roads_are_not_symmetrised() -> None:
    # A ring road driven one way: the reverse of the cheapest order costs ten times as much.
    n = 9
    table = np.array([[(b - a) % n for b in range(n)] for a in range(n)], np.int64) ** 3
    problem = day_problem(table, length_rate=0.0, hour_rate=1.0)
    start = np.arange(n - 1)[::-1].copy()
    found = sequence_tour(problem, 0, start, kicks=200, seed=0)
    assert found.order.tolist() == list(range(n - 1))
    assert plain_money(problem, found.order) == n


def test_all_shifts_are_ordered_and_their_sequence_does_not_matter() -> None:
    rng = np.random.default_rng(5)
    problem = day_problem(plane_table(rng, 25))
    two = {field: np.repeat(value, 2) for field, value in problem.shifts._asdict().items()}
    both = Problem(
        travel=problem.travel,
        visits=problem.visits,
        shifts=problem.shifts._replace(**two),
        plane_x_m=problem.plane_x_m,
        plane_y_m=problem.plane_y_m,
    )
    given_orders = (np.arange(12), np.arange(12, 24))
    fractions: list[float] = []

    def progress(
        stage: str, *, fraction: float, cost: float | None = None, best_cost: float | None = None
    ) -> None:
        assert stage == "order"
        del cost, best_cost
        fractions.append(fraction)

    effort = EFFORTS["quick"]
    result = sequence(both, Solution(orders=given_orders), effort=effort, seed=3, progress=progress)
    assert fractions == [0.0, 0.5, 1.0]
    alone = sequence_tour(both, 1, given_orders[1], kicks=12 * effort.kicks_per_stop, seed=3)
    assert np.array_equal(result.solution.orders[1], alone.order)
    assert len(result.steps) == 2
    assert result.steps[0][-1].order_after.tolist() == result.solution.orders[0].tolist()
