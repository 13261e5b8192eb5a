"""Hand whole tours over between two shifts: the same stops by another inspector, or another day."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.random_stream import below
from georoute.kernels.slack_state import (
    COUNT,
    KIND,
    LOAD_LIMIT,
    LOADED,
    STOP,
    WHERE,
    Facts,
    Rows,
    close_row,
    save_row,
)

__all__ = ["hand_over"]


@kernel
def _may_take(facts: Facts, rows: Rows, giver: Int, taker: Int) -> bool:
    """Tell whether shift ``taker`` may carry the load and do the visits of row ``giver``."""
    fits = rows.sum[giver, LOADED] <= facts.shift[taker, LOAD_LIMIT]
    for k in range(1, rows.sum[giver, COUNT] + 1):
        fits = fits and facts.eligible[rows.cell[STOP, giver, k], taker]
    return bool(fits)


@kernel
def hand_over(
    facts: Facts,
    rows: Rows,
    touch: NDArray[np.int64],
    backup: Rows,
    stream: NDArray[np.uint64],
) -> None:
    """Exchange the stops of two shifts of different kinds, the one of a visit and any other.

    Visit and shift are drawn at random. Nothing changes where the visit is absent, or where the
    two may not take each other's visits. Durations are left to the caller to judge. Rows that
    change are saved in ``backup`` and listed in ``touch``.
    """
    a = rows.link[WHERE, below(stream, rows.link.shape[1])]
    b = below(stream, rows.sum.shape[0])
    if a < 0 or facts.shift[a, KIND] == facts.shift[b, KIND]:
        return
    if not _may_take(facts, rows, a, b) or not _may_take(facts, rows, b, a):
        return
    save_row(rows, backup, touch, a)
    save_row(rows, backup, touch, b)
    for giver, taker in ((a, b), (b, a)):
        n = backup.sum[giver, COUNT]
        rows.sum[taker, COUNT] = n
        for k in range(1, n + 1):
            rows.cell[STOP, taker, k] = backup.cell[STOP, giver, k]
        close_row(facts, rows, taker)
