"""Every leg measured again, apart from the way that planning measures."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from pyproj import Geod

from georoute.audit.on_roads import MeasuredOnRoads
from georoute.audit.own_table import OwnTable
from georoute.domain.programme import TravelMethod

if TYPE_CHECKING:
    from georoute.audit.report import Report
    from georoute.domain.plan import Plan
    from georoute.domain.programme import DetourModel

__all__ = ["Ruler"]

MEAN_RADIUS_M = 6_371_008.7714
"""Mean radius of WGS 84, (2a + b) / 3."""

M_PER_KM = 1_000.0
S_PER_MIN = 60.0
KMH_PER_MPS = 3.6

_GEOD = Geod(ellps="WGS84")

Point = tuple[float, float]
"""Latitude and longitude in degrees."""

Figures = tuple[float, float]
"""Seconds and metres; both infinite where there is no way."""


def _great_circle_m(a: Point, b: Point) -> float:
    lat_a, lat_b = math.radians(a[0]), math.radians(b[0])
    half_lat, half_lon = (lat_b - lat_a) / 2, math.radians(b[1] - a[1]) / 2
    h = math.sin(half_lat) ** 2 + math.cos(lat_a) * math.cos(lat_b) * math.sin(half_lon) ** 2
    return 2 * MEAN_RADIUS_M * math.asin(math.sqrt(min(1.0, h)))  # h may pass 1 by rounding


def _geodesic_m(a: Point, b: Point) -> float:
    return float(_GEOD.inv(a[1], a[0], b[1], b[0])[2])


def _detour(model: DetourModel, length_m: float) -> Figures:
    if length_m == 0:
        return 0.0, 0.0
    straight_km = length_m / M_PER_KM
    road_km = model.length_at_1km * straight_km**model.length_exponent
    drive_min = model.time_at_1km_min * straight_km**model.time_exponent
    return drive_min * S_PER_MIN, max(road_km, straight_km) * M_PER_KM


class Ruler:
    """Measures legs between the places of a plan by the method of its programme."""

    def __init__(self, plan: Plan, report: Report) -> None:
        self._travel = plan.programme.travel
        bases, sites = plan.programme.bases, plan.sites
        self._points: dict[str, Point] = {b.base_id: (b.lat_deg, b.lon_deg) for b in bases}
        self._points |= {s.site_id: (s.lat_deg, s.lon_deg) for s in sites}
        self._table: OwnTable | None = None
        self._roads: MeasuredOnRoads | None = None
        if self._travel.method is TravelMethod.ROADS:
            self._roads = MeasuredOnRoads.find(plan, report)
        if self._travel.method is TravelMethod.TABLE:
            self._table = OwnTable.find(
                self._travel.table_path, beside=plan.programme.source, report=report
            )

    def leg(self, from_id: str, to_id: str) -> Figures | None:
        """Return seconds and metres of a leg; ``None`` where it cannot be measured again."""
        if from_id not in self._points or to_id not in self._points:
            return None
        if self._travel.method is TravelMethod.TABLE:
            return None if self._table is None else self._table.leg(from_id, to_id)
        if self._travel.method is TravelMethod.ROADS:
            return None if self._roads is None else self._roads.leg(from_id, to_id)
        a, b = self._points[from_id], self._points[to_id]
        if self._travel.method is TravelMethod.DETOUR:
            return _detour(self._travel.detour, _geodesic_m(a, b))
        great = self._travel.method is TravelMethod.GREAT_CIRCLE
        straight_m = _great_circle_m(a, b) if great else _geodesic_m(a, b)
        length_m = straight_m * self._travel.circuity
        return length_m / (self._travel.speed_kmh / KMH_PER_MPS), length_m
