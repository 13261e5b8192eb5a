"""Nothing lost, nothing twice: ids, visits in tours or in the list of unplaced ones."""

from __future__ import annotations

import math
import uuid
from collections import Counter
from typing import TYPE_CHECKING

from georoute.domain.plan import ReasonCode

if TYPE_CHECKING:
    from collections.abc import Iterable

    from georoute.audit.report import Report
    from georoute.domain.plan import Plan, Unplaced

__all__ = ["check_coverage", "check_ids"]

MAX_LAT_DEG = 90.0
MAX_LON_DEG = 180.0


def _check_unique(kind: str, ids: Iterable[str], report: Report) -> None:
    for name, count in Counter(ids).items():
        if count > 1:
            report.fault("duplicate_id", f"{kind} {name}", expected="one", got=count, subject=name)


def _check_places(plan: Plan, report: Report) -> None:
    spots = [(s.site_id, s.lat_deg, s.lon_deg) for s in plan.sites]
    spots += [(b.base_id, b.lat_deg, b.lon_deg) for b in plan.programme.bases]
    for name, lat, lon in spots:
        # Longitudes beyond half a turn come from registers of the Pacific; they are measurable.
        if not (abs(lat) <= MAX_LAT_DEG and abs(lon) <= 2 * MAX_LON_DEG):
            report.fault(
                "bad_coordinates",
                f"Place {name}",
                expected="latitude and longitude in degrees",
                got=f"{lat}, {lon}",
                subject=name,
            )


def check_ids(plan: Plan, report: Report) -> None:
    """Check that every id stands for one thing and that what is pointed at is there."""
    programme = plan.programme
    try:
        uuid.UUID(plan.plan_id)
    except ValueError:
        report.fault("plan_id", "Plan id", expected="a UUID", got=plan.plan_id, subject="plan")
    places = [site.site_id for site in plan.sites] + [base.base_id for base in programme.bases]
    _check_unique("Place", places, report)
    _check_unique("Visit", (visit.visit_id for visit in plan.visits), report)
    _check_unique("Inspector", (p.inspector_id for p in programme.inspectors), report)
    _check_unique("Tour", (tour.tour_id for tour in plan.tours), report)
    _check_places(plan, report)
    sites = {site.site_id for site in plan.sites}
    for visit in plan.visits:
        where = f"Visit {visit.visit_id}"
        if visit.site_id not in sites:
            report.fault(
                "unknown_site",
                where,
                expected="a site of the register",
                got=visit.site_id,
                subject=visit.visit_id,
            )
        if not (0 <= visit.work_s < math.inf and 0 <= visit.access_s < math.inf):
            report.fault(
                "bad_work",
                where,
                expected="work and access of 0 s or more",
                got=f"{visit.work_s}, {visit.access_s}",
                subject=visit.visit_id,
            )


def _check_unplaced(entry: Unplaced, site_id: str | None, report: Report) -> None:
    where = f"Unplaced visit {entry.visit_id}"
    if site_id is None:
        report.fault(
            "unknown_visit",
            where,
            expected="a visit of the register",
            got=entry.visit_id,
            subject=entry.visit_id,
        )
    elif entry.site_id != site_id:
        report.fault(
            "wrong_site", where, expected=site_id, got=entry.site_id, subject=entry.visit_id
        )
    if entry.code not in set(ReasonCode) or not entry.message.strip():
        report.fault(
            "no_reason",
            where,
            expected="a reason code and the reason in words",
            got=f"{entry.code!r}, {entry.message!r}",
            subject=entry.visit_id,
        )
    if not entry.figures or any(math.isnan(figure) for figure in entry.figures.values()):
        report.fault(
            "no_figures",
            where,
            expected="the figures behind the reason",
            got=dict(entry.figures),
            subject=entry.visit_id,
        )


def check_coverage(plan: Plan, report: Report) -> None:
    """Check that every visit is exactly once in a tour or among the unplaced."""
    site_of = {visit.visit_id: visit.site_id for visit in plan.visits}
    placed = Counter(stop.visit_id for tour in plan.tours for stop in tour.stops)
    left_out = Counter(entry.visit_id for entry in plan.unplaced)
    for visit_id in site_of:
        times = placed[visit_id] + left_out[visit_id]
        if times != 1:
            report.fault(
                "visit_lost" if times == 0 else "visit_twice",
                f"Visit {visit_id}",
                expected="once, in a tour or among the unplaced",
                got=f"{placed[visit_id]} in tours, {left_out[visit_id]} unplaced",
                subject=visit_id,
            )
    for entry in plan.unplaced:
        _check_unplaced(entry, site_of.get(entry.visit_id), report)
