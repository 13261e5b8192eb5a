"""What a search over all tours remembers besides the tours."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.kernels.board import KIND
from georoute.kernels.day_step import Step

if TYPE_CHECKING:
    from georoute.kernels.board import Board

__all__ = ["make_step"]


def make_step(board: Board) -> Step:
    """Return an empty step for these tours."""
    n_visits, n_shifts = board.visit.shape[0], board.tour.shape[0]
    classes = int(board.visit[:, KIND].max(initial=0)) + 1
    return Step(
        touched=np.zeros(n_shifts, np.int64),
        size=np.zeros(3, np.int64),
        is_touched=np.zeros(n_shifts, np.int64),
        stops=np.zeros_like(board.stops),
        sizes=np.zeros(n_shifts, np.int64),
        money=np.zeros(n_shifts, np.int64),
        lost=np.zeros(classes, np.int64),
        seen=np.zeros(n_shifts, np.int64),
        changed=np.zeros(n_shifts, np.int64),
        stuck=np.full(n_visits, -1, np.int64),
        settled=np.full(n_visits, -1, np.int64),
        unswapped=np.full(n_visits, -1, np.int64),
    )
