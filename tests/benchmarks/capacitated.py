"""Customers from one depot by tours of limited load and, in some sets, limited duration.

The instances of N. Christofides, A. Mingozzi, P. Toth (Combinatorial Optimization, Wiley 1979,
315-338), of B. Golden, E. Wasil, J. Kelly, I-M. Chao (Fleet Management and Logistics, Kluwer
1998, 33-56) and of E. Uchoa et al. (EJOR 257 (2017) 845-858). A tour lasts as long as it is, and
``SERVICE_TIME`` at each customer; ``DISTANCE`` is the longest duration. Only the length costs.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterator, Sequence
from itertools import pairwise
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from georoute.kernels.arrays import MUST, Shifts, Travel, Visits
from georoute.problem import Problem, Solution
from tests.benchmarks.instance import Instance, Tour
from tests.benchmarks.tsplib import ENDLESS, UNIT, parse

__all__ = ["TOLERANCE", "CapacitatedInstance", "read_exact", "read_rounded"]

TOLERANCE = 1e-6
"""A tour may exceed its limits by this share of them: legs are rounded to 10**-6 units."""
SPARE_TOURS = 0.25
"""The fleet is free: the tours of a plain construction, a quarter more, and one."""


def read_exact(path: Path) -> Instance:
    """Read an instance file of a set whose distances are not rounded."""
    return CapacitatedInstance(path.stem, path.read_text(), rounded=False)


def read_rounded(path: Path) -> Instance:
    """Read an instance file of a set that rounds each distance to the nearest whole number."""
    return CapacitatedInstance(path.stem, path.read_text(), rounded=True)


class CapacitatedInstance:
    """Tours from the depot (any node of the file) through all other nodes."""

    def __init__(self, name: str, text: str, *, rounded: bool) -> None:
        header, sections = parse(text)
        self.name = name
        self._rounded = rounded
        nodes = np.array(sections["NODE_COORD_SECTION"]).reshape(-1, 3)
        self._xy = {int(node): (float(x), float(y)) for node, x, y in nodes}
        loads = np.array(sections["DEMAND_SECTION"]).reshape(-1, 2)
        self._load = {int(node): float(load) for node, load in loads}
        self.depot = int(sections["DEPOT_SECTION"][0])
        self.customers = tuple(sorted(set(self._xy) - {self.depot}))
        self.size = len(self.customers)
        self.capacity = float(header["CAPACITY"])
        self.longest = float(header.get("DISTANCE", "inf"))
        self.service = float(header.get("SERVICE_TIME", "0"))
        if int(header["DIMENSION"]) != len(self._xy) or set(self._load) != set(self._xy):
            raise ValueError(f"{name}: nodes, loads and DIMENSION do not agree")

    def distance(self, i: int, j: int) -> float:
        """Return the distance between two nodes, rounded as the set says."""
        (xi, yi), (xj, yj) = self._xy[i], self._xy[j]
        exact = math.hypot(xi - xj, yi - yj)
        return float(int(exact + 0.5)) if self._rounded else exact

    def length(self, places: Sequence[int]) -> float:
        """Return the length of the way through the places."""
        return math.fsum(self.distance(a, b) for a, b in pairwise(places))

    def problem(self) -> Problem:
        """Return the problem: place 0 is the depot, visit k goes to the k-th customer."""
        nodes = (self.depot, *self.customers)
        x, y = np.array([self._xy[node] for node in nodes]).T.copy()
        table = self._table(x, y)
        return Problem(
            travel=Travel(1, table, table, x, y, 0.0, 0.0, 1),
            visits=self._visits(tours := self.fleet()),
            shifts=self._shifts(tours),
            plane_x_m=x,
            plane_y_m=y,
        )

    def _table(self, x: NDArray[np.float64], y: NDArray[np.float64]) -> NDArray[np.int64]:
        units: NDArray[np.float64] = np.hypot(x[:, None] - x[None, :], y[:, None] - y[None, :])
        if self._rounded:
            units = np.floor(units + 0.5)
        return np.asarray(np.rint(units * UNIT), np.int64)

    def _visits(self, tours: int) -> Visits:
        n = self.size
        none, zeros = np.zeros(0, np.int64), np.zeros(n, np.int64)
        return Visits(
            place=np.arange(1, n + 1),
            work_ms=zeros + round(self.service * UNIT),
            load=np.array([self._load[node] for node in self.customers]).astype(np.int64),
            window_ptr=np.zeros(n + 1, np.int64),
            window_open_ms=none,
            window_close_ms=none,
            worth=zeros + MUST,
            level=zeros,
            eligible=np.ones((n, tours), np.bool_),
        )

    def _shifts(self, tours: int) -> Shifts:
        zeros, free = np.zeros(tours, np.int64), np.zeros(tours)
        limited = math.isfinite(self.longest)
        return Shifts(
            start_place=zeros,
            end_place=zeros,
            open_ms=zeros,
            close_ms=zeros + ENDLESS,
            paid_ms=zeros + ENDLESS,
            limit_ms=zeros + (round(self.longest * UNIT) if limited else ENDLESS),
            write_up_ms=zeros,
            load_limit=zeros + int(self.capacity),
            hour_rate=free,
            overtime_rate=free,
            length_rate=np.ones(tours),
            day_cost=zeros,
            day=np.arange(tours),
            inspector=zeros,
        )

    def fleet(self) -> int:
        """Return how many tours the engine may use."""
        needed = sum(1 for _ in self.plain_tours())
        return needed + math.ceil(SPARE_TOURS * needed) + 1

    def plain_tours(self) -> Iterator[tuple[int, ...]]:
        """Yield tours that each go on to the nearest customer that still fits."""
        left = set(self.customers)
        while left:
            tour = [self.depot]
            load, spent = 0.0, 0.0
            while fitting := [node for node in left if self._fits(tour[-1], node, load, spent)]:
                node = min(fitting, key=lambda other: (self.distance(tour[-1], other), other))
                spent += self.distance(tour[-1], node) + self.service
                load += self._load[node]
                tour.append(node)
                left.discard(node)
            if len(tour) == 1:
                raise ValueError(f"{self.name}: {sorted(left)} fit in no tour of their own")
            yield (*tour, self.depot)

    def _fits(self, here: int, node: int, load: float, spent: float) -> bool:
        if load + self._load[node] > self.capacity:
            return False
        back = self.distance(here, node) + self.service + self.distance(node, self.depot)
        return spent + back <= self.longest

    def tours(self, solution: Solution) -> tuple[Tour, ...]:
        """Return the tours that leave the depot."""
        return tuple(
            Tour(places=(self.depot, *(self.customers[v] for v in order), self.depot))
            for order in solution.orders
            if order.shape[0] > 0
        )

    def cost(self, tours: Sequence[Tour]) -> float:
        """Return the length of all tours."""
        return math.fsum(self.length(tour.places) for tour in tours)

    def violations(self, tours: Sequence[Tour]) -> tuple[str, ...]:
        """Return what breaks a rule: coverage, ends, load, duration."""
        times = Counter(node for tour in tours for node in tour.places[1:-1])
        found = [
            f"customer {node} is visited {times[node]} times"
            for node in self.customers
            if times[node] != 1
        ]
        found.extend(
            f"node {node} is no customer" for node in sorted(set(times) - set(self.customers))
        )
        for number, tour in enumerate(tours, start=1):
            found.extend(f"tour {number} {breach}" for breach in self._breaches(tour))
        return tuple(found)

    def _breaches(self, tour: Tour) -> Iterator[str]:
        if len(tour.places) < 2 or {tour.places[0], tour.places[-1]} != {self.depot}:
            yield "does not start and end at the depot"
        known = [node for node in tour.places if node in self._xy]
        stops = [node for node in known if node != self.depot]
        load = math.fsum(self._load[node] for node in stops)
        if load > self.capacity * (1 + TOLERANCE):
            yield f"carries {load:g} of at most {self.capacity:g}"
        duration = self.length(known) + self.service * len(stops)
        if duration > self.longest * (1 + TOLERANCE):
            yield f"lasts {duration:.6f} of at most {self.longest:g}"
