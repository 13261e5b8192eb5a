"""How a tour is drawn: hue = inspector, dash and mark = weekday, the same on every page."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, NamedTuple

if TYPE_CHECKING:
    from collections.abc import Sequence
    from datetime import date

    from georoute.domain.people import Inspector

__all__ = ["HUES", "WEEKDAY_LOOKS", "TourLook", "WeekdayLook", "looks_of"]

HUES = ("#0072B2", "#009E73", "#CC79A7", "#E69F00", "#56B4E9", "#1E1E1E")
"""Okabe and Ito's set ("Color Universal Design", 2008) less yellow (faint on paper) and
vermillion, which is kept for late alone; the last is ink."""

_DASHES = ("18 4", "9 4", "2.5 4", "14 4 2.5 4", "9 3 2.5 3 2.5 3", "5 4 14 4", "4 9")
"""One pattern per weekday, Monday first. All are broken: straight legs are never a full line."""

_MARKS = ("circle", "square", "triangle", "diamond", "hexagon", "cross", "ring")


class WeekdayLook(NamedTuple):
    """What tells the weekday of a tour."""

    dash: str
    mark: str


WEEKDAY_LOOKS = tuple(map(WeekdayLook, _DASHES, _MARKS))
"""Monday first."""


@dataclass(frozen=True, slots=True)
class TourLook:
    """Hue number, whether the hue is used a second time (outlined), dash, and mark."""

    hue: int
    outlined: bool
    dash: str
    mark: str

    @property
    def symbol(self) -> str:
        """The id of the strand that shows this look in a table, whatever its hue."""
        return f"{self.mark}-outlined" if self.outlined else self.mark


def looks_of(inspectors: Sequence[Inspector], inspector_id: str, day: date) -> TourLook:
    """Return the look of one inspector's tour on one date."""
    place = [inspector.inspector_id for inspector in inspectors].index(inspector_id)
    return TourLook(
        hue=place % len(HUES),
        outlined=place >= len(HUES),
        dash=WEEKDAY_LOOKS[day.weekday()].dash,
        mark=WEEKDAY_LOOKS[day.weekday()].mark,
    )
