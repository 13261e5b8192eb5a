"""Strands of an overview: tours that share a road lie side by side, each on its driving side."""

from __future__ import annotations

from collections import defaultdict
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from georoute.publishing.road_lines import STEP_DEG, steps_of, thinned

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from georoute.domain.plan import DayTour, Leg
    from georoute.publishing.road_lines import Flat

__all__ = ["Run", "runs_of", "told_runs"]

_STEADY_SHARE = 0.04
"""A strand takes a slot that stays free for this share of the plan's extent: it does not sway."""
Edge = tuple[tuple[int, int], tuple[int, int]]
Run = tuple[int, "NDArray[np.float64]"]
"""The slot (0 next to the middle of the road) and the line in metres, shape (n, 2)."""


def _edges(leg: Leg) -> list[Edge]:
    nodes = [(round(lat / STEP_DEG), round(lon / STEP_DEG)) for lat, lon in leg.path]
    return list(pairwise(nodes))


def _free_slot(taken: Sequence[set[int]]) -> int:
    used = set().union(*taken)
    return next(slot for slot in range(len(used) + 1) if slot not in used)


def _slots(
    edges: list[Edge], ends: NDArray[np.float64], taken: dict[Edge, set[int]], steady_m: float
) -> list[int]:
    """Return a slot for each edge: the lowest that is free for a while ahead.

    ``ends`` are metres from the start of the leg, one more than edges.
    """
    slots: list[int] = []
    for k in range(len(edges)):
        last = int(np.searchsorted(ends, ends[k] + steady_m))
        ahead = [taken[edge] for edge in edges[k : max(last, k + 1)]]
        lowest = _free_slot(ahead)
        if slots and slots[-1] > lowest and slots[-1] not in taken[edges[k]]:
            # it came from farther out: it moves in only once the lower slot stays free behind too
            first = int(np.searchsorted(ends, ends[k] - steady_m))
            behind = [taken[edge] for edge in edges[first:k]]
            lowest = slots[-1] if any(lowest in used for used in behind) else lowest
        slots.append(lowest)
    return slots


def runs_of(tours: Sequence[DayTour], flat: Flat) -> list[list[list[Run]]]:
    """Return the runs of each leg of each tour; a straight leg has none.

    Only ways in the same direction compete for a slot: the other direction has its own side.
    """
    taken: dict[Edge, set[int]] = defaultdict(set)
    places = [place for tour in tours for leg in tour.legs for place in leg.path]
    steady_m = float(np.ptp(flat.forward(places), axis=0).max()) * _STEADY_SHARE if places else 0.0
    found = []
    for tour in tours:
        mine: dict[Edge, set[int]] = defaultdict(set)
        legs: list[list[Run]] = []
        for leg in tour.legs:
            if not leg.path:
                legs.append([])
                continue
            points = flat.forward(leg.path)
            step = np.diff(points, axis=0)
            ends = np.concatenate([[0.0], np.cumsum(np.hypot(step[:, 0], step[:, 1]))])
            edges = _edges(leg)
            slots = _slots(edges, ends, taken, steady_m)
            for edge, slot in zip(edges, slots, strict=True):
                mine[edge].add(slot)
            cuts = [0, *(k for k in range(1, len(slots)) if slots[k] != slots[k - 1]), len(slots)]
            legs.append([(slots[a], points[a : b + 1]) for a, b in pairwise(cuts) if a < b])
        # a tour that drives a road twice keeps its slot there
        for edge, slots_here in mine.items():
            taken[edge] |= slots_here
        found.append(legs)
    return found


def told_runs(legs: list[list[Run]], flat: Flat, tolerance_m: float) -> list[list[list[int]]]:
    """Return the runs of a tour's legs for the data island: the slot, then steps."""
    return [
        [[slot, *steps_of(flat.steps(thinned(points, tolerance_m)))] for slot, points in leg]
        for leg in legs
    ]
