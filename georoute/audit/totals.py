"""What is said about the plan as a whole: capacity, stages, travel, where it came from."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.audit.report import MONEY
from georoute.audit.working_day import count_working_days
from georoute.domain.programme import TravelMethod

if TYPE_CHECKING:
    from georoute.audit.report import Report
    from georoute.domain.plan import Plan

__all__ = ["check_totals"]

S_PER_HOUR = 3_600.0
HOURS = 1e-4
"""Hours that a sum of capacity may differ, a third of a second."""


def _check_capacity(plan: Plan, report: Report) -> None:
    capacity, programme = plan.capacity, plan.programme
    days = count_working_days(programme)
    work_s = sum(visit.work_s + visit.access_s for visit in plan.visits)
    sums = (
        ("visits", len(plan.visits), capacity.visits),
        ("shifts", sum(days.values()), capacity.shifts),
        ("work_h", work_s / S_PER_HOUR, capacity.work_h),
    )
    for name, expected, got in sums:
        report.figure(
            "capacity",
            f"Capacity: {name}",
            expected=expected,
            got=got,
            tolerance=HOURS,
            subject="capacity",
        )
    for name in ("least_travel_h", "shift_h", "overtime_h"):
        value = getattr(capacity, name)
        if not value >= 0:
            report.fault(
                "capacity",
                f"Capacity: {name}",
                expected="0 or more",
                got=value,
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
    estimated = settings.method is not TravelMethod.TABLE
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
    _check_stages(plan, report)
    _check_travel(plan, report)
    _check_provenance(plan, report)
