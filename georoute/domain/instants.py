"""Elapsed time between aware datetimes.

Python subtracts two datetimes of the same zone as wall times, which is an hour off across a
change of clocks; these two count in UTC.
"""

from __future__ import annotations

from datetime import UTC, datetime, timedelta

__all__ = ["elapsed_s", "later"]


def elapsed_s(start: datetime, end: datetime) -> float:
    """Return the seconds that pass between two instants."""
    return (end.astimezone(UTC) - start.astimezone(UTC)).total_seconds()


def later(moment: datetime, duration_s: float) -> datetime:
    """Return the instant ``duration_s`` seconds after ``moment``, in the zone of ``moment``."""
    return (moment.astimezone(UTC) + timedelta(seconds=duration_s)).astimezone(moment.tzinfo)
