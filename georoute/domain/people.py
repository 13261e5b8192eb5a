"""Inspectors, the days they work, and the shifts that follow from both."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date, datetime, time
from types import MappingProxyType

__all__ = ["Inspector", "Shift", "WorkingCalendar", "shift_id_of"]


def shift_id_of(inspector_id: str, day: date) -> str:
    """Return the stable name of a shift, which is also the name of its tour."""
    return f"{day.isoformat()}|{inspector_id}"


@dataclass(frozen=True, slots=True, kw_only=True)
class WorkingCalendar:
    """Which dates are worked: ISO weekdays (1 = Monday) less days off and holidays.

    ``holidays`` maps a date to the holiday's name.
    """

    weekdays: frozenset[int] = frozenset({1, 2, 3, 4, 5})
    days_off: frozenset[date] = frozenset()
    holidays: Mapping[date, str] = field(default_factory=lambda: MappingProxyType({}))

    def works_on(self, day: date) -> bool:
        """Tell whether ``day`` is worked."""
        return (
            day.isoweekday() in self.weekdays
            and day not in self.days_off
            and day not in self.holidays
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class Inspector:
    """A person who visits sites, with the shift worked on each working day.

    Times are local wall times in the zone of the programme. ``paid_s`` is the length of the
    ordinary working day; beyond it up to ``overtime_limit_s`` may be worked as overtime.
    ``write_up_s`` is kept free at the end of the day, after the return.
    ``load_limit`` ``None`` means no limit.
    """

    inspector_id: str
    name: str
    start_base_id: str
    end_base_id: str
    shift_start: time
    shift_end: time
    paid_s: float
    overtime_limit_s: float
    calendar: WorkingCalendar
    write_up_s: float = 0.0
    load_limit: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Shift:
    """One inspector on one date.

    The tour may leave at ``earliest_start`` at the earliest and is back, written up and done
    by ``latest_end``; its length is at most ``paid_s + overtime_limit_s``.
    """

    shift_id: str
    inspector_id: str
    day: date
    start_base_id: str
    end_base_id: str
    earliest_start: datetime
    latest_end: datetime
    paid_s: float
    overtime_limit_s: float
    write_up_s: float = 0.0
    load_limit: float | None = None
