"""What a reader of a benchmark set gives the runner."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Protocol

from georoute.problem import Problem, Solution

__all__ = ["Instance", "Tour"]


@dataclass(frozen=True, kw_only=True)
class Tour:
    """One tour in the numbers of the instance file, start and end included."""

    places: tuple[int, ...]
    day: int | None = None
    base: int | None = None

    def line(self) -> str:
        """Return the line of a solution file."""
        head = []
        if self.day is not None:
            head.append(f"day={self.day}")
        if self.base is not None:
            head.append(f"base={self.base}")
        start = [" ".join(head) + ":"] if head else []
        return " ".join([*start, *map(str, self.places)])


class Instance(Protocol):
    """One published instance: the problem for the engine, and judgement apart from it.

    ``cost`` and ``violations`` work on the tours as they are written to a solution file, from
    the instance file in doubles under the rounding of its set; they use no array of the problem.
    """

    name: str
    size: int

    def problem(self) -> Problem:
        """Return the array problem: one unit of the instance is 10**6 ticks."""

    def tours(self, solution: Solution) -> tuple[Tour, ...]:
        """Return a solution of the problem in the numbers of the instance file."""

    def cost(self, tours: Sequence[Tour]) -> float:
        """Return what the tours cost."""

    def violations(self, tours: Sequence[Tour]) -> tuple[str, ...]:
        """Return every rule that the tours break, in words."""
