"""Order of a day whose legs cost one thing there and another back (one-way roads).

Nothing is symmetrised. Two exchanges are searched: neighbouring stretches change places and
keep their direction ("A C B", the 3-exchange of P. Kanellakis, C. Papadimitriou, "Local search
for the asymmetric traveling salesman problem", Operations Research 28 (1980) 1086-1099, which
covers I. Or's moves of short chains), and a stretch is turned round (G. Croes's 2-opt) with
the legs inside it priced the other way by sums kept for both directions. Kicks are double
bridges, which keep all directions (O. Martin, S. Otto, E. Felten, Complex Systems 5 (1991)
299-326).

All arrays are int64. ``table`` (n, n): money from row to column. ``tour`` (2, n): nodes in
sequence and where each stands; position 0 never changes. ``sums`` (2, n): money from position 0
to each position, along the tour and against it. ``near`` (2, n, K): cheapest nodes to go to
from a node, and to come from. ``queue``: see ``node_queue``. ``note`` (3,): first and last
position changed since it was reset, and the kind of the last exchange.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Float, Int, kernel
from georoute.kernels.acceptance import dearer_by
from georoute.kernels.node_queue import pop, push, waiting
from georoute.kernels.random_stream import below

__all__ = [
    "OR_3OPT",
    "OR_OPT",
    "TWO_OPT",
    "descend_directed",
    "kick_and_repair_directed",
    "refresh_sums",
]

Ints = NDArray[np.int64]

TWO_OPT = 1
OR_OPT = 2
OR_3OPT = 3
SHORT_CHAIN = 3
LONGEST_SEGMENT = 30


@kernel
def refresh_sums(table: Ints, tour: Ints, sums: Ints, start: Int) -> None:
    """Bring positions and sums up to date from position ``start`` on."""
    for k in range(start, tour.shape[1]):
        node = tour[0, k]
        tour[1, node] = k
        if k == 0:
            sums[0, 0] = 0
            sums[1, 0] = 0
        else:
            before = tour[0, k - 1]
            sums[0, k] = sums[0, k - 1] + table[before, node]
            sums[1, k] = sums[1, k - 1] + table[node, before]


@kernel
def _changed(table: Ints, tour: Ints, sums: Ints, note: Ints, first: Int, last: Int) -> None:
    note[0] = min(note[0], first)
    note[1] = max(note[1], last)
    refresh_sums(table, tour, sums, first)


@kernel
def _swap(
    table: Ints, tour: Ints, sums: Ints, queue: Ints, note: Ints, i: Int, j: Int, k: Int
) -> None:
    """Swap the stretches ``i + 1 .. j`` and ``j + 1 .. k`` (positions)."""
    n = tour.shape[1]
    for at in (i, i + 1, j, j + 1, k):
        push(queue, tour[0, at])
    push(queue, tour[0, k + 1 if k + 1 < n else 0])
    moved = tour[0, i + 1 : j + 1].copy()
    size = k - j
    for at in range(size):
        tour[0, i + 1 + at] = tour[0, j + 1 + at]
    tour[0, i + 1 + size : k + 1] = moved
    note[2] = OR_OPT if min(j - i, size) <= SHORT_CHAIN else OR_3OPT
    _changed(table, tour, sums, note, i + 1, k)


@kernel
def _turn(
    table: Ints, tour: Ints, sums: Ints, queue: Ints, note: Ints, first: Int, last: Int
) -> None:
    """Turn the stretch ``first .. last`` (positions) round."""
    n = tour.shape[1]
    for at in (first - 1, first, last):
        push(queue, tour[0, at])
    push(queue, tour[0, last + 1 if last + 1 < n else 0])
    i = first
    j = last
    while i < j:
        tour[0, i], tour[0, j] = tour[0, j], tour[0, i]
        i += 1
        j -= 1
    note[2] = TWO_OPT
    _changed(table, tour, sums, note, first, last)


@kernel
def _turn_gain(table: Ints, tour: Ints, sums: Ints, first: Int, last: Int) -> Int:
    """Return the gain of turning the stretch ``first .. last`` (positions, first >= 1) round."""
    a = tour[0, first - 1]
    b = tour[0, first]
    c = tour[0, last]
    d = tour[0, last + 1] if last + 1 < tour.shape[1] else tour[0, 0]
    gain = table[a, b] + table[c, d] - table[a, c] - table[b, d]
    gain += sums[0, last] - sums[0, first]
    return gain - (sums[1, last] - sums[1, first])


@kernel
def _try_turns(
    table: Ints, tour: Ints, sums: Ints, near: Ints, queue: Ints, note: Ints, node: Int
) -> Int:
    """Try to turn a stretch so that ``node`` is left for, or reached from, a near node."""
    n = tour.shape[1]
    at = tour[1, node]
    for k in range(near.shape[2]):
        for way in range(3):
            other = tour[1, near[0 if way < 2 else 1, node, k]]
            if way == 0:  # leave node for a later one: turn what lies between
                first, last = at + 1, other
            elif way == 1:  # node becomes the last of the turned stretch
                first, last = at, (other if other > 0 else n) - 1
            else:  # reach node from an earlier one
                first, last = other + 1, at
            if first < 1 or last <= first:
                continue
            gain = _turn_gain(table, tour, sums, first, last)
            if gain > 0:
                _turn(table, tour, sums, queue, note, first, last)
                return gain
    return np.int64(0)


@kernel
def _in_turn(p: Int, q: Int, r: Int) -> bool:
    """Tell whether going round from p one meets q before r (all different)."""
    return bool((p < q < r) or (q < r < p) or (r < p < q))


@kernel
def _try_swaps(
    table: Ints, tour: Ints, sums: Ints, near: Ints, queue: Ints, note: Ints, a: Int
) -> Int:
    """Try to leave ``a`` for a near node by swapping two stretches."""
    n = tour.shape[1]
    order = tour[0]
    pos = tour[1]
    pa = pos[a]
    after_a = order[(pa + 1) % n]
    for k in range(near.shape[2]):
        to = near[0, a, k]
        gain1 = table[a, after_a] - table[a, to]
        if gain1 <= 0:
            break
        pb = pos[to] - 1 if pos[to] > 0 else n - 1
        if pb == pa:
            continue
        b = order[pb]
        gain1 += table[b, to]
        for m in range(2 * near.shape[2]):
            if m < near.shape[2]:  # b is left for a near node
                after_c = near[0, b, m]
                pc = pos[after_c] - 1 if pos[after_c] > 0 else n - 1
                if gain1 - table[b, after_c] <= 0:
                    continue
            else:  # what followed a is reached from a near node
                pc = pos[near[1, after_a, m - near.shape[2]]]
                if gain1 - table[order[pc], after_a] <= 0:
                    continue
            if pc in (pa, pb) or not _in_turn(pa, pb, pc):
                continue
            c = order[pc]
            after_c = order[(pc + 1) % n]
            gain = gain1 + table[c, after_c] - table[b, after_c] - table[c, after_a]
            if gain > 0:
                i = min(pa, pb, pc)
                j = max(pa, pb, pc)
                _swap(table, tour, sums, queue, note, i, pa + pb + pc - i - j, j)
                return gain
    return np.int64(0)


@kernel
def descend_directed(
    table: Ints,
    tour: Ints,
    sums: Ints,
    near: Ints,
    queue: Ints,
    note: Ints,
    looks: Int,
    steps: Int,
) -> Int:
    """Make improving exchanges until the queue is empty; return the sum gained.

    Ends early after ``looks`` nodes looked at or ``steps`` exchanges made.
    """
    total = np.int64(0)
    while looks > 0 and steps > 0 and waiting(queue) > 0:
        node = pop(queue)
        looks -= 1
        gain = _try_swaps(table, tour, sums, near, queue, note, node)
        if gain == 0:
            gain = _try_turns(table, tour, sums, near, queue, note, node)
        if gain > 0:
            total += gain
            steps -= 1
            push(queue, node)
    return total


@kernel
def _double_bridge(
    table: Ints, tour: Ints, sums: Ints, queue: Ints, note: Ints, stream: NDArray[np.uint64]
) -> Int:
    """Swap the first and third of three short stretches in a row; return the cost added."""
    n = tour.shape[1]
    longest = max(1, min(LONGEST_SEGMENT, (n - 1) // 3))
    size1 = 1 + below(stream, longest)
    size2 = 1 + below(stream, longest)
    size3 = 1 + below(stream, longest)
    first = 1 + below(stream, n - size1 - size2 - size3)
    last = first + size1 + size2 + size3 - 1
    end = tour[0, last + 1 if last + 1 < n else 0]
    before = sums[0, last] - sums[0, first - 1] + table[tour[0, last], end]
    for at in (first - 1, first, last):
        push(queue, tour[0, at])
    push(queue, end)
    for at in (first + size1, first + size1 + size2):
        push(queue, tour[0, at - 1])
        push(queue, tour[0, at])
    old = tour[0, first : last + 1].copy()
    tour[0, first : first + size3] = old[size1 + size2 :]
    tour[0, first + size3 : first + size3 + size2] = old[size1 : size1 + size2]
    tour[0, first + size3 + size2 : last + 1] = old[:size1]
    _changed(table, tour, sums, note, first, last)
    return sums[0, last] - sums[0, first - 1] + table[tour[0, last], end] - before


@kernel
def kick_and_repair_directed(
    table: Ints,
    tour: Ints,
    sums: Ints,
    near: Ints,
    queue: Ints,
    note: Ints,
    stream: NDArray[np.uint64],
    kept: Ints,
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
    made before this call. ``kept`` (n,) is the tour to go back to,
    ``best`` (n,) the best; ``costs`` (2,) are the costs of both. With ``stop_at_best`` 1 the
    call ends at a new best tour.
    """
    n = tour.shape[1]
    for done in range(kicks):
        note[0] = n
        note[1] = 0
        added = _double_bridge(table, tour, sums, queue, note, stream)
        added -= descend_directed(table, tour, sums, near, queue, note, 1 << 40, 1 << 40)
        limit = dearer_by(stream, heat, before + done, total, spent)
        low = note[0]
        high = note[1] + 1
        if added > 0 and added > limit:
            tour[0, low:high] = kept[low:high]
            refresh_sums(table, tour, sums, low)
            continue
        kept[low:high] = tour[0, low:high]
        costs[0] += added
        if costs[0] < costs[1]:
            costs[1] = costs[0]
            best[:] = kept
            if stop_at_best == 1:
                return np.int64(done + 1)
    return np.int64(kicks)
