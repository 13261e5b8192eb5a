"""Sections of the office page that have a plot: cost, stages, hours, balance, weeks."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.publishing.looks import looks_of
from georoute.publishing.office_tables import Row, Section, Table
from georoute.publishing.plots import bars, strip
from georoute.publishing.quality import (
    balance,
    cost_parts,
    hours_spent,
    undated,
    week_loads,
)

if TYPE_CHECKING:
    from collections.abc import Sequence

    from georoute.publishing.page_values import Edition
    from georoute.publishing.plots import BarPlot, StripPlot
    from georoute.publishing.quality import Balance, InspectorHours, Spread, WeekLoad

__all__ = ["OfficeParts"]

_HOUR_S = 3_600.0
_COST_KINDS = {"hours": "ink", "overtime": "dense", "distance": "hatch", "days": "hollow"}


class OfficeParts:
    """Makes these sections for one edition."""

    def __init__(self, edition: Edition) -> None:
        self._edition = edition
        self._figures = edition.figures
        self._words = edition.figures.words

    def _head(self, *keys: str) -> tuple[str, ...]:
        return tuple(self._words(key) for key in keys)

    def _money_word(self, key: str) -> str:
        return self._words("with_unit", word=self._words(key), unit=self._figures.currency)

    def cost(self) -> Section:
        """Return the cost by what is paid for."""
        words, figures = self._words, self._figures
        parts = cost_parts(self._edition.plan)
        total = sum(part.amount for part in parts)
        rows, pieces, start = [], [], 0.0
        for part in parts:
            kind = _COST_KINDS[part.kind]
            if part.kind == "days":
                # the number of days is no estimate
                quantity = str(round(part.quantity))
                amount = figures.plain_amount(part.amount)
            elif part.kind == "distance":
                quantity = figures.length(part.quantity * 1000)
                amount = figures.amount(part.amount)
            else:
                quantity = figures.marked(figures.hours(part.quantity))
                amount = figures.amount(part.amount)
            cells = (
                quantity,
                words(f"rate_{part.kind}", money=figures.plain_amount(part.rate)),
                amount,
                figures.share(part.amount, total),
            )
            rows.append(Row(name=words(f"cost_{part.kind}"), cells=cells, kind=kind))
            pieces.append((kind, start, start + part.amount))
            start += part.amount
        title = words("cost_parts")
        money = figures.money(total)
        return Section(
            key="cost",
            title=title,
            bar_plot=bars(
                [(words("all_tours"), money, pieces)], title=title, text=words("cost_plot")
            ),
            table=Table(
                head=(*self._head("part", "quantity", "rate"), self._money_word("amount"), "%"),
                rows=tuple(rows),
                total=Row(name=words("sum"), cells=("", "", figures.amount(total), "")),
            ),
        )

    def stages(self) -> Section:
        """Return the cost after each stage of the search."""
        words, figures, stages = self._words, self._figures, self._edition.plan.stages
        rows, plotted, before = [], [], None
        for stage in stages:
            key = f"stage_{stage.stage.replace(' ', '_')}"
            name = words.texts.get(key, stage.stage)
            change = "" if before is None else figures.change(stage.cost - before)
            rows.append(
                Row(name=name, cells=(figures.amount(stage.cost), change, str(stage.placed)))
            )
            first = stages[0].cost
            pieces = [("ink", 0.0, stage.cost), ("saved", stage.cost, first)]
            plotted.append((name, figures.money(stage.cost), pieces))
            before = stage.cost
        title = words("cost_by_stage")
        return Section(
            key="stages",
            title=title,
            bar_plot=bars(plotted, title=title, text=words("stages_plot")) if plotted else None,
            table=Table(
                head=(
                    words("stage"),
                    self._money_word("cost"),
                    self._money_word("change"),
                    words("placed"),
                ),
                rows=tuple(rows),
            ),
            notes=(words("stages_note"),),
        )

    def spent(self) -> Section:
        """Return where the hours go."""
        words, figures = self._words, self._figures
        spent = hours_spent(self._edition.plan)
        parts = (
            ("work", "ink", spent.work_s, False),
            ("access", "dense", spent.access_s, False),
            ("drive", "cord", spent.drive_s, True),
            ("wait", "hatch", spent.wait_s, True),
            ("write_up", "pale", spent.write_up_s, False),
        )
        rows, pieces, start = [], [], 0.0
        for key, kind, seconds, travel in parts:
            text = figures.duration(seconds)
            cells = (
                figures.marked(text) if travel else text,
                figures.share(seconds, spent.total_s),
            )
            rows.append(Row(name=words(key), cells=cells, kind=kind))
            pieces.append((kind, start, start + seconds))
            start += seconds
        total = figures.marked(figures.duration(spent.total_s))
        title = words("hours_spent")
        share = figures.marked(figures.share(spent.travel_share, 1.0))
        return Section(
            key="spent",
            title=title,
            lines=(words("travel_share_line", share=share),),
            bar_plot=bars(
                [(words("all_tours"), total, pieces)], title=title, text=words("spent_plot")
            ),
            table=Table(
                head=(words("spent_on"), words("hours"), "%"),
                rows=tuple(rows),
                total=Row(name=words("sum"), cells=(total, "")),
            ),
        )

    def _spread_cells(self, spread: Spread) -> tuple[str, ...]:
        figures = self._figures
        if not spread.count:
            return ("\u2013",) * 4
        values = (spread.least, spread.median, spread.most, spread.spread)
        return tuple(figures.marked(figures.compact(seconds)) for seconds in values)

    def _strip_row(
        self, row: InspectorHours
    ) -> tuple[str, str, tuple[int, bool], Sequence[tuple[float, str, str]], Spread]:
        words, figures = self._words, self._figures
        people = self._edition.plan.programme.inspectors
        look = looks_of(people, row.inspector_id, self._edition.plan.programme.first_date)
        marks = [
            (
                seconds / _HOUR_S,
                looks_of(people, row.inspector_id, day).mark,
                f"{figures.date_short(day)}: {figures.marked(figures.duration(seconds))}",
            )
            for day, seconds in row.days
        ]
        name = self._edition.index.inspectors[row.inspector_id].name
        total = figures.marked(figures.duration(row.total_s))
        figure = words("days_and_hours", count=len(row.days), hours=total)
        return name, figure, (look.hue, look.outlined), marks, row.spread.scaled(1 / _HOUR_S)

    def _strip(self, found: Balance) -> StripPlot:
        rows = [self._strip_row(row) for row in found.inspectors]
        return strip(rows, title=self._words("balance"), text=self._words("balance_plot"))

    def balance(self) -> Section:
        """Return how evenly the hours lie on inspectors and on their days."""
        words, figures = self._words, self._figures
        found = balance(self._edition.plan)
        rows = [
            Row(
                name=self._edition.index.inspectors[row.inspector_id].name,
                cells=(
                    str(len(row.days)),
                    *self._spread_cells(row.spread),
                    figures.marked(figures.compact(row.total_s)),
                ),
            )
            for row in found.inspectors
        ]
        days = Row(
            name=words("all_inspector_days"),
            cells=(
                str(found.per_day.count),
                *self._spread_cells(found.per_day),
                figures.marked(figures.compact(sum(row.total_s for row in found.inspectors))),
            ),
        )
        people = Row(
            name=words("per_inspector"), cells=("", *self._spread_cells(found.per_inspector), "")
        )
        return Section(
            key="balance",
            title=words("balance"),
            strip_plot=self._strip(found) if found.per_day.count else None,
            table=Table(
                head=self._head(
                    "inspector", "days", "least", "median", "most", "spread", "sum_hours"
                ),
                rows=(*rows, days, people),
            ),
            notes=(words("balance_note"), words("legend_weekday")),
        )

    def _week_name(self, load: WeekLoad) -> str:
        figures = self._figures
        return self._words(
            "week_name",
            week=load.week,
            first=figures.date_short(load.first),
            last=figures.date_short(load.last),
        )

    def _week_plot(self, loads: Sequence[WeekLoad]) -> BarPlot:
        words, figures = self._words, self._figures
        rows = []
        for load in loads:
            most = load.shift_s + load.overtime_s
            pieces = [
                ("frame", 0.0, load.shift_s),
                ("extra", load.shift_s, most),
                ("ink", 0.0, min(load.due_s, most)),
                ("beyond", most, load.due_s),
            ]
            text = words(
                "week_figure",
                due=figures.duration(load.due_s),
                shift=figures.duration(load.shift_s),
            )
            rows.append((self._week_name(load), text, pieces))
        return bars(rows, title=words("weeks"), text=words("weeks_plot"))

    def _week_rows(self, loads: Sequence[WeekLoad]) -> tuple[tuple[Row, ...], bool]:
        """Return the rows of the weeks, and whether hours are short in one of them."""
        figures, compact = self._figures, self._figures.compact
        rows, room_s, short = [], 0.0, False
        for load in loads:
            # hours left over serve a later week; work due cannot wait for one
            room_s += load.shift_s + load.overtime_s - load.due_s
            short = short or room_s < 0
            cells = (
                str(load.due_visits),
                compact(load.due_s),
                str(load.shifts),
                compact(load.shift_s),
                compact(load.overtime_s),
                compact(max(0.0, -room_s)),
                compact(load.placed_s),
                figures.marked(compact(load.drive_s)),
            )
            rows.append(Row(name=self._week_name(load), cells=cells))
        return tuple(rows), short

    def _capacity_lines(self, *, weeks_short: bool) -> tuple[str, str, str]:
        words, figures, capacity = self._words, self._figures, self._edition.plan.capacity
        sums = words(
            "capacity_line",
            visits=capacity.visits,
            work=figures.hours(capacity.work_h),
            travel=figures.marked(figures.hours(capacity.least_travel_h)),
            shifts=capacity.shifts,
            shift=figures.hours(capacity.shift_h),
            overtime=figures.hours(capacity.overtime_h),
        )
        verdict = (
            words("capacity_short", short=figures.hours(capacity.short_h))
            if capacity.short_h > 0
            else words("capacity_enough")
        )
        return sums, verdict, words("weeks_short" if weeks_short else "weeks_enough")

    def weeks(self) -> Section:
        """Return the work that falls due week by week against the hours of shifts."""
        words, figures, plan = self._words, self._figures, self._edition.plan
        loads, rest = week_loads(plan), undated(plan)
        rows, short = self._week_rows(loads)
        head = ("week", "due_visits", "due_hours", "shifts", "shift_hours", "overtime")
        return Section(
            key="weeks",
            title=words("weeks"),
            lines=self._capacity_lines(weeks_short=short),
            bar_plot=self._week_plot(loads),
            table=Table(head=self._head(*head, "short_so_far", "placed_hours", "drive"), rows=rows),
            notes=(
                words("weeks_note"),
                words(
                    "weeks_rest",
                    without=rest.without_date,
                    without_hours=figures.duration(rest.without_date_s),
                    later=rest.later,
                    later_hours=figures.duration(rest.later_s),
                ),
            ),
        )
