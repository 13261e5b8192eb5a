"""Visits past their due date, past their latest date, and late for opening hours."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from georoute.publishing.day_view import lateness_s

if TYPE_CHECKING:
    from datetime import date

    from georoute.domain.plan import Plan

__all__ = ["DateRecord", "PastDue", "date_record"]


@dataclass(frozen=True, slots=True)
class PastDue:
    """A visit placed on ``day`` although it was due ``days`` earlier, on ``due``."""

    visit_id: str
    due: date
    day: date

    @property
    def days(self) -> int:
        """Days between the due date and the visit."""
        return (self.day - self.due).days


@dataclass(frozen=True, slots=True, kw_only=True)
class DateRecord:
    """How the plan keeps dates.

    ``past_due`` are placed visits past their due date, the worst first; ``overdue_before`` of
    all visits were due before the horizon begins, ``overdue_left`` of them are not placed.
    ``left_due`` visits are not placed though due within the horizon or before. ``past_latest``
    counts placed visits past their latest date, ``late_stops`` those late for opening hours, by
    at most ``worst_late_s`` seconds.
    """

    past_due: tuple[PastDue, ...]
    overdue_before: int
    overdue_left: int
    left_due: int
    past_latest: int
    late_stops: int
    worst_late_s: float


def date_record(plan: Plan) -> DateRecord:
    """Return how ``plan`` keeps due dates, latest dates and opening hours."""
    visits = {visit.visit_id: visit for visit in plan.visits}
    first, last = plan.programme.first_date, plan.programme.last_date
    placed = [(visits[s.visit_id], s, tour.day) for tour in plan.tours for s in tour.stops]
    past_due = [
        PastDue(visit.visit_id, visit.due, day)
        for visit, _, day in placed
        if visit.due is not None and day > visit.due
    ]
    gone = {visit.visit_id for visit, _, _ in placed}
    left = [visit for visit in plan.visits if visit.visit_id not in gone]
    late = [seconds for visit, stop, _ in placed if (seconds := lateness_s(visit, stop)) > 0]
    return DateRecord(
        past_due=tuple(sorted(past_due, key=lambda entry: (-entry.days, entry.visit_id))),
        overdue_before=sum(v.due is not None and v.due < first for v in plan.visits),
        overdue_left=sum(v.due is not None and v.due < first for v in left),
        left_due=sum(v.due is not None and v.due <= last for v in left),
        past_latest=sum(v.latest is not None and day > v.latest for v, _, day in placed),
        late_stops=len(late),
        worst_late_s=max(late, default=0.0),
    )
