"""Run the product's own engine on a public problem for a number of CPU seconds."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from georoute.domain.run import EFFORTS, never_stop, no_progress
from georoute.improve.slack_induction import improve
from georoute.problem import Problem, Solution
from georoute.sequence import sequence, sequence_tour

__all__ = ["Run", "compile_once", "solve"]

NO_END = 1 << 40
"""More kicks than any run makes: the seconds end it."""
DAYS_SHARE = 0.98
"""Share of the seconds for days together; the rest puts each tour in order once more."""


@dataclass(frozen=True, kw_only=True)
class Run:
    """One solution, the CPU seconds of all threads it took, and the kicks or steps made."""

    solution: Solution
    cpu_s: float
    iterations: int


def solve(problem: Problem, *, seconds: float, seed: int, iterations: int = NO_END) -> Run:
    """Plan all visits of a problem within CPU ``seconds``; ``iterations`` limits one shift's."""
    started = time.process_time()

    def spent() -> float:
        return (time.process_time() - started) / seconds

    if problem.shift_count == 1:
        solution, made = _one_day(problem, seed=seed, iterations=iterations, spent=spent)
    else:
        solution, made = _days(problem, seed=seed, spent=spent)
    return Run(solution=solution, cpu_s=time.process_time() - started, iterations=made)


def _one_day(
    problem: Problem, *, seed: int, iterations: int, spent: Callable[[], float]
) -> tuple[Solution, int]:
    found = sequence_tour(
        problem,
        0,
        np.arange(problem.visit_count, dtype=np.int64),
        kicks=iterations,
        seed=seed,
        should_stop=lambda: spent() >= 1.0,
        share_spent=spent,
    )
    return Solution(orders=(found.order,)), found.kicks


def _days(problem: Problem, *, seed: int, spent: Callable[[], float]) -> tuple[Solution, int]:
    """Lay all days together from nothing placed, then put each tour in order."""
    found = improve(
        problem,
        _nothing_placed(problem),
        effort=EFFORTS["normal"],
        seed=seed,
        progress=no_progress,
        should_stop=lambda: spent() >= DAYS_SHARE,
        share_spent=lambda: spent() / DAYS_SHARE,
    )
    ordered = sequence(
        problem,
        found.solution,
        effort=EFFORTS["quick"],
        seed=seed,
        should_stop=lambda: spent() >= 1.0,
        keep_log=False,
    )
    return ordered.solution, found.steps


def _nothing_placed(problem: Problem) -> Solution:
    return Solution(orders=tuple(np.empty(0, np.int64) for _ in range(problem.shift_count)))


def compile_once(problem: Problem) -> None:
    """Run for a moment on ``problem``, so that later runs find compiled kernels."""
    few = np.arange(min(8, problem.visit_count), dtype=np.int64)
    sequence_tour(problem, 0, few, kicks=2, seed=0)
    if problem.shift_count > 1:
        improve(
            problem,
            _nothing_placed(problem),
            effort=replace(EFFORTS["quick"], seconds=None, improve_steps=1),
            seed=0,
            progress=no_progress,
            should_stop=never_stop,
        )
