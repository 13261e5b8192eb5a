"""What it costs to put a visit into a tour, or in the place of another, by the full clock."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.board import (
    CLOSE,
    COUNT,
    DRIVE,
    END,
    FIRST,
    FITS,
    INFEASIBLE,
    LAST,
    LATEST,
    LEAVE,
    LENGTH,
    LIMIT,
    LOAD,
    LOADED,
    MONEY,
    MOST_LOAD,
    OPEN,
    PLACE,
    SLACK,
    START,
    WAITED,
    WINDOWED,
    WORK,
    WORKED,
    WRITE_UP,
    Board,
    leg,
    price,
)

__all__ = ["best_place", "replaced"]


@kernel
def _finish_of(
    time: NDArray[np.int64],
    x: NDArray[np.float64],
    y: NDArray[np.float64],
    plane: NDArray[np.float64],
    visit: NDArray[np.int64],
    opens: NDArray[np.int64],
    closes: NDArray[np.int64],
    shift: NDArray[np.int64],
    stops: NDArray[np.int64],
    ahead: NDArray[np.int64],
    n: Int,
    s: Int,
    p: Int,
    q: Int,
    v: Int,
    here: Int,
) -> tuple[Int, Int]:
    """Return finish and duration with stops ``p .. q - 1`` of ``s`` replaced by ``v``.

    ``here`` is the place before position ``p``. A finish of ``INFEASIBLE`` means that something
    comes too late.
    """
    now = ahead[s, p, LEAVE]
    wait = ahead[s, p, WAITED]
    slack = ahead[s, p, SLACK]
    too_late = np.int64(INFEASIBLE)
    for k in range(q - 1, n):
        u = v if k < q else stops[s, k]
        there = visit[u, PLACE]
        now += leg(time, x, y, plane, 0, here, there)
        if k == q and now > ahead[s, q, LATEST]:
            return too_late, too_late
        first = visit[u, FIRST]
        last = visit[u, LAST]
        if first < last:
            while first < last and now > closes[first]:
                first += 1
            if first == last:
                return too_late, too_late
            if opens[first] > now:
                wait += opens[first] - now
                now = opens[first]
            slack = min(slack, wait + closes[first] - now)
        now += visit[u, WORK]
        here = there
    finish = now + leg(time, x, y, plane, 0, here, shift[s, END]) + shift[s, WRITE_UP]
    return finish, finish - shift[s, OPEN] - min(slack, wait)


@kernel
def best_place(board: Board, s: Int, v: Int, ceiling: Int) -> tuple[Int, Int]:
    """Return the least rise of money by visit ``v`` in shift ``s``, and the position for it.

    ``INFEASIBLE`` and -1 where it fits nowhere for a rise below ``ceiling``, or where the tour
    breaks a limit as it is. A full row holds more stops than any tour that fits can have.
    """
    time, length, x, y, plane = board.time, board.length, board.x, board.y, board.plane
    visit, shift, rate, stops, tour = board.visit, board.shift, board.rate, board.stops, board.tour
    opens, closes, ahead = board.opens, board.closes, board.ahead
    best = np.int64(INFEASIBLE)
    position = np.int64(-1)
    n = tour[s, COUNT]
    if n >= stops.shape[1] or not board.eligible[v, s] or tour[s, FITS] == 0:
        return best, position
    if tour[s, LOADED] + visit[v, LOAD] > shift[s, MOST_LOAD]:
        return best, position
    old = tour[s, MONEY]
    bar = min(best, old + ceiling)
    new = visit[v, PLACE]
    bare = visit[v, FIRST] == visit[v, LAST] and tour[s, WINDOWED] == 0
    base = tour[s, DRIVE] + tour[s, WORKED] + visit[v, WORK] + shift[s, WRITE_UP]
    room = min(shift[s, LIMIT], shift[s, CLOSE] - shift[s, OPEN])
    room = min(room, UNREACHABLE - 1)
    here = shift[s, START]
    for p in range(n + 1):
        there = shift[s, END] if p == n else visit[stops[s, p], PLACE]
        least = base + leg(time, x, y, plane, 0, here, new)
        least += leg(time, x, y, plane, 0, new, there) - leg(time, x, y, plane, 0, here, there)
        if least <= room:
            far = tour[s, LENGTH] + leg(length, x, y, plane, 1, here, new)
            far += leg(length, x, y, plane, 1, new, there)
            far -= leg(length, x, y, plane, 1, here, there)
            # Without waiting the tour takes ``least``; waiting can only make it dearer.
            money = price(shift, rate, s, least, far)
            if money < bar and not bare:
                finish, duration = _finish_of(
                    time, x, y, plane, visit, opens, closes, shift, stops, ahead,
                    n, s, p, p, v, here,
                )  # fmt: skip
                money = np.int64(INFEASIBLE)
                if finish <= shift[s, CLOSE] and duration <= shift[s, LIMIT]:
                    money = price(shift, rate, s, duration, far)
            if money < bar:
                bar = money
                best = money - old
                position = np.int64(p)
        here = there
    return best, position


@kernel
def replaced(board: Board, s: Int, k: Int, v: Int, ceiling: Int) -> Int:
    """Return the money of shift ``s``, which fits, with its stop ``k`` replaced by ``v``.

    ``INFEASIBLE`` where a limit breaks, or where the money is not below ``ceiling``.
    """
    time, length, x, y, plane = board.time, board.length, board.x, board.y, board.plane
    visit, shift, stops, tour = board.visit, board.shift, board.stops, board.tour
    nothing = np.int64(INFEASIBLE)
    u = stops[s, k]
    if tour[s, LOADED] - visit[u, LOAD] + visit[v, LOAD] > shift[s, MOST_LOAD]:
        return nothing
    n = tour[s, COUNT]
    here = shift[s, START] if k == 0 else visit[stops[s, k - 1], PLACE]
    there = shift[s, END] if k == n - 1 else visit[stops[s, k + 1], PLACE]
    old = visit[u, PLACE]
    new = visit[v, PLACE]
    least = tour[s, DRIVE] + tour[s, WORKED] - visit[u, WORK] + visit[v, WORK] + shift[s, WRITE_UP]
    least += leg(time, x, y, plane, 0, here, new) + leg(time, x, y, plane, 0, new, there)
    least -= leg(time, x, y, plane, 0, here, old) + leg(time, x, y, plane, 0, old, there)
    room = min(shift[s, LIMIT], shift[s, CLOSE] - shift[s, OPEN])
    if least > min(room, UNREACHABLE - 1):
        return nothing
    far = tour[s, LENGTH]
    far += leg(length, x, y, plane, 1, here, new) + leg(length, x, y, plane, 1, new, there)
    far -= leg(length, x, y, plane, 1, here, old) + leg(length, x, y, plane, 1, old, there)
    money = price(shift, board.rate, s, least, far)
    bare = visit[v, FIRST] == visit[v, LAST] and tour[s, WINDOWED] == 0
    if money < ceiling and not bare:
        finish, duration = _finish_of(
            time, x, y, plane, visit, board.opens, board.closes, shift, stops, board.ahead,
            n, s, k, k + 1, v, here,
        )  # fmt: skip
        if finish > shift[s, CLOSE] or duration > shift[s, LIMIT]:
            return nothing
        money = price(shift, board.rate, s, duration, far)
    return money if money < ceiling else nothing
