"""TSPLIB95 instances, symmetric and asymmetric.

G. Reinelt, "TSPLIB - A Traveling Salesman Problem Library", ORSA Journal on Computing 3 (1991)
376-384; the file format and the distance functions are those of "TSPLIB 95", Universitaet
Heidelberg, 1995. Degrees of ``GEO`` are truncated, as all published optima assume.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Callable, Sequence
from itertools import pairwise
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from georoute.kernels.arrays import MUST, Shifts, Travel, Visits
from georoute.problem import Problem, Solution
from tests.benchmarks.instance import Instance, Tour

__all__ = ["ENDLESS", "UNIT", "TsplibInstance", "parse", "read"]

UNIT = 1_000_000
"""Ticks of one unit of distance."""
ENDLESS = 1 << 60
PI = 3.141592
RADIUS_KM = 6378.388
SECTIONS = {
    "NODE_COORD_SECTION",
    "EDGE_WEIGHT_SECTION",
    "DEMAND_SECTION",
    "DEPOT_SECTION",
    "DISPLAY_DATA_SECTION",
    "FIXED_EDGES_SECTION",
    "TOUR_SECTION",
    "EOF",
}


def read(path: Path) -> Instance:
    """Read an instance file."""
    return TsplibInstance(path.stem, *parse(path.read_text()))


def parse(text: str) -> tuple[dict[str, str], dict[str, list[float]]]:
    """Return the header and the numbers of each section of an instance file."""
    header: dict[str, str] = {}
    sections: dict[str, list[float]] = {}
    numbers: list[float] = []
    for line in text.splitlines():
        word = line.strip().rstrip(":").strip()
        if word in SECTIONS:
            numbers = sections.setdefault(word, [])
        elif ":" in line:
            key, _, value = line.partition(":")
            header[key.strip()] = value.strip()
        else:
            numbers.extend(map(float, line.split()))
    return header, sections


class TsplibInstance:
    """A closed tour through all nodes; node 1 is the base, the others are visits."""

    def __init__(self, name: str, header: dict[str, str], sections: dict[str, list[float]]) -> None:
        self.name = name
        self.size = int(header["DIMENSION"])
        self.weight_type = header["EDGE_WEIGHT_TYPE"]
        self._weights: list[list[float]] = []
        self._xy: list[tuple[float, float]] = []
        if self.weight_type == "EXPLICIT":
            listed = sections["EDGE_WEIGHT_SECTION"]
            self._weights = full_matrix(listed, header["EDGE_WEIGHT_FORMAT"], self.size)
        else:
            rows = np.array(sections["NODE_COORD_SECTION"]).reshape(self.size, 3)
            by_id = rows[np.argsort(rows[:, 0])]
            self._xy = [(float(x), float(y)) for _, x, y in by_id]

    def distance(self, i: int, j: int) -> float:
        """Return the distance from node ``i`` to node ``j`` (counted from 1), by the text."""
        if self.weight_type == "EXPLICIT":
            return self._weights[i - 1][j - 1]
        (xi, yi), (xj, yj) = self._xy[i - 1], self._xy[j - 1]
        if self.weight_type == "GEO":
            return geo(xi, yi, xj, yj)
        square = (xi - xj) ** 2 + (yi - yj) ** 2
        if self.weight_type == "EUC_2D":
            return int(math.sqrt(square) + 0.5)
        if self.weight_type == "CEIL_2D":
            return math.ceil(math.sqrt(square))
        if self.weight_type == "ATT":
            root = math.sqrt(square / 10)
            rounded = int(root + 0.5)
            return rounded + 1 if rounded < root else rounded
        msg = f"distances of type {self.weight_type!r} are not known"
        raise ValueError(msg)

    def problem(self) -> Problem:
        n = self.size
        xy = np.array(self._xy, np.float64) if self._xy else np.zeros((n, 2))
        x, y = np.ascontiguousarray(xy[:, 0]), np.ascontiguousarray(xy[:, 1])
        none = np.zeros((0, 0), np.int64)
        if self.weight_type == "EUC_2D":
            travel = Travel(0, none, none, x, y, float(UNIT), 0.0, UNIT)
        else:
            table = self._table(x, y) * UNIT
            travel = Travel(1, table, np.zeros_like(table), x, y, 0.0, 0.0, UNIT)
        return Problem(
            travel=travel,
            visits=free_visits(n),
            shifts=endless_shift(),
            plane_x_m=x,
            plane_y_m=y,
        )

    def _table(self, x: NDArray[np.float64], y: NDArray[np.float64]) -> NDArray[np.int64]:
        """Return all distances at once, int64 (n, n)."""
        if self.weight_type == "EXPLICIT":
            return np.array(self._weights).astype(np.int64)
        if self.weight_type == "GEO":
            return geo_table(x, y)
        dx, dy = x[:, None] - x[None, :], y[:, None] - y[None, :]
        if self.weight_type == "CEIL_2D":
            return np.ceil(np.hypot(dx, dy)).astype(np.int64)
        root = np.sqrt((dx * dx + dy * dy) / 10)
        rounded = np.floor(root + 0.5)
        return np.where(rounded < root, rounded + 1, rounded).astype(np.int64)

    def tours(self, solution: Solution) -> tuple[Tour, ...]:
        visits = [int(v) + 2 for v in solution.orders[0]]
        return (Tour(places=(1, *visits, 1)),)

    def cost(self, tours: Sequence[Tour]) -> float:
        places = tours[0].places
        return math.fsum(self.distance(a, b) for a, b in pairwise(places))

    def violations(self, tours: Sequence[Tour]) -> tuple[str, ...]:
        if len(tours) != 1:
            return (f"{len(tours)} tours instead of 1",)
        places = tours[0].places
        found = []
        if places[0] != places[-1]:
            found.append("the tour is not closed")
        times = Counter(places[:-1])
        found.extend(
            f"node {node} is visited {times[node]} times"
            for node in range(1, self.size + 1)
            if times[node] != 1
        )
        if any(not 1 <= node <= self.size for node in places):
            found.append("a node that does not exist is visited")
        return tuple(found)


def full_matrix(listed: list[float], layout: str, n: int) -> list[list[float]]:
    """Return all weights row by row from one of the layouts of the format."""
    weights = [[0.0] * n for _ in range(n)]
    rows: dict[str, Callable[[int], range]] = {
        "FULL_MATRIX": lambda _: range(n),
        "LOWER_DIAG_ROW": lambda i: range(i + 1),
        "LOWER_ROW": range,
        "UPPER_DIAG_ROW": lambda i: range(i, n),
        "UPPER_ROW": lambda i: range(i + 1, n),
    }
    if layout not in rows:
        msg = f"weights in layout {layout!r} are not known"
        raise ValueError(msg)
    numbers = iter(listed)
    for i in range(n):
        for j in rows[layout](i):
            weights[i][j] = next(numbers)
            if layout != "FULL_MATRIX":
                weights[j][i] = weights[i][j]
    return weights


def _radians(ddd_mm: float) -> float:
    degrees = int(ddd_mm)
    return PI * (degrees + 5.0 * (ddd_mm - degrees) / 3.0) / 180.0


def geo(lat_i: float, lon_i: float, lat_j: float, lon_j: float) -> int:
    """Return the distance of type ``GEO`` in kilometres; arguments are written DDD.MM."""
    q1 = math.cos(_radians(lon_i) - _radians(lon_j))
    q2 = math.cos(_radians(lat_i) - _radians(lat_j))
    q3 = math.cos(_radians(lat_i) + _radians(lat_j))
    return int(RADIUS_KM * math.acos(0.5 * ((1.0 + q1) * q2 - (1.0 - q1) * q3)) + 1.0)


def geo_table(lat: NDArray[np.float64], lon: NDArray[np.float64]) -> NDArray[np.int64]:
    """Return distances of type ``GEO`` between all nodes, 0 from a node to itself."""

    def radians(value: NDArray[np.float64]) -> NDArray[np.float64]:
        degrees = np.trunc(value)
        angle: NDArray[np.float64] = PI * (degrees + 5.0 * (value - degrees) / 3.0) / 180.0
        return angle

    phi, lam = radians(lat), radians(lon)
    q1 = np.cos(lam[:, None] - lam[None, :])
    q2 = np.cos(phi[:, None] - phi[None, :])
    q3 = np.cos(phi[:, None] + phi[None, :])
    cosine = np.clip(0.5 * ((1.0 + q1) * q2 - (1.0 - q1) * q3), -1.0, 1.0)
    table = np.trunc(RADIUS_KM * np.arccos(cosine) + 1.0).astype(np.int64)
    np.fill_diagonal(table, 0)
    return table


def free_visits(n: int) -> Visits:
    """Return visits to all nodes but the first, without work, windows or load."""
    zeros = np.zeros(n - 1, np.int64)
    none = np.zeros(0, np.int64)
    return Visits(
        np.arange(1, n),
        zeros,
        zeros,
        np.zeros(n, np.int64),
        none,
        none,
        zeros + MUST,
        zeros,
        np.ones((n - 1, 1), np.bool_),
    )


def endless_shift() -> Shifts:
    """Return one shift at place 0 without limits, whose time costs 1 a tick."""
    zero = np.zeros(1, np.int64)
    one, free = np.ones(1), np.zeros(1)
    end = zero + ENDLESS
    return Shifts(zero, zero, zero, end, end, end, zero, end, one, one, free, zero, zero, zero)
