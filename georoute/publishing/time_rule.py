"""The time rule of a day: where blocks, waits, brackets and ticks lie, in per cent of its width."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, timedelta
from typing import TYPE_CHECKING

from georoute.domain.instants import elapsed_s

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence
    from datetime import datetime

    from georoute.domain.people import Shift
    from georoute.domain.plan import DayTour
    from georoute.domain.sites import Visit
    from georoute.publishing.figures import Figures

__all__ = ["Block", "Bracket", "Tick", "TimeRule", "time_axis", "time_rule"]

_HOUR_S = 3600.0
_WHOLE = 100.0
_DIGIT = 1.05
"""Share of the rule (per cent) that a digit takes; a narrower block wears its number above."""
_LABEL_ROOM = 2.2
"""Room for the number of a bracket (per cent), so that brackets in one lane do not touch."""
_MOST_HOURS = 14
"""Longer days tell every second hour, or fewer."""
_SLACK_ROOM = 9.0
"""Slack narrower than this (per cent) has no words in it."""


@dataclass(frozen=True, slots=True)
class Block:
    """A stretch of the day. ``kind``: ``work``, ``late``, ``wait`` or ``write_up``."""

    kind: str
    x: float
    width: float
    text: str = ""
    above: bool = False

    @property
    def middle(self) -> float:
        """Where the middle of the block is."""
        return self.x + self.width / 2


@dataclass(frozen=True, slots=True)
class Bracket:
    """Opening hours of a stop, above the rule in a lane of its own (0 is the lowest)."""

    number: int
    x: float
    width: float
    lane: int
    late: bool

    @property
    def end(self) -> float:
        """Where the bracket ends."""
        return self.x + self.width


@dataclass(frozen=True, slots=True)
class Tick:
    """A tick of the hour scale; only whole hours carry a text."""

    x: float
    text: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeRule:
    """The whole rule; every place is in per cent of its width."""

    ticks: tuple[Tick, ...]
    blocks: tuple[Block, ...]
    brackets: tuple[Bracket, ...]
    lanes: int
    drive_x: float
    drive_width: float
    frame_x: float
    frame_width: float
    frame_text: str
    slack: Block | None

    @property
    def has_above(self) -> bool:
        """Whether some number stands above its block."""
        return any(block.above for block in self.blocks)


@dataclass(frozen=True, slots=True)
class _Axis:
    start: datetime
    length_s: float

    def at(self, moment: datetime) -> float:
        share = (moment - self.start).total_seconds() / self.length_s
        return round(_WHOLE * min(1.0, max(0.0, share)), 3)

    def span(self, start: datetime, end: datetime) -> tuple[float, float]:
        x = self.at(start)
        return x, round(self.at(end) - x, 3)


def time_axis(first: datetime, last: datetime, figures: Figures) -> tuple[datetime, datetime]:
    """Return whole local hours around a stretch of time, as instants in UTC."""
    local = first.astimezone(figures.zone)
    start = local.replace(minute=0, second=0, microsecond=0).astimezone(UTC)
    hours = -(-(last.astimezone(UTC) - start).total_seconds() // _HOUR_S)
    return start, start + timedelta(hours=max(1.0, hours))


def _ticks(start: datetime, end: datetime, axis: _Axis, figures: Figures) -> tuple[Tick, ...]:
    ticks = []
    quarters = round((end - start).total_seconds() / (_HOUR_S / 4))
    hours = quarters / 4
    step = next((step for step in (1, 2, 3, 4, 6, 12) if hours / step <= _MOST_HOURS), 24)
    for quarter in range(quarters + 1):
        moment = start + timedelta(minutes=15 * quarter)
        whole = quarter % 4 == 0
        told = whole and quarter % (4 * step) == 0
        text = f"{moment.astimezone(figures.zone):%H:%M}" if told else ""
        ticks.append(Tick(axis.at(moment), text))
    return tuple(ticks)


def _blocks(tour: DayTour, states: Sequence[str], axis: _Axis) -> tuple[Block, ...]:
    blocks = []
    taken = 0.0
    for stop, state in zip(tour.stops, states, strict=True):
        if stop.wait_s > 0:
            blocks.append(Block("wait", *axis.span(stop.arrive, stop.start)))
        x, width = axis.span(stop.start, stop.leave)
        kind = "late" if state == "late" else "work"
        text = str(stop.order)
        room = _DIGIT * len(text)
        above = width < room
        if above and x + width / 2 - room / 2 < taken:
            text = ""  # no room beside the number before it; the run list has them all
        elif above:
            taken = x + width / 2 + room / 2
        blocks.append(Block(kind, x, width, text, above))
    if tour.write_up_s > 0:
        blocks.append(Block("write_up", *axis.span(tour.back, tour.finish)))
    return tuple(blocks)


def _brackets(
    tour: DayTour, visits: Mapping[str, Visit], states: Sequence[str], axis: _Axis
) -> tuple[tuple[Bracket, ...], int]:
    """Lay out opening hours that bind: those that do not cover the whole tour."""
    wanted = []
    for stop, state in zip(tour.stops, states, strict=True):
        for span in visits[stop.visit_id].open_intervals:
            apart = span.closes <= axis.start or axis.at(span.opens) >= _WHOLE
            covers = span.opens <= tour.depart and span.closes >= tour.back
            if not apart and not covers:
                x, width = axis.span(span.opens, span.closes)
                wanted.append((x, width, stop.order, state == "late"))
    lane_ends: list[float] = []
    brackets = []
    for x, width, number, late in sorted(wanted):
        lane = next((k for k, end in enumerate(lane_ends) if end + _LABEL_ROOM < x), len(lane_ends))
        if lane == len(lane_ends):
            lane_ends.append(0.0)
        lane_ends[lane] = x + width
        brackets.append(Bracket(number, x, width, lane, late))
    return tuple(brackets), len(lane_ends)


def time_rule(
    tour: DayTour,
    shift: Shift | None,
    visits: Mapping[str, Visit],
    states: Sequence[str],
    figures: Figures,
) -> TimeRule:
    """Lay out the time rule of ``tour``; ``states`` are those of its stops, in order."""
    frame_start = shift.earliest_start if shift else tour.depart
    frame_end = shift.latest_end if shift else tour.finish
    start, end = time_axis(min(frame_start, tour.depart), max(frame_end, tour.finish), figures)
    axis = _Axis(start, (end - start).total_seconds())
    brackets, lanes = _brackets(tour, visits, states, axis)
    drive_x, drive_width = axis.span(tour.depart, tour.back)
    frame_x, frame_width = axis.span(frame_start, frame_end)
    x, width = axis.span(tour.finish, frame_end)
    spare = figures.marked(figures.duration(elapsed_s(tour.finish, frame_end)))
    slack = Block("slack", x, width, figures.words("slack", time=spare))
    return TimeRule(
        ticks=_ticks(start, end, axis, figures),
        blocks=_blocks(tour, states, axis),
        brackets=brackets,
        lanes=lanes,
        drive_x=drive_x,
        drive_width=drive_width,
        frame_x=frame_x,
        frame_width=frame_width,
        frame_text=figures.words(
            "shift_frame",
            start=figures.clock(frame_start, tour.day),
            end=figures.clock(frame_end, tour.day),
        ),
        slack=slack if width >= _SLACK_ROOM else None,
    )
