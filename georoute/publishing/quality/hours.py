"""Where the hours of a plan go, and how evenly they lie on inspectors and days."""

from __future__ import annotations

from dataclasses import dataclass
from statistics import median
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable
    from datetime import date

    from georoute.domain.plan import Plan

__all__ = [
    "Balance",
    "HoursSpent",
    "InspectorHours",
    "Spread",
    "balance",
    "hours_spent",
    "spread_of",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class HoursSpent:
    """Seconds of all tours by what they are spent on; waits are apart from driving."""

    work_s: float
    access_s: float
    drive_s: float
    wait_s: float
    write_up_s: float

    @property
    def total_s(self) -> float:
        """Seconds out, write-up included."""
        return self.work_s + self.access_s + self.drive_s + self.wait_s + self.write_up_s

    @property
    def travel_share(self) -> float:
        """Driving as a share of driving, work and access; 0 where there is none of them."""
        whole = self.drive_s + self.work_s + self.access_s
        return self.drive_s / whole if whole > 0 else 0.0


def hours_spent(plan: Plan) -> HoursSpent:
    """Return where the time of all tours goes."""
    access = {visit.visit_id: visit.access_s for visit in plan.visits}
    stops = [stop for tour in plan.tours for stop in tour.stops]
    access_s = sum(access[stop.visit_id] for stop in stops)
    return HoursSpent(
        work_s=sum(tour.work_s for tour in plan.tours) - access_s,
        access_s=access_s,
        drive_s=sum(tour.drive_s for tour in plan.tours),
        wait_s=sum(tour.wait_s for tour in plan.tours),
        write_up_s=sum(tour.write_up_s for tour in plan.tours),
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Spread:
    """Least, median and most of some figures; all 0 where there are none."""

    count: int
    least: float
    median: float
    most: float

    @property
    def spread(self) -> float:
        """The most less the least."""
        return self.most - self.least

    def scaled(self, factor: float) -> Spread:
        """Return the same spread in another unit."""
        return Spread(
            count=self.count,
            least=self.least * factor,
            median=self.median * factor,
            most=self.most * factor,
        )


def spread_of(figures: Iterable[float]) -> Spread:
    """Return the spread of ``figures``."""
    values = sorted(figures)
    if not values:
        return Spread(count=0, least=0.0, median=0.0, most=0.0)
    return Spread(count=len(values), least=values[0], median=median(values), most=values[-1])


@dataclass(frozen=True, slots=True, kw_only=True)
class InspectorHours:
    """The tours of one inspector: their dates with seconds out, and the spread of these."""

    inspector_id: str
    days: tuple[tuple[date, float], ...]
    spread: Spread

    @property
    def total_s(self) -> float:
        """Seconds of all days together."""
        return sum(seconds for _, seconds in self.days)


@dataclass(frozen=True, slots=True, kw_only=True)
class Balance:
    """Hours of each inspector, the spread over all inspector-days, and over inspectors.

    All in seconds. Inspectors without a tour count in ``per_inspector`` with 0.
    """

    inspectors: tuple[InspectorHours, ...]
    per_day: Spread
    per_inspector: Spread


def balance(plan: Plan) -> Balance:
    """Return how the hours of ``plan`` (departure to the end of the write-up) are spread."""
    rows = []
    for person in plan.programme.inspectors:
        days = tuple(
            (tour.day, tour.duration_s)
            for tour in plan.tours
            if tour.inspector_id == person.inspector_id
        )
        rows.append(
            InspectorHours(
                inspector_id=person.inspector_id,
                days=days,
                spread=spread_of(seconds for _, seconds in days),
            )
        )
    return Balance(
        inspectors=tuple(rows),
        per_day=spread_of(tour.duration_s for tour in plan.tours),
        per_inspector=spread_of(row.total_s for row in rows),
    )
