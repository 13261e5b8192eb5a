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
    "is_better",
    "step_in",
    "step_out",
    "undo_step",
]


class Step(NamedTuple):
    """What has to be known to take a step back. All int64.

    ``touched`` (S,): shifts changed, the first ``size[0]`` of them; ``is_touched`` (S,) marks
    them. ``stops`` (S, W), ``count`` (S,), ``money`` (S,): their rows before the step.
    ``lost`` (C,): change of the loss of each class. ``seen`` (S,) and ``size[1]``: marks of the
    shifts looked at in one search for a place. ``wide`` (1,): 1 where that search goes through
    all tours, 0 where only through those of nearby visits and the empty ones.
    """

    touched: NDArray[np.int64]
    size: NDArray[np.int64]
    is_touched: NDArray[np.int64]
    stops: NDArray[np.int64]
    count: NDArray[np.int64]
    money: NDArray[np.int64]
    lost: NDArray[np.int64]
    seen: NDArray[np.int64]
    wide: NDArray[np.int64]


@kernel
def begin_step(step: Step) -> None:
    """Start a step; whatever was changed before stays."""
    for k in range(step.size[0]):
        step.is_touched[step.touched[k]] = 0
    step.size[0] = 0
    step.lost[:] = 0


@kernel
def _touch(board: Board, step: Step, s: Int) -> None:
    """Keep the row of shift ``s`` as it was, once a step."""
    if step.is_touched[s] == 0:
        step.is_touched[s] = 1
        step.touched[step.size[0]] = s
        step.size[0] += 1
        n = board.tour[s, COUNT]
        step.count[s] = n
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
        board.tour[s, COUNT] = step.count[s]
        for i in range(step.count[s]):
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
            return step.lost[c] < 0
    return rise < 0


@kernel
def best_anywhere(
    board: Board,
    step: Step,
    v: Int,
    barred: Int,
    ceiling: Int,
) -> tuple[Int, Int, Int]:
    """Return the least rise of money by visit ``v``, with its shift and position there.

    Shift ``barred`` (-1: none) is left alone. Ties go to the first shift. ``INFEASIBLE``, -1, -1
    where there is no place for a rise below ``ceiling``. Where ``step.wide`` is 0 and nearby
    tours have no place, all are tried.
    """
    n_shifts = board.tour.shape[0]
    best = np.int64(INFEASIBLE)
    shift = np.int64(-1)
    position = np.int64(-1)
    bar = np.int64(ceiling)
    if step.wide[0] == 0:
        step.size[1] += 1
        mark = step.size[1]
        for k in range(board.near.shape[1]):
            s = board.spot[board.near[v, k], WHERE]
            if s >= 0 and step.seen[s] != mark:
                step.seen[s] = mark
        for s in range(n_shifts):
            if (step.seen[s] == mark or board.tour[s, COUNT] == 0) and s != barred:
                rise, p = best_place(board, s, v, bar)
                if rise < bar:
                    bar = rise
                    best = rise
                    shift = np.int64(s)
                    position = p
    if step.wide[0] == 1 or (shift < 0 and board.spot[v, WHERE] < 0 and ceiling >= INFEASIBLE):
        for s in range(n_shifts):
            if s != barred:
                rise, p = best_place(board, s, v, bar)
                if rise < bar:
                    bar = rise
                    best = rise
                    shift = np.int64(s)
                    position = p
    return best, shift, position
