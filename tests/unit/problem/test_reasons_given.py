"""Planted visits that cannot be placed get the right reason, minutes and sentence."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.sparse.csgraph import dijkstra

from georoute.domain.plan import ReasonCode
from georoute.domain.run import Effort
from georoute.improve import relocate
from georoute.kernels.alone import shortest_ways
from georoute.kernels.arrays import UNREACHABLE, Visits
from georoute.problem import Problem, Solution
from georoute.problem.eligibility import WhyNot
from georoute.problem.reasons import cannot_fit, explain_unplaced, fits_alone, reason_text
from tests.days_helpers import DAY, HOUR, MIN, Recipe, random_orders, random_problem, slow_tour

EASY = Recipe(
    visits=6,
    shifts=3,
    bases=1,
    windowed=0.0,
    loaded=0.0,
    load_limited=0.0,
    restricted=0.0,
    asymmetry=0.0,
    span_m=5_000.0,
)


def easy(**visits: NDArray[np.int64]) -> Problem:
    """Return six visits half an hour from the base and each other, three shifts of 8 h."""
    problem = random_problem(0, EASY)
    away = np.full((7, 7), 30 * MIN)
    np.fill_diagonal(away, 0)
    problem.travel.time_ms[:] = away
    problem.visits.work_ms[:] = HOUR
    problem.shifts.open_ms[:] = np.array([0, 1, 2]) * DAY + 8 * HOUR
    problem.shifts.close_ms[:] = problem.shifts.open_ms + 9 * HOUR
    problem.shifts.paid_ms[:] = 7 * HOUR
    problem.shifts.limit_ms[:] = 8 * HOUR
    problem.shifts.write_up_ms[:] = 20 * MIN
    names = {"window_ptr", "window_open_ms", "window_close_ms"}
    assert visits.keys() <= names
    kept = problem.visits._asdict() | visits
    return replace(problem, visits=Visits(**kept))


def windows(*spans: tuple[int, int]) -> dict[str, NDArray[np.int64]]:
    """Return the arrays that give visit 0 these windows and the others none."""
    return {
        "window_ptr": np.array([0, *[len(spans)] * 6], np.int64),
        "window_open_ms": np.array([opens for opens, _ in spans], np.int64),
        "window_close_ms": np.array([closes for _, closes in spans], np.int64),
    }


def test_nothing_planted_nothing_found() -> None:
    assert cannot_fit(easy()) == ()


def test_too_far() -> None:
    problem = easy()
    problem.travel.time_ms[0, 1] = 4 * HOUR  # 240 out, 60 work, 200 back, 20 write-up = 520
    problem.travel.time_ms[1, 0] = 200 * MIN
    problem.travel.time_ms[1, 2:] = problem.travel.time_ms[2:, 1] = 5 * HOUR
    ((visit, code, figures),) = cannot_fit(problem)
    assert (visit, code) == (0, ReasonCode.TOO_FAR_FOR_SHIFT)
    assert figures == {
        "out_min": 240.0,
        "work_min": 60.0,
        "back_min": 200.0,
        "write_up_min": 20.0,
        "needed_min": 520.0,
        "shift_min": 480.0,
        "short_min": 40.0,
    }
    assert reason_text(code, figures) == (
        "needs 8 h 40 min as the only stop of a day (4 h out, 60 min work, 3 h 20 min back, "
        "20 min write-up); the longest suitable shift is 8 h: 40 min too long"
    )


def test_a_way_round_through_another_place_disproves_the_proof() -> None:
    problem = easy()
    problem.travel.time_ms[0, 1] = 10 * HOUR  # but 30 + 30 min through any other site
    assert not fits_alone(problem)[0].any()
    assert cannot_fit(problem) == ()


def test_the_shift_where_least_is_missing_counts() -> None:
    problem = easy()
    problem.visits.work_ms[0] = 9 * HOUR
    problem.shifts.limit_ms[1] = 8 * HOUR + 30 * MIN
    ((_, code, figures),) = cannot_fit(problem)
    assert code == ReasonCode.TOO_FAR_FOR_SHIFT
    assert figures["short_min"] == 540 + 60 + 20 - 510


def test_closed_before_it_can_be_reached() -> None:
    problem = easy(**windows((6 * HOUR, 8 * HOUR + 12 * MIN)))  # reached at 8:30
    ((visit, code, figures),) = cannot_fit(problem)
    assert (visit, code) == (0, ReasonCode.CLOSED)
    assert figures["short_min"] == 18.0
    assert (figures["arrive_min"], figures["closes_min"]) == (510.0, 492.0)
    assert "18 min after it closes for the last time" in reason_text(code, figures)


def test_opens_too_late_to_be_back() -> None:
    # Opens on the first date at 16:00: back 17:30, written up 17:50, the shift ends at 17:00.
    problem = easy(**windows((16 * HOUR, 20 * HOUR)))
    ((_, code, figures),) = cannot_fit(problem)
    assert code == ReasonCode.CLOSED
    assert figures["short_min"] == 50.0
    assert figures["opens_min"] == 960.0
    assert "the shift would end 50 min too late" in reason_text(code, figures)


def test_unreachable() -> None:
    problem = easy()
    problem.travel.time_ms[1, [0, 2, 3, 4, 5, 6]] = UNREACHABLE
    ((visit, code, figures),) = cannot_fit(problem)
    assert (visit, code) == (0, ReasonCode.UNREACHABLE)
    assert "no way out" in reason_text(code, figures)


def test_load_limit() -> None:
    problem = easy()
    problem.visits.load[0] = 2_500
    problem.shifts.load_limit[:] = (1_000, 2_000, 1_500)
    ((_, code, figures),) = cannot_fit(problem)
    assert code == ReasonCode.LOAD_LIMIT
    assert figures == {"load": 2.5, "load_limit": 2.0, "over_load": 0.5}
    assert reason_text(code, figures) == (
        "its load of 2.5 is 0.5 more than any suitable shift may carry (2)"
    )


@pytest.mark.parametrize(
    ("codes", "expected", "words"),
    [
        ((1, 1, 1), ReasonCode.BEFORE_EARLIEST, "on or after its earliest date"),
        ((2, 2, 2), ReasonCode.AFTER_LATEST, "on or before its latest date"),
        ((1, 2, 2), ReasonCode.AFTER_LATEST, "between its earliest and its latest date"),
        ((3, 3, 3), ReasonCode.NO_WORKING_TIME_LEFT, "none of the inspectors"),
        ((3, 1, 3), ReasonCode.BEFORE_EARLIEST, "on or after its earliest date"),
    ],
)
def test_no_shift_allowed(codes: tuple[int, ...], expected: ReasonCode, words: str) -> None:
    problem = easy()
    why_not = np.zeros((6, 3), np.int8)
    why_not[4] = [WhyNot(code) for code in codes]
    problem.visits.eligible[:] = why_not == WhyNot.ELIGIBLE
    ((visit, code, figures),) = cannot_fit(problem, why_not=why_not)
    assert (visit, code) == (4, expected)
    assert words in reason_text(code, figures)


def nowhere(orders: list[list[int]]) -> Solution:
    return Solution(orders=tuple(np.array(order, np.int64) for order in orders))


def test_no_working_time_left() -> None:
    # One shift of 480 min: 30 + 3 * (100 + 30) + 20 = 440 used, 40 left; a visit takes 130.
    problem = easy()
    problem.visits.work_ms[:] = 100 * MIN
    problem.visits.eligible[:, 1:] = False
    found = explain_unplaced(problem, nowhere([[0, 1, 2], [], []]))
    assert [visit for visit, _, _ in found] == [3, 4, 5]
    _, code, figures = found[0]
    assert code == ReasonCode.NO_WORKING_TIME_LEFT
    assert figures["short_min"] == 130.0 - 40.0
    assert figures["free_min"] == 40.0
    assert figures["needed_min"] == 130.0
    assert "the best day is 90 min short" in reason_text(code, figures)


def test_time_left_but_in_pieces() -> None:
    # Three shifts with 40 min left each: 120 in all, enough in sum for 80, nowhere in one piece.
    problem = easy()
    problem.visits.work_ms[:] = 390 * MIN - 20 * MIN
    problem.visits.work_ms[3:] = 50 * MIN
    problem.visits.work_ms[:3] = 480 * MIN - 20 * MIN - 60 * MIN - 40 * MIN
    _, code, figures = explain_unplaced(problem, nowhere([[0], [1], [2]]))[0]
    assert code == ReasonCode.NOT_FOUND_BY_SEARCH
    assert figures["short_min"] == 80.0 - 40.0
    assert figures["free_min"] == 120.0
    assert "not proven impossible" in reason_text(code, figures)


def test_it_would_fit_as_planned() -> None:
    _, code, figures = explain_unplaced(easy(), nowhere([[0, 1, 2, 3, 4], [], []]))[0]
    assert code == ReasonCode.NOT_FOUND_BY_SEARCH
    assert figures["short_min"] == 0.0
    assert "would fit into a day as planned" in reason_text(code, figures)


def test_load_taken_by_others() -> None:
    problem = easy()
    problem.visits.load[:] = 1_000
    problem.shifts.load_limit[:] = 1_500
    _, code, figures = explain_unplaced(problem, nowhere([[0], [1], [2]]))[0]
    assert code == ReasonCode.LOAD_LIMIT
    assert figures == {"load": 1.0, "free_load": 0.5, "over_load": 0.5}
    assert "0.5 more than any suitable shift has left as planned" in reason_text(code, figures)


@pytest.mark.parametrize("seed", range(10))
def test_proven_visits_are_in_no_plan_and_the_minutes_are_true(seed: int) -> None:
    recipe = Recipe(visits=10, shifts=3, work_min=(60, 420), windowed=0.5, unreachable=0.2)
    problem = random_problem(seed, recipe)
    effort = Effort(name="few", kicks_per_stop=0, relocation_rounds=2)
    solution = relocate(problem, random_orders(problem, seed), effort=effort, seed=0).solution
    proven = {visit for visit, _, _ in cannot_fit(problem)}
    assert proven <= set(solution.unplaced(10).tolist())
    explained = explain_unplaced(problem, solution)
    assert [visit for visit, _, _ in explained] == solution.unplaced(10).tolist()
    for visit, code, figures in explained:
        assert reason_text(code, figures)
        if visit not in proven and "short_min" in figures:
            assert figures["short_min"] > 0.0  # the search ended by itself: nothing fits as it is


@pytest.mark.parametrize("seed", range(5))
def test_fits_alone_is_what_the_slow_clock_says(seed: int) -> None:
    problem = random_problem(seed, Recipe(visits=10, shifts=4, work_min=(60, 420), windowed=0.6))
    found = fits_alone(problem)
    for v in range(10):
        for s in range(4):
            assert found[v, s] == (not slow_tour(problem, s, [v]).breaches)


@pytest.mark.parametrize("outward", [1, 0])
def test_shortest_ways_equal_scipy(outward: int) -> None:
    # Reference: scipy.sparse.csgraph.dijkstra.
    problem = random_problem(3, Recipe(visits=20, shifts=2, unreachable=0.6))
    table = problem.travel.time_ms if outward else problem.travel.time_ms.T
    graph: Any = np.where(table >= UNREACHABLE, np.inf, table.astype(np.float64))
    expected = dijkstra(graph, indices=[1])[0]
    ways = np.zeros(table.shape[0], np.int64)
    shortest_ways(problem.travel, 1, outward, ways)
    found = np.where(ways >= UNREACHABLE, np.inf, ways)
    assert found.tolist() == expected.tolist()


def test_a_code_without_a_sentence_is_said_in_words() -> None:
    assert reason_text(ReasonCode.LODGING_NEEDED, {}) == "lodging needed"
