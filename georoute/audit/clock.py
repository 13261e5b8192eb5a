"""The clock of a tour: legs measured again, and every time the sum of what comes before it."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import TYPE_CHECKING

from georoute.audit.report import LENGTH_M, RELATIVE, TIME_S, close, gap_s

if TYPE_CHECKING:
    from collections.abc import Iterator
    from datetime import datetime

    from georoute.audit.remeasure import Ruler
    from georoute.audit.report import Report
    from georoute.domain.plan import DayTour, Leg

__all__ = ["check_clock", "check_legs", "moments_of"]


def moments_of(tour: DayTour) -> Iterator[tuple[str, datetime]]:
    """Yield every clock time of a tour with its name."""
    yield from (("depart", tour.depart), ("back", tour.back), ("finish", tour.finish))
    for stop in tour.stops:
        for name in ("arrive", "start", "leave", "latest_arrive"):
            yield f"stop {stop.order} {name}", getattr(stop, name)
    for leg in tour.legs:
        for name in ("depart", "arrive"):
            yield f"leg {leg.order} {name}", getattr(leg, name)


def _check_leg_figures(leg: Leg, tour: DayTour, ruler: Ruler, report: Report) -> None:
    where = f"Tour {tour.tour_id}, leg {leg.order} {leg.from_id} → {leg.to_id}"
    figures = ruler.leg(leg.from_id, leg.to_id)
    if figures is None:
        return
    drive_s, dist_m = figures
    if not (math.isfinite(drive_s) and math.isfinite(dist_m)):
        report.fault(
            "unreachable_leg",
            where,
            expected="no such leg: there is no way",
            got=f"{leg.drive_s} s, {leg.dist_m} m",
            subject=tour.tour_id,
        )
        return
    report.figure(
        "leg_time",
        f"{where}: drive_s",
        expected=drive_s,
        got=leg.drive_s,
        tolerance=TIME_S + RELATIVE * drive_s,
        subject=tour.tour_id,
    )
    report.figure(
        "leg_length",
        f"{where}: dist_m",
        expected=dist_m,
        got=leg.dist_m,
        tolerance=LENGTH_M + RELATIVE * dist_m,
        subject=tour.tour_id,
    )


def check_legs(tour: DayTour, ruler: Ruler, report: Report) -> None:
    """Check that legs join base, stops in order, and base, and measure each again."""
    where, subject = f"Tour {tour.tour_id}", tour.tour_id
    places = [tour.start_base_id, *(stop.site_id for stop in tour.stops), tour.end_base_id]
    chain = list(pairwise(places))
    if len(tour.legs) != len(chain):
        report.fault(
            "leg_count", f"{where}: legs", expected=len(chain), got=len(tour.legs), subject=subject
        )
    for number, (leg, (from_id, to_id)) in enumerate(zip(tour.legs, chain, strict=False), 1):
        if leg.order != number:
            report.fault(
                "leg_order", f"{where}: leg order", expected=number, got=leg.order, subject=subject
            )
        if (leg.from_id, leg.to_id) != (from_id, to_id):
            report.fault(
                "leg_chain",
                f"{where}, leg {number}",
                expected=f"{from_id} → {to_id}",
                got=f"{leg.from_id} → {leg.to_id}",
                subject=subject,
            )
    for leg in tour.legs:
        _check_leg_figures(leg, tour, ruler, report)


def check_clock(tour: DayTour, report: Report) -> None:
    """Check departures, arrivals, return and end against the legs and stops before them."""
    where, subject = f"Tour {tour.tour_id}", tour.tour_id
    departures = [tour.depart, *(stop.leave for stop in tour.stops)]
    arrivals = [*(stop.arrive for stop in tour.stops), tour.back]
    for k, leg in enumerate(tour.legs):
        if k >= len(departures):
            break
        at = f"{where}, leg {k + 1}"
        report.instant(
            "leg_depart",
            f"{at}: departure",
            expected=departures[k],
            got=leg.depart,
            subject=subject,
        )
        if not close(leg.drive_s, gap_s(leg.depart, leg.arrive), TIME_S):
            report.fault(
                "leg_arrive",
                f"{at}: arrival",
                expected=f"{leg.drive_s} s after {leg.depart.isoformat()}",
                got=leg.arrive,
                subject=subject,
            )
        last = k == len(arrivals) - 1
        report.instant(
            "tour_back" if last else "stop_arrive",
            f"{where}: return" if last else f"{where}, stop {k + 1}: arrival",
            expected=leg.arrive,
            got=arrivals[k],
            subject=subject,
        )
    written_up = gap_s(tour.back, tour.finish)
    report.figure(
        "tour_finish",
        f"{where}: seconds from return to end",
        expected=tour.write_up_s,
        got=written_up,
        tolerance=TIME_S,
        subject=subject,
    )
