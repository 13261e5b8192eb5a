"""The trail of accepted changes that a person can follow."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.sequence.result import Step

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

__all__ = ["Trail"]

SHORT_CHAIN = 3
"""Stops that an Or-opt move takes together at most."""


class Trail:
    """Collects the steps of one day; keeps nothing when ``kept`` is false.

    ``to_order`` gives the visits of a tour, ``to_money`` the money of its cost.
    """

    def __init__(
        self,
        to_order: Callable[[NDArray[np.int64]], NDArray[np.int64]],
        to_money: Callable[[int], int] = int,
        *,
        kept: bool,
    ) -> None:
        self._to_order = to_order
        self._to_money = to_money
        self._tour: NDArray[np.int64] = np.empty(0, np.int64)
        self._cost = 0
        self.kept = kept
        self.steps: list[Step] = []

    def begin(self, tour: NDArray[np.int64], cost: int) -> None:
        """Take ``tour`` of ``cost`` as what the first step starts from."""
        self._tour = tour.copy()
        self._cost = cost

    def note(self, kind: str, tour: NDArray[np.int64], cost: int) -> None:
        """Note that ``tour`` of ``cost`` was accepted, unless it is the one before."""
        if not self.kept or np.array_equal(tour, self._tour):
            return
        self.steps.append(
            Step(
                kind=kind,
                order_before=self._to_order(self._tour),
                order_after=self._to_order(tour),
                cost_before=self._to_money(self._cost),
                cost_after=self._to_money(cost),
            )
        )
        self.begin(tour, cost)

    def note_exchange(self, tour: NDArray[np.int64], cost: int) -> None:
        """Note an exchange whose kind follows from the legs that went."""
        if self.kept:
            self.note(_kind(self._tour, tour), tour, cost)


def _kind(before: NDArray[np.int64], after: NDArray[np.int64]) -> str:
    """Name the exchange between two closed tours in which direction does not matter."""
    kept = {frozenset(leg) for leg in zip(after, np.roll(after, -1), strict=True)}
    legs = zip(before, np.roll(before, -1), strict=True)
    cuts = [k for k, leg in enumerate(legs) if frozenset(leg) not in kept]
    if len(cuts) == 2:  # noqa: PLR2004 - the two legs of a 2-exchange
        return "two_opt"
    if len(cuts) > 3:  # noqa: PLR2004 - the three legs of a 3-exchange
        return "lin_kernighan"
    sizes = np.diff([*cuts, cuts[0] + before.shape[0]])
    return "or_opt" if sizes.min() <= SHORT_CHAIN else "or_3opt"
