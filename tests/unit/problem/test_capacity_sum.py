"""The capacity sum, by hand, and its travel bound against plans and a reference library."""

from __future__ import annotations

from itertools import pairwise

import networkx as nx
import numpy as np
import pytest

from georoute.domain.run import Effort
from georoute.improve import relocate
from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.spanning import half_legs_ms, spanning_tree_ms
from georoute.problem.capacity import capacity, least_travel_ms
from tests.days_helpers import HOUR, MIN, Recipe, random_orders, random_problem, slow_leg


def test_hours_by_hand() -> None:
    problem = random_problem(0, Recipe(visits=3, shifts=2))
    problem.visits.work_ms[:] = (30 * MIN, 60 * MIN, 90 * MIN)
    problem.shifts.open_ms[:] = 8 * HOUR
    problem.shifts.close_ms[:] = (18 * HOUR, 15 * HOUR)  # the second must be back after 7 h
    problem.shifts.paid_ms[:] = 8 * HOUR
    problem.shifts.limit_ms[:] = 9 * HOUR
    problem.shifts.write_up_ms[:] = 30 * MIN
    found = capacity(problem)
    assert (found.visits, found.shifts) == (3, 2)
    assert found.work_h == pytest.approx(3.0)
    assert found.shift_h == pytest.approx(7.5 + 6.5)
    assert found.overtime_h == pytest.approx(1.0 + 0.0)
    assert found.short_h == 0.0


def test_too_little_time_is_told() -> None:
    problem = random_problem(0, Recipe(visits=10, shifts=1))
    problem.visits.work_ms[:] = 2 * HOUR
    found = capacity(problem)
    expected = 20.0 + found.least_travel_h - found.shift_h - found.overtime_h
    assert found.short_h == pytest.approx(expected)
    assert found.short_h > 0.0


@pytest.mark.parametrize("seed", range(5))
def test_spanning_tree_equals_networkx(seed: int) -> None:
    # Reference: networkx.minimum_spanning_tree on the same edges.
    problem = random_problem(seed, Recipe(visits=12, shifts=3, unreachable=0.2))
    bases = np.array([0, 1])
    graph = nx.Graph()
    graph.add_node("base")
    for i, p in enumerate(problem.visits.place.tolist()):
        for q in [*problem.visits.place[:i].tolist(), 0, 1]:
            way = min(slow_leg(problem, p, q)[0], slow_leg(problem, q, p)[0])
            end = "base" if q < 2 else q
            old = graph.get_edge_data(p, end, {"weight": UNREACHABLE})["weight"]
            if way < old:
                graph.add_edge(p, end, weight=way)
    tree = nx.minimum_spanning_tree(graph.subgraph(nx.node_connected_component(graph, "base")))
    assert spanning_tree_ms(problem.travel, problem.visits.place, bases) == tree.size("weight")


def test_half_legs_by_hand() -> None:
    problem = random_problem(0, Recipe(visits=2, shifts=1, bases=1))
    table = [[0, 10, 40], [12, 0, 5], [30, 9, 0]]  # base, A, B
    problem.travel.time_ms[:] = table
    # A: in 9 (from B), out 5 (to B); B: in 5 (from A), out 9 (to A).
    assert half_legs_ms(problem.travel, problem.visits.place, np.array([0])) == 14


@pytest.mark.parametrize("seed", range(6))
def test_no_plan_travels_less_than_the_bound(seed: int) -> None:
    planar = seed % 2 == 0
    recipe = Recipe(visits=14, shifts=6, planar=planar, windowed=0.0, loaded=0.0, restricted=0.0)
    problem = random_problem(seed, recipe)
    effort = Effort(name="few", kicks_per_stop=0, relocation_rounds=3)
    solution = relocate(problem, random_orders(problem, seed), effort=effort, seed=0).solution
    assert solution.unplaced(14).size == 0
    drive = 0
    for s, order in enumerate(solution.orders):
        if order.size > 0:
            stops = problem.visits.place[order].tolist()
            places = [problem.shifts.start_place[s], *stops, problem.shifts.end_place[s]]
            drive += sum(slow_leg(problem, i, j)[0] for i, j in pairwise(places))
    assert 0 < least_travel_ms(problem) <= drive


def test_no_visits_no_shifts() -> None:
    assert capacity(random_problem(0, Recipe(visits=0, shifts=2))).least_travel_h == 0.0
    assert capacity(random_problem(0, Recipe(visits=2, shifts=0))).shift_h == 0.0
