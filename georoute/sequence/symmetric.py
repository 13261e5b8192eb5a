"""Order of a day whose legs cost the same both ways."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.kernels.day_net import Net, money_of_pairs, tour_money
from georoute.kernels.flips import new_tour
from georoute.kernels.greedy import greedy_symmetric
from georoute.kernels.lin_kernighan import descend, kick_and_repair, new_chain
from georoute.kernels.node_queue import empty_queue, new_queue, waiting
from georoute.sequence.neighbours import candidate_legs, nearest_by_table, nearest_on_plane

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.sequence.budget import KickBudget
    from georoute.sequence.day import Day
    from georoute.sequence.trail import Trail

__all__ = ["order_symmetric"]

NEIGHBOURS = 8
BREADTH = (5, 3)
"""Alternatives tried for each exchange of a chain; all neighbours for the one after these."""
FIRST_DEPTH = 1
"""Depth of the first descent: exchanges of two or three legs, which a person can follow."""
HEAT = 0.1
"""Temperature at the start, as a share of the mean leg."""
KICKS_A_CALL = 500
LOOKS_A_CALL = 1_000
LOG_SIZE = 20_000
ALL = 1 << 40
"""More looks or steps than any descent makes."""


def order_symmetric(
    day: Day, start: NDArray[np.int64], *, budget: KickBudget, trail: Trail
) -> NDArray[np.int64]:
    """Return the best closed tour found; ``start`` is a tour to begin with, if it is good.

    Needs at least 4 nodes: fewer have one closed tour only.
    """
    near = _neighbours(day)
    tour = _start(day.net, near, start)
    cost = int(tour_money(*day.net, tour))
    trail.begin(start, int(tour_money(*day.net, start)))
    trail.note("start", tour, cost)
    heat = HEAT * day.money(cost) / day.size
    if day.net.table.shape[0] > 0:
        names = np.arange(day.size)
        search = _Search(day.net, near, tour, names, heat)
        return search.run(budget, trail)
    net, near = _along(day.net, near, tour)
    search = _Search(net, near, np.arange(day.size), tour, heat)
    return tour[search.run(budget, trail)]


def _neighbours(day: Day) -> NDArray[np.int64]:
    """Return the neighbours of each node and the money of going there, int64 (n, K, 2)."""
    if day.net.table.shape[0] > 0:
        near = nearest_by_table(day.net.table, NEIGHBOURS)
    else:
        near = nearest_on_plane(day.x, day.y, NEIGHBOURS)
        if day.linked:
            ends = np.array([day.size - 2, day.size - 1])
            near[ends, 1:] = near[ends, :-1]
            near[ends, 0] = ends[::-1]
    return np.stack((near, money_of_pairs(*day.net, near)), axis=2)


def _start(
    net: Net,
    near: NDArray[np.int64],
    given: NDArray[np.int64],
) -> NDArray[np.int64]:
    """Return the greedy tour, or the one given if that is no longer."""
    first, second = candidate_legs(near, symmetric=True)
    greedy = greedy_symmetric(*net, first, second)
    return given if tour_money(*net, given) <= tour_money(*net, greedy) else greedy


def _along(
    net: Net, near: NDArray[np.int64], tour: NDArray[np.int64]
) -> tuple[Net, NDArray[np.int64]]:
    """Renumber the nodes along ``tour``: what is looked up together then lies together."""
    new_number = np.empty_like(tour)
    new_number[tour] = np.arange(tour.shape[0])
    price = net.price.copy()
    if price[5] >= 0:
        price[5:] = new_number[price[5:].astype(np.int64)]
    near = near[tour]
    near[:, :, 0] = new_number[near[:, :, 0]]
    return Net(net.table, net.points[tour], price), near


class _Search:
    """A tour and the scratch its kernels work on; ``names`` are the day's numbers of nodes."""

    def __init__(
        self,
        net: Net,
        near: NDArray[np.int64],
        start: NDArray[np.int64],
        names: NDArray[np.int64],
        heat: float,
    ) -> None:
        self.net = net
        self.near = near
        self.names = names
        self.heat = heat
        self.tour = new_tour(start)
        self.log = np.zeros((LOG_SIZE, 2), np.int64)
        self.chain = new_chain(BREADTH)
        self.cost = int(tour_money(*net, start))

    def run(self, budget: KickBudget, trail: Trail) -> NDArray[np.int64]:
        """Descend, first shallow, then deep; then kick and repair; return the best tour."""
        for depth in (min(FIRST_DEPTH, len(BREADTH)), len(BREADTH)):
            queue = new_queue(self.tour[0])
            while waiting(queue) > 0 and not budget.stopped():
                self._descend(queue, depth, trail)
        return self._kick(budget, trail)

    def _descend(self, queue: NDArray[np.int64], depth: int, trail: Trail) -> None:
        self.log[0, 0] = 0
        looks, steps = (ALL, 1) if trail.kept else (LOOKS_A_CALL, ALL)
        arrays = (self.tour, self.log, self.near, self.chain, queue)
        gain = int(descend(*self.net, *arrays, depth, looks, steps))
        self.cost -= gain
        if gain > 0:
            trail.note_exchange(self.names[self.tour[0]], self.cost)

    def _kick(self, budget: KickBudget, trail: Trail) -> NDArray[np.int64]:
        tour = self.tour
        best: NDArray[np.int64] = tour[0].copy()
        costs = np.array([self.cost, self.cost, 0], np.int64)
        queue = empty_queue(best.shape[0])
        while (kicks := budget.next_kicks(KICKS_A_CALL)) > 0:
            before = costs[1]
            made = kick_and_repair(
                *self.net,
                tour,
                self.log,
                self.near,
                self.chain,
                queue,
                budget.stream,
                best,
                costs,
                kicks,
                self.heat,
                budget.used,
                budget.kicks,
                budget.spent,
                int(trail.kept),
            )
            budget.used += int(made)
            if costs[1] < before:
                trail.note("kick", self.names[tour[0]], int(costs[1]))
        if costs[2] == 1:
            best[:] = tour[0]
        return best
