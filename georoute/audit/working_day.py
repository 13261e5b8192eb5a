"""When an inspector may work on a date, worked out from the programme alone."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date, datetime, timedelta
from typing import TYPE_CHECKING
from zoneinfo import ZoneInfo

if TYPE_CHECKING:
    from georoute.domain.people import Inspector
    from georoute.domain.programme import Programme

__all__ = ["WorkingDay", "why_not_worked", "working_dates", "working_day"]


@dataclass(frozen=True, slots=True, kw_only=True)
class WorkingDay:
    """The limits of one inspector's work on one date."""

    starts: datetime
    ends: datetime
    longest_s: float


def why_not_worked(programme: Programme, inspector: Inspector, day: date) -> str:
    """Return why an inspector does not work on a date; empty where he does."""
    calendar = inspector.calendar
    if not programme.first_date <= day <= programme.last_date:
        return f"outside {programme.first_date} to {programme.last_date}"
    if day in calendar.holidays:
        return f"a holiday ({calendar.holidays[day]})"
    if day in calendar.days_off:
        return "a day off"
    if day.isoweekday() not in calendar.weekdays:
        return f"a {day:%A}"
    return ""


def working_day(programme: Programme, inspector: Inspector, day: date) -> WorkingDay:
    """Return the limits of a date; a shift that ends before it starts ends on the next date."""
    zone = ZoneInfo(programme.zone)
    starts = datetime.combine(day, inspector.shift_start, zone)
    ends = datetime.combine(day, inspector.shift_end, zone)
    if inspector.shift_end <= inspector.shift_start:
        ends = datetime.combine(day + timedelta(days=1), inspector.shift_end, zone)
    return WorkingDay(
        starts=starts, ends=ends, longest_s=inspector.paid_s + inspector.overtime_limit_s
    )


def working_dates(programme: Programme) -> list[tuple[Inspector, date]]:
    """Return every date of the horizon that an inspector works, with the inspector."""
    length = (programme.last_date - programme.first_date).days + 1
    days = [programme.first_date + timedelta(days=k) for k in range(length)]
    return [
        (person, day)
        for day in days
        for person in programme.inspectors
        if not why_not_worked(programme, person, day)
    ]
