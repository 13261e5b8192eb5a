"""One day as a closed tour through nodes: its visits and its base."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from georoute.kernels.arrays import UNREACHABLE, Travel
from georoute.kernels.day_net import BLOCKED, LINK, Net

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.problem import Problem

__all__ = ["Day", "Rates", "gather", "leg_tables"]

LARGEST_TABLE = 1_200
"""Nodes up to which points on a plane get a table: beyond it, on the fly is faster."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Rates:
    """Price of travel: micro-units of money per ms and per mm."""

    time: float
    length: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Day:
    """The nodes of a day: node k is ``visits[k]``, the base nodes come last.

    ``symmetric``: a leg costs the same both ways; then a day with two ends has two base nodes,
    joined by a link (``linked``). Otherwise there is one base node: legs from it are those of
    the start, legs to it those of the end. ``x`` and ``y`` (float64, (n,)) place the nodes on a
    plane.
    """

    net: Net
    visits: NDArray[np.int64]
    symmetric: bool
    linked: bool
    x: NDArray[np.float64]
    y: NDArray[np.float64]

    @property
    def size(self) -> int:
        """Number of nodes."""
        return int(self.x.shape[0])

    def tour_of(self, order: NDArray[np.int64]) -> NDArray[np.int64]:
        """Return the closed tour (node numbers) of an order of ``visits``."""
        node_of = {int(v): k for k, v in enumerate(self.visits)}
        nodes = [node_of[int(v)] for v in order]
        base = [*range(self.visits.shape[0], self.size)]
        return np.array([base[0], *nodes, *base[1:]], np.int64)

    def order_of(self, tour: NDArray[np.int64]) -> NDArray[np.int64]:
        """Return the order of visits of a closed tour; where free, the smaller visit first."""
        count = self.visits.shape[0]
        at = int(np.flatnonzero(tour == count)[0])
        nodes = np.roll(tour, -at)[1:]
        if self.linked:
            nodes = nodes[:-1] if nodes[-1] == count + 1 else nodes[:0:-1]
        order = self.visits[nodes]
        if self.symmetric and not self.linked and order[0] > order[-1]:
            order = order[::-1]
        return np.ascontiguousarray(order)

    def money(self, tour_cost: int) -> int:
        """Return the travel money of a tour whose cost may count the link."""
        return int(tour_cost) - (LINK if self.linked else 0)


def gather(problem: Problem, shift: int, order: NDArray[np.int64], *, rates: Rates) -> Day:
    """Collect the nodes of the day of ``shift`` through the visits of ``order``.

    The nodes are numbered by visit, not by their place in ``order``, so that the order handed
    in matters only as a start.
    """
    visits = np.sort(order)
    start = int(problem.shifts.start_place[shift])
    end = int(problem.shifts.end_place[shift])
    places = np.concatenate((problem.visits.place[visits], [start, end]))
    if not problem.travel.dense and visits.shape[0] + 1 > LARGEST_TABLE:
        return _on_the_fly(problem, visits, places, rates)
    table = _money_table(problem.travel, places, rates)
    symmetric = bool(np.array_equal(table, table.T))
    count = visits.shape[0]
    linked = symmetric and start != end
    if linked:
        table[count, count + 1] = table[count + 1, count] = LINK
    else:
        table[:, count] = table[:, count + 1]
        table = np.ascontiguousarray(table[:-1, :-1])
        places = places[:-1]
    np.fill_diagonal(table, 0)
    return Day(
        net=Net(table, np.empty((0, 2)), np.full(7, -1.0)),
        visits=visits,
        symmetric=symmetric,
        linked=linked,
        x=problem.plane_x_m[places],
        y=problem.plane_y_m[places],
    )


def _money_table(travel: Travel, places: NDArray[np.int64], rates: Rates) -> NDArray[np.int64]:
    """Return the money of all legs between ``places``, each rounded once, int64 (n, n)."""
    time, length = leg_tables(travel, places)
    money = np.floor(rates.time * time + rates.length * length + 0.5)
    blocked = (time >= UNREACHABLE) | (length >= UNREACHABLE) | (money >= BLOCKED)
    table = np.where(blocked, 0.0, money).astype(np.int64)
    table[blocked] = BLOCKED
    return table


def leg_tables(
    travel: Travel, places: NDArray[np.int64]
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return ``leg_ms`` and ``leg_mm`` between all ``places``, int64 (n, n) each."""
    if travel.dense:
        pairs = np.ix_(places, places)
        return travel.time_ms[pairs], travel.length_mm[pairs]
    time = _plane_ticks(travel, places, travel.time_scale)
    return time, _plane_ticks(travel, places, travel.length_scale)


def _plane_ticks(travel: Travel, places: NDArray[np.int64], scale: float) -> NDArray[np.int64]:
    """Return ``leg_ms`` or ``leg_mm`` of all pairs of ``places`` at once."""
    x, y = travel.x[places], travel.y[places]
    dx = x[:, None] - x[None, :]
    dy = y[:, None] - y[None, :]
    steps = np.floor(np.sqrt(dx * dx + dy * dy) * scale / travel.step + 0.5)
    return steps.astype(np.int64) * travel.step


def _on_the_fly(
    problem: Problem, visits: NDArray[np.int64], places: NDArray[np.int64], rates: Rates
) -> Day:
    """Return a day whose legs are priced when asked for."""
    count = visits.shape[0]
    linked = places[-1] != places[-2]
    kept = places if linked else places[:-1]
    travel = problem.travel
    x, y = travel.x[kept], travel.y[kept]
    ends = (count, count + 1) if linked else (-1, -1)
    scales = (travel.time_scale, travel.length_scale, travel.step)
    price = np.array([*scales, rates.time, rates.length, *ends], np.float64)
    net = Net(np.empty((0, 0), np.int64), np.column_stack((x, y)), price)
    return Day(net=net, visits=visits, symmetric=True, linked=linked, x=x, y=y)
