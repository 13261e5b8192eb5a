"""Work that falls due week by week against the hours of the shifts there are."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from georoute.domain.instants import elapsed_s

if TYPE_CHECKING:
    from datetime import date

    from georoute.domain.people import Shift
    from georoute.domain.plan import Plan
    from georoute.domain.sites import Visit

__all__ = ["Undated", "WeekLoad", "deadline", "undated", "week_loads"]

Week = tuple[int, int]


@dataclass(frozen=True, slots=True, kw_only=True)
class WeekLoad:
    """One ISO week of the horizon; seconds, work with access.

    ``due_s`` is the work that falls due in this week; what was due before the horizon falls to
    its first week. ``shift_s`` are the paid hours of the shifts less write-up, ``overtime_s``
    what may be worked beyond, ``placed_s`` and ``drive_s`` what the plan does in this week.
    """

    year: int
    week: int
    first: date
    last: date
    due_visits: int
    due_s: float
    shifts: int
    shift_s: float
    overtime_s: float
    placed_s: float
    drive_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Undated:
    """Visits that do not fall due within the horizon: without a date, or with a later one."""

    without_date: int
    without_date_s: float
    later: int
    later_s: float


def deadline(visit: Visit) -> date | None:
    """Return the date a visit is due, or else its latest date, or else nothing."""
    return visit.due or visit.latest


def _week(day: date) -> Week:
    year, week, _ = day.isocalendar()
    return year, week


def _work_s(visit: Visit) -> float:
    return visit.work_s + visit.access_s


def _shift_hours(shift: Shift) -> tuple[float, float]:
    """Return the seconds of a shift less its write-up, and those of overtime beyond.

    The paid length is cut where the shift must end sooner; a write-up longer than it takes the
    rest from the overtime.
    """
    open_s = elapsed_s(shift.earliest_start, shift.latest_end)
    usable_s = min(shift.paid_s + shift.overtime_limit_s, open_s)
    paid_s = min(shift.paid_s, usable_s)
    free_s = max(0.0, paid_s - shift.write_up_s)
    return free_s, max(0.0, usable_s - max(paid_s, shift.write_up_s))


def week_loads(plan: Plan) -> tuple[WeekLoad, ...]:
    """Return the weeks of the horizon in order, each with what falls due and what there is."""
    programme = plan.programme
    days: dict[Week, list[date]] = {}
    for day in programme.days:
        days.setdefault(_week(day), []).append(day)
    due: dict[Week, list[float]] = {week: [] for week in days}
    for visit in plan.visits:
        by = deadline(visit)
        if by is not None and by <= programme.last_date:
            due[_week(max(by, programme.first_date))].append(_work_s(visit))
    shifts: dict[Week, list[tuple[float, float]]] = {week: [] for week in days}
    for shift in programme.shifts():
        shifts[_week(shift.day)].append(_shift_hours(shift))
    return tuple(
        WeekLoad(
            year=week[0],
            week=week[1],
            first=dates[0],
            last=dates[-1],
            due_visits=len(due[week]),
            due_s=sum(due[week]),
            shifts=len(shifts[week]),
            shift_s=sum(paid for paid, _ in shifts[week]),
            overtime_s=sum(over for _, over in shifts[week]),
            placed_s=sum(tour.work_s for tour in plan.tours if _week(tour.day) == week),
            drive_s=sum(tour.drive_s for tour in plan.tours if _week(tour.day) == week),
        )
        for week, dates in days.items()
    )


def undated(plan: Plan) -> Undated:
    """Return the visits that fall due in no week of the horizon."""
    last = plan.programme.last_date
    without = [_work_s(visit) for visit in plan.visits if deadline(visit) is None]
    later = [_work_s(visit) for visit in plan.visits if (by := deadline(visit)) and by > last]
    return Undated(
        without_date=len(without),
        without_date_s=sum(without),
        later=len(later),
        later_s=sum(later),
    )
