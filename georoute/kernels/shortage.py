"""What is missing for a visit to go into a tour as it is."""

from __future__ import annotations

import numpy as np

from georoute.kernels._jit import Int, kernel
from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.board import (
    CLOSE,
    COUNT,
    END,
    FIRST,
    FOREVER,
    LAST,
    LEAVE,
    LIMIT,
    OPEN,
    PLACE,
    SLACK,
    START,
    WAITED,
    WORK,
    WRITE_UP,
    Board,
    leg,
)

__all__ = ["closing", "least_shortage", "start_at", "way"]


@kernel
def way(board: Board, i: Int, j: Int) -> Int:
    """Return the travel time from place ``i`` to place ``j`` in ms."""
    return leg(board.time, board.x, board.y, board.plane, 0, i, j)


@kernel
def closing(board: Board, v: Int) -> Int:
    """Return when work at ``v`` may start at the latest."""
    last = board.visit[v, LAST]
    if board.visit[v, FIRST] == last:
        return np.int64(FOREVER)
    return board.closes[last - 1]


@kernel
def start_at(board: Board, v: Int, arrive: Int) -> tuple[Int, Int, Int]:
    """Return start of work, room to the window's close, and lateness of visit ``v``."""
    first = board.visit[v, FIRST]
    last = board.visit[v, LAST]
    if first == last:
        return arrive, np.int64(FOREVER), np.int64(0)
    for w in range(first, last):
        if arrive <= board.closes[w]:
            start = max(arrive, board.opens[w])
            return start, board.closes[w] - start, np.int64(0)
    return arrive, np.int64(0), arrive - board.closes[last - 1]


@kernel
def _shortage_at(board: Board, s: Int, p: Int, v: Int) -> Int:
    """Return lateness plus time beyond the shift with ``v`` at position ``p`` of ``s``, in ms."""
    n = board.tour[s, COUNT]
    now = board.ahead[s, p, LEAVE]
    wait = board.ahead[s, p, WAITED]
    slack = board.ahead[s, p, SLACK]
    late = np.int64(0)
    here = board.shift[s, START] if p == 0 else board.visit[board.stops[s, p - 1], PLACE]
    for k in range(p - 1, n):
        u = v if k < p else board.stops[s, k]
        arrive = now + way(board, here, board.visit[u, PLACE])
        start, room, lateness = start_at(board, u, arrive)
        wait += start - arrive
        late += lateness
        slack = min(slack, wait + room)
        now = start + board.visit[u, WORK]
        here = board.visit[u, PLACE]
    finish = now + way(board, here, board.shift[s, END]) + board.shift[s, WRITE_UP]
    depart = board.shift[s, OPEN]
    if late == 0:
        depart += min(slack, wait)
    excess = max(finish - board.shift[s, CLOSE], finish - depart - board.shift[s, LIMIT])
    return late + max(np.int64(0), excess)


@kernel
def least_shortage(board: Board, s: Int, v: Int) -> tuple[Int, Int]:
    """Return the ms missing for ``v`` in shift ``s`` at its best position, and the ms it adds.

    Missing: lateness at all stops plus time beyond the shift; 0 where ``v`` fits. Added: work
    and the least detour, whatever the position. ``UNREACHABLE`` where no position is reached.
    """
    missing: Int = np.int64(UNREACHABLE)
    added: Int = np.int64(UNREACHABLE)
    n = board.tour[s, COUNT]
    here = board.shift[s, START]
    new = board.visit[v, PLACE]
    for p in range(n + 1):
        there = board.shift[s, END] if p == n else board.visit[board.stops[s, p], PLACE]
        detour = way(board, here, new) + way(board, new, there)
        if detour < UNREACHABLE:
            if n > 0:
                detour -= way(board, here, there)
            added = min(added, detour + board.visit[v, WORK])
            missing = min(missing, _shortage_at(board, s, p, v))
        here = there
    return missing, added
