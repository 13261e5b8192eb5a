"""The packed board against the tour clock, and against a slow clock in plain Python."""

from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from georoute.kernels.board import (
    COUNT,
    FITS,
    INFEASIBLE,
    MONEY,
    WHERE,
    Board,
    put_in,
    take_out,
)
from georoute.kernels.clock import time_tour, tour_cost
from georoute.kernels.insertion import best_place, replaced
from georoute.problem import Problem
from georoute.problem.board import make_board
from tests.days_helpers import Recipe, random_orders, random_problem, slow_tour
from tests.examples import at_most

seeds = st.integers(0, 10_000)
SMALL = Recipe(visits=7, shifts=3, windowed=0.5, double_windowed=0.25)
PLANAR = Recipe(visits=7, shifts=3, windowed=0.4, planar=True)
CUT = Recipe(visits=7, shifts=3, unreachable=0.1)
recipes = st.sampled_from([SMALL, PLANAR, CUT])


def slow_money(problem: Problem, shift: int, order: list[int]) -> int:
    """Return the slow clock's money, or ``INFEASIBLE``; 0 without a stop."""
    if not order:
        return 0
    times = slow_tour(problem, shift, order)
    return INFEASIBLE if times.breaches else times.cost


def order_of(board: Board, s: int) -> list[int]:
    row: list[int] = board.stops[s, : board.tour[s, COUNT]].tolist()
    return row


def assert_true_to_clocks(problem: Problem, board: Board) -> None:
    for s in range(problem.shift_count):
        order = order_of(board, s)
        if not order:
            assert board.tour[s, MONEY] == 0
            continue
        array = np.array(order, np.int64)
        times = time_tour(problem.travel, problem.visits, problem.shifts, s, array)
        slow = slow_tour(problem, s, order)
        assert board.tour[s, MONEY] == tour_cost(problem.shifts, s, times)
        assert bool(board.tour[s, FITS]) == (not slow.breaches)
        if not slow.breaches:
            assert board.tour[s, MONEY] == slow.cost


@given(seed=seeds, recipe=recipes)
def test_every_tour_costs_what_both_clocks_say(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    assert_true_to_clocks(problem, make_board(problem, random_orders(problem, seed)))


@settings(max_examples=at_most(30))
@given(seed=seeds, recipe=recipes)
def test_changes_keep_the_board_true(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    board = make_board(problem, random_orders(problem, seed))
    rng = np.random.default_rng(seed)
    for _ in range(10):
        v = int(rng.integers(problem.visit_count))
        if board.spot[v, WHERE] >= 0:
            take_out(board, v)
        else:
            s = int(rng.integers(problem.shift_count))
            put_in(board, s, int(rng.integers(board.tour[s, COUNT] + 1)), v)
    assert_true_to_clocks(problem, board)


@settings(max_examples=at_most(40))
@given(seed=seeds, recipe=recipes)
def test_best_place_is_the_best_of_all_positions(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    board = make_board(problem, random_orders(problem, seed))
    for v in range(problem.visit_count):
        take_out(board, v)
        for s in range(problem.shift_count):
            order = order_of(board, s)
            if not board.tour[s, FITS]:
                continue
            bills = [
                slow_money(problem, s, [*order[:p], v, *order[p:]]) for p in range(len(order) + 1)
            ]
            rise, p = best_place(board, s, v, INFEASIBLE)
            if min(bills) == INFEASIBLE:
                assert (rise, p) == (INFEASIBLE, -1)
            else:
                assert rise == min(bills) - slow_money(problem, s, order)
                assert p == bills.index(min(bills))
                assert best_place(board, s, v, rise)[1] == -1
                assert best_place(board, s, v, rise + 1) == (rise, p)


@settings(max_examples=at_most(40))
@given(seed=seeds, recipe=recipes)
def test_replacing_a_stop_costs_what_the_slow_clock_says(seed: int, recipe: Recipe) -> None:
    problem = random_problem(seed, recipe)
    board = make_board(problem, random_orders(problem, seed))
    for s in range(problem.shift_count):
        order = order_of(board, s)
        for k in range(len(order)):
            for v in set(range(problem.visit_count)) - set(order):
                # ``replaced`` speaks of tours that fit, and leaves eligibility to its caller.
                if board.tour[s, FITS] and problem.visits.eligible[[*order, v], s].all():
                    changed = [*order[:k], v, *order[k + 1 :]]
                    expected = slow_money(problem, s, changed)
                    assert replaced(board, s, k, v, INFEASIBLE) == expected
