"""What a relocation did: the solution, and each change it kept, in order."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from georoute.kernels.board import COUNT, MONEY

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from georoute.kernels.board import Board
    from georoute.kernels.day_step import Step
    from georoute.problem import Solution

__all__ = ["Move", "RelocateResult", "read_move"]

Moved = tuple[int, int, int]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Move:
    """One change that was kept.

    ``kind`` is ``take_out`` (a tour broke a limit), ``put_in``, ``relocate``, ``swap``,
    ``close_day``, ``make_room``, ``push_out`` or ``rearrange``. ``visits`` holds
    ``(visit, from shift, to shift)`` with -1 for not placed; it is empty where only the order
    within a tour changed. ``tours`` holds ``(shift, order before, order after)`` of each tour
    changed. Costs are the money of all tours, in micro-units.
    """

    kind: str
    visits: tuple[Moved, ...]
    tours: tuple[tuple[int, NDArray[np.int64], NDArray[np.int64]], ...]
    cost_before: int
    cost_after: int


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class RelocateResult:
    """A solution that keeps every limit, and how it came about.

    ``stopped`` tells that the caller ended the search before its effort was used.
    """

    solution: Solution
    moves: tuple[Move, ...]
    stopped: bool


def read_move(kind: str, board: Board, step: Step, *, cost_before: int) -> Move:
    """Return what the step just kept has changed."""
    tours = []
    came_from: dict[int, int] = {}
    now_at: dict[int, int] = {}
    cost = cost_before
    for s in step.touched[: step.size[0]].tolist():
        before = step.stops[s, : step.sizes[s]].copy()
        after = board.stops[s, : board.tour[s, COUNT]].copy()
        tours.append((s, before, after))
        came_from.update(dict.fromkeys(before.tolist(), s))
        now_at.update(dict.fromkeys(after.tolist(), s))
        cost += int(board.tour[s, MONEY]) - int(step.money[s])
    visits = tuple(
        (v, came_from.get(v, -1), now_at.get(v, -1))
        for v in sorted(came_from.keys() | now_at.keys())
        if came_from.get(v, -1) != now_at.get(v, -1)
    )
    return Move(
        kind=kind, visits=visits, tours=tuple(tours), cost_before=cost_before, cost_after=cost
    )
