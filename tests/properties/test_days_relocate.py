"""Relocation on random problems, judged by a slow clock that shares nothing with the kernels."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from georoute.domain.run import Effort
from georoute.improve import RelocateResult, relocate
from georoute.kernels.arrays import MUST
from georoute.problem import Problem, Solution
from georoute.split import split
from tests.days_helpers import (
    HOUR,
    Recipe,
    best_by_brute_force,
    random_orders,
    random_problem,
    slow_breaches,
    slow_cost,
    slow_loss,
    slow_tour,
)
from tests.examples import at_most

seeds = st.integers(0, 10_000)
FEW = Effort(name="few", kicks_per_stop=0, relocation_rounds=3)
TIGHT = Recipe(visits=10, shifts=2, paid_min=(180, 300), loaded=0.5, windowed=0.4, must=0.3)
CUT = replace(TIGHT, unreachable=0.15)
PLANAR = replace(TIGHT, planar=True, clusters=2)
recipes = st.sampled_from([TIGHT, CUT, PLANAR])


def same(first: Solution, second: Solution) -> bool:
    pairs = zip(first.orders, second.orders, strict=True)
    return all(np.array_equal(a, b) for a, b in pairs)


def outcome(problem: Problem, solution: Solution) -> tuple[tuple[int, ...], int]:
    return slow_loss(problem, solution), slow_cost(problem, solution)


@given(seed=seeds, recipe=recipes)
def test_the_result_keeps_every_limit(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    result = relocate(problem, random_orders(problem, seed), effort=FEW, seed=seed)
    assert slow_breaches(problem, result.solution) == []
    assert not result.stopped


@settings(max_examples=at_most(25))
@given(seed=seeds, recipe=recipes)
def test_a_plan_that_fits_never_gets_worse(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    start = relocate(problem, split(problem, seed=seed), effort=FEW, seed=seed).solution
    again = relocate(problem, start, effort=FEW, seed=seed + 1)
    assert outcome(problem, again.solution) <= outcome(problem, start)


@settings(max_examples=at_most(25))
@given(seed=seeds, recipe=recipes)
def test_no_visit_left_out_fits_into_a_tour_as_it_is(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    solution = relocate(problem, random_orders(problem, seed), effort=FEW, seed=seed).solution
    for v in solution.unplaced(problem.visit_count).tolist():
        for s, order in enumerate(solution.orders):
            for p in range(order.shape[0] + 1):
                longer = [*order[:p].tolist(), v, *order[p:].tolist()]
                assert slow_tour(problem, s, longer).breaches


@settings(max_examples=at_most(25))
@given(seed=seeds)
def test_a_must_is_not_left_out_for_anything_less(seed: int) -> None:
    # Without a place for a must even among the musts alone, nothing less could make room.
    problem = random_problem(seed, replace(TIGHT, windowed=0.0, asymmetry=0.0))
    solution = relocate(problem, random_orders(problem, seed), effort=FEW, seed=seed).solution
    must = problem.visits.worth >= MUST
    for v in solution.unplaced(problem.visit_count).tolist():
        if must[v]:
            for s, order in enumerate(solution.orders):
                musts = [u for u in order.tolist() if must[u]]
                tours = ([*musts[:p], v, *musts[p:]] for p in range(len(musts) + 1))
                assert all(slow_tour(problem, s, tour).breaches for tour in tours)


@settings(max_examples=at_most(15))
@given(seed=seeds)
def test_everything_is_placed_where_there_is_ample_time(seed: int) -> None:
    ample = Recipe(visits=12, shifts=6, windowed=0.0, loaded=0.0, restricted=0.0, span_m=15_000.0)
    problem = random_problem(seed, ample)
    assert problem.visits.work_ms.sum() < 2 * 7 * HOUR
    result = relocate(problem, random_orders(problem, seed), effort=FEW, seed=seed)
    assert result.solution.unplaced(problem.visit_count).size == 0


@settings(max_examples=at_most(15))
@given(seed=seeds, recipe=recipes)
def test_same_seed_same_result(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    start = split(problem, seed=seed)
    first = relocate(problem, start, effort=FEW, seed=seed)
    second = relocate(problem, start, effort=FEW, seed=seed)
    assert same(first.solution, second.solution)
    assert [m.kind for m in first.moves] == [m.kind for m in second.moves]


@settings(max_examples=at_most(20))
@given(seed=seeds, polls=st.integers(0, 60))
def test_stopped_at_any_moment_the_result_keeps_every_limit(seed: int, polls: int) -> None:
    problem = random_problem(seed, TIGHT)
    asked = 0

    def enough() -> bool:
        nonlocal asked
        asked += 1
        return asked > polls

    result = relocate(
        problem, random_orders(problem, seed), effort=FEW, seed=seed, should_stop=enough
    )
    assert slow_breaches(problem, result.solution) == []
    assert result.stopped == (asked > polls)


def replay(start: Solution, result: RelocateResult, problem: Problem) -> list[list[int]]:
    """Follow the moves from ``start``, checking that each begins where the last one ended."""
    orders = [order.tolist() for order in start.orders]
    cost = None
    for move in result.moves:
        assert cost is None or move.cost_before == cost
        cost = move.cost_after
        where = {v: s for s, order in enumerate(orders) for v in order}
        for v, before, after in move.visits:
            assert where.get(v, -1) == before != after
        for s, before_order, after_order in move.tours:
            assert orders[s] == before_order.tolist()
            orders[s] = after_order.tolist()
        where = {v: s for s, order in enumerate(orders) for v in order}
        assert all(where.get(v, -1) == after for v, _, after in move.visits)
    if cost is not None:
        assert cost == slow_cost(problem, result.solution)
    return orders


@settings(max_examples=at_most(25))
@given(seed=seeds, recipe=recipes)
def test_the_moves_lead_from_the_start_to_the_result(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    start = random_orders(problem, seed)
    result = relocate(problem, start, effort=FEW, seed=seed)
    orders = replay(start, result, problem)
    assert orders == [order.tolist() for order in result.solution.orders]
    for move in result.moves:
        if move.kind in {"swap", "close_day"} or (
            move.kind == "relocate" and all(before >= 0 for _, before, _ in move.visits)
        ):
            assert move.cost_after < move.cost_before


@pytest.mark.parametrize("seed", range(8))
def test_never_below_the_optimum_and_nothing_more_left_out(seed: int) -> None:
    # Oracle: every assignment and every order, by the slow clock.
    recipe = Recipe(visits=4, shifts=2, paid_min=(150, 300), work_min=(20, 80), loaded=0.4)
    problem = random_problem(seed, recipe)
    best = best_by_brute_force(problem)
    found = outcome(
        problem, relocate(problem, split(problem, seed=seed), effort=FEW, seed=seed).solution
    )
    assert found >= best
    assert found[0] == best[0]
