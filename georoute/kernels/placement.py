"""Tours that fit: take out what is too much, and find places for what is left out."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Float, Int, kernel
from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.board import (
    CLOSE,
    COUNT,
    DRIVE,
    END,
    INFEASIBLE,
    LEAVE,
    LIMIT,
    LOAD,
    LOADED,
    MONEY,
    MOST_LOAD,
    OPEN,
    PLACE,
    RANK,
    SLACK,
    START,
    WAITED,
    WHERE,
    WORK,
    WORKED,
    WRITE_UP,
    Board,
)
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
from georoute.kernels.insertion import best_place
from georoute.kernels.shortage import closing, start_at, way

__all__ = [
    "cheapest_push",
    "excess_visit",
    "fill_rises",
    "next_pick",
    "push_out",
    "trade_place",
]

EXACT_STOPS = 200
"""Up to so many stops, each removal is judged by the clock; beyond, by the time it frees."""


@kernel
def _breach_without(board: Board, s: Int, p: Int) -> Float:
    """Return by how much tour ``s`` breaks its limits without stop ``p``: ms, load scaled."""
    n = board.tour[s, COUNT]
    now = board.ahead[s, p, LEAVE]
    wait = board.ahead[s, p, WAITED]
    slack = board.ahead[s, p, SLACK]
    load = board.tour[s, LOADED] - board.visit[board.stops[s, p], LOAD]
    late = np.int64(0)
    here = board.shift[s, START]
    for k in range(p):
        u = board.stops[s, k]
        start = board.ahead[s, k + 1, LEAVE] - board.visit[u, WORK]
        late += max(np.int64(0), start - closing(board, u))
        here = board.visit[u, PLACE]
    drive: Int = np.int64(0)
    for k in range(p + 1, n):
        u = board.stops[s, k]
        leg = way(board, here, board.visit[u, PLACE])
        drive = max(drive, leg)
        start, room, lateness = start_at(board, u, now + leg)
        wait += start - now - leg
        late += lateness
        slack = min(slack, wait + room)
        now = start + board.visit[u, WORK]
        here = board.visit[u, PLACE]
    leg = way(board, here, board.shift[s, END])
    drive = max(drive, leg)
    finish = now + leg + board.shift[s, WRITE_UP]
    depart = board.shift[s, OPEN]
    if late == 0:
        depart += max(np.int64(0), min(slack, wait))
    excess = max(finish - board.shift[s, CLOSE], finish - depart - board.shift[s, LIMIT])
    breach = float(late) + float(max(np.int64(0), excess))
    if drive >= UNREACHABLE:
        breach += float(UNREACHABLE)
    over = max(np.int64(0), load - board.shift[s, MOST_LOAD])
    time_per_load = float(board.shift[s, LIMIT]) / max(1.0, float(board.shift[s, MOST_LOAD]))
    return breach + float(over) * time_per_load


@kernel
def _time_freed(board: Board, s: Int, p: Int) -> Float:
    """Return the work and detour that stop ``p`` adds to tour ``s``, in ms."""
    v = board.stops[s, p]
    n = board.tour[s, COUNT]
    before = board.shift[s, START] if p == 0 else board.visit[board.stops[s, p - 1], PLACE]
    after = board.shift[s, END] if p == n - 1 else board.visit[board.stops[s, p + 1], PLACE]
    here = board.visit[v, PLACE]
    detour = way(board, before, here) + way(board, here, after) - way(board, before, after)
    return float(board.visit[v, WORK] + detour)


@kernel
def excess_visit(board: Board, s: Int) -> Int:
    """Return the visit to take out of tour ``s``, which breaks a limit.

    A visit that may not be there at all goes first. Else the one after which the breach is
    least; where several mend it, the one with the least loss, then the one freeing most time.
    """
    n = board.tour[s, COUNT]
    best = board.stops[s, 0]
    best_breach = np.inf
    best_freed = -np.inf
    exact = n <= EXACT_STOPS
    for p in range(n):
        v = board.stops[s, p]
        if not board.eligible[v, s]:
            return v
        freed = _time_freed(board, s, p)
        start = board.ahead[s, p + 1, LEAVE] - board.visit[v, WORK]
        if exact:
            breach = _breach_without(board, s, p)
        elif start > closing(board, v):
            breach = -np.inf  # too late itself: no way round it
        else:
            breach = -freed
        better = breach < best_breach
        if breach == best_breach:
            order = board.visit[v, RANK] - board.visit[best, RANK]
            better = order > 0 or (order == 0 and freed > best_freed)
        if better:
            best = v
            best_breach = breach
            best_freed = freed
    return best


@kernel
def fill_rises(
    board: Board,
    bank: NDArray[np.int64],
    rows: NDArray[np.int64],
    columns: NDArray[np.int64],
    rises: NDArray[np.int64],
) -> None:
    """Fill ``rises[i, s]`` with the least rise of money by visit ``bank[i]`` in shift ``s``.

    For all ``i`` of ``rows`` that are not placed, and all ``s`` of ``columns``; ``INFEASIBLE``
    where it has no place.
    """
    for i in rows:
        v = bank[i]
        if board.spot[v, WHERE] < 0:
            for s in columns:
                rise, _ = best_place(board, s, v, np.int64(INFEASIBLE))
                rises[i, s] = rise


@kernel
def next_pick(board: Board, bank: NDArray[np.int64], rises: NDArray[np.int64]) -> tuple[Int, Int]:
    """Return which visit to put in next, and its shift; -1, -1 where none has a place.

    Those to be left out last come first; among equals the one that would lose most by not
    getting its best shift (regret: Potvin and Rousseau, European Journal of Operational
    Research 66 (1993) 331-340).
    """
    pick = np.int64(-1)
    shift = np.int64(-1)
    most = np.int64(-1)
    for i in range(bank.shape[0]):
        v = bank[i]
        if board.spot[v, WHERE] >= 0:
            continue
        if pick >= 0 and board.visit[v, RANK] > board.visit[bank[pick], RANK]:
            continue
        best = np.int64(INFEASIBLE)
        second = np.int64(INFEASIBLE)
        best_shift = np.int64(-1)
        for s in range(rises.shape[1]):
            if rises[i, s] < best:
                second = best
                best = rises[i, s]
                best_shift = np.int64(s)
            elif rises[i, s] < second:
                second = rises[i, s]
        if best_shift < 0:
            continue
        regret = second - best
        if pick < 0 or board.visit[v, RANK] < board.visit[bank[pick], RANK] or regret > most:
            pick = np.int64(i)
            shift = best_shift
            most = regret
    return pick, shift


@kernel
def _trade_in(board: Board, step: Step, v: Int, s: Int, begin: Int, end: Int) -> bool:
    room = min(board.shift[s, LIMIT], board.shift[s, CLOSE] - board.shift[s, OPEN])
    room -= board.tour[s, DRIVE] + board.tour[s, WORKED] + board.shift[s, WRITE_UP]
    for k in range(begin, min(end, board.tour[s, COUNT])):
        u = board.stops[s, k]
        # A detour is seldom negative: without the time for the work itself, do not even try.
        if _time_freed(board, s, k) + room < board.visit[v, WORK]:
            continue
        if not has_place(board, step, u, s):
            continue
        step_out(board, step, u)
        _, p = best_place(board, s, v, np.int64(INFEASIBLE))
        if p >= 0:
            step_in(board, step, s, p, v)
            _, t, q = best_anywhere(
                board, step, u, s, np.int64(-1), np.int64(1), np.int64(INFEASIBLE)
            )
            if t >= 0:
                step_in(board, step, t, q, u)
                if is_better(board, step):
                    return True
        undo_step(board, step)
    return False


@kernel
def trade_place(
    board: Board, step: Step, v: Int, shifts: NDArray[np.int64], begin: Int, end: Int
) -> bool:
    """Make room for ``v``, left out until now, by moving one visit of ``shifts`` elsewhere.

    Tries the stops ``begin .. end - 1`` of each of the shifts; returns whether that worked.
    """
    begin_step(step)
    made = False
    for s in shifts:
        if board.eligible[v, s] and _trade_in(board, step, v, s, begin, end):
            made = True
            break
    return made


@kernel
def _least_loss(board: Board, s: Int, v: Int) -> Int:
    """Return the visit of shift ``s`` that is left out first, if it is before ``v``; else -1."""
    pick = np.int64(-1)
    for k in range(board.tour[s, COUNT]):
        u = board.stops[s, k]
        if board.visit[u, RANK] > board.visit[v, RANK] and (
            pick < 0 or board.visit[u, RANK] > board.visit[pick, RANK]
        ):
            pick = u
    return pick


@kernel
def push_out(
    board: Board,
    step: Step,
    v: Int,
    s: Int,
    spare: NDArray[np.int64],
) -> bool:
    """Put ``v`` into shift ``s`` at the price of visits that are left out before it.

    They are taken out one by one, the least loss first, until ``v`` fits; then each is put back
    wherever it has a place, the gravest loss first. The step is kept open where less is left
    out in the end; else it is taken back. ``spare`` (int64, (V,)) is scratch.
    """
    begin_step(step)
    if not board.eligible[v, s]:
        return False
    gone = 0
    _, p = best_place(board, s, v, np.int64(INFEASIBLE))
    while p < 0:
        u = _least_loss(board, s, v)
        if u < 0:
            break
        has_place(board, step, u, s)  # notes where to look no more
        step_out(board, step, u)
        spare[gone] = u
        gone += 1
        _, p = best_place(board, s, v, np.int64(INFEASIBLE))
    if p >= 0:
        step_in(board, step, s, p, v)
        for i in range(gone - 1, -1, -1):
            u = spare[i]
            t: Int = np.int64(s)
            _, q = best_place(board, s, u, np.int64(INFEASIBLE))
            if q < 0:
                _, t, q = best_anywhere(
                    board, step, u, s, step.stuck[u], np.int64(1), np.int64(INFEASIBLE)
                )
            if q >= 0:
                step_in(board, step, t, q, u)
        if is_better(board, step):
            return True
    undo_step(board, step)
    return False


@kernel
def _beats(step: Step, rise: Int, found: NDArray[np.int64]) -> bool:
    """Tell whether the open step loses less than the one in ``found``, or costs less."""
    for c in range(step.lost.shape[0]):
        if step.lost[c] != found[2 + c]:
            return bool(step.lost[c] < found[2 + c])
    return bool(rise < found[1])


@kernel
def cheapest_push(
    board: Board,
    step: Step,
    v: Int,
    shifts: NDArray[np.int64],
    spare: NDArray[np.int64],
    found: NDArray[np.int64],
) -> None:
    """Find the shift of ``shifts`` where ``push_out`` of ``v`` loses least, then costs least.

    ``found`` (int64, (2 + C,)): the best shift so far or -1, its rise of money and its change of
    the loss of each class; updated. Everything is taken back.
    """
    for s in shifts:
        if push_out(board, step, v, s, spare):
            rise = np.int64(0)
            for k in range(step.size[0]):
                t = step.touched[k]
                rise += board.tour[t, MONEY] - step.money[t]
            if found[0] < 0 or _beats(step, rise, found):
                found[0] = s
                found[1] = rise
                found[2:] = step.lost
            undo_step(board, step)
