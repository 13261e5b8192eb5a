"""Take out a few visits that are near each other and put them in again, if that pays."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.board import INFEASIBLE, RANK, WHERE, Board
from georoute.kernels.day_step import (
    Step,
    begin_step,
    best_anywhere,
    is_better,
    step_in,
    step_out,
    undo_step,
)
from georoute.kernels.random_stream import below

__all__ = ["rearrange"]

MOST_OUT = 12
"""Visits taken out at once; more takes longer and seldom pays."""
MOST_TRIED = 4
"""Visits left out until now that are tried along with them."""


@kernel
def _shuffle_by_rank(
    board: Board, bank: NDArray[np.int64], n: Int, stream: NDArray[np.uint64]
) -> None:
    """Shuffle the first ``n`` of ``bank``; then those to be left out last come first."""
    for i in range(n - 1, 0, -1):
        j = below(stream, i + 1)
        bank[i], bank[j] = bank[j], bank[i]
    for i in range(1, n):
        v = bank[i]
        k = i - 1
        while k >= 0 and board.visit[bank[k], RANK] > board.visit[v, RANK]:
            bank[k + 1] = bank[k]
            k -= 1
        bank[k + 1] = v


@kernel
def _pick_absent(
    board: Board,
    absent: NDArray[np.int64],
    bank: NDArray[np.int64],
    stream: NDArray[np.uint64],
) -> Int:
    """Put up to ``MOST_TRIED`` visits that are left out at the front of ``bank``."""
    n = np.int64(0)
    if absent.shape[0] == 0:
        return n
    begin = below(stream, absent.shape[0])
    for k in range(min(MOST_TRIED, absent.shape[0])):
        v = absent[(begin + k) % absent.shape[0]]
        if board.spot[v, WHERE] < 0:
            bank[n] = v
            n += 1
    return n


@kernel
def rearrange(
    board: Board,
    step: Step,
    absent: NDArray[np.int64],
    bank: NDArray[np.int64],
    stream: NDArray[np.uint64],
    tries: Int,
    wide: Int,
) -> tuple[Int, bool]:
    """Try up to ``tries`` times; stop after the first that pays.

    Around a visit drawn at random the nearest ones are taken out of their tours; with some of
    ``absent`` they are put in again one by one, each at its least rise of money. ``bank``
    (int64, at least K + ``MOST_TRIED`` + 1) is scratch; ``wide`` as in ``best_anywhere``. Returns
    the tries made and whether the last one paid.
    """
    n_visits = board.visit.shape[0]
    width = board.near.shape[1]
    for done in range(tries):
        begin_step(step)
        n = _pick_absent(board, absent, bank, stream)
        first = bank[below(stream, n)] if n > 0 else below(stream, n_visits)
        most = min(width, MOST_OUT - 1)
        out = 1 + below(stream, most) if most > 0 else np.int64(0)
        if board.spot[first, WHERE] >= 0:
            step_out(board, step, first)
            bank[n] = first
            n += 1
        for k in range(width):
            u = board.near[first, k]
            if out > 0 and board.spot[u, WHERE] >= 0:
                step_out(board, step, u)
                bank[n] = u
                n += 1
                out -= 1
        _shuffle_by_rank(board, bank, n, stream)
        for i in range(n):
            v = bank[i]
            _, s, p = best_anywhere(
                board, step, v, np.int64(-1), np.int64(-1), wide, np.int64(INFEASIBLE)
            )
            if s < 0 and wide == 0:
                _, s, p = best_anywhere(
                    board, step, v, np.int64(-1), step.stuck[v], np.int64(1), np.int64(INFEASIBLE)
                )
            if s >= 0:
                step_in(board, step, s, p, v)
        if is_better(board, step):
            return np.int64(done + 1), True
        undo_step(board, step)
    return np.int64(tries), False
