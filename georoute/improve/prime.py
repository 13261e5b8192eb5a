"""Compile the kernels of the days before a search needs them."""

from __future__ import annotations

from functools import cache

import numpy as np

from georoute.improve.state import make_step
from georoute.kernels.arrays import Shifts, Travel, Visits
from georoute.kernels.board import INFEASIBLE, WHERE
from georoute.kernels.day_step import begin_step, keep_step, step_in, step_out, undo_step
from georoute.kernels.insertion import best_place
from georoute.kernels.placement import (
    cheapest_push,
    excess_visit,
    fill_rises,
    next_pick,
    push_out,
    trade_place,
)
from georoute.kernels.random_stream import new_stream
from georoute.kernels.rearrangement import MOST_TRIED, rearrange
from georoute.kernels.relocation import close_day, relocate_one, swap_one
from georoute.problem import Problem, Solution
from georoute.problem.board import make_board

__all__ = ["prime"]


def _two_by_two() -> Problem:
    """Return two visits and two shifts at one place, where every limit holds."""
    nil, ones = np.zeros(2, np.int64), np.ones(2, np.int64)
    ample = np.full(2, 9, np.int64)
    table, rate = np.zeros((1, 1), np.int64), np.ones(2)
    return Problem(
        travel=Travel(1, table, table, np.zeros(0), np.zeros(0), 1.0, 1.0, 1),
        visits=Visits(
            place=nil,
            work_ms=ones,
            load=nil,
            window_ptr=np.zeros(3, np.int64),
            window_open_ms=np.zeros(0, np.int64),
            window_close_ms=np.zeros(0, np.int64),
            worth=np.array([1, 2], np.int64),
            level=nil,
            eligible=np.ones((2, 2), np.bool_),
        ),
        shifts=Shifts(
            start_place=nil,
            end_place=nil,
            open_ms=nil,
            close_ms=ample,
            paid_ms=ample,
            limit_ms=ample,
            write_up_ms=nil,
            load_limit=nil,
            hour_rate=rate,
            overtime_rate=rate,
            length_rate=rate,
            day_cost=nil,
            day=nil,
            inspector=nil,
        ),
        plane_x_m=np.zeros(1),
        plane_y_m=np.zeros(1),
    )


@cache
def prime() -> None:
    """Call every kernel of the search once, on a problem of its own.

    What is not compiled yet is compiled now, and not in the middle of a timed search; once in
    a process is enough.
    """
    nobody = np.zeros(0, np.int64)
    board = make_board(_two_by_two(), Solution(orders=(np.array([0], np.int64), nobody)))
    step = make_step(board)
    queue, rises = np.array([1], np.int64), np.full((1, 2), INFEASIBLE, np.int64)
    scratch = np.zeros(2 + MOST_TRIED, np.int64)
    excess_visit(board, 0)
    best_place(board, 1, 1, INFEASIBLE)
    fill_rises(board, queue, np.array([0]), np.array([0, 1]), rises)
    next_pick(board, queue, rises)
    trade_place(board, step, 1, np.array([0]), 0, 1)
    cheapest_push(board, step, 1, np.array([0]), scratch, np.array([-1, 0, 0]))
    push_out(board, step, 1, 0, scratch)
    undo_step(board, step)
    close_day(board, step, 0, scratch, 1)
    relocate_one(board, step, queue, 0, 1, 1)
    swap_one(board, step, queue, 0, 1)
    rearrange(board, step, nobody, scratch, new_stream(0), 1, 1)
    begin_step(step)
    s = int(board.spot[0, WHERE])
    step_out(board, step, 0)
    step_in(board, step, s, 0, 0)
    keep_step(step)
