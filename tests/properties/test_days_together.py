"""The search over all days, judged by a slow clock and by trying everything."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from georoute.domain.run import EFFORTS, never_stop, no_progress
from georoute.improve import ImproveResult, improve, relocate
from georoute.problem import Problem, Solution
from georoute.sequence import sequence
from tests.days_helpers import (
    Recipe,
    best_by_brute_force,
    random_orders,
    random_problem,
    slow_breaches,
    slow_cost,
    slow_loss,
)
from tests.examples import at_most

seeds = st.integers(0, 10_000)
TIGHT = Recipe(visits=10, shifts=3, paid_min=(180, 300), loaded=0.5, windowed=0.4, must=0.3)
PLAIN = replace(TIGHT, windowed=0.0, double_windowed=0.0)
CUT = replace(TIGHT, unreachable=0.15)
recipes = st.sampled_from([TIGHT, PLAIN, CUT])
FEW = replace(EFFORTS["quick"], improve_steps=4)
TINY = Recipe(visits=5, shifts=2, paid_min=(150, 300), windowed=0.2, loaded=0.3, must=0.2)
TINY_PLAIN = replace(TINY, windowed=0.0, double_windowed=0.0)


def improved(
    problem: Problem,
    start: Solution,
    *,
    seed: int = 1,
    steps: int = 4,
    fewest_days: bool = False,
) -> ImproveResult:
    return improve(
        problem,
        start,
        effort=replace(FEW, improve_steps=steps),
        seed=seed,
        progress=no_progress,
        should_stop=never_stop,
        fewest_days=fewest_days,
    )


def feasible_start(problem: Problem, seed: int) -> Solution:
    return relocate(problem, random_orders(problem, seed), effort=FEW, seed=seed).solution


def outcome(problem: Problem, solution: Solution) -> tuple[tuple[int, ...], int]:
    return slow_loss(problem, solution), slow_cost(problem, solution)


@given(seed=seeds, recipe=recipes)
def test_every_limit_holds_afterwards(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    found = improved(problem, feasible_start(problem, seed), seed=seed)
    assert slow_breaches(problem, found.solution) == []


@given(seed=seeds, recipe=recipes)
def test_it_never_leaves_more_out_nor_costs_more(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    start = feasible_start(problem, seed)
    found = improved(problem, start, seed=seed)
    assert outcome(problem, found.solution) <= outcome(problem, start)


@given(seed=seeds)
@settings(max_examples=at_most(20))
def test_the_same_seed_gives_the_same_days(seed: int) -> None:
    problem = random_problem(seed, TIGHT)
    start = feasible_start(problem, seed)
    first, second = improved(problem, start, seed=3), improved(problem, start, seed=3)
    for one, other in zip(first.solution.orders, second.solution.orders, strict=True):
        assert np.array_equal(one, other)


@given(seed=seeds, recipe=recipes)
@settings(max_examples=at_most(30))
def test_it_starts_from_nothing_as_well(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    nothing = Solution(orders=tuple(np.empty(0, np.int64) for _ in range(problem.shift_count)))
    found = improved(problem, nothing)
    assert slow_breaches(problem, found.solution) == []
    assert outcome(problem, found.solution) <= outcome(problem, nothing)


@pytest.mark.slow
@pytest.mark.parametrize("recipe", [TINY, TINY_PLAIN], ids=["windows", "plain"])
def test_small_problems_are_solved_to_the_best_that_trying_everything_finds(recipe: Recipe) -> None:
    met = 0
    for seed in range(40):
        problem = random_problem(seed, recipe)
        found = improved(problem, feasible_start(problem, seed), steps=200)
        last = sequence(problem, found.solution, effort=FEW, seed=1, keep_log=False).solution
        met += outcome(problem, last) == best_by_brute_force(problem)
    assert met >= 39


def outcome_by_days(problem: Problem, solution: Solution) -> tuple[tuple[int, ...], int]:
    days = sum(order.shape[0] > 0 for order in solution.orders)
    return (*slow_loss(problem, solution), days), slow_cost(problem, solution)


@given(seed=seeds, recipe=recipes)
def test_fewest_days_first_never_leaves_more_out_nor_needs_more_days(
    seed: int, recipe: Recipe
) -> None:
    problem = random_problem(seed, recipe)
    start = feasible_start(problem, seed)
    found = improved(problem, start, seed=seed, fewest_days=True)
    assert slow_breaches(problem, found.solution) == []
    assert outcome_by_days(problem, found.solution) <= outcome_by_days(problem, start)


@pytest.mark.slow
@pytest.mark.parametrize("recipe", [TINY, TINY_PLAIN], ids=["windows", "plain"])
def test_fewest_days_of_small_problems_are_those_that_trying_everything_finds(
    recipe: Recipe,
) -> None:
    met = 0
    for seed in range(40):
        # A day out costs nothing, so that the least money takes more days where it can.
        problem = random_problem(seed, replace(recipe, shifts=3, day_cost=0))
        found = improved(problem, feasible_start(problem, seed), steps=200, fewest_days=True)
        last = sequence(problem, found.solution, effort=FEW, seed=1, keep_log=False).solution
        best = best_by_brute_force(problem, fewest_days=True)
        met += outcome_by_days(problem, last) == best
    assert met >= 39


def test_an_interrupted_search_returns_its_start_or_better() -> None:
    problem = random_problem(5, TIGHT)
    start = feasible_start(problem, 5)
    found = improve(
        problem, start, effort=FEW, seed=1, progress=no_progress, should_stop=lambda: True
    )
    assert found.steps == 0
    assert outcome(problem, found.solution) <= outcome(problem, start)
