"""One tour at a time: whose it is, on which day, and by whose clock."""

from __future__ import annotations

from collections import Counter
from itertools import pairwise
from typing import TYPE_CHECKING

from georoute.audit.clock import check_clock, check_legs, moments_of
from georoute.audit.report import LENGTH_M, MONEY, TIME_S, gap_s
from georoute.audit.stops import check_latest_arrivals, check_stops
from georoute.audit.working_day import why_not_worked, working_day

if TYPE_CHECKING:
    from georoute.audit.remeasure import Ruler
    from georoute.audit.report import Report
    from georoute.domain.people import Inspector
    from georoute.domain.plan import DayTour, Plan
    from georoute.domain.programme import Programme
    from georoute.domain.sites import Visit

__all__ = ["check_tours", "travel_cost"]

S_PER_HOUR = 3_600.0
M_PER_KM = 1_000.0
LOAD = 0.001
"""Loads are planned in thousandths."""


def travel_cost(programme: Programme, *, drive_s: float, dist_m: float) -> float:
    """Return the money for driving alone: hours at the ordinary rate, and kilometres."""
    tariff = programme.tariff
    return tariff.hour * drive_s / S_PER_HOUR + tariff.km * dist_m / M_PER_KM


def _check_identity(tour: DayTour, person: Inspector, programme: Programme, report: Report) -> None:
    where, subject = f"Tour {tour.tour_id}", tour.tour_id
    named = f"{tour.day.isoformat()}|{tour.inspector_id}"
    if tour.tour_id != named:
        report.fault("tour_id", where, expected=named, got=tour.tour_id, subject=subject)
    reason = why_not_worked(programme, person, tour.day)
    if reason:
        report.fault(
            "not_working_day",
            where,
            expected=f"a working day of {tour.inspector_id}",
            got=f"{tour.day}, {reason}",
            subject=subject,
        )
    ends = (
        ("start", person.start_base_id, tour.start_base_id),
        ("end", person.end_base_id, tour.end_base_id),
    )
    for end, expected, got in ends:
        if expected != got:
            report.fault(
                "wrong_base", f"{where}: {end} base", expected=expected, got=got, subject=subject
            )
    if not tour.stops:
        report.fault("empty_tour", where, expected="a stop or more", got="none", subject=subject)


def _check_limits(tour: DayTour, person: Inspector, programme: Programme, report: Report) -> None:
    where, subject = f"Tour {tour.tour_id}", tour.tour_id
    limits = working_day(programme, person, tour.day)
    if gap_s(limits.starts, tour.depart) < -TIME_S:
        report.fault(
            "before_shift",
            f"{where}: departure",
            expected=f"{limits.starts.isoformat()} or later",
            got=tour.depart,
            subject=subject,
        )
    if gap_s(tour.finish, limits.ends) < -TIME_S:
        report.fault(
            "after_shift",
            f"{where}: end",
            expected=f"{limits.ends.isoformat()} or earlier",
            got=tour.finish,
            subject=subject,
        )
    duration_s = gap_s(tour.depart, tour.finish)
    if duration_s > limits.longest_s + TIME_S:
        report.fault(
            "too_long",
            f"{where}: duration in seconds",
            expected=f"at most {limits.longest_s:g}",
            got=duration_s,
            subject=subject,
        )
    if person.load_limit is not None and tour.load > person.load_limit + LOAD:
        report.fault(
            "load_limit",
            f"{where}: load",
            expected=f"at most {person.load_limit:g}",
            got=tour.load,
            subject=subject,
        )


def _check_sums(tour: DayTour, person: Inspector, visits: dict[str, Visit], report: Report) -> None:
    known = [visits[stop.visit_id] for stop in tour.stops if stop.visit_id in visits]
    slack_s = TIME_S * (len(tour.legs) + 1)
    slack_m = LENGTH_M * (len(tour.legs) + 1)
    duration_s = gap_s(tour.depart, tour.finish)
    wait_s = sum(gap_s(stop.arrive, stop.start) for stop in tour.stops)
    sums = (
        ("work_sum", "work_s", sum(v.work_s + v.access_s for v in known), tour.work_s, slack_s),
        ("drive_sum", "drive_s", sum(leg.drive_s for leg in tour.legs), tour.drive_s, slack_s),
        ("wait_sum", "wait_s", wait_s, tour.wait_s, slack_s),
        ("dist_sum", "dist_m", sum(leg.dist_m for leg in tour.legs), tour.dist_m, slack_m),
        ("load_sum", "load", sum(v.load for v in known), tour.load, LOAD * (len(known) + 1)),
        ("write_up", "write_up_s", person.write_up_s, tour.write_up_s, TIME_S),
        (
            "overtime_sum",
            "overtime_s",
            max(0.0, duration_s - person.paid_s),
            tour.overtime_s,
            TIME_S,
        ),
    )
    for code, name, expected, got, tolerance in sums:
        report.figure(
            code,
            f"Tour {tour.tour_id}: {name}",
            expected=expected,
            got=got,
            tolerance=tolerance,
            subject=tour.tour_id,
        )


def _check_money(tour: DayTour, person: Inspector, programme: Programme, report: Report) -> None:
    tariff = programme.tariff
    duration_s = gap_s(tour.depart, tour.finish)
    paid_s = min(duration_s, person.paid_s)
    expected = (
        tariff.hour * paid_s / S_PER_HOUR
        + tariff.overtime_hour * (duration_s - paid_s) / S_PER_HOUR
        + tariff.km * tour.dist_m / M_PER_KM
        + tariff.day_opened
    )
    report.figure(
        "tour_cost",
        f"Tour {tour.tour_id}: cost",
        expected=expected,
        got=tour.cost,
        tolerance=MONEY,
        subject=tour.tour_id,
    )
    if tour.bound is not None:
        driven = travel_cost(programme, drive_s=tour.drive_s, dist_m=tour.dist_m)
        if not tour.bound.value <= driven + MONEY:
            report.fault(
                "bound",
                f"Tour {tour.tour_id}: proven bound",
                expected=f"at most the travel cost {driven:.6f}",
                got=tour.bound.value,
                subject=tour.tour_id,
            )


def _check_tour(
    tour: DayTour, plan: Plan, visits: dict[str, Visit], ruler: Ruler, report: Report
) -> None:
    programme = plan.programme
    people = {person.inspector_id: person for person in programme.inspectors}
    person = people.get(tour.inspector_id)
    if person is None:
        report.fault(
            "unknown_inspector",
            f"Tour {tour.tour_id}",
            expected="an inspector of the programme",
            got=tour.inspector_id,
            subject=tour.tour_id,
        )
        return
    _check_identity(tour, person, programme, report)
    vague = [name for name, moment in moments_of(tour) if moment.tzinfo is None]
    if vague:
        report.fault(
            "no_zone",
            f"Tour {tour.tour_id}: times",
            expected="a time zone",
            got=f"none at {', '.join(vague)}",
            subject=tour.tour_id,
        )
        return
    check_legs(tour, ruler, report)
    check_clock(tour, report)
    check_stops(tour, visits, report)
    check_latest_arrivals(tour, visits, working_day(programme, person, tour.day), report)
    _check_limits(tour, person, programme, report)
    _check_sums(tour, person, visits, report)
    _check_money(tour, person, programme, report)


def _check_order(plan: Plan, report: Report) -> None:
    """Check that tours come by date, then in the order of the inspectors."""
    rank = {p.inspector_id: k for k, p in enumerate(plan.programme.inspectors)}
    for earlier, tour in pairwise(plan.tours):
        before = (earlier.day, rank.get(earlier.inspector_id, -1))
        if before > (tour.day, rank.get(tour.inspector_id, -1)):
            report.fault(
                "tour_order",
                f"Tour {tour.tour_id}",
                expected="tours by date, then in the order of the inspectors",
                got=f"after {earlier.tour_id}",
                subject=tour.tour_id,
            )
    shared = Counter((tour.inspector_id, tour.day) for tour in plan.tours)
    for (inspector_id, day), count in shared.items():
        if count > 1:
            report.fault(
                "shift_shared",
                f"Inspector {inspector_id} on {day}",
                expected="one tour",
                got=count,
                subject=inspector_id,
            )


def check_tours(plan: Plan, ruler: Ruler, report: Report) -> None:
    """Check every tour by itself, then their order."""
    visits = {visit.visit_id: visit for visit in plan.visits}
    for tour in plan.tours:
        _check_tour(tour, plan, visits, ruler, report)
    _check_order(plan, report)
