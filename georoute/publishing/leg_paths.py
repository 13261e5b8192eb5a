"""The legs of a tour along roads, ready to draw: pieces of road and of ferry, and last metres."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np
import shapely

from georoute.domain.roads import BackdropKind
from georoute.publishing.road_lines import steps_of, thinned

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from georoute.domain.plan import DayTour, Leg, Plan
    from georoute.domain.roads import RoadPoint
    from georoute.publishing.ground import Ground
    from georoute.publishing.road_lines import Flat

__all__ = ["APART_M", "Piece", "any_roads", "pieces_of", "road_points_of", "told_pieces", "tour_m"]

APART_M = 15.0
"""A place at least this far from where driving ends gets a line from there."""
_ON_FERRY_M = 30.0
_THIN_M = 2.5


@dataclass(frozen=True, slots=True, eq=False)
class Piece:
    """A part of a leg: its line in metres, shape (n, 2), and whether it goes by ship."""

    points: NDArray[np.float64]
    ferry: bool


def any_roads(legs: Sequence[Leg]) -> bool:
    """Tell whether any of the legs follows roads."""
    return any(leg.path for leg in legs)


def road_points_of(plan: Plan) -> dict[str, RoadPoint]:
    """Return where places meet the road, by the id of the place."""
    return {point.place_id: point for point in plan.road_points}


def tour_m(tour: DayTour, flat: Flat) -> NDArray[np.float64]:
    """Return the legs along roads of a tour as one line in metres, shape (n, 2)."""
    paths = [flat.forward(leg.path) for leg in tour.legs if leg.path]
    return np.vstack(paths) if paths else np.zeros((0, 2))


def _by_ship(points: NDArray[np.float64], ferries: Sequence[shapely.Geometry]) -> list[bool]:
    """Tell of each step of a leg with a ferry whether it goes by ship.

    Where the map holds no ferry line beside it, the longest step does: ships go straight.
    """
    middles = shapely.points((points[:-1] + points[1:]) / 2)
    ends = shapely.points(points)
    if ferries:
        lines = shapely.union_all(list(ferries))
        near = np.asarray(shapely.distance(ends, lines)) <= _ON_FERRY_M
        on = near[:-1] & near[1:] & (shapely.distance(middles, lines) <= _ON_FERRY_M)
        if on.any():
            return [bool(step) for step in on]
    step = np.diff(points, axis=0)
    longest = int(np.hypot(step[:, 0], step[:, 1]).argmax())
    return [k == longest for k in range(len(step))]


def pieces_of(leg: Leg, ground: Ground) -> list[Piece]:
    """Return a leg as pieces in the order driven; a straight leg has none."""
    if not leg.path:
        return []
    points = ground.flat.forward(leg.path)
    if not leg.ferry or len(points) <= 1:
        return [Piece(points, ferry=False)]
    ferries = [shape for _, shape in ground.lines[BackdropKind.FERRY]]
    ship = _by_ship(points, ferries)
    cuts = [0, *(k for k in range(1, len(ship)) if ship[k] != ship[k - 1]), len(ship)]
    return [Piece(points[a : b + 1], ferry=ship[a]) for a, b in pairwise(cuts)]


def told_pieces(pieces: list[Piece], flat: Flat) -> list[list[int]]:
    """Return pieces for the data island: 1 for a ferry or 0, then steps as differences."""
    return [
        [int(piece.ferry), *steps_of(flat.steps(thinned(piece.points, _THIN_M)))]
        for piece in pieces
    ]
