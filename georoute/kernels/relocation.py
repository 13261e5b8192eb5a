"""Moves between days: one visit to a better place, two visits swapped, a day closed.

Each kernel goes through its candidates, makes the first change that pays by the full clock, and
returns, so that the caller can log it, look at the time, and go on after it. The changed shifts
and their former orders are in ``step``.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.board import AT, COUNT, INFEASIBLE, MONEY, WHERE, WORK, Board
from georoute.kernels.day_step import (
    Step,
    begin_step,
    best_anywhere,
    has_place,
    is_better,
    step_in,
    step_out,
    undo_step,
)
from georoute.kernels.insertion import replaced

__all__ = ["close_day", "relocate_one", "swap_one"]


@kernel
def relocate_one(
    board: Board,
    step: Step,
    queue: NDArray[np.int64],
    begin: Int,
    end: Int,
    wide: Int,
) -> tuple[Int, bool]:
    """Find the first visit of ``queue[begin:end]`` that a better place is found for, and move it.

    A visit that is left out is put in wherever it fits at the least rise of money. ``wide`` as
    in ``best_anywhere``. Returns the place in the queue to go on from, and whether a visit was
    moved.
    """
    for i in range(begin, end):
        v = queue[i]
        begin_step(step)
        s = board.spot[v, WHERE]
        if s < 0:
            if has_place(board, step, v, np.int64(-1)):
                _, to, p = best_anywhere(
                    board, step, v, np.int64(-1), np.int64(-1), np.int64(1), np.int64(INFEASIBLE)
                )
                step_in(board, step, to, p, v)
                return np.int64(i + 1), True
            continue
        # In tours that have not changed since the last look there is still nothing better.
        since = step.settled[v] if step.changed[s] <= step.settled[v] else np.int64(-1)
        if since == step.size[2]:
            continue
        step_out(board, step, v)
        ceiling = step.money[s] - board.tour[s, MONEY]
        _, to, p = best_anywhere(board, step, v, np.int64(-1), since, wide, ceiling)
        if to >= 0:
            step_in(board, step, to, p, v)
            if is_better(board, step):
                return np.int64(i + 1), True
        undo_step(board, step)
        step.settled[v] = step.size[2]
    return np.int64(end), False


@kernel
def _swap_pays(board: Board, v: Int, u: Int) -> bool:
    """Tell whether ``v`` and ``u`` of different shifts do better in each other's place."""
    s = board.spot[v, WHERE]
    t = board.spot[u, WHERE]
    if not (board.eligible[v, t] and board.eligible[u, s]):
        return False
    k = board.spot[v, AT]
    j = board.spot[u, AT]
    whole = board.tour[s, MONEY] + board.tour[t, MONEY]
    first = replaced(board, s, k, u, whole)
    if first >= whole:
        return False
    second = replaced(board, t, j, v, whole - first)
    return second < whole - first


@kernel
def swap_one(
    board: Board,
    step: Step,
    queue: NDArray[np.int64],
    begin: Int,
    end: Int,
) -> tuple[Int, bool]:
    """Swap the first visit of ``queue[begin:end]`` that gains by it with one nearby.

    Both take each other's position. Returns as ``relocate_one`` does.
    """
    for i in range(begin, end):
        v = queue[i]
        s = board.spot[v, WHERE]
        if s < 0:
            continue
        since = step.unswapped[v] if step.changed[s] <= step.unswapped[v] else np.int64(-1)
        if since == step.size[2]:
            continue
        for c in range(board.near.shape[1]):
            u = board.near[v, c]
            t = board.spot[u, WHERE]
            if t < 0 or t == s or step.changed[t] <= since or not _swap_pays(board, v, u):
                continue
            k = board.spot[v, AT]
            j = board.spot[u, AT]
            begin_step(step)
            step_out(board, step, v)
            step_out(board, step, u)
            step_in(board, step, s, k, u)
            step_in(board, step, t, j, v)
            if is_better(board, step):
                return np.int64(i), True
            undo_step(board, step)
        step.unswapped[v] = step.size[2]
    begin_step(step)
    return np.int64(end), False


@kernel
def close_day(
    board: Board,
    step: Step,
    s: Int,
    spare: NDArray[np.int64],
    wide: Int,
) -> bool:
    """Empty shift ``s`` by giving its visits to others, if that pays; return whether it did.

    The longest work goes first. ``spare`` (int64, at least as long as the tour) is scratch;
    ``wide`` as in ``best_anywhere``.
    """
    begin_step(step)
    n = board.tour[s, COUNT]
    for k in range(n):
        spare[k] = board.stops[s, k]
    for i in range(1, n):
        v = spare[i]
        k = i - 1
        while k >= 0 and board.visit[spare[k], WORK] < board.visit[v, WORK]:
            spare[k + 1] = spare[k]
            k -= 1
        spare[k + 1] = v
    for i in range(n):
        step_out(board, step, spare[i])
    left = step.money[s] if n > 0 else np.int64(0)
    for i in range(n):
        v = spare[i]
        rise, to, p = best_anywhere(board, step, v, s, np.int64(-1), wide, left)
        if to < 0:
            undo_step(board, step)
            return False
        step_in(board, step, to, p, v)
        left -= rise
    if n > 0 and is_better(board, step):
        return True
    undo_step(board, step)
    return False
