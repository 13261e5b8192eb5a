"""All tours at once, packed tightly, with what the clock says at every stop.

The arrays of ``kernels.arrays`` are laid side by side in a few tables, because a compiled call
pays for every array it is handed. For each stop the tables keep what the clock says going
forward (time, waiting, slack) and going backward (latest arrival); with these a change is
judged from the place where it happens. The sums are those of Savelsbergh, "The vehicle routing
problem with time windows: minimizing route duration", ORSA Journal on Computing 4 (1992)
146-154. Nothing is assumed of travel: it may be asymmetric and need not obey the triangle
inequality, and a visit may have any number of windows.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.arrays import UNREACHABLE

__all__ = ["INFEASIBLE", "Board", "leg", "price", "put_in", "refresh", "take_out"]

INFEASIBLE = 1 << 62
"""Money of a change that breaks a limit."""
FOREVER = 1 << 60

# Columns of ``Board.visit``.
PLACE, WORK, LOAD, FIRST, LAST, KIND, AMOUNT, RANK = range(8)
# Columns of ``Board.shift``.
START, END, OPEN, CLOSE, PAID, LIMIT, WRITE_UP, MOST_LOAD, DAY_COST = range(9)
# Columns of ``Board.tour``.
COUNT, MONEY, DRIVE, LENGTH, WORKED, LOADED, WINDOWED, FITS = range(8)
# Columns of ``Board.ahead``.
LEAVE, WAITED, SLACK, LATEST = range(4)
# Columns of ``Board.spot``.
WHERE, AT = range(2)


class Board(NamedTuple):
    """V visits, S shifts, P places, tours W stops wide. int64 unless said otherwise.

    ``time``, ``length`` (P, P): ms and mm of each leg, or (0, 0), and then ``x``, ``y`` (float64,
    (P,)) with ``plane`` (float64, (3,)): ms and mm per unit, and the step that legs are rounded
    to. ``visit`` (V, 8): place, work, load, first and last + 1 of its windows, class, amount and
    rank of the loss when left out (class 0 the gravest, rank 0 to be left out last).
    ``eligible`` (bool, (V, S)). ``opens``, ``closes``: all windows. ``shift`` (S, 9), ``rate``
    (float64, (S, 3)): as ``kernels.arrays.Shifts``, columns named above. ``near`` (V, K): other
    visits nearby, nearest first.

    ``stops`` (S, W): visits of each tour in order. ``tour`` (S, 8): number of stops, money (0
    where empty), totals, whether some stop has windows, whether all limits hold. ``ahead``
    (S, W + 1, 4): before stop k, the time of leaving the stop before it, the waiting so far and
    how much later the tour could have left; and the latest arrival at stop k that keeps what
    follows in time. ``spot`` (V, 2): shift of each visit or -1, and its position there.
    """

    time: NDArray[np.int64]
    length: NDArray[np.int64]
    x: NDArray[np.float64]
    y: NDArray[np.float64]
    plane: NDArray[np.float64]
    visit: NDArray[np.int64]
    eligible: NDArray[np.bool_]
    opens: NDArray[np.int64]
    closes: NDArray[np.int64]
    shift: NDArray[np.int64]
    rate: NDArray[np.float64]
    near: NDArray[np.int64]
    stops: NDArray[np.int64]
    tour: NDArray[np.int64]
    ahead: NDArray[np.int64]
    spot: NDArray[np.int64]


@kernel
def leg(
    table: NDArray[np.int64],
    x: NDArray[np.float64],
    y: NDArray[np.float64],
    plane: NDArray[np.float64],
    axis: Int,
    i: Int,
    j: Int,
) -> Int:
    """Return a leg from its table, or from the plane (``axis`` 0: ms, 1: mm)."""
    if table.shape[0] > 0:
        return table[i, j]
    dx = x[i] - x[j]
    dy = y[i] - y[j]
    step = plane[2]
    return np.int64(np.floor(np.sqrt(dx * dx + dy * dy) * plane[axis] / step + 0.5) * step)


@kernel
def price(
    shift: NDArray[np.int64], rate: NDArray[np.float64], s: Int, duration: Int, length: Int
) -> Int:
    """Return the money of a tour of this duration and length, as ``clock.tour_cost`` does."""
    paid = min(duration, shift[s, PAID])
    money = rate[s, 0] * paid + rate[s, 1] * (duration - paid) + rate[s, 2] * length
    return np.int64(np.floor(money + 0.5)) + shift[s, DAY_COST]


@kernel
def _fill_latest(board: Board, s: Int) -> None:
    time, x, y, plane = board.time, board.x, board.y, board.plane
    visit, stops, ahead, opens = board.visit, board.stops, board.ahead, board.opens
    n = board.tour[s, COUNT]
    bound = board.shift[s, CLOSE] - board.shift[s, WRITE_UP]
    there = board.shift[s, END]
    ahead[s, n, LATEST] = bound
    for k in range(n - 1, -1, -1):
        v = stops[s, k]
        here = visit[v, PLACE]
        bound -= leg(time, x, y, plane, 0, here, there) + visit[v, WORK]
        first = visit[v, FIRST]
        w = visit[v, LAST] - 1
        if w >= first:
            while w >= first and opens[w] > bound:
                w -= 1
            bound = min(bound, board.closes[w]) if w >= first else np.int64(-FOREVER)
        ahead[s, k, LATEST] = bound
        there = here


@kernel
def refresh(board: Board, s: Int) -> None:
    """Bring everything the board says about shift ``s`` up to date with its stops."""
    time, length, x, y, plane = board.time, board.length, board.x, board.y, board.plane
    visit, shift, stops, tour = board.visit, board.shift, board.stops, board.tour
    ahead, spot, opens, closes = board.ahead, board.spot, board.opens, board.closes
    n = tour[s, COUNT]
    here = shift[s, START]
    depart = now = shift[s, OPEN]
    wait = late = drive = far = work = load = windowed = np.int64(0)
    slack = np.int64(FOREVER)
    fits: bool | np.bool_ = True
    for k in range(n):
        ahead[s, k, LEAVE] = now
        ahead[s, k, WAITED] = wait
        ahead[s, k, SLACK] = slack
        v = stops[s, k]
        spot[v, WHERE], spot[v, AT] = s, k
        fits = fits and board.eligible[v, s]
        there = visit[v, PLACE]
        way = leg(time, x, y, plane, 0, here, there)
        drive += way
        far += leg(length, x, y, plane, 1, here, there)
        now += way
        first, last = visit[v, FIRST], visit[v, LAST]
        if first < last:
            windowed = np.int64(1)
            while first < last and now > closes[first]:
                first += 1
            if first == last:
                late += now - closes[last - 1]
                slack = min(slack, wait)
            else:
                start = max(now, opens[first])
                wait += start - now
                now = start
                slack = min(slack, wait + closes[first] - now)
        now += visit[v, WORK]
        work += visit[v, WORK]
        load += visit[v, LOAD]
        here = there
    ahead[s, n, LEAVE] = now
    ahead[s, n, WAITED] = wait
    ahead[s, n, SLACK] = slack
    way = leg(time, x, y, plane, 0, here, shift[s, END])
    drive += way
    far += leg(length, x, y, plane, 1, here, shift[s, END])
    finish = now + way + shift[s, WRITE_UP]
    if late == 0:
        depart += min(slack, wait)
    duration = finish - depart
    fits = fits and late == 0 and drive < UNREACHABLE and load <= shift[s, MOST_LOAD]
    fits = fits and finish <= shift[s, CLOSE] and duration <= shift[s, LIMIT]
    tour[s, DRIVE], tour[s, LENGTH] = drive, far
    tour[s, WORKED], tour[s, LOADED] = work, load
    tour[s, WINDOWED] = windowed
    tour[s, FITS] = 1 if fits or n == 0 else 0
    tour[s, MONEY] = price(shift, board.rate, s, duration, far) if n > 0 else 0
    _fill_latest(board, s)


@kernel
def put_in(board: Board, s: Int, p: Int, v: Int) -> None:
    """Put visit ``v`` at position ``p`` of shift ``s``."""
    stops = board.stops
    for k in range(board.tour[s, COUNT], p, -1):
        stops[s, k] = stops[s, k - 1]
    stops[s, p] = v
    board.tour[s, COUNT] += 1
    refresh(board, s)


@kernel
def take_out(board: Board, v: Int) -> None:
    """Take visit ``v`` out of its shift."""
    stops = board.stops
    s = board.spot[v, WHERE]
    for k in range(board.spot[v, AT], board.tour[s, COUNT] - 1):
        stops[s, k] = stops[s, k + 1]
    board.tour[s, COUNT] -= 1
    board.spot[v, WHERE] = -1
    refresh(board, s)
