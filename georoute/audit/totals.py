"""What is said about the plan as a whole: capacity, stages, travel, where it came from."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.audit.report import MONEY, gap_s
from georoute.audit.working_day import working_dates, working_day
from georoute.domain.programme import TravelMethod

if TYPE_CHECKING:
    from georoute.audit.report import Report
    from georoute.domain.plan import Plan

__all__ = ["check_totals"]

S_PER_HOUR = 3_600.0
ROUNDING_H = 0.0005 / S_PER_HOUR
"""Hours by which rounding to milliseconds may change the work of one visit."""

HOURS = 1e-6
"""Hours that a sum may differ, beside the rounding of its parts."""


def _shift_hours(plan: Plan) -> tuple[float, float]:
    """Return the hours of all shifts less write-up, and the hours of overtime beyond them.

    A shift gives its paid length, cut where it must end sooner; the write-up comes off it and,
    where it is longer, off the overtime.
    """
    programme, paid_s, overtime_s = plan.programme, 0.0, 0.0
    for person, day in working_dates(programme):
        limits = working_day(programme, person, day)
        usable_s = min(limits.longest_s, gap_s(limits.starts, limits.ends))
        ordinary_s = min(person.paid_s, usable_s)
        paid_s += max(0.0, ordinary_s - person.write_up_s)
        overtime_s += max(0.0, usable_s - max(ordinary_s, person.write_up_s))
    return paid_s / S_PER_HOUR, overtime_s / S_PER_HOUR


def _check_capacity(plan: Plan, report: Report) -> None:
    capacity = plan.capacity
    work_s = sum(visit.work_s + visit.access_s for visit in plan.visits)
    shift_h, overtime_h = _shift_hours(plan)
    sums = (
        ("visits", len(plan.visits), capacity.visits),
        ("shifts", len(working_dates(plan.programme)), capacity.shifts),
        ("work_h", work_s / S_PER_HOUR, capacity.work_h),
        ("shift_h", shift_h, capacity.shift_h),
        ("overtime_h", overtime_h, capacity.overtime_h),
    )
    for name, expected, got in sums:
        report.figure(
            "capacity",
            f"Capacity: {name}",
            expected=expected,
            got=got,
            tolerance=HOURS + ROUNDING_H * len(plan.visits),
            subject="capacity",
        )
    if not capacity.least_travel_h >= 0:
        report.fault(
            "capacity",
            "Capacity: least_travel_h",
            expected="0 or more",
            got=capacity.least_travel_h,
            subject="capacity",
        )


def _check_least_travel(plan: Plan, report: Report) -> None:
    """Check the lower bound on travel against a plan that does place every visit."""
    if plan.unplaced:
        return
    driven_h = sum(tour.drive_s for tour in plan.tours) / S_PER_HOUR
    if not plan.capacity.least_travel_h <= driven_h + HOURS:
        report.fault(
            "least_travel",
            "Capacity: least_travel_h",
            expected=f"at most the {driven_h:.6f} h driven with every visit placed",
            got=plan.capacity.least_travel_h,
            subject="capacity",
        )


def _check_stages(plan: Plan, report: Report) -> None:
    if not plan.stages:
        return
    last = plan.stages[-1]
    cost = sum(tour.cost for tour in plan.tours)
    report.figure(
        "total_cost",
        f"Cost of the plan after stage {last.stage}",
        expected=cost,
        got=last.cost,
        tolerance=MONEY * (len(plan.tours) + 1),
        subject="plan",
    )
    placed = sum(len(tour.stops) for tour in plan.tours)
    if last.placed != placed:
        report.fault(
            "placed_count",
            f"Visits placed after stage {last.stage}",
            expected=placed,
            got=last.placed,
            subject="plan",
        )


def _check_travel(plan: Plan, report: Report) -> None:
    """Check that estimates are called so, with the interval of their model."""
    settings, note = plan.programme.travel, plan.travel
    estimated = settings.method not in {TravelMethod.TABLE, TravelMethod.ROADS}
    if note.estimated != estimated:
        report.fault(
            "travel_note",
            f"Travel by {settings.method}: estimated",
            expected=estimated,
            got=note.estimated,
            subject="travel",
        )
    detour = settings.method is TravelMethod.DETOUR
    expected = (settings.detour.low_factor, settings.detour.high_factor) if detour else (1.0, 1.0)
    got = (note.low_factor, note.high_factor)
    if expected != got:
        report.fault(
            "travel_note",
            f"Travel by {settings.method}: interval of the estimate",
            expected=expected,
            got=got,
            subject="travel",
        )


def _check_provenance(plan: Plan, report: Report) -> None:
    programme, provenance = plan.programme, plan.provenance
    pairs = (
        ("programme hash", programme.sha256, provenance.programme_sha256),
        ("seed", programme.seed, provenance.seed),
        ("effort", programme.effort.name, provenance.effort),
        ("seconds", programme.effort.seconds, provenance.seconds),
    )
    for name, expected, got in pairs:
        if expected != got:
            report.fault(
                "provenance",
                f"Provenance: {name}",
                expected=expected,
                got=got,
                subject="provenance",
            )


def check_totals(plan: Plan, report: Report) -> None:
    """Check capacity, stages, the note on travel and the provenance."""
    _check_capacity(plan, report)
    _check_least_travel(plan, report)
    _check_stages(plan, report)
    _check_travel(plan, report)
    _check_provenance(plan, report)
