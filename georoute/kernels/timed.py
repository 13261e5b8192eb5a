"""Order of a day with opening windows: every exchange is priced by the times of all stops.

Exchanges: a stretch turned round, and two neighbouring stretches swapped, the shorter of at
most three stops, turned or not (G. Croes 1958; I. Or 1976; see ``lin_kernighan``). What a tour
is worth comes in two parts: lateness and excess in ms first, then money. An exchange is timed
only if travel, work and write-up alone leave room for a gain.

The times are those of ``kernels.clock``, computed from the day's own small tables, ten times
faster than from the whole problem; the stage lets the clock itself judge every result.

All arrays are int64 unless said otherwise. Nodes 0 .. m-1 are the visits, node m the start,
m + 1 the end. ``legs`` (2, m + 2, m + 2): ms and mm. ``stops`` (m, 3): work in ms, first of the
visit's windows in ``spans`` (w, 2), one past the last. ``limits`` (5,): work and write-up of the
day in ms, departure at the earliest, finish at the latest, longest duration, write-up.
``tariff`` float64 (5,): per ms, per ms of overtime, per mm, paid ms, per day. ``seq`` (2, m + 2):
nodes in sequence with start and end, and where each stands. ``sums`` (4, m + 2): ms along and
against the sequence, mm along and against. ``worth`` (4,): ms late or in excess, money, ms of
travel, mm of travel. ``trial`` (2, m + 2) is scratch.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Float, Int, kernel
from georoute.kernels.acceptance import dearer_by
from georoute.kernels.node_queue import pop, push, waiting
from georoute.kernels.random_stream import below
from georoute.kernels.timed_moves import (
    SHORT_CHAIN,
    SWAP_TURN_FIRST,
    SWAP_TURN_SECOND,
    TURN,
    added_travel,
    double_bridge,
    move_at_random,
    nth_exchange,
    refresh_timed,
    write_exchanged,
)

__all__ = ["descend_timed", "kick_and_repair_timed", "price_timed"]

Ints = NDArray[np.int64]
Floats = NDArray[np.float64]


@kernel
def _money(tariff: Floats, duration: Int, length: Int) -> Int:
    paid = min(np.float64(duration), tariff[3])
    money = tariff[0] * paid + tariff[1] * (duration - paid) + tariff[2] * length
    return np.int64(np.floor(money + 0.5) + tariff[4])


@kernel
def price_timed(
    legs: Ints,
    stops: Ints,
    spans: Ints,
    limits: Ints,
    tariff: Floats,
    seq: Ints,
    latest: Int,
    worth: Ints,
) -> None:
    """Fill ``worth`` for the sequence: the model of ``clock_tour`` in one pass.

    Once lateness exceeds ``latest``, nothing but that is said of it.

    Leaving later by the forward time slack (Savelsbergh 1992, see ``clock``) shortens the day
    and leaves its finish as it is.
    """
    now = limits[1]
    late = np.int64(0)
    wait = np.int64(0)
    slack = np.int64(1 << 60)
    drive = np.int64(0)
    length = np.int64(0)
    here = seq[0, 0]
    for k in range(1, seq.shape[1] - 1):
        node = seq[0, k]
        drive += legs[0, here, node]
        length += legs[1, here, node]
        now += legs[0, here, node]
        here = node
        first = stops[node, 1]
        last = stops[node, 2]
        if first < last:
            if now > spans[last - 1, 1]:
                late += now - spans[last - 1, 1]
                slack = min(slack, wait)
                if late > latest:
                    worth[0] = late
                    return
            else:
                while now > spans[first, 1]:
                    first += 1
                start = max(now, spans[first, 0])
                wait += start - now
                slack = min(slack, wait + spans[first, 1] - start)
                now = start
        now += stops[node, 0]
    end = seq[0, seq.shape[1] - 1]
    drive += legs[0, here, end]
    length += legs[1, here, end]
    finish = now + legs[0, here, end] + limits[4]
    depart = limits[1]
    if late == 0:
        depart += max(np.int64(0), min(slack, wait))
    excess = max(finish - limits[2], finish - depart - limits[3])
    worth[0] = late + max(np.int64(0), excess)
    worth[1] = _money(tariff, finish - depart, length)
    worth[2] = drive
    worth[3] = length


@kernel
def _may_gain(
    legs: Ints,
    seq: Ints,
    sums: Ints,
    worth: Ints,
    limits: Ints,
    tariff: Floats,
    kind: Int,
    i: Int,
    j: Int,
    k: Int,
) -> bool:
    """Tell whether travel, work and write-up alone leave room for a gain."""
    drive = worth[2] + added_travel(legs, seq, sums, 0, kind, i, j, k)
    duration = drive + limits[0]
    excess = max(limits[1] + duration - limits[2], duration - limits[3], 0)
    if excess > worth[0]:
        return False
    if excess < worth[0]:
        return True
    length = worth[3] + added_travel(legs, seq, sums, 1, kind, i, j, k)
    return _money(tariff, duration, length) < worth[1]


@kernel
def _try(
    legs: Ints,
    stops: Ints,
    spans: Ints,
    limits: Ints,
    tariff: Floats,
    seq: Ints,
    sums: Ints,
    worth: Ints,
    trial: Ints,
    kind: Int,
    i: Int,
    j: Int,
    k: Int,
) -> bool:
    """Make the exchange if it is worth more; tell whether it was made."""
    write_exchanged(seq, trial, kind, i, j, k)
    new = trial[1]
    price_timed(legs, stops, spans, limits, tariff, trial, worth[0], new)
    if new[0] > worth[0] or (new[0] == worth[0] and new[1] >= worth[1]):
        return False
    worth[:4] = new[:4]
    seq[0] = trial[0]
    refresh_timed(legs, seq, sums)
    return True


@kernel
def _improve(
    legs: Ints,
    stops: Ints,
    spans: Ints,
    limits: Ints,
    tariff: Floats,
    seq: Ints,
    sums: Ints,
    worth: Ints,
    trial: Ints,
    queue: Ints,
    p: Int,
) -> Int:
    """Make one exchange around position ``p``; return 0 for none, 1 turned, 2 swapped."""
    m = stops.shape[0]
    for role in range(6):
        for step in range(m if role < 2 else SHORT_CHAIN * m):
            group, i, j, k = nth_exchange(seq, role, step, p)
            if k == 0:
                continue
            for kind in range(group, 1 if group == TURN else 4):
                if kind == SWAP_TURN_FIRST and not 0 < j - i < SHORT_CHAIN:
                    continue
                if kind == SWAP_TURN_SECOND and not 1 < k - j <= SHORT_CHAIN:
                    continue
                if not _may_gain(legs, seq, sums, worth, limits, tariff, kind, i, j, k):
                    continue
                if _try(
                    legs,
                    stops,
                    spans,
                    limits,
                    tariff,
                    seq,
                    sums,
                    worth,
                    trial,
                    kind,
                    i,
                    j,
                    k,
                ):
                    for at in (i - 1, i, i + k - j - 1, i + k - j, j, j + 1, k, k + 1):
                        if 1 <= at <= m:
                            push(queue, seq[0, at])
                    return np.int64(1 if kind == TURN else 2)
    return np.int64(0)


@kernel
def descend_timed(
    legs: Ints,
    stops: Ints,
    spans: Ints,
    limits: Ints,
    tariff: Floats,
    seq: Ints,
    sums: Ints,
    worth: Ints,
    trial: Ints,
    queue: Ints,
    steps: Int,
) -> Int:
    """Make up to ``steps`` better exchanges; return the kind of the last, as ``_improve``."""
    last: Int = np.int64(0)
    while steps > 0 and waiting(queue) > 0:
        node = pop(queue)
        made = _improve(
            legs,
            stops,
            spans,
            limits,
            tariff,
            seq,
            sums,
            worth,
            trial,
            queue,
            seq[1, node],
        )
        if made > 0:
            last = made
            steps -= 1
            push(queue, node)
    return last


@kernel
def kick_and_repair_timed(
    legs: Ints,
    stops: Ints,
    spans: Ints,
    limits: Ints,
    tariff: Floats,
    seq: Ints,
    sums: Ints,
    worth: Ints,
    trial: Ints,
    queue: Ints,
    stream: NDArray[np.uint64],
    kept: Ints,
    kept_worth: Ints,
    best: Ints,
    best_worth: Ints,
    kicks: Int,
    heat: Float,
    late_rate: Float,
    before: Int,
    total: Int,
    spent: Float,
    stop_at_best: Int,
) -> Int:
    """Kick and repair ``kicks`` times; return how many were made.

    ``kept`` and ``best`` (m + 2,) are the sequence to go back to and the best, with what they
    are worth. Dearer sequences are accepted as ``dearer_by`` says, ``before`` of ``total``
    kicks having been made before this call; for that, lateness and excess are priced at
    ``late_rate`` micro-units per ms. With ``stop_at_best`` 1 the call ends at a new best one.
    """
    for done in range(kicks):
        if below(stream, 2) == 0:
            double_bridge(seq, trial, queue, stream)
        else:
            move_at_random(seq, trial, queue, stream)
            move_at_random(seq, trial, queue, stream)
        refresh_timed(legs, seq, sums)
        price_timed(legs, stops, spans, limits, tariff, seq, 1 << 60, worth)
        descend_timed(legs, stops, spans, limits, tariff, seq, sums, worth, trial, queue, 1 << 40)
        limit = dearer_by(stream, heat, before + done, total, spent)
        later = worth[0] - kept_worth[0]
        dearer = worth[1] - kept_worth[1] + late_rate * later
        if later >= 0 and dearer > 0 and dearer > limit:
            seq[0] = kept
            worth[:] = kept_worth
            refresh_timed(legs, seq, sums)
            continue
        kept[:] = seq[0]
        kept_worth[:] = worth
        if worth[0] < best_worth[0] or (worth[0] == best_worth[0] and worth[1] < best_worth[1]):
            best[:] = kept
            best_worth[:] = worth
            if stop_at_best == 1:
                return np.int64(done + 1)
    return np.int64(kicks)
