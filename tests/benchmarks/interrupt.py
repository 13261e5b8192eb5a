"""How long a search goes on after it was asked to end.

``python -m tests.benchmarks interrupt [--visits N] [--moments K]`` plans a random register of
``N`` visits and asks the search to end at ``K`` moments spread over its whole length. The delay
counts from the moment itself, whether or not the search was looking, to the return of its plan.
Nothing is asserted: another machine under load has other delays.
"""

from __future__ import annotations

import argparse
import math
import statistics
import time
from collections.abc import Sequence
from datetime import timedelta

import numpy as np

from georoute.domain.programme import Programme
from georoute.domain.run import EFFORTS, no_progress
from georoute.domain.sites import Register
from georoute.pipeline import compile_search, prepare
from georoute.pipeline.budget import Budget
from georoute.pipeline.search import search
from tests.spine_helpers import small_programme, small_register

__all__ = ["delays", "main"]

VISITS_A_SHIFT = 15


def _register(count: int) -> Register:
    rng = np.random.default_rng(20_270_301)
    lat = -29.96 + rng.uniform(-0.2, 0.2, count)
    lon = -71.2 + rng.uniform(0.0, 0.3, count)
    return small_register(list(zip(lat.tolist(), lon.tolist(), strict=True)))


def _programme(visits: int) -> Programme:
    few = small_programme()
    days = math.ceil(visits / VISITS_A_SHIFT / len(few.inspectors))
    return small_programme(
        last_date=few.first_date + timedelta(days=2 * days), effort=EFFORTS["normal"]
    )


def delays(*, visits: int, moments: int) -> tuple[float, list[float]]:
    """Return the seconds of the whole search, and those from each moment to the return."""
    prepared = prepare(_programme(visits), _register(visits))
    compile_search(prepared)

    def run(end: float) -> float:
        begin = time.perf_counter()
        search(
            prepared.packed,
            effort=EFFORTS["normal"],
            seed=1,
            progress=no_progress,
            budget=Budget(lambda: time.perf_counter() - begin >= end, seconds=None),
        )
        return time.perf_counter() - begin

    whole = run(math.inf)
    ends = [whole * (k + 0.5) / moments for k in range(moments)]
    return whole, [run(end) - end for end in ends]


def main(arguments: Sequence[str] | None = None) -> int:
    """Print the delays; return the exit code."""
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks interrupt")
    parser.add_argument("--visits", type=int, default=400)
    parser.add_argument("--moments", type=int, default=20)
    chosen = parser.parse_args(arguments)
    whole, found = delays(visits=chosen.visits, moments=chosen.moments)
    print(f"search of {chosen.visits} visits: {whole:.1f} s; asked to end at {len(found)} moments")
    worst = max(range(len(found)), key=found.__getitem__)
    print(
        f"interrupt: median {statistics.median(found):.3f} s, worst {found[worst]:.3f} s "
        f"(asked at {(worst + 0.5) / len(found):.0%})"
    )
    return 0
