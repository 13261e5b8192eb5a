"""The shape of tours on the map: how tight they are, and where they get in each other's way.

Everything is measured on straight lines in a plane centred on the data, whatever the travel
figures are.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.spatial import cKDTree

from georoute.projection import local_plane

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.domain.plan import DayTour, Plan

    Points = NDArray[np.float64]

__all__ = ["NEAR_M", "Shape", "TourShape", "crosses_itself", "shape"]

NEAR_M = 200.0
"""Stops as near as this (metres) and served on different days are counted."""


@dataclass(frozen=True, slots=True, kw_only=True)
class TourShape:
    """Mean distance (m) of a tour's stops to their centre, and whether it crosses itself."""

    tour_id: str
    mean_to_centre_m: float
    crosses: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Shape:
    """Shape of a plan.

    ``mean_to_centre_m`` is the mean over all stops of the distance to the centre (mean place)
    of their own tour. ``near_pairs`` counts pairs of stops within ``NEAR_M`` of each other that
    are served on different days, ``near_stops`` the stops in such pairs; the same task coming
    up again at the same site is no pair.
    """

    tours: tuple[TourShape, ...]
    mean_to_centre_m: float
    near_pairs: int
    near_stops: int

    @property
    def crossing(self) -> int:
        """Number of tours that cross themselves."""
        return sum(tour.crosses for tour in self.tours)


def _turn(a: Points, b: Points, c: Points) -> Points:
    """Return on which side of the line from a to b the point c lies: +1, 0 or -1."""
    area = (b[..., 0] - a[..., 0]) * (c[..., 1] - a[..., 1])
    area = area - (b[..., 1] - a[..., 1]) * (c[..., 0] - a[..., 0])
    return np.asarray(np.sign(area), np.float64)


def crosses_itself(points: Points) -> bool:
    """Tell whether a way through points, shape (n, 2), crosses itself.

    Two legs cross where each has its ends strictly on different sides of the other. Legs that
    only touch, or lie on one another (a way out and back), do not count.
    """
    start, end = points[:-1, None, :], points[1:, None, :]
    other_start, other_end = points[None, :-1, :], points[None, 1:, :]
    parts = _turn(start, end, other_start) * _turn(start, end, other_end) < 0
    parted = _turn(other_start, other_end, start) * _turn(other_start, other_end, end) < 0
    return bool((parts & parted).any())


def _way(tour: DayTour, places: dict[str, tuple[float, float]]) -> Points:
    """Return the way of a tour, base to base, shape (stops + 2, 2)."""
    keys = [
        f"base|{tour.start_base_id}",
        *(f"site|{stop.site_id}" for stop in tour.stops),
        f"base|{tour.end_base_id}",
    ]
    return np.array([places[key] for key in keys], np.float64)


def _places(plan: Plan) -> dict[str, tuple[float, float]]:
    """Return metres in the plane of all sites and bases; a base may have the id of a site."""
    spots = {f"site|{site.site_id}": (site.lon_deg, site.lat_deg) for site in plan.sites}
    for base in plan.programme.bases:
        spots[f"base|{base.base_id}"] = (base.lon_deg, base.lat_deg)
    lon_deg, lat_deg = np.array(list(spots.values()), np.float64).T
    x_m, y_m = local_plane(lon_deg, lat_deg).forward(lon_deg, lat_deg)
    return dict(zip(spots, zip(x_m.tolist(), y_m.tolist(), strict=True), strict=True))


def _near(points: Points, series: NDArray[np.int64], days: NDArray[np.int64]) -> tuple[int, int]:
    """Return pairs and stops near each other on different days, repeats of a series aside."""
    pairs = cKDTree(points).query_pairs(NEAR_M, output_type="ndarray")
    one, other = pairs[:, 0], pairs[:, 1]
    apart = (days[one] != days[other]) & (series[one] != series[other])
    return int(apart.sum()), len(np.unique(pairs[apart]))


def shape(plan: Plan) -> Shape:
    """Return the shape of the tours of ``plan``."""
    if not plan.tours:
        return Shape(tours=(), mean_to_centre_m=0.0, near_pairs=0, near_stops=0)
    places = _places(plan)
    ways = [_way(tour, places) for tour in plan.tours]
    distances = [np.hypot(*(way[1:-1] - way[1:-1].mean(axis=0)).T) for way in ways]
    tasks = {visit.visit_id: (visit.site_id, visit.task) for visit in plan.visits}
    numbers = {series: number for number, series in enumerate(dict.fromkeys(tasks.values()))}
    stops = [(tour.day, stop) for tour in plan.tours for stop in tour.stops]
    near_pairs, near_stops = _near(
        np.concatenate([way[1:-1] for way in ways]),
        np.array([numbers[tasks[stop.visit_id]] for _, stop in stops], np.int64),
        np.array([day.toordinal() for day, _ in stops], np.int64),
    )
    return Shape(
        tours=tuple(
            TourShape(
                tour_id=tour.tour_id,
                mean_to_centre_m=float(distance.mean()),
                crosses=crosses_itself(way),
            )
            for tour, way, distance in zip(plan.tours, ways, distances, strict=True)
        ),
        mean_to_centre_m=float(np.concatenate(distances).mean()),
        near_pairs=near_pairs,
        near_stops=near_stops,
    )
