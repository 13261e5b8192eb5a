"""The exchanges searched on a day with opening windows: their travel, their outcome.

Arrays as in ``kernels.timed``. An exchange is a kind and positions i <= j <= k of the sequence:
``TURN`` turns ``i .. j`` round; ``SWAP`` swaps ``i .. j`` and ``j + 1 .. k``, with the first or
the second of them turned round for ``SWAP_TURN_FIRST`` and ``SWAP_TURN_SECOND``.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.node_queue import push
from georoute.kernels.random_stream import below

__all__ = [
    "SHORT_CHAIN",
    "SWAP",
    "SWAP_TURN_FIRST",
    "SWAP_TURN_SECOND",
    "TURN",
    "added_travel",
    "double_bridge",
    "move_at_random",
    "nth_exchange",
    "refresh_timed",
    "write_exchanged",
]

Ints = NDArray[np.int64]

TURN = 0
SWAP = 1
SWAP_TURN_FIRST = 2
SWAP_TURN_SECOND = 3
SHORT_CHAIN = 3
LONGEST_SEGMENT = 30


@kernel
def refresh_timed(legs: Ints, seq: Ints, sums: Ints) -> None:
    """Bring positions and sums up to date."""
    seq[1, seq[0, 0]] = 0
    sums[:, 0] = 0
    for k in range(1, seq.shape[1]):
        a = seq[0, k - 1]
        b = seq[0, k]
        seq[1, b] = k
        sums[0, k] = sums[0, k - 1] + legs[0, a, b]
        sums[1, k] = sums[1, k - 1] + legs[0, b, a]
        sums[2, k] = sums[2, k - 1] + legs[1, a, b]
        sums[3, k] = sums[3, k - 1] + legs[1, b, a]


@kernel
def added_travel(
    legs: Ints, seq: Ints, sums: Ints, unit: Int, kind: Int, i: Int, j: Int, k: Int
) -> Int:
    """Return the travel added by an exchange, in ms (``unit`` 0) or mm (1)."""
    a, b = seq[0, i - 1], seq[0, i]
    c, d = seq[0, j], seq[0, j + 1]
    along = 2 * unit
    if kind == TURN:
        added = legs[unit, a, c] + legs[unit, b, d] - legs[unit, a, b] - legs[unit, c, d]
        added += sums[along + 1, j] - sums[along + 1, i]
        return added - (sums[along, j] - sums[along, i])
    e, f = seq[0, k], seq[0, k + 1]
    added = -legs[unit, a, b] - legs[unit, c, d] - legs[unit, e, f]
    if kind == SWAP:
        return added + legs[unit, a, d] + legs[unit, e, b] + legs[unit, c, f]
    if kind == SWAP_TURN_FIRST:
        added += legs[unit, a, d] + legs[unit, e, c] + legs[unit, b, f]
        added += sums[along + 1, j] - sums[along + 1, i]
        return added - (sums[along, j] - sums[along, i])
    added += legs[unit, a, e] + legs[unit, d, b] + legs[unit, c, f]
    added += sums[along + 1, k] - sums[along + 1, j + 1]
    return added - (sums[along, k] - sums[along, j + 1])


@kernel
def write_exchanged(seq: Ints, trial: Ints, kind: Int, i: Int, j: Int, k: Int) -> None:
    """Write the sequence after an exchange into row 0 of ``trial``."""
    last = j if kind == TURN else k
    size = last - j
    for at in range(seq.shape[1]):
        source: Int = at
        if i <= at <= last:
            if at < i + size:
                source = j + 1 + at - i if kind != SWAP_TURN_SECOND else k - (at - i)
            elif kind in (TURN, SWAP_TURN_FIRST):
                source = j - (at - i - size)
            else:
                source = at - size
        trial[0, at] = seq[0, source]


@kernel
def nth_exchange(seq: Ints, role: Int, step: Int, p: Int) -> tuple[Int, Int, Int, Int]:
    """Return the exchange number ``step`` around position p as kind-group, i, j, k; k 0: none.

    Roles: p starts (0) or ends (1) a turned stretch; p starts a short first stretch (2), ends a
    short second stretch (3), starts a short second one (4) or ends a short first one (5).
    """
    last = seq.shape[1] - 2
    if role == 0:
        j = p + 1 + step
        return TURN, p, j, j if j <= last else 0
    if role == 1:
        i = 1 + step
        return TURN, i, p, p if i < p else 0
    size = step % SHORT_CHAIN
    far = 1 + step // SHORT_CHAIN
    if role >= 4 and size == 0:  # one stop alone: roles 2 and 3 move it already
        return SWAP, p, p, 0
    if role == 2:
        j = p + size
        return SWAP, p, j, j + far if j + far <= last else 0
    if role == 3:
        j = p - size - 1
        return SWAP, j - far + 1, j, p if j - far + 1 >= 1 else 0
    if role == 4:
        k = p + size
        return SWAP, p - far, p - 1, k if k <= last and p - far >= 1 else 0
    i = p - size
    return SWAP, i, p, p + far if i >= 1 and p + far <= last else 0


@kernel
def double_bridge(seq: Ints, trial: Ints, queue: Ints, stream: NDArray[np.uint64]) -> None:
    """Swap the first and third of three short stretches in a row."""
    m = seq.shape[1] - 2
    longest = max(1, min(LONGEST_SEGMENT, m // 3))
    size1 = 1 + below(stream, longest)
    size2 = 1 + below(stream, longest)
    size3 = 1 + below(stream, longest)
    first = 1 + below(stream, m - size1 - size2 - size3 + 1)
    last = first + size1 + size2 + size3 - 1
    trial[0] = seq[0]
    seq[0, first : first + size3] = trial[0, first + size1 + size2 : last + 1]
    middle = first + size3
    seq[0, middle : middle + size2] = trial[0, first + size1 : first + size1 + size2]
    seq[0, middle + size2 : last + 1] = trial[0, first : first + size1]
    for at in (first - 1, first, middle - 1, middle, middle + size2 - 1, middle + size2, last):
        if at >= 1:
            push(queue, seq[0, at])
    if last + 1 <= m:
        push(queue, seq[0, last + 1])


@kernel
def move_at_random(seq: Ints, trial: Ints, queue: Ints, stream: NDArray[np.uint64]) -> None:
    """Take one stop out and put it in at any place."""
    m = seq.shape[1] - 2
    old = 1 + below(stream, m)
    new = 1 + below(stream, m)
    stop = seq[0, old]
    trial[0] = seq[0]
    if old < new:
        seq[0, old:new] = trial[0, old + 1 : new + 1]
    else:
        seq[0, new + 1 : old + 1] = trial[0, new:old]
    seq[0, new] = stop
    for at in (old - 1, old, old + 1, new - 1, new, new + 1):
        if 1 <= at <= m:
            push(queue, seq[0, at])
