"""What a plan costs, by what it is paid for."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from georoute.domain.plan import Plan

__all__ = ["CostPart", "cost_parts"]

_HOUR_S = 3_600.0
_KM_M = 1_000.0


@dataclass(frozen=True, slots=True, kw_only=True)
class CostPart:
    """One part of the cost: so much of something, at so much each.

    ``kind`` is ``hours``, ``overtime``, ``distance`` or ``days``; ``quantity`` is in hours,
    hours, kilometres and days, ``rate`` in money for one of them.
    """

    kind: str
    quantity: float
    rate: float

    @property
    def amount(self) -> float:
        """Money for this part."""
        return self.quantity * self.rate


def cost_parts(plan: Plan) -> tuple[CostPart, ...]:
    """Return the four parts of the cost of all tours; their sum is the cost of the plan.

    Paid are the hours from leaving the base to the end of the write-up, waits included; what is
    overtime is paid at its own price instead. A day is opened by every tour.
    """
    tariff, tours = plan.programme.tariff, plan.tours
    overtime_h = sum(tour.overtime_s for tour in tours) / _HOUR_S
    all_h = sum(tour.duration_s for tour in tours) / _HOUR_S
    km = sum(tour.dist_m for tour in tours) / _KM_M
    return (
        CostPart(kind="hours", quantity=all_h - overtime_h, rate=tariff.hour),
        CostPart(kind="overtime", quantity=overtime_h, rate=tariff.overtime_hour),
        CostPart(kind="distance", quantity=km, rate=tariff.km),
        CostPart(kind="days", quantity=float(len(tours)), rate=tariff.day_opened),
    )
