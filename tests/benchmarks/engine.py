"""Run the product's own engine on a public problem for a number of CPU seconds."""

from __future__ import annotations

import time
from dataclasses import dataclass

import numpy as np

from georoute.problem import Problem, Solution
from georoute.sequence import sequence_tour

__all__ = ["Run", "compile_once", "solve"]

NO_END = 1 << 40
"""More kicks than any run makes: the seconds end it."""


@dataclass(frozen=True, kw_only=True)
class Run:
    """One solution, the CPU seconds of all threads it took, and the kicks made."""

    solution: Solution
    cpu_s: float
    iterations: int


def solve(problem: Problem, *, seconds: float, seed: int, iterations: int = NO_END) -> Run:
    """Order the visits of a problem of one shift within CPU ``seconds``."""
    started = time.process_time()

    def spent() -> float:
        return (time.process_time() - started) / seconds

    found = sequence_tour(
        problem,
        0,
        np.arange(problem.visit_count, dtype=np.int64),
        kicks=iterations,
        seed=seed,
        should_stop=lambda: spent() >= 1.0,
        share_spent=spent,
    )
    return Run(
        solution=Solution(orders=(found.order,)),
        cpu_s=time.process_time() - started,
        iterations=found.kicks,
    )


def compile_once(problem: Problem) -> None:
    """Run on the first few visits of ``problem``, so that later runs find compiled kernels."""
    few = np.arange(min(8, problem.visit_count), dtype=np.int64)
    sequence_tour(problem, 0, few, kicks=2, seed=0)
