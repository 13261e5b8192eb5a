"""The stops of a tour: is the visit allowed there and then, and how late may one come."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from typing import TYPE_CHECKING

from georoute.audit.report import TIME_S, gap_s

if TYPE_CHECKING:
    from georoute.audit.report import Report
    from georoute.audit.working_day import WorkingDay
    from georoute.domain.plan import DayTour, Stop
    from georoute.domain.sites import Visit

__all__ = ["check_latest_arrivals", "check_stops"]


def _check_allowed(tour: DayTour, stop: Stop, visit: Visit, report: Report) -> None:
    """Check site, dates and inspector of a stop against its visit."""
    where, subject = f"Tour {tour.tour_id}, stop {stop.order} {stop.visit_id}", tour.tour_id
    if stop.site_id != visit.site_id:
        report.fault("wrong_site", where, expected=visit.site_id, got=stop.site_id, subject=subject)
    if visit.earliest is not None and tour.day < visit.earliest:
        report.fault(
            "too_early",
            where,
            expected=f"{visit.earliest} or later",
            got=tour.day,
            subject=subject,
        )
    if visit.latest is not None and tour.day > visit.latest:
        report.fault(
            "too_late", where, expected=f"{visit.latest} or earlier", got=tour.day, subject=subject
        )
    if visit.inspector_ids and tour.inspector_id not in visit.inspector_ids:
        report.fault(
            "not_eligible",
            where,
            expected=f"one of {', '.join(sorted(visit.inspector_ids))}",
            got=tour.inspector_id,
            subject=subject,
        )


def _first_start(visit: Visit, arrive: datetime) -> datetime | None:
    """Return when work may start at the earliest after arriving; ``None`` when not any more."""
    if not visit.open_intervals:
        return arrive
    starts = [
        max(arrive, interval.opens, key=lambda moment: moment.astimezone(UTC))
        for interval in visit.open_intervals
        if gap_s(arrive, interval.closes) >= -TIME_S
    ]
    return min(starts, key=lambda moment: moment.astimezone(UTC), default=None)


def _is_open(visit: Visit, moment: datetime) -> bool:
    return not visit.open_intervals or any(
        gap_s(interval.opens, moment) >= -TIME_S and gap_s(moment, interval.closes) >= -TIME_S
        for interval in visit.open_intervals
    )


def _check_work(tour: DayTour, stop: Stop, visit: Visit, report: Report) -> None:
    """Check wait, start of work and its length."""
    where, subject = f"Tour {tour.tour_id}, stop {stop.order} {stop.visit_id}", tour.tour_id
    first = _first_start(visit, stop.arrive)
    if gap_s(stop.arrive, stop.start) < -TIME_S:
        report.fault(
            "start_before_arrival",
            f"{where}: start",
            expected=f"{stop.arrive.isoformat()} or later",
            got=stop.start,
            subject=subject,
        )
    elif not _is_open(visit, stop.start):
        hours = ", ".join(
            f"{interval.opens.isoformat()} to {interval.closes.isoformat()}"
            for interval in visit.open_intervals
        )
        report.fault(
            "outside_opening",
            f"{where}: start",
            expected=f"within {hours}",
            got=stop.start,
            subject=subject,
        )
    elif first is not None:
        report.instant(
            "start_time", f"{where}: start", expected=first, got=stop.start, subject=subject
        )
    report.figure(
        "work_time",
        f"{where}: seconds from start to leaving",
        expected=visit.access_s + visit.work_s,
        got=gap_s(stop.start, stop.leave),
        tolerance=TIME_S,
        subject=subject,
    )


def check_stops(tour: DayTour, visits: dict[str, Visit], report: Report) -> None:
    """Check every stop of a tour against its visit."""
    for number, stop in enumerate(tour.stops, 1):
        where, subject = f"Tour {tour.tour_id}, stop {number}", tour.tour_id
        if stop.order != number:
            report.fault(
                "stop_order", f"{where}: order", expected=number, got=stop.order, subject=subject
            )
        visit = visits.get(stop.visit_id)
        if visit is None:
            report.fault(
                "unknown_visit",
                where,
                expected="a visit of the register",
                got=stop.visit_id,
                subject=subject,
            )
            continue
        _check_allowed(tour, stop, visit, report)
        _check_work(tour, stop, visit, report)


def _latest(visit: Visit, bound: datetime) -> datetime:
    """Return the latest arrival for a start of work not after ``bound``."""
    closing = [
        min(bound, interval.closes, key=lambda moment: moment.astimezone(UTC))
        for interval in visit.open_intervals
        if gap_s(interval.opens, bound) >= 0
    ]
    return max(closing, key=lambda moment: moment.astimezone(UTC), default=bound)


def check_latest_arrivals(
    tour: DayTour, visits: dict[str, Visit], limits: WorkingDay, report: Report
) -> None:
    """Go backwards from the end of the shift and compare the latest arrival at each stop."""
    if len(tour.legs) != len(tour.stops) + 1:
        return  # reported as such; the legs of the stops are not known
    longest = tour.depart.astimezone(UTC) + timedelta(seconds=limits.longest_s)
    bound = min(longest, limits.ends.astimezone(UTC)) - timedelta(seconds=tour.write_up_s)
    for stop, leg in zip(reversed(tour.stops), reversed(tour.legs), strict=False):
        where, subject = f"Tour {tour.tour_id}, stop {stop.order} {stop.visit_id}", tour.tour_id
        visit = visits.get(stop.visit_id)
        if visit is None:
            return  # reported as such
        bound -= timedelta(seconds=leg.drive_s + visit.access_s + visit.work_s)
        latest = _latest(visit, bound)
        report.instant(
            "latest_arrive",
            f"{where}: latest arrival",
            expected=latest.astimezone(stop.arrive.tzinfo),
            got=stop.latest_arrive,
            subject=subject,
        )
        if gap_s(stop.arrive, stop.latest_arrive) < -TIME_S:
            report.fault(
                "latest_before_arrival",
                f"{where}: latest arrival",
                expected=f"{stop.arrive.isoformat()} or later",
                got=stop.latest_arrive,
                subject=subject,
            )
        bound = stop.latest_arrive.astimezone(UTC)
