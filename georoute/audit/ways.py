"""Ways of legs along roads: as long as they say, from road point to road point, road by road."""

from __future__ import annotations

from typing import TYPE_CHECKING

from pyproj import Geod

from georoute.domain.programme import TravelMethod

if TYPE_CHECKING:
    from georoute.audit.report import Report
    from georoute.domain.plan import DayTour, Leg, Plan
    from georoute.domain.roads import RoadPoint

__all__ = ["check_ways"]

RELATIVE = 1e-6
ROUNDING_M = 0.002
"""Metres by which the length of one road of a way may be rounded, and the cut at either end."""
SAME_PLACE_M = 0.05
"""Metres between the end of a way and its road point: degrees are kept whole, cuts are rounded."""

_GEOD = Geod(ellps="WGS84")


def _check_end(
    leg: Leg, place_id: str, at: tuple[float, float], points: dict[str, RoadPoint], report: Report
) -> None:
    point = points.get(place_id)
    if point is None:
        report.fault(
            "way_end",
            f"Leg {leg.from_id} → {leg.to_id}: road point of {place_id}",
            expected="where the place meets the road",
            got="none",
            subject=place_id,
        )
        return
    away_m = float(_GEOD.inv(at[1], at[0], point.lon_deg, point.lat_deg)[2])
    report.figure(
        "way_end",
        f"Leg {leg.from_id} → {leg.to_id}: metres from the way's end to the road point of "
        f"{place_id}",
        expected=0.0,
        got=away_m,
        tolerance=SAME_PLACE_M,
        subject=place_id,
    )


def _check_way(leg: Leg, tour: DayTour, points: dict[str, RoadPoint], report: Report) -> None:
    where = f"Tour {tour.tour_id}, leg {leg.order} {leg.from_id} → {leg.to_id}"
    lat, lon = zip(*leg.path, strict=True)
    tolerance = RELATIVE * leg.dist_m + ROUNDING_M * (len(leg.roads) + 2)
    report.figure(
        "way_length",
        f"{where}: length of its way",
        expected=leg.dist_m,
        got=float(_GEOD.line_length(lon, lat)),
        tolerance=tolerance,
        subject=tour.tour_id,
    )
    report.figure(
        "way_roads",
        f"{where}: metres of its roads together",
        expected=leg.dist_m,
        got=sum(metres for _, metres in leg.roads),
        tolerance=tolerance,
        subject=tour.tour_id,
    )
    _check_end(leg, leg.from_id, leg.path[0], points, report)
    _check_end(leg, leg.to_id, leg.path[-1], points, report)


def _check_kind(leg: Leg, tour: DayTour, report: Report, *, on_roads: bool) -> None:
    """Check that a leg has a way just where travel is along roads."""
    told = bool(leg.path), bool(leg.roads), leg.ferry
    fitting = told[:2] == (True, True) if on_roads else told == (False, False, False)
    if not fitting:
        report.fault(
            "way_kind",
            f"Tour {tour.tour_id}, leg {leg.order} {leg.from_id} → {leg.to_id}",
            expected="a way along roads" if on_roads else "a straight line",
            got=f"way {told[0]}, roads {told[1]}, ferry {told[2]}",
            subject=tour.tour_id,
        )


def check_ways(plan: Plan, report: Report) -> None:
    """Check the way of every leg, and that there is one where travel is along roads."""
    points = {point.place_id: point for point in plan.road_points}
    on_roads = plan.programme.travel.method is TravelMethod.ROADS
    for tour in plan.tours:
        for leg in tour.legs:
            _check_kind(leg, tour, report, on_roads=on_roads)
            if leg.path:
                _check_way(leg, tour, points, report)
