"""The log of accepted exchanges in short: how many a tour saw, and what they did to its travel."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from georoute.domain.plan import Plan

__all__ = ["TourChanges", "tour_changes"]

_BETWEEN_DAYS = "relocate"


@dataclass(frozen=True, slots=True, kw_only=True)
class TourChanges:
    """Accepted exchanges of one tour; travel cost in money, before the first and after the last.

    ``within`` changed the order of the same visits, ``between`` took visits in or gave them to
    other days. A tour without any has no costs (``None``).
    """

    tour_id: str
    within: int
    between: int
    cost_first: float | None
    cost_last: float | None


def tour_changes(plan: Plan) -> tuple[TourChanges, ...]:
    """Return the log of each tour in short, in the order of the tours."""
    rows = []
    for tour in plan.tours:
        log = [entry for entry in plan.exchanges if entry.tour_id == tour.tour_id]
        between = sum(entry.kind == _BETWEEN_DAYS for entry in log)
        rows.append(
            TourChanges(
                tour_id=tour.tour_id,
                within=len(log) - between,
                between=between,
                cost_first=log[0].cost_before if log else None,
                cost_last=log[-1].cost_after if log else None,
            )
        )
    return tuple(rows)
