"""A step that may be taken back: changes of several tours, judged together.

A step is worth keeping when less is left out, or as much for less money. What is left out is
compared class by class, the first class outweighing all later ones.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.board import (
    AMOUNT,
    COUNT,
    FITS,
    INFEASIBLE,
    KIND,
    MONEY,
    WHERE,
    Board,
    put_in,
    refresh,
    take_out,
)
from georoute.kernels.insertion import best_place

__all__ = [
    "Step",
    "begin_step",
    "best_anywhere",
    "has_place",
    "is_better",
    "keep_step",
    "step_in",
    "step_out",
    "undo_step",
]


class Step(NamedTuple):
    """What has to be known to take a step back. All int64.

    ``touched`` (S,): shifts changed, the first ``size[0]`` of them; ``is_touched`` (S,) marks
    them. ``stops`` (S, W), ``sizes`` (S,), ``money`` (S,): their rows before the step.
    ``lost`` (C,): change of the loss of each class. ``seen`` (S,) and ``size[1]``: marks of the
    shifts looked at in one search for a place. ``size[2]`` counts the steps kept; ``changed``
    (S,): its value when each shift was last changed; ``stuck``, ``settled`` and ``unswapped``
    (V,): its value when a visit was last found to have no place in another tour, no better
    place, no better partner.
    """

    touched: NDArray[np.int64]
    size: NDArray[np.int64]
    is_touched: NDArray[np.int64]
    stops: NDArray[np.int64]
    sizes: NDArray[np.int64]
    money: NDArray[np.int64]
    lost: NDArray[np.int64]
    seen: NDArray[np.int64]
    changed: NDArray[np.int64]
    stuck: NDArray[np.int64]
    settled: NDArray[np.int64]
    unswapped: NDArray[np.int64]


@kernel
def begin_step(step: Step) -> None:
    """Start a step; whatever was changed before stays."""
    for k in range(step.size[0]):
        step.is_touched[step.touched[k]] = 0
    step.size[0] = 0
    step.lost[:] = 0


@kernel
def keep_step(step: Step) -> None:
    """Keep what the step did, and note which shifts it changed."""
    step.size[2] += 1
    for k in range(step.size[0]):
        step.changed[step.touched[k]] = step.size[2]
    begin_step(step)


@kernel
def _touch(board: Board, step: Step, s: Int) -> None:
    """Keep the row of shift ``s`` as it was, once a step."""
    if step.is_touched[s] == 0:
        step.is_touched[s] = 1
        step.touched[step.size[0]] = s
        step.size[0] += 1
        n = board.tour[s, COUNT]
        step.sizes[s] = n
        step.money[s] = board.tour[s, MONEY]
        for k in range(n):
            step.stops[s, k] = board.stops[s, k]


@kernel
def step_out(board: Board, step: Step, v: Int) -> None:
    """Take visit ``v`` out as part of the step."""
    _touch(board, step, board.spot[v, WHERE])
    take_out(board, v)
    step.lost[board.visit[v, KIND]] += board.visit[v, AMOUNT]


@kernel
def step_in(
    board: Board,
    step: Step,
    s: Int,
    p: Int,
    v: Int,
) -> None:
    """Put visit ``v`` in as part of the step."""
    _touch(board, step, s)
    put_in(board, s, p, v)
    step.lost[board.visit[v, KIND]] -= board.visit[v, AMOUNT]


@kernel
def undo_step(board: Board, step: Step) -> None:
    """Take the whole step back."""
    for k in range(step.size[0]):
        s = step.touched[k]
        for i in range(board.tour[s, COUNT]):
            board.spot[board.stops[s, i], WHERE] = -1
    for k in range(step.size[0]):
        s = step.touched[k]
        board.tour[s, COUNT] = step.sizes[s]
        for i in range(step.sizes[s]):
            board.stops[s, i] = step.stops[s, i]
        refresh(board, s)
    begin_step(step)


@kernel
def is_better(board: Board, step: Step) -> bool:
    """Tell whether the step leaves less out, or as much for less money, and all tours fit."""
    rise = np.int64(0)
    for k in range(step.size[0]):
        s = step.touched[k]
        if board.tour[s, FITS] == 0:
            return False
        rise += board.tour[s, MONEY] - step.money[s]
    for c in range(step.lost.shape[0]):
        if step.lost[c] != 0:
            return bool(step.lost[c] < 0)
    return bool(rise < 0)


@kernel
def best_anywhere(
    board: Board, step: Step, v: Int, barred: Int, since: Int, wide: Int, ceiling: Int
) -> tuple[Int, Int, Int]:
    """Return the least rise of money by visit ``v``, with its shift and position there.

    Shift ``barred`` (-1: none) is left alone, and so are shifts unchanged after ``since``
    (-1: none). ``wide`` 0 looks at the tours of nearby visits and at empty shifts only. Ties go
    to the first shift. ``INFEASIBLE``, -1, -1 where there is no place for a rise below
    ``ceiling``.
    """
    best: Int = np.int64(INFEASIBLE)
    shift: Int = np.int64(-1)
    position: Int = np.int64(-1)
    bar: Int = np.int64(ceiling)
    spot, near, seen, changed = board.spot, board.near, step.seen, step.changed
    step.size[1] += 1
    mark = step.size[1]
    for k in range(near.shape[1]):
        s = spot[near[v, k], WHERE]
        if s >= 0:
            seen[s] = mark
    for s in range(seen.shape[0]):
        if s == barred or changed[s] <= since:
            continue
        if wide == 1 or seen[s] == mark or board.tour[s, COUNT] == 0:
            rise, p = best_place(board, s, v, bar)
            if rise < bar:
                bar = rise
                best = rise
                shift = np.int64(s)
                position = p
    return best, shift, position


@kernel
def has_place(board: Board, step: Step, v: Int, barred: Int) -> bool:
    """Tell whether visit ``v`` fits in some tour as it is, other than that of ``barred``.

    Tours in which it was found not to fit are looked at again only after they changed. For a
    visit that is in a tour, ``barred`` must be that tour.
    """
    for s in range(step.changed.shape[0]):
        if s != barred and step.changed[s] > step.stuck[v]:
            _, p = best_place(board, s, v, np.int64(INFEASIBLE))
            if p >= 0:
                return True
    step.stuck[v] = step.size[2]
    return False
