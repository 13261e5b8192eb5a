"""What the overview page says about a whole plan, ready to show."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from georoute.publishing.day_view import lateness_s
from georoute.publishing.looks import looks_of
from georoute.publishing.names import page_name

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence
    from datetime import datetime

    from georoute.domain.plan import DayTour, Plan
    from georoute.publishing.day_view import PlanIndex
    from georoute.publishing.figures import Figures
    from georoute.publishing.looks import TourLook

__all__ = ["Bar", "OverviewView", "TourRow", "UnplacedRow", "overview_view"]

_HOUR_S = 3600.0
_BAR_UNITS = 1000
_MOST_TICKS = 12
_COLUMNS = ("stops", "drive", "distance", "work", "wait", "overtime", "cost")


@dataclass(frozen=True, slots=True, kw_only=True)
class Bar:
    """A tour on the common hour scale of the table: paths in units of 1000 across, 16 down.

    ``blocks`` are pairs of a kind (``wait``, ``write``, ``work``) and a path that is not empty.
    """

    line: str
    blocks: tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class TourRow:
    """One tour in the table of tours; ``cells`` are its figures, each with its unit."""

    tour: DayTour
    look: TourLook
    date_short: str
    inspector: str
    day_href: str
    sheet_href: str
    out_back: str
    cells: tuple[str, ...]
    bar: Bar


@dataclass(frozen=True, slots=True, kw_only=True)
class UnplacedRow:
    """A visit that is not placed, with its reason and the arithmetic behind it."""

    name: str
    site_id: str
    task: str
    reason: str
    message: str


@dataclass(frozen=True, slots=True, kw_only=True)
class OverviewView:
    """The overview, ready to show. ``ticks`` are pairs of a place (of 1000) and an hour.

    ``columns`` name the figures of the rows, ``sums`` are those of all tours together.
    """

    title: str
    unplaced: tuple[UnplacedRow, ...]
    placement: str
    capacity: str
    capacity_verdict: str
    capacity_short: bool
    columns: tuple[str, ...]
    rows: tuple[TourRow, ...]
    sums: tuple[str, ...]
    drive_interval: str
    ticks: tuple[tuple[int, str], ...]


def _path(spans: list[tuple[int, int]], top: int, height: int) -> str:
    return "".join(f"M{x} {top}h{max(1, width)}v{height}h-{max(1, width)}z" for x, width in spans)


@dataclass(frozen=True, slots=True)
class _DayScale:
    """Wall-clock hours of a day, common to all tours, in units of the bar."""

    first_hour: int
    last_hour: int
    figures: Figures

    @classmethod
    def of(cls, tours: Sequence[DayTour], figures: Figures) -> _DayScale:
        whole_day = cls(0, 24, figures)
        firsts = [whole_day.seconds(tour, tour.depart) for tour in tours]
        lasts = [whole_day.seconds(tour, tour.finish) for tour in tours]
        first = int(min(firsts, default=0.0) // _HOUR_S)
        last = int(-(-max(lasts, default=_HOUR_S) // _HOUR_S))
        return cls(first, max(last, first + 1), figures)

    def seconds(self, tour: DayTour, moment: datetime) -> float:
        """Return wall-clock seconds since midnight of the tour's date."""
        local = moment.astimezone(self.figures.zone)
        days = (local.date() - tour.day).days
        return days * 24 * _HOUR_S + local.hour * _HOUR_S + local.minute * 60.0 + local.second

    def at(self, tour: DayTour, moment: datetime) -> int:
        hours = self.seconds(tour, moment) / _HOUR_S - self.first_hour
        return round(_BAR_UNITS * hours / (self.last_hour - self.first_hour))

    def ticks(self) -> tuple[tuple[int, str], ...]:
        span = self.last_hour - self.first_hour
        step = next(step for step in (1, 2, 3, 4, 6, 12, 24) if span / step <= _MOST_TICKS)
        hours = range(self.first_hour, self.last_hour + 1, step)
        return tuple(
            (round(_BAR_UNITS * (hour - self.first_hour) / span), f"{hour % 24:02d}")
            for hour in hours
        )


def _bar(tour: DayTour, scale: _DayScale) -> Bar:
    def span(first: datetime, last: datetime) -> tuple[int, int]:
        x = scale.at(tour, first)
        return x, scale.at(tour, last) - x

    waits = [span(stop.arrive, stop.start) for stop in tour.stops if stop.wait_s > 0]
    write_up = [span(tour.back, tour.finish)] if tour.write_up_s > 0 else []
    paths = {
        "wait": _path(waits, 4, 8),
        "write": _path(write_up, 4, 8),
        "work": _path([span(stop.start, stop.leave) for stop in tour.stops], 2, 12),
    }
    return Bar(
        line=_path([span(tour.depart, tour.back)], 7, 2),
        blocks=tuple((kind, path) for kind, path in paths.items() if path),
    )


def _stops_text(tour: DayTour, index: PlanIndex, figures: Figures) -> str:
    late = sum(lateness_s(index.visits[stop.visit_id], stop) > 0 for stop in tour.stops)
    count = str(len(tour.stops))
    return figures.words("stops_late", stops=count, late=late) if late else count


def _tour_row(
    plan: Plan, tour: DayTour, index: PlanIndex, slugs: Mapping[str, str], scale: _DayScale
) -> TourRow:
    figures = scale.figures
    person = slugs[tour.inspector_id]
    out = figures.clock(tour.depart, tour.day)
    back = figures.clock(tour.back, tour.day)
    return TourRow(
        tour=tour,
        look=looks_of(plan.programme.inspectors, tour.inspector_id, tour.day),
        date_short=figures.date_short(tour.day),
        inspector=index.inspectors[tour.inspector_id].name,
        day_href=page_name("day", tour.day, person),
        sheet_href=page_name("sheet", tour.day, person),
        out_back=figures.marked(f"{out}\u2013{back}"),
        cells=_cells([tour], figures, stops=_stops_text(tour, index, figures)),
        bar=_bar(tour, scale),
    )


def _cells(tours: Sequence[DayTour], figures: Figures, *, stops: str) -> tuple[str, ...]:
    """Return the figures of some tours together, in the order of ``_COLUMNS``."""

    def hours(seconds: float) -> str:
        return figures.words("hours_compact", hours=figures.compact(seconds))

    return (
        stops,
        figures.marked(hours(sum(tour.drive_s for tour in tours))),
        figures.length(sum(tour.dist_m for tour in tours)),
        hours(sum(tour.work_s for tour in tours)),
        figures.marked(hours(sum(tour.wait_s for tour in tours))),
        figures.marked(hours(sum(tour.overtime_s for tour in tours))),
        figures.money(sum(tour.cost for tour in tours)),
    )


def _unplaced_rows(plan: Plan, index: PlanIndex, figures: Figures) -> tuple[UnplacedRow, ...]:
    rows = []
    for left in plan.unplaced:
        site = index.sites.get(left.site_id)
        visit = index.visits.get(left.visit_id)
        rows.append(
            UnplacedRow(
                name=(site.name if site else "") or left.site_id,
                site_id=left.site_id,
                task=visit.task if visit else "",
                reason=figures.words(f"reason_{left.code.value}"),
                message=left.message,
            )
        )
    return tuple(rows)


def overview_view(
    plan: Plan, index: PlanIndex, slugs: Mapping[str, str], figures: Figures
) -> OverviewView:
    """Return what the overview of ``plan`` says; ``slugs`` are those of its inspectors."""
    words, capacity, programme = figures.words, plan.capacity, plan.programme
    scale = _DayScale.of(plan.tours, figures)
    visits, left = len(plan.visits), len(plan.unplaced)
    short = capacity.short_h > 0
    return OverviewView(
        title=words(
            "overview_title",
            first=figures.date_long(programme.first_date),
            last=figures.date_long(programme.last_date),
        ),
        unplaced=_unplaced_rows(plan, index, figures),
        placement=words("unplaced_count", count=left, visits=visits)
        if left
        else words("all_placed", visits=visits),
        capacity=words(
            "capacity_line",
            visits=capacity.visits,
            work=figures.hours(capacity.work_h),
            travel=figures.marked(figures.hours(capacity.least_travel_h)),
            shifts=capacity.shifts,
            shift=figures.hours(capacity.shift_h),
            overtime=figures.hours(capacity.overtime_h),
        ),
        capacity_verdict=words("capacity_short", short=figures.hours(capacity.short_h))
        if short
        else words("capacity_enough"),
        capacity_short=short,
        rows=tuple(_tour_row(plan, tour, index, slugs, scale) for tour in plan.tours),
        columns=tuple(words(key) for key in _COLUMNS),
        sums=_cells(plan.tours, figures, stops=str(sum(len(t.stops) for t in plan.tours))),
        drive_interval=figures.drive(sum(tour.drive_s for tour in plan.tours))
        if figures.has_interval
        else "",
        ticks=scale.ticks(),
    )
