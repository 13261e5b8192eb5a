"""Order of a day whose legs cost one thing there and another back."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.kernels.day_net import money_of_pairs, tour_money
from georoute.kernels.directed import (
    OR_3OPT,
    OR_OPT,
    TWO_OPT,
    descend_directed,
    kick_and_repair_directed,
    refresh_sums,
)
from georoute.kernels.flips import new_tour
from georoute.kernels.greedy import greedy_directed
from georoute.kernels.node_queue import new_queue, waiting
from georoute.sequence.neighbours import candidate_legs, nearest_by_table

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.sequence.budget import KickBudget
    from georoute.sequence.day import Day
    from georoute.sequence.trail import Trail

__all__ = ["order_directed"]

NEIGHBOURS = 10
HEAT = 0.1
"""Temperature at the start, as a share of the mean leg."""
KICKS_A_CALL = 500
LOOKS_A_CALL = 1_000
ALL = 1 << 40
"""More looks or steps than any descent makes."""
KINDS = {TWO_OPT: "two_opt", OR_OPT: "or_opt", OR_3OPT: "or_3opt"}


def order_directed(
    day: Day, start: NDArray[np.int64], *, budget: KickBudget, trail: Trail
) -> NDArray[np.int64]:
    """Return the best closed tour found; ``start`` is a tour to begin with, if it is good.

    Needs at least 4 nodes.
    """
    table = day.net.table
    near = np.stack(
        (nearest_by_table(table, NEIGHBOURS), nearest_by_table(table.T.copy(), NEIGHBOURS))
    )
    first = _start(day, near[0], start)
    cost = int(tour_money(*day.net, first))
    trail.begin(start, int(tour_money(*day.net, start)))
    trail.note("start", first, cost)
    tour = new_tour(first)
    sums = np.zeros_like(tour)
    refresh_sums(table, tour, sums, 0)
    note = np.zeros(3, np.int64)
    queue = new_queue(first)
    looks, steps = (ALL, 1) if trail.kept else (LOOKS_A_CALL, ALL)
    while waiting(queue) > 0 and not budget.stopped():
        gain = int(descend_directed(table, tour, sums, near, queue, note, looks, steps))
        cost -= gain
        if gain > 0:
            trail.note(KINDS[int(note[2])], tour[0], cost)
    kept: NDArray[np.int64] = tour[0].copy()
    best: NDArray[np.int64] = tour[0].copy()
    costs = np.array([cost, cost], np.int64)
    while (kicks := budget.next_kicks(KICKS_A_CALL)) > 0:
        before = costs[1]
        made = kick_and_repair_directed(
            table,
            tour,
            sums,
            near,
            queue,
            note,
            budget.stream,
            kept,
            best,
            costs,
            kicks,
            HEAT * cost / day.size,
            budget.used,
            budget.kicks,
            budget.spent,
            int(trail.kept),
        )
        budget.used += int(made)
        if costs[1] < before:
            trail.note("kick", best, int(costs[1]))
    return best


def _start(day: Day, near: NDArray[np.int64], given: NDArray[np.int64]) -> NDArray[np.int64]:
    """Return the greedy tour, or the one given if that is no longer."""
    legs = np.stack((near, money_of_pairs(*day.net, near)), axis=2)
    greedy = greedy_directed(*day.net, *candidate_legs(legs, symmetric=False))
    greedy = np.roll(greedy, -int(np.flatnonzero(greedy == given[0])[0]))
    return given if tour_money(*day.net, given) <= tour_money(*day.net, greedy) else greedy
