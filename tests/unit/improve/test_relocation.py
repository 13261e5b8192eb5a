"""Relocation between days on small plans made by hand."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from georoute.domain.run import Effort
from georoute.improve import relocate, relocation
from georoute.kernels.arrays import MUST
from georoute.problem import Problem, Solution
from tests.days_helpers import (
    HOUR,
    MIN,
    Recipe,
    random_orders,
    random_problem,
    slow_breaches,
    slow_cost,
    slow_loss,
)

FEW = Effort(name="few", kicks_per_stop=0, relocation_rounds=3)
NONE = Effort(name="none", kicks_per_stop=0, relocation_rounds=0)
PLAIN = Recipe(
    visits=6,
    shifts=3,
    bases=1,
    windowed=0.0,
    loaded=0.0,
    load_limited=0.0,
    restricted=0.0,
    must=0.0,
    levels=1,
    asymmetry=0.0,
    one_way_shifts=0.0,
)


def plain(work_min: int) -> Problem:
    """Return six equal visits 10 min from the base and each other; three shifts of 4 h."""
    problem = random_problem(0, PLAIN)
    away = np.full((7, 7), 10 * MIN)
    np.fill_diagonal(away, 0)
    problem.travel.time_ms[:] = away
    problem.travel.length_mm[:] = away
    problem.visits.work_ms[:] = work_min * MIN
    problem.shifts.paid_ms[:] = 4 * HOUR
    problem.shifts.limit_ms[:] = 4 * HOUR
    problem.shifts.close_ms[:] = problem.shifts.open_ms + 4 * HOUR
    problem.shifts.write_up_ms[:] = 0
    return problem


def orders(*rows: list[int]) -> Solution:
    return Solution(orders=tuple(np.array(row, np.int64) for row in rows))


def days_used(solution: Solution) -> int:
    return sum(order.size > 0 for order in solution.orders)


def test_an_overlong_day_hands_visits_to_the_next() -> None:
    problem = plain(work_min=60)  # three visits take 3 * 60 + 4 * 10 = 220 min, four 290
    result = relocate(problem, orders([0, 1, 2, 3, 4, 5], [], []), effort=FEW, seed=0)
    assert [order.size for order in result.solution.orders if order.size > 0] == [3, 3]
    assert "take_out" in {move.kind for move in result.moves}


def test_a_day_that_others_have_room_for_is_closed() -> None:
    problem = plain(work_min=30)  # five visits take 5 * 30 + 6 * 10 = 210 min, six 250
    result = relocate(problem, orders([0, 1], [2, 3], [4, 5]), effort=FEW, seed=0)
    assert days_used(result.solution) == 2
    assert slow_cost(problem, result.solution) < slow_cost(problem, orders([0, 1], [2, 3], [4, 5]))


def test_a_closed_day_opens_again_when_it_is_needed() -> None:
    problem = plain(work_min=60)
    result = relocate(problem, orders([0, 1, 2], [3, 4], []), effort=FEW, seed=0)
    assert result.solution.unplaced(6).size == 0
    crowded = plain(work_min=90)  # two visits a day
    result = relocate(crowded, orders([0, 1, 2], [3, 4], []), effort=FEW, seed=0)
    assert days_used(result.solution) == 3
    assert result.solution.unplaced(6).size == 0


def test_the_least_worth_is_left_out_and_musts_never() -> None:
    problem = plain(work_min=180)  # one visit a day
    problem.visits.worth[:] = (5, MUST, 50, 500, MUST, 1)
    start = orders([0], [2], [5])
    result = relocate(problem, start, effort=NONE, seed=0)
    assert result.solution.unplaced(6).tolist() == [0, 2, 5]


def test_a_level_counts_before_the_worth() -> None:
    problem = plain(work_min=180)
    problem.visits.worth[:] = (1, 1, 1, 10**9, 10**9, 10**9)
    problem.visits.level[:] = (0, 0, 0, 1, 1, 1)
    result = relocate(problem, orders([3], [4], [5]), effort=FEW, seed=0)
    assert result.solution.unplaced(6).tolist() == [3, 4, 5]


def test_nothing_is_left_out_to_save_money() -> None:
    problem = plain(work_min=60)
    problem.visits.worth[:] = 0
    result = relocate(problem, orders([], [], []), effort=FEW, seed=0)
    assert result.solution.unplaced(6).size == 0


def test_a_visit_on_a_shift_it_may_not_go_on_is_moved() -> None:
    problem = plain(work_min=60)
    problem.visits.eligible[0] = (False, False, True)
    result = relocate(problem, orders([0, 1, 2], [3, 4, 5], []), effort=FEW, seed=0)
    assert 0 in result.solution.orders[2]


def test_a_visit_given_twice_is_kept_once() -> None:
    problem = plain(work_min=30)
    result = relocate(problem, orders([0, 1, 0], [1, 2], []), effort=FEW, seed=0)
    assert sorted(v for order in result.solution.orders for v in order) == [0, 1, 2, 3, 4, 5]


@pytest.mark.parametrize("seed", range(6))
def test_looking_only_at_nearby_tours(monkeypatch: pytest.MonkeyPatch, seed: int) -> None:
    monkeypatch.setattr(relocation, "WIDE_UP_TO", 0)
    problem = random_problem(seed, Recipe(visits=40, shifts=8, paid_min=(240, 300)))
    start = random_orders(problem, seed)
    first = relocate(problem, start, effort=FEW, seed=1).solution
    assert slow_breaches(problem, first) == []
    again = relocate(problem, first, effort=FEW, seed=2).solution
    assert (slow_loss(problem, again), slow_cost(problem, again)) <= (
        slow_loss(problem, first),
        slow_cost(problem, first),
    )


def test_an_interrupt_from_the_keyboard_gives_a_plan_that_fits() -> None:
    problem = random_problem(5, replace(PLAIN, visits=20, shifts=4))
    asked = 0

    def interrupt() -> bool:
        nonlocal asked
        asked += 1
        if asked == 5:
            raise KeyboardInterrupt
        return False

    result = relocate(problem, random_orders(problem, 5), effort=FEW, seed=0, should_stop=interrupt)
    assert result.stopped
    assert slow_breaches(problem, result.solution) == []


def test_progress_goes_from_none_to_all() -> None:
    seen: list[float] = []

    def progress(
        stage: str, *, fraction: float, cost: float | None = None, best_cost: float | None = None
    ) -> None:
        assert stage == "relocate"
        assert cost is not None
        assert cost == best_cost
        seen.append(fraction)

    problem = plain(work_min=60)
    relocate(problem, orders([0, 1, 2], [3], [4, 5]), effort=FEW, seed=0, progress=progress)
    assert seen == sorted(seen)
    assert seen[-1] == 1.0
