"""Days together against small published instances and hand arithmetic; nothing is read."""

from __future__ import annotations

import math
from functools import cache
from itertools import combinations, pairwise, permutations

import numpy as np
import pytest

from georoute.problem import Solution
from tests.benchmarks import reference
from tests.benchmarks.capacitated import CapacitatedInstance
from tests.benchmarks.engine import compile_once, solve
from tests.benchmarks.instance import Tour
from tests.benchmarks.tsplib import UNIT

AUGERAT = (
    "P. Augerat et al., Rapport de recherche 949-M, IMAG, Grenoble 1995: P-n16-k8, proven optimum "
    "450; coordinates, loads and tours from memory, the optimum proved again by this test"
)
P_N16_K8 = """NAME : P-n16-k8
TYPE : CVRP
DIMENSION : 16
EDGE_WEIGHT_TYPE : EUC_2D
CAPACITY : 35
NODE_COORD_SECTION
1 30 40\n2 37 52\n3 49 49\n4 52 64\n5 31 62\n6 52 33\n7 42 41\n8 52 41
9 57 58\n10 62 42\n11 42 57\n12 27 68\n13 43 67\n14 58 48\n15 58 27\n16 37 69
DEMAND_SECTION
1 0\n2 19\n3 30\n4 16\n5 23\n6 11\n7 31\n8 15
9 28\n10 8\n11 8\n12 7\n13 14\n14 6\n15 19\n16 11
DEPOT_SECTION
1
-1
EOF
"""
BEST_TOURS = ("3", "7", "9", "16 13 11", "15 6", "14 10 8", "12 5", "4 2")
DEPOT_LAST = """NAME: corners
COMMENT: two right triangles of sides 3, 4, 5 on either side of the last node
DIMENSION: 5
CAPACITY: 10
{limits}NODE_COORD_SECTION
1 3 0
2 3 4
3 -3 0
4 -3 -4
5 0 0
DEMAND_SECTION
1 4
2 5
3 6
4 4
5 0
DEPOT_SECTION
5
-1
EOF
"""
LIMITED = DEPOT_LAST.format(limits="DISTANCE: 20.00000\nSERVICE_TIME: 4.0\n")
HAND = "hand arithmetic: the right triangle of sides 3, 4 and 5"


def _tours(depot: int, *lines: str) -> tuple[Tour, ...]:
    return tuple(Tour(places=(depot, *map(int, line.split()), depot)) for line in lines)


def _rounded(a: tuple[float, ...], b: tuple[float, ...]) -> int:
    return int(math.dist(a, b) + 0.5)


def _least_length(text: str, capacity: int) -> int:
    """Return the least length over every partition of the sites into tours; node 1 is the depot."""
    words = text.split()
    at = words.index("NODE_COORD_SECTION") + 1
    n = (words.index("DEMAND_SECTION") - at) // 3
    xy = [(float(words[at + 3 * k + 1]), float(words[at + 3 * k + 2])) for k in range(n)]
    loads = [int(words[at + 3 * n + 2 + 2 * k]) for k in range(n)]
    tours: dict[int, list[tuple[int, int]]] = {k: [] for k in range(1, n)}
    for count in range(1, n):
        fitting = [
            some
            for some in combinations(range(1, n), count)
            if sum(loads[k] for k in some) <= capacity
        ]
        for some in fitting:
            length = min(
                sum(_rounded(xy[a], xy[b]) for a, b in pairwise((0, *way, 0)))
                for way in permutations(some)
            )
            tours[some[0]].append((sum(1 << k for k in some), length))
        if not fitting:
            break

    @cache
    def least(left: int) -> int:
        if left == 0:
            return 0
        first = (left & -left).bit_length() - 1
        return min(
            length + least(left ^ tour) for tour, length in tours[first] if tour & left == tour
        )

    return least((1 << n) - 2)


@pytest.mark.source(AUGERAT)
def test_a_published_optimum_is_proved_and_its_tours_cost_it() -> None:
    instance = CapacitatedInstance("P-n16-k8", P_N16_K8, rounded=True)
    tours = _tours(1, *BEST_TOURS)
    assert instance.violations(tours) == ()
    assert instance.cost(tours) == 450 == _least_length(P_N16_K8, 35)


@pytest.mark.slow
@pytest.mark.source(AUGERAT)
@pytest.mark.parametrize("seed", range(3))
def test_the_engine_finds_a_published_optimum(seed: int) -> None:
    instance = CapacitatedInstance("P-n16-k8", P_N16_K8, rounded=True)
    compile_once(instance.problem())
    tours = instance.tours(solve(instance.problem(), seconds=1.0, seed=seed).solution)
    assert instance.violations(tours) == ()
    assert instance.cost(tours) == 450


@pytest.mark.slow
@pytest.mark.source("OR-Tools (general routing search) on the instance quoted from Augerat 1995")
def test_the_reference_plans_the_same_problem_and_cannot_beat_the_optimum() -> None:
    instance = CapacitatedInstance("P-n16-k8", P_N16_K8, rounded=True)
    run = reference.solve(instance.problem(), seconds=0.5)
    assert run.solution is not None
    tours = instance.tours(run.solution)
    assert instance.violations(tours) == ()
    assert 450 <= instance.cost(tours) <= 1.1 * 450


@pytest.mark.source(HAND)
def test_lengths_loads_and_the_depot_are_read() -> None:
    instance = CapacitatedInstance("corners", LIMITED, rounded=False)
    assert (instance.depot, instance.customers, instance.size) == (5, (1, 2, 3, 4), 4)
    assert (instance.capacity, instance.longest, instance.service) == (10, 20, 4)
    tours = _tours(5, "1 2", "4 3")
    assert tours[0].line() == "5 1 2 5"
    assert instance.cost(tours) == 12 + 12
    assert instance.violations(tours) == ()
    assert instance.distance(1, 3) == 6
    assert instance.distance(1, 4) == math.sqrt(52)
    rounded = CapacitatedInstance("corners", LIMITED, rounded=True)
    assert rounded.distance(1, 4) == 7


@pytest.mark.source("the rules of the sets: each customer once, load, duration with service")
def test_broken_rules_are_named() -> None:
    instance = CapacitatedInstance("corners", LIMITED, rounded=False)

    def found(*lines: str) -> tuple[str, ...]:
        return instance.violations(_tours(5, *lines))

    assert found("1 2", "3") == ("customer 4 is visited 0 times",)
    assert found("1 2", "3 4", "4") == ("customer 4 is visited 2 times",)
    assert found("1 2", "3 4", "9") == ("node 9 is no customer",)
    assert found("1 2", "5", "3 4") == ("node 5 is no customer",)
    assert found("1", "2 3", "4") == (
        "tour 2 carries 11 of at most 10",
        f"tour 2 lasts {5 + math.sqrt(52) + 3 + 8:.6f} of at most 20",
    )
    assert found("1 4", "2", "3") == (
        f"tour 1 lasts {3 + math.sqrt(52) + 5 + 8:.6f} of at most 20",
    )
    open_tour = (Tour(places=(5, 1, 2)), *_tours(5, "3 4"))
    assert "tour 1 does not start and end at the depot" in instance.violations(open_tour)
    assert len(instance.violations(())) == 4


@pytest.mark.source(HAND)
def test_a_limit_may_be_exceeded_by_rounding_only() -> None:
    def exceeded(limit: str) -> bool:
        text = DEPOT_LAST.format(limits=f"DISTANCE: {limit}\nSERVICE_TIME: 4.0\n")
        instance = CapacitatedInstance("corners", text, rounded=False)
        return bool(instance.violations(_tours(5, "1 2", "3 4")))

    assert not exceeded("19.99999")
    assert exceeded("19.9999")


@pytest.mark.source(HAND)
def test_the_problem_is_the_instance_in_ticks() -> None:
    instance = CapacitatedInstance("corners", LIMITED, rounded=False)
    problem = instance.problem()
    nodes = (5, 1, 2, 3, 4)
    for i, a in enumerate(nodes):
        for j, b in enumerate(nodes):
            assert problem.travel.time_ms[i, j] == round(instance.distance(a, b) * UNIT)
            assert problem.travel.length_mm[i, j] == problem.travel.time_ms[i, j]
    assert problem.visits.load.tolist() == [4, 5, 6, 4]
    assert problem.visits.work_ms.tolist() == [4 * UNIT] * 4
    assert set(problem.shifts.limit_ms.tolist()) == {20 * UNIT}
    assert set(problem.shifts.load_limit.tolist()) == {10}
    assert problem.shift_count == instance.fleet() == 2 + 1 + 1
    nowhere = np.empty(0, np.int64)
    orders = (np.array([0, 1]), nowhere, np.array([3, 2]), nowhere)
    assert instance.tours(Solution(orders=orders)) == _tours(5, "1 2", "4 3")


@pytest.mark.source("common practice: a customer that no tour can serve has no solution")
def test_faulty_instances_are_refused() -> None:
    heavy = CapacitatedInstance("heavy", LIMITED.replace("2 5\n", "2 50\n"), rounded=False)
    with pytest.raises(ValueError, match=r"\[2\] fit in no tour"):
        heavy.problem()
    with pytest.raises(ValueError, match="do not agree"):
        CapacitatedInstance("x", LIMITED.replace("DIMENSION: 5", "DIMENSION: 6"), rounded=False)
