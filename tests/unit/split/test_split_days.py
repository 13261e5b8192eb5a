"""The first split of the visits over the shifts."""

from __future__ import annotations

import os
import subprocess
import sys
from dataclasses import replace

import numpy as np
import pytest

from georoute.problem import Problem, Solution
from georoute.split import split
from tests.days_helpers import HOUR, Recipe, random_problem

PLAIN = Recipe(
    visits=60,
    shifts=16,
    bases=1,
    windowed=0.0,
    loaded=0.0,
    restricted=0.0,
    asymmetry=0.0,
    work_min=(30, 30),
    paid_min=(480, 480),
    overtime_min=(0, 0),
    write_up_min=(0, 0),
    span_m=20_000.0,
)


def used(solution: Solution) -> list[int]:
    return [s for s, order in enumerate(solution.orders) if order.size > 0]


def shift_of(problem: Problem, solution: Solution) -> list[int]:
    where = [-1] * problem.visit_count
    for s, order in enumerate(solution.orders):
        for v in order.tolist():
            where[v] = s
    return where


@pytest.mark.parametrize("seed", range(6))
def test_every_visit_goes_to_exactly_one_shift_that_may_take_it(seed: int) -> None:
    problem = random_problem(seed, Recipe(visits=50, shifts=9, restricted=0.6, windowed=0.4))
    solution = split(problem, seed=seed)
    placed = sorted(v for order in solution.orders for v in order.tolist())
    assert placed == np.flatnonzero(problem.visits.eligible.any(axis=1)).tolist()
    for s, order in enumerate(solution.orders):
        assert problem.visits.eligible[order, s].all()


def test_about_as_many_days_as_the_work_needs() -> None:
    # 60 visits of 30 min are 30 h of work: with no travel at all 4 shifts of 8 h.
    problem = random_problem(1, PLAIN)
    days = len(used(split(problem, seed=0)))
    assert 4 <= days <= 8


def test_days_have_about_the_same_work() -> None:
    problem = random_problem(1, PLAIN)
    work = [problem.visits.work_ms[order].sum() for order in split(problem, seed=0).orders]
    busy = [w for w in work if w > 0]
    assert max(busy) <= 8 * HOUR
    assert min(busy) >= 0.5 * np.mean(busy)


def test_early_dates_first() -> None:
    problem = random_problem(2, PLAIN)
    days = problem.shifts.day[used(split(problem, seed=0))]
    left = sorted(set(range(problem.shift_count)) - set(used(split(problem, seed=0))))
    assert days.max() <= problem.shifts.day[left].min()


def test_clusters_go_to_shifts_of_their_own_base() -> None:
    # Two towns 100 km apart, a base in each, shifts of both on every date.
    problem = random_problem(3, replace(PLAIN, bases=2, visits=40, shifts=8))
    x_m, y_m = np.zeros(42), np.zeros(42)
    rng = np.random.default_rng(3)
    town = np.array([0, 1, *([0, 1] * 20)])
    x_m[:] = town * 100_000.0 + rng.random(42) * 3_000.0
    x_m[:2] = (0.0, 100_000.0)
    y_m[2:] = rng.random(40) * 3_000.0
    gap = np.hypot(x_m[:, None] - x_m, y_m[:, None] - y_m)
    base = np.array([0, 1] * 4)
    problem = replace(
        problem,
        travel=problem.travel._replace(
            time_ms=(gap * 60).astype(np.int64), length_mm=(gap * 1000).astype(np.int64)
        ),
        shifts=problem.shifts._replace(start_place=base, end_place=base),
        plane_x_m=x_m,
        plane_y_m=y_m,
    )
    for v, s in enumerate(shift_of(problem, split(problem, seed=0))):
        assert base[s] == town[v + 2]


def test_visits_tied_to_a_date_make_that_day_open() -> None:
    problem = random_problem(4, PLAIN)
    problem.visits.eligible[:5] = False
    problem.visits.eligible[:5, 15] = True
    where = shift_of(problem, split(problem, seed=0))
    assert set(where[:5]) == {15}


def test_a_visit_no_shift_may_take_is_in_no_order() -> None:
    problem = random_problem(5, PLAIN)
    problem.visits.eligible[7] = False
    assert split(problem, seed=0).unplaced(60).tolist() == [7]


@pytest.mark.parametrize(
    ("visits", "shifts"), [(0, 3), (1, 3), (3, 1), (2, 5), (0, 0), (4, 0)], ids=str
)
def test_very_small_problems(visits: int, shifts: int) -> None:
    problem = random_problem(0, Recipe(visits=visits, shifts=shifts, restricted=0.0))
    solution = split(problem, seed=0)
    assert len(solution.orders) == shifts
    assert solution.unplaced(visits).size == (visits if shifts == 0 else 0)


def test_all_sites_at_one_point() -> None:
    problem = random_problem(6, PLAIN)
    problem.plane_x_m[:] = 0.0
    problem.plane_y_m[:] = 0.0
    problem.travel.time_ms[:] = 0
    days = used(split(problem, seed=0))
    assert len(days) == 4  # 30 h of work in shifts of 8 h


def test_same_seed_same_bits_with_any_number_of_threads() -> None:
    script = (
        "import hashlib\n"
        "from georoute.split import split\n"
        "from tests.days_helpers import Recipe, random_problem\n"
        "problem = random_problem(9, Recipe(visits=80, shifts=12))\n"
        "orders = split(problem, seed=4).orders\n"
        "print(hashlib.sha256(b'|'.join(o.tobytes() for o in orders)).hexdigest())\n"
    )
    seen = set()
    for threads in ("1", "4"):
        names = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS")
        environment = os.environ | dict.fromkeys(names, threads)
        done = subprocess.run(
            [sys.executable, "-c", script],
            env=environment,
            capture_output=True,
            text=True,
            check=True,
        )
        seen.add(done.stdout.strip())
    assert len(seen) == 1
