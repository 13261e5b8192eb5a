"""Sections of the office page that are words and a table: reasons, dates, shape, exchanges."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from georoute.publishing.names import page_name
from georoute.publishing.quality import NEAR_M, date_record, shape, tour_changes

if TYPE_CHECKING:
    from georoute.domain.plan import DayTour, Unplaced
    from georoute.publishing.page_values import Edition
    from georoute.publishing.plots import BarPlot, StripPlot
    from georoute.publishing.quality import DateRecord

__all__ = ["OfficeTables", "Row", "Section", "Table", "tour_row"]

_MOST_NAMES = 30
"""So many visits are named under a reason; the overview has them all."""
_MOST_PAST_DUE = 20
"""So many visits past their due date are in the table, the worst first."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """A row of a table; ``kind`` names the sign of its part of a plot, ``href`` a day page."""

    name: str
    cells: tuple[str, ...]
    kind: str = ""
    href: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A table; ``wordy`` are the columns (from 0) that hold words, not figures."""

    head: tuple[str, ...]
    rows: tuple[Row, ...]
    total: Row | None = None
    wordy: frozenset[int] = frozenset()


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """A section: sentences, a plot, the table that says the same, and notes below it."""

    key: str
    title: str
    lines: tuple[str, ...] = ()
    bar_plot: BarPlot | None = None
    strip_plot: StripPlot | None = None
    table: Table | None = None
    notes: tuple[str, ...] = ()


def tour_row(edition: Edition, tour: DayTour, cells: tuple[str, ...]) -> Row:
    """Return a row that names a tour and leads to its page."""
    name = edition.index.inspectors[tour.inspector_id].name
    return Row(
        name=f"{edition.figures.date_short(tour.day)}, {name}",
        cells=cells,
        href=page_name("day", tour.day, edition.slugs[tour.inspector_id]),
    )


class OfficeTables:
    """Makes these sections for one edition."""

    def __init__(self, edition: Edition) -> None:
        self._edition = edition
        self._figures = edition.figures
        self._words = edition.figures.words

    def _head(self, *keys: str) -> tuple[str, ...]:
        return tuple(self._words(key) for key in keys)

    def _site_name(self, site_id: str) -> str:
        site = self._edition.index.sites.get(site_id)
        return (site.name if site else "") or site_id

    def left(self) -> Section:
        """Return how many visits are not placed for which reason, and which."""
        words = self._words
        by_reason: dict[str, list[Unplaced]] = {}
        for entry in self._edition.plan.unplaced:
            by_reason.setdefault(words(f"reason_{entry.code.value}"), []).append(entry)
        rows = []
        for reason, entries in sorted(by_reason.items(), key=lambda item: -len(item[1])):
            names = [f"{self._site_name(e.site_id)} ({e.site_id})" for e in entries[:_MOST_NAMES]]
            if len(entries) > _MOST_NAMES:
                names.append(words("and_more", count=len(entries) - _MOST_NAMES))
            rows.append(Row(name=reason, cells=(str(len(entries)), "; ".join(names))))
        return Section(
            key="left",
            title=words("left_by_reason"),
            table=Table(
                head=self._head("reason", "visits", "sites"), rows=tuple(rows), wordy=frozenset({2})
            ),
            notes=(words("left_note"),),
        )

    def _date_lines(self, record: DateRecord) -> tuple[str, ...]:
        words = self._words
        lines = [
            words("past_due", count=len(record.past_due), days=record.past_due[0].days)
            if record.past_due
            else words("none_past_due"),
            words("overdue_before", count=record.overdue_before, left=record.overdue_left),
            words("left_due", count=record.left_due),
        ]
        if record.past_latest:
            lines.append(words("past_latest", count=record.past_latest))
        if record.late_stops:
            worst = self._figures.minutes(record.worst_late_s)
            lines.append(words("late_stops", count=record.late_stops, minutes=worst))
        else:
            lines.append(words("none_late"))
        return tuple(lines)

    def dates(self) -> Section:
        """Return how the plan keeps due dates and opening hours, with the worst visits."""
        words, figures, index = self._words, self._figures, self._edition.index
        record = date_record(self._edition.plan)
        rows = []
        for entry in record.past_due[:_MOST_PAST_DUE]:
            visit = index.visits[entry.visit_id]
            name = f"{self._site_name(visit.site_id)} ({visit.site_id}), {visit.task}"
            dates = (figures.date_short(entry.due), figures.date_short(entry.day))
            rows.append(Row(name=name, cells=(*dates, str(entry.days))))
        more = len(record.past_due) - len(rows)
        return Section(
            key="dates",
            title=words("dates"),
            lines=self._date_lines(record),
            table=Table(head=self._head("visit", "due", "visited", "days_late"), rows=tuple(rows))
            if rows
            else None,
            notes=(words("and_more", count=more),) if more else (),
        )

    def shape(self) -> Section:
        """Return how tight the tours are and whether they get in each other's way."""
        words, figures, plan = self._words, self._figures, self._edition.plan
        found = shape(plan)
        rows = tuple(
            tour_row(
                self._edition,
                tour,
                (
                    figures.metres(entry.mean_to_centre_m),
                    words("yes") if entry.crosses else words("no"),
                ),
            )
            for tour, entry in zip(plan.tours, found.tours, strict=True)
        )
        near = figures.metres(NEAR_M)
        return Section(
            key="shape",
            title=words("shape"),
            lines=(
                words("shape_mean", length=figures.metres(found.mean_to_centre_m)),
                words("shape_near", pairs=found.near_pairs, stops=found.near_stops, near=near),
                words("shape_crossing", count=found.crossing, tours=len(plan.tours)),
            ),
            table=Table(head=self._head("tour", "to_centre", "crosses"), rows=rows)
            if rows
            else None,
            notes=(words("shape_note"),),
        )

    def changes(self) -> Section:
        """Return the exchange log in short."""
        words, figures, plan = self._words, self._figures, self._edition.plan
        rows = []
        for tour, entry in zip(plan.tours, tour_changes(plan), strict=True):
            costs = tuple(
                "\u2013" if cost is None else figures.amount(cost)
                for cost in (entry.cost_first, entry.cost_last)
            )
            cells = (str(entry.within), str(entry.between), *costs)
            rows.append(tour_row(self._edition, tour, cells))
        money = [
            words("with_unit", word=words(key), unit=figures.currency)
            for key in ("travel_first", "travel_last")
        ]
        return Section(
            key="changes",
            title=words("changes"),
            table=Table(
                head=(*self._head("tour", "within_day", "between_days"), *money), rows=tuple(rows)
            )
            if rows
            else None,
            notes=(words("changes_note"),),
        )
