"""Small plots of the office page: where their bars, frames and marks lie.

Every place across is in per cent of the width, so that a plot fills a phone and a desk alike
while its words keep their size. What a plot shows stands in a table beside it too.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Sequence

    from georoute.publishing.quality import Spread

__all__ = ["BarPlot", "BarRow", "Piece", "StripMark", "StripPlot", "StripRow", "bars", "strip"]

_WHOLE = 100.0
_EDGE = 4.0
"""Per cent kept free at either end of a strip, so that marks and hours are not cut."""
_MOST_TICKS = 7


def _places(value: float) -> float:
    return round(value, 2)


@dataclass(frozen=True, slots=True)
class Piece:
    """A stretch of a bar. ``kind`` names how it is drawn (``ink``, ``frame``, ``hatch`` …)."""

    kind: str
    x: float
    width: float


@dataclass(frozen=True, slots=True, kw_only=True)
class BarRow:
    """One bar with a name above and a figure below it."""

    name: str
    figure: str
    pieces: tuple[Piece, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class BarPlot:
    """Bars on one scale; ``text`` tells in a sentence what they show."""

    title: str
    text: str
    rows: tuple[BarRow, ...]


def bars(
    rows: Sequence[tuple[str, str, Sequence[tuple[str, float, float]]]], *, title: str, text: str
) -> BarPlot:
    """Lay out bars: each row is a name, a figure, and pieces as (kind, from, to) in one unit.

    Pieces without length are left out. The farthest end of all pieces is the whole width.
    """
    ends = [to for _, _, pieces in rows for _, _, to in pieces]
    scale = _WHOLE / max(ends, default=0.0) if max(ends, default=0.0) > 0 else 0.0
    laid = tuple(
        BarRow(
            name=name,
            figure=figure,
            pieces=tuple(
                Piece(kind, _places(start * scale), _places((to - start) * scale))
                for kind, start, to in pieces
                if to > start
            ),
        )
        for name, figure, pieces in rows
    )
    return BarPlot(title=title, text=text, rows=laid)


@dataclass(frozen=True, slots=True)
class StripMark:
    """One day on a strip: where, how it is drawn, and what it is."""

    x: float
    mark: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class StripRow:
    """The days of one inspector on the scale of hours; ``median`` is a place like ``x``."""

    name: str
    figure: str
    hue: int
    outlined: bool
    marks: tuple[StripMark, ...]
    line: Piece | None
    median: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class StripPlot:
    """Days as marks on a scale of hours, one row an inspector; ``ticks`` are (place, hour)."""

    title: str
    text: str
    rows: tuple[StripRow, ...]
    ticks: tuple[tuple[float, str], ...]


@dataclass(frozen=True, slots=True)
class _Scale:
    first: int
    last: int

    def at(self, hours: float) -> float:
        share = (hours - self.first) / (self.last - self.first)
        return _places(_EDGE + (_WHOLE - 2 * _EDGE) * share)

    def ticks(self) -> tuple[tuple[float, str], ...]:
        span = self.last - self.first
        step = next(step for step in (1, 2, 3, 4, 6, 12, 24, span) if span / step <= _MOST_TICKS)
        hours = range(self.first, self.last + 1, step)
        return tuple((self.at(hour), str(hour)) for hour in hours)


def strip(
    rows: Sequence[tuple[str, str, tuple[int, bool], Sequence[tuple[float, str, str]], Spread]],
    *,
    title: str,
    text: str,
) -> StripPlot:
    """Lay out strips: each row is name, figure, (hue, outlined), marks, and their spread.

    Marks are (hours, mark, text); the spread is in hours too.
    """
    hours = [at for _, _, _, marks, _ in rows for at, _, _ in marks]
    first = math.floor(min(hours, default=0.0))
    scale = _Scale(first, max(math.ceil(max(hours, default=1.0)), first + 1))
    laid = []
    for name, figure, (hue, outlined), marks, spread in rows:
        start, end = scale.at(spread.least), scale.at(spread.most)
        laid.append(
            StripRow(
                name=name,
                figure=figure,
                hue=hue,
                outlined=outlined,
                marks=tuple(StripMark(scale.at(at), mark, note) for at, mark, note in marks),
                line=Piece("line", start, _places(end - start)) if marks else None,
                median=scale.at(spread.median) if marks else None,
            )
        )
    return StripPlot(title=title, text=text, rows=tuple(laid), ticks=scale.ticks())
