"""Order of a day with symmetric costs: Lin-Kernighan steps, then kicks and repair.

A step exchanges legs one after another, each exchange keeping one closed tour, as long as the
sum gained stays positive: S. Lin, B. Kernighan, "An effective heuristic algorithm for the
traveling-salesman problem", Operations Research 21 (1973) 498-516. Depth 1 is the 2-opt of
G. Croes, Operations Research 6 (1958) 791-812; the exchange of two neighbouring stretches
covers I. Or's moves of short chains (PhD thesis, Northwestern University, 1976). Kicks are
double bridges: O. Martin, S. Otto, E. Felten, Complex Systems 5 (1991) 299-326; here local.
Unlike there, the first exchange that gains is taken; a leg put in may go again.

Arrays are int64 unless said otherwise. ``table, points, price``: see ``day_net``; ``tour``,
``log``: see ``flips``; ``queue``: see ``node_queue``. ``near`` (n, K, 2): neighbours of each
node, nearest first, and what they cost. ``chain`` (depth, 5 + 3 B) is scratch; row k holds how
many candidates there are at depth k, the next one, t2, the gain so far, the most candidates
allowed (set by ``new_chain``), then t3, t4 and gain of each.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Float, Int, kernel
from georoute.kernels.acceptance import dearer_by
from georoute.kernels.day_net import leg_money
from georoute.kernels.flips import exchange, next_of, prev_of, redo, undo
from georoute.kernels.node_queue import pop, push, waiting
from georoute.kernels.random_stream import below

__all__ = ["descend", "kick_and_repair", "new_chain"]

Ints = NDArray[np.int64]
Floats = NDArray[np.float64]

LONGEST_SEGMENT = 50
LOG_RESERVE = 64
"""Reversals one step can add to the log at most; no step starts with less room."""


def new_chain(breadth: tuple[int, ...]) -> Ints:
    """Return scratch for chains with ``breadth[k]`` alternatives at depth k, all at the last."""
    chain = np.zeros((len(breadth), 5 + 3 * max(breadth)), np.int64)
    chain[:, 4] = breadth
    return chain


@kernel
def _candidates(
    table: Ints,
    points: Floats,
    price: Floats,
    tour: Ints,
    near: Ints,
    chain: Ints,
    level: Int,
    t1: Int,
) -> None:
    """Collect the best continuations t3, t4 from t2 of ``level``, best gain first."""
    t2 = chain[level, 2]
    gain = chain[level, 3]
    forward = next_of(tour, t1) == t2
    most = chain[level, 4]
    found = 0
    for k in range(near.shape[1]):
        rest = gain - near[t2, k, 1]
        if rest <= 0:
            break
        t3 = near[t2, k, 0]
        t4 = prev_of(tour, t3) if forward else next_of(tour, t3)
        if t3 == t1 or t4 == t2:
            continue
        total = rest + leg_money(table, points, price, t3, t4)
        place = found
        while place > 0 and chain[level, 4 + 3 * place] < total:
            place -= 1
        if place >= most:
            continue
        found = min(found + 1, most)
        for cell in range(4 + 3 * found, 7 + 3 * place, -1):
            chain[level, cell] = chain[level, cell - 3]
        chain[level, 5 + 3 * place] = t3
        chain[level, 6 + 3 * place] = t4
        chain[level, 7 + 3 * place] = total
    chain[level, 0] = found
    chain[level, 1] = 0


@kernel
def _push_chain(queue: Ints, chain: Ints, level: Int, t1: Int) -> None:
    push(queue, t1)
    for k in range(level + 1):
        cell = 2 + 3 * chain[k, 1]
        push(queue, chain[k, 2])
        push(queue, chain[k, cell])
        push(queue, chain[k, cell + 1])


@kernel
def _last_exchange(
    table: Ints,
    points: Floats,
    price: Floats,
    tour: Ints,
    near: Ints,
    t1: Int,
    t2: Int,
    t3: Int,
    t4: Int,
    gain: Int,
) -> tuple[Int, Int, Int]:
    """Return gain, t5 and t6 of the best exchange that closes after t1-t2, t3-t4 went.

    The exchange before is only imagined: within the stretch t2..t4 the tour would run the other
    way.
    """
    n = tour.shape[1]
    forward = next_of(tour, t1) == t2
    base = tour[1, t2]
    span = tour[1, t4] - base if forward else base - tour[1, t4]
    if span < 0:
        span += n
    best: Int = np.int64(0)
    best5: Int = np.int64(-1)
    best6: Int = np.int64(-1)
    for k in range(near.shape[1]):
        rest = gain - near[t4, k, 1]
        if rest <= 0:
            break
        t5 = near[t4, k, 0]
        at = tour[1, t5] - base if forward else base - tour[1, t5]
        if at < 0:
            at += n
        if t5 == t3:
            t6 = t2
        elif forward == (at <= span):
            t6 = next_of(tour, t5)
        else:
            t6 = prev_of(tour, t5)
        if t5 == t1 or t6 == t4:
            continue
        closed = rest + leg_money(table, points, price, t5, t6)
        closed -= leg_money(table, points, price, t6, t1)
        if closed > best:
            best, best5, best6 = closed, t5, t6
    return best, best5, best6


@kernel
def _try_chain(
    table: Ints,
    points: Floats,
    price: Floats,
    tour: Ints,
    log: Ints,
    near: Ints,
    chain: Ints,
    queue: Ints,
    t1: Int,
    t2: Int,
    depth: Int,
) -> Int:
    """Try chains of up to ``depth`` + 1 exchanges that begin by removing t1-t2.

    The first that gains is made.
    """
    level = 0
    chain[0, 2] = t2
    chain[0, 3] = leg_money(table, points, price, t1, t2)
    _candidates(table, points, price, tour, near, chain, 0, t1)
    while True:
        choice = chain[level, 1]
        if choice >= chain[level, 0]:
            level -= 1
            if level < 0:
                return np.int64(0)
            undo(tour, log, log[0, 0] - 1)
            continue
        chain[level, 1] = choice + 1
        t3 = chain[level, 5 + 3 * choice]
        t4 = chain[level, 6 + 3 * choice]
        gain = chain[level, 7 + 3 * choice]
        closed = gain - leg_money(table, points, price, t4, t1)
        t6: Int = np.int64(-1)
        if closed <= 0:
            if level + 1 < depth:
                exchange(tour, log, t1, chain[level, 2], t4)
                level += 1
                chain[level, 2] = t4
                chain[level, 3] = gain
                _candidates(table, points, price, tour, near, chain, level, t1)
                continue
            closed, t5, t6 = _last_exchange(
                table, points, price, tour, near, t1, chain[level, 2], t3, t4, gain
            )
            if closed <= 0:
                continue
            push(queue, t5)
            push(queue, t6)
        exchange(tour, log, t1, chain[level, 2], t4)
        if t6 >= 0:
            exchange(tour, log, t1, t4, t6)
        _push_chain(queue, chain, level, t1)
        return closed


@kernel
def _swap_stretches(
    table: Ints,
    points: Floats,
    price: Floats,
    tour: Ints,
    log: Ints,
    near: Ints,
    queue: Ints,
    t1: Int,
    t2: Int,
) -> Int:
    """Try to exchange or to turn two neighbouring stretches, the first starting at t2.

    Removing t1-t2 and t3-t4 and joining t2-t3 leaves a ring t2..t3; it is opened at t5-t6 and
    joined again: the one kind of 3-exchange no sequence of two reversals gives.
    """
    n = tour.shape[1]
    forward = next_of(tour, t1) == t2
    gain0 = leg_money(table, points, price, t1, t2)
    base = tour[1, t2]
    for k in range(near.shape[1]):
        gain1 = gain0 - near[t2, k, 1]
        if gain1 <= 0:
            return np.int64(0)
        t3 = near[t2, k, 0]
        t4 = next_of(tour, t3) if forward else prev_of(tour, t3)
        if t1 in (t3, t4):
            continue
        ring = tour[1, t3] - base if forward else base - tour[1, t3]
        if ring < 0:
            ring += n
        gain1 += leg_money(table, points, price, t3, t4)
        for m in range(near.shape[1]):
            gain2 = gain1 - near[t4, m, 1]
            if gain2 <= 0:
                break
            t5 = near[t4, m, 0]
            at = tour[1, t5] - base if forward else base - tour[1, t5]
            if at < 0:
                at += n
            if at > ring:
                continue
            for after in range(2):
                if (after == 1 and at == ring) or (after == 0 and at == 0):
                    continue
                t6 = next_of(tour, t5) if forward == (after == 1) else prev_of(tour, t5)
                closed = gain2 + leg_money(table, points, price, t5, t6)
                closed -= leg_money(table, points, price, t6, t1)
                if closed > 0:
                    _open_ring(tour, log, after, t1, t2, t3, t5, t6)
                    for node in (t1, t2, t3, t4, t5, t6):
                        push(queue, node)
                    return closed
    return np.int64(0)


@kernel
def _open_ring(
    tour: Ints, log: Ints, after: Int, t1: Int, t2: Int, t3: Int, t5: Int, t6: Int
) -> None:
    """Join t2-t3, t4-t5 and t6-t1, t6 coming after or before t5 on the way t2..t3."""
    if after == 1:
        exchange(tour, log, t1, t2, t3)
        exchange(tour, log, t1, t3, t6)
        exchange(tour, log, t3, t5, t2)
    else:
        exchange(tour, log, t1, t2, t6)
        exchange(tour, log, t2, t5, t3)


@kernel
def descend(
    table: Ints,
    points: Floats,
    price: Floats,
    tour: Ints,
    log: Ints,
    near: Ints,
    chain: Ints,
    queue: Ints,
    depth: Int,
    looks: Int,
    steps: Int,
) -> Int:
    """Make improving steps until the queue is empty; return the sum gained.

    Ends early after ``looks`` nodes looked at, after ``steps`` steps made, or with a full log.
    """
    total: Int = np.int64(0)
    room = log.shape[0] - LOG_RESERVE
    while looks > 0 and steps > 0 and waiting(queue) > 0 and log[0, 0] < room:
        t1 = pop(queue)
        looks -= 1
        gain: Int = np.int64(0)
        for way in range(2):
            t2 = next_of(tour, t1) if way == 0 else prev_of(tour, t1)
            gain = _try_chain(table, points, price, tour, log, near, chain, queue, t1, t2, depth)
            if gain == 0:
                gain = _swap_stretches(table, points, price, tour, log, near, queue, t1, t2)
            if gain > 0:
                break
        if gain > 0:
            total += gain
            steps -= 1
            push(queue, t1)
    return total


@kernel
def _double_bridge(
    table: Ints,
    points: Floats,
    price: Floats,
    tour: Ints,
    log: Ints,
    queue: Ints,
    stream: NDArray[np.uint64],
) -> Int:
    """Swap the first and third of three short stretches in a row; return the cost added."""
    n = tour.shape[1]
    longest = max(1, min(LONGEST_SEGMENT, (n - 1) // 3))
    p = below(stream, n)
    q = p + 1 + below(stream, longest)
    r = q + 1 + below(stream, longest)
    s = r + 1 + below(stream, longest)
    a, b = tour[0, p], tour[0, (p + 1) % n]
    c, d = tour[0, q % n], tour[0, (q + 1) % n]
    e, f = tour[0, r % n], tour[0, (r + 1) % n]
    g, h = tour[0, s % n], tour[0, (s + 1) % n]
    added: Int = np.int64(0)
    for came, to in ((a, f), (g, d), (e, b), (c, h)):
        added += leg_money(table, points, price, came, to)
    for went, to in ((a, b), (c, d), (e, f), (g, h)):
        added -= leg_money(table, points, price, went, to)
    exchange(tour, log, a, b, g)
    exchange(tour, log, a, g, f)
    exchange(tour, log, g, e, d)
    exchange(tour, log, e, c, b)
    for node in (a, b, c, d, e, f, g, h):
        push(queue, node)
    return added


@kernel
def kick_and_repair(
    table: Ints,
    points: Floats,
    price: Floats,
    tour: Ints,
    log: Ints,
    near: Ints,
    chain: Ints,
    queue: Ints,
    stream: NDArray[np.uint64],
    best: Ints,
    costs: Ints,
    kicks: Int,
    heat: Float,
    before: Int,
    total: Int,
    spent: Float,
    stop_at_best: Int,
) -> Int:
    """Kick and repair ``kicks`` times; return how many were made.

    A dearer tour is accepted as ``dearer_by`` says, ``before`` of ``total`` kicks having been
    made before this call. ``costs`` (int64, (3,)) holds the cost at
    hand, the best cost, and 1 while ``best`` (int64, (n,)) has not yet been copied from the
    tour at hand. With ``stop_at_best`` 1 the call ends at a new best tour.
    """
    depth = chain.shape[0]
    for done in range(kicks):
        log[0, 0] = 0
        added = _double_bridge(table, points, price, tour, log, queue, stream)
        added -= descend(
            table, points, price, tour, log, near, chain, queue, depth, 1 << 40, 1 << 40
        )
        limit = dearer_by(stream, heat, before + done, total, spent)
        if added > 0 and added > limit:
            undo(tour, log, 0)
            continue
        if added > 0 and costs[2] == 1:
            count = log[0, 0]
            undo(tour, log, 0)
            best[:] = tour[0]
            costs[2] = 0
            redo(tour, log, count)
        costs[0] += added
        if costs[0] < costs[1]:
            costs[1] = costs[0]
            costs[2] = 1
            if stop_at_best == 1:
                return np.int64(done + 1)
    return np.int64(kicks)
