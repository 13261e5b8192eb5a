"""The log of accepted exchanges: which legs went, which came, and what that did to the cost.

The stages hand over orders before and after; the legs are what differs between the two.
"""

from __future__ import annotations

from collections import Counter
from itertools import pairwise
from typing import TYPE_CHECKING

from georoute.domain.plan import Exchange
from georoute.kernels.arrays import leg_mm, leg_ms
from georoute.problem import MICRO

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from georoute.problem import Packed

__all__ = ["ExchangeLog"]

Order = tuple[int, ...]
LegIndex = tuple[int, int]


class ExchangeLog:
    """Collects the exchanges of every tour, in the order in which they were accepted."""

    def __init__(self, packed: Packed) -> None:
        self._packed = packed
        self._last: dict[int, Order] = {}
        self._entries: dict[int, list[Exchange]] = {}
        time_ms = packed.problem.travel.time_ms
        length_mm = packed.problem.travel.length_mm
        self._symmetric = bool((time_ms == time_ms.T).all() and (length_mm == length_mm.T).all())

    def begin(self, shift: int, order: NDArray[np.int64]) -> None:
        """Take ``order`` as where the log of ``shift`` starts."""
        self._last[shift] = tuple(order.tolist())
        self._entries[shift] = []

    def add(self, shift: int, kind: str, order: NDArray[np.int64]) -> None:
        """Log that the order of ``shift`` became ``order``; nothing where its legs are the same."""
        after = tuple(order.tolist())
        before = self._last[shift]
        legs_before, legs_after = self._legs(shift, before), self._legs(shift, after)
        out, into = legs_before - legs_after, legs_after - legs_before
        if not out and not into:
            return
        self._last[shift] = after
        entries = self._entries[shift]
        entries.append(
            Exchange(
                tour_id=self._packed.shifts[shift].shift_id,
                step=len(entries) + 1,
                kind=kind,
                legs_out=self._named(out),
                legs_in=self._named(into),
                cost_before=self._travel_cost(shift, before),
                cost_after=self._travel_cost(shift, after),
            )
        )

    def entries(self, shift: int) -> tuple[Exchange, ...]:
        """Return the log of one shift."""
        return tuple(self._entries.get(shift, ()))

    def _places(self, shift: int, order: Order) -> list[int]:
        problem = self._packed.problem
        if not order:
            return []
        return [
            int(problem.shifts.start_place[shift]),
            *(int(problem.visits.place[v]) for v in order),
            int(problem.shifts.end_place[shift]),
        ]

    def _legs(self, shift: int, order: Order) -> Counter[LegIndex]:
        """Return the legs of an order; where direction is free, the smaller place comes first."""
        legs = pairwise(self._places(shift, order))
        if self._symmetric:
            return Counter((min(leg), max(leg)) for leg in legs)
        return Counter(legs)

    def _named(self, legs: Counter[LegIndex]) -> tuple[tuple[str, str], ...]:
        ids = self._packed.place_ids
        return tuple((ids[i], ids[j]) for i, j in sorted(legs.elements()))

    def _travel_cost(self, shift: int, order: Order) -> float:
        problem = self._packed.problem
        legs = list(pairwise(self._places(shift, order)))
        drive_ms = sum(int(leg_ms(problem.travel, i, j)) for i, j in legs)
        dist_mm = sum(int(leg_mm(problem.travel, i, j)) for i, j in legs)
        rates = problem.shifts
        money = rates.hour_rate[shift] * drive_ms + rates.length_rate[shift] * dist_mm
        return round(float(money)) / MICRO
