"""What to search for, how hard, and the two callables a caller hands in to watch and to stop it."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import Protocol

__all__ = [
    "EFFORTS",
    "Aim",
    "Effort",
    "EffortName",
    "Progress",
    "ShouldStop",
    "never_stop",
    "no_progress",
]


class Aim(StrEnum):
    """What decides between plans that leave out the same visits.

    ``LEAST_COST``: money. ``FEWEST_DAYS``: the number of days on which an inspector goes out,
    summed over inspectors; money decides between equals.
    """

    LEAST_COST = "least_cost"
    FEWEST_DAYS = "fewest_days"


class EffortName(StrEnum):
    """The efforts on offer."""

    QUICK = "quick"
    NORMAL = "normal"
    THOROUGH = "thorough"


@dataclass(frozen=True, slots=True, kw_only=True)
class Effort:
    """The budget of a search.

    The default budget is counted in iterations, so that the same inputs give the same plan.
    ``seconds`` is the user's choice of a wall-clock limit on top; a plan that ends on it says so.
    """

    name: str
    kicks_per_stop: int
    relocation_rounds: int
    seconds: float | None = None
    improve_steps: int = 0


EFFORTS: dict[str, Effort] = {
    effort.name: effort
    for effort in (
        Effort(name=EffortName.QUICK, kicks_per_stop=10, relocation_rounds=20, improve_steps=60),
        Effort(name=EffortName.NORMAL, kicks_per_stop=50, relocation_rounds=100, improve_steps=600),
        Effort(
            name=EffortName.THOROUGH,
            kicks_per_stop=2_000,
            relocation_rounds=1_000,
            improve_steps=20_000,
        ),
    )
}


class Progress(Protocol):
    """Called often during long work; must return quickly.

    ``fraction`` is the share of the stage done, 0 to 1; ``cost`` and ``best_cost`` are money.
    """

    def __call__(
        self,
        stage: str,
        *,
        fraction: float,
        cost: float | None = None,
        best_cost: float | None = None,
    ) -> None:
        """Take one report of progress."""


class ShouldStop(Protocol):
    """Asked often during long work; true means: end now with the best found so far."""

    def __call__(self) -> bool:
        """Tell whether the caller wants the search to end."""


def no_progress(
    stage: str, *, fraction: float, cost: float | None = None, best_cost: float | None = None
) -> None:
    """Ignore a report of progress."""


def never_stop() -> bool:
    """Never ask the search to end."""
    return False
