"""Solve the same problem with the general routing search of OR-Tools, for comparison.

The library gets the problem's own whole numbers: a leg costs what the tariff makes of it, so one
unit of length is 10**6. Its first solution is its own choice, its search is guided local search,
as its documentation advises for routing; nothing else is set. It knows no seed, so one run is
all there is. Its own limit counts wall seconds; so that it gets the CPU seconds of the engine
whatever else the machine does, it is asked to end by a callback, which costs it a few per cent of
them. Building its model is not counted.
"""

from __future__ import annotations

import time
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import count
from typing import Any

import numpy as np
import ortools
from numpy.typing import NDArray
from ortools.constraint_solver import pywrapcp, routing_enums_pb2

from georoute.kernels.arrays import UNREACHABLE
from georoute.problem import Problem, Solution

__all__ = ["NAME", "ReferenceRun", "solve"]

NAME = f"OR-Tools {'.'.join(ortools.__version__.split('.')[:2])}"
LARGEST_TABLE = 5000
"""Places up to which the library is given a table; above, it asks for each leg, which is slower."""
NO_END_S = 1_000_000
"""Wall seconds that no run takes."""
QUESTIONS = 64
"""The clock is read once in so many questions."""


@dataclass(frozen=True, kw_only=True)
class ReferenceRun:
    """The best solution, if any was found, and the CPU seconds it took."""

    solution: Solution | None
    cpu_s: float


def solve(problem: Problem, *, seconds: float) -> ReferenceRun:
    """Search for ``seconds`` of CPU time."""
    model = _Model(problem)
    parameters = pywrapcp.DefaultRoutingSearchParameters()
    parameters.local_search_metaheuristic = (
        routing_enums_pb2.LocalSearchMetaheuristic.GUIDED_LOCAL_SEARCH
    )
    parameters.time_limit.FromSeconds(NO_END_S)
    questions = count()
    started = time.process_time()

    def over() -> bool:
        """Answer the library, which asks some 300,000 times a second."""
        return next(questions) % QUESTIONS == 0 and time.process_time() - started > seconds

    model.routing.AddSearchMonitor(model.routing.solver().CustomLimit(over))
    found = model.routing.SolveWithParameters(parameters)
    cpu_s = time.process_time() - started
    return ReferenceRun(solution=None if found is None else model.solution(found), cpu_s=cpu_s)


class _Model:
    """A problem with one kind of shift from one place, in the terms of the library."""

    def __init__(self, problem: Problem) -> None:
        shifts, visits = problem.shifts, problem.visits
        base = int(shifts.start_place[0])
        same = all(np.ptp(column) == 0 for column in shifts[2:-2])
        if not same or {*shifts.start_place, *shifts.end_place} != {base} or visits.window_ptr[-1]:
            raise ValueError("the reference serves one base, one kind of shift, and no windows")
        self.problem = problem
        self.places = np.array([base, *visits.place])
        self.manager = pywrapcp.RoutingIndexManager(self.places.shape[0], problem.shift_count, 0)
        self.routing = pywrapcp.RoutingModel(self.manager)
        money = shifts.hour_rate[0] * self._legs("time_ms", problem.travel.time_scale)
        money += shifts.length_rate[0] * self._legs("length_mm", problem.travel.length_scale)
        self.routing.SetArcCostEvaluatorOfAllVehicles(self._evaluator(np.rint(money)))
        self._limit_load()
        self._limit_duration()

    def _legs(self, table: str, scale: float) -> NDArray[np.float64]:
        """Return one figure of all legs between the base and the visits."""
        travel, at = self.problem.travel, self.places
        if travel.dense:
            listed: NDArray[np.int64] = getattr(travel, table)
            return np.asarray(listed[np.ix_(at, at)], np.float64)
        x, y = travel.x[at], travel.y[at]
        legs: NDArray[np.float64] = np.hypot(x[:, None] - x[None, :], y[:, None] - y[None, :])
        legs *= scale / travel.step
        legs += 0.5
        np.floor(legs, out=legs)
        legs *= travel.step
        return legs

    def _evaluator(self, table: NDArray[np.float64]) -> int:
        if table.shape[0] <= LARGEST_TABLE:
            return int(self.routing.RegisterTransitMatrix(table.astype(np.int64).tolist()))
        node = self.manager.IndexToNode
        return int(self.routing.RegisterTransitCallback(lambda i, j: int(table[node(i), node(j)])))

    def _limit_load(self) -> None:
        load, limit = self.problem.visits.load, int(self.problem.shifts.load_limit[0])
        if load.sum() <= limit:
            return
        loads = self.routing.RegisterUnaryTransitVector([0, *load.tolist()])
        self.routing.AddDimension(loads, 0, limit, True, "load")

    def _limit_duration(self) -> None:
        shifts = self.problem.shifts
        room = np.minimum(shifts.limit_ms, shifts.close_ms - shifts.open_ms) - shifts.write_up_ms
        if room[0] >= UNREACHABLE:
            return
        spent = self._legs("time_ms", self.problem.travel.time_scale)
        spent += np.concatenate(([0], self.problem.visits.work_ms))[:, None]
        self.routing.AddDimension(self._evaluator(spent), 0, int(room[0]), True, "duration")

    def solution(self, found: Any) -> Solution:
        """Return what the library found as a solution of the problem."""
        return Solution(
            orders=tuple(
                np.array([*self._visits(found, shift)], np.int64)
                for shift in range(self.problem.shift_count)
            )
        )

    def _visits(self, found: Any, shift: int) -> Iterator[int]:
        index = self.routing.Start(shift)
        while True:
            index = found.Value(self.routing.NextVar(index))
            if self.routing.IsEnd(index):
                return
            yield self.manager.IndexToNode(index) - 1
