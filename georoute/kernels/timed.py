"""Order of a day with opening windows: every exchange is priced by the clock of the tour.

Exchanges: a stretch turned round, and two neighbouring stretches swapped, the shorter of at
most three stops, turned or not (G. Croes 1958; I. Or 1976; see ``lin_kernighan``). What a tour
is worth comes in two parts: lateness and excess in ms first, then money. Before the clock is
asked, an exchange has to pass two exact bounds: no duration is shorter than travel, work and
write-up, and no tour is earlier than one that leaves at once.

All arrays are int64 unless said otherwise. Nodes 0 .. m-1 are the visits ``names`` (m,), node m
the start, m + 1 the end. ``legs`` (2, m + 2, m + 2): ms and mm. ``seq`` (2, m + 2): nodes in
sequence with start and end, and where each stands. ``sums`` (4, m + 2): ms along and against
the sequence, mm along and against. ``worth`` (4,): ms late or in excess, money, ms of travel,
mm of travel. ``limits`` (4,): work and write-up in ms, departure at the earliest,
finish at the latest, longest duration. ``tariff`` float64 (5,): per ms, per ms of overtime, per
mm, paid ms, per day.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Float, Int, kernel
from georoute.kernels.acceptance import dearer_by
from georoute.kernels.arrays import Shifts, Travel, Visits
from georoute.kernels.clock import clock_tour, tour_cost
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
    travel: Travel,
    visits: Visits,
    shifts: Shifts,
    shift: Int,
    names: Ints,
    seq: Ints,
    scratch: Ints,
    worth: Ints,
) -> None:
    """Fill ``worth`` for the sequence, by the clock. ``scratch`` is int64 (3, m)."""
    order = scratch[0]
    for k in range(names.shape[0]):
        order[k] = names[seq[0, k + 1]]
    times = clock_tour(travel, visits, shifts, shift, order, scratch[1], scratch[2])
    worth[0] = times.late_ms + times.excess_ms
    worth[1] = tour_cost(shifts, shift, times)
    worth[2] = times.drive_ms
    worth[3] = times.length_mm


@kernel
def _earliest(
    legs: Ints, names: Ints, visits: Visits, limits: Ints, trial: Ints
) -> tuple[Int, Int]:
    """Return lateness and finish of a sequence that leaves as early as allowed."""
    ptr, opens, closes = visits.window_ptr, visits.window_open_ms, visits.window_close_ms
    work = visits.work_ms
    now = limits[1]
    late = np.int64(0)
    total_work = np.int64(0)
    for k in range(1, trial.shape[1]):
        now += legs[0, trial[0, k - 1], trial[0, k]]
        if k == trial.shape[1] - 1:
            break
        v = names[trial[0, k]]
        last = ptr[v + 1]
        if ptr[v] < last:
            if now > closes[last - 1]:
                late += now - closes[last - 1]
            else:
                w = ptr[v]
                while now > closes[w]:
                    w += 1
                now = max(now, opens[w])
        now += work[v]
        total_work += work[v]
    return late, now + limits[0] - total_work


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
    travel: Travel,
    visits: Visits,
    shifts: Shifts,
    shift: Int,
    names: Ints,
    legs: Ints,
    seq: Ints,
    sums: Ints,
    worth: Ints,
    limits: Ints,
    scratch: Ints,
    trial: Ints,
    kind: Int,
    i: Int,
    j: Int,
    k: Int,
) -> bool:
    """Make the exchange if the clock says it is better; tell whether it was made."""
    write_exchanged(seq, trial, kind, i, j, k)
    late, finish = _earliest(legs, names, visits, limits, trial)
    if late + max(0, finish - limits[2]) > worth[0]:
        return False
    new = np.empty(4, np.int64)
    price_timed(travel, visits, shifts, shift, names, trial, scratch, new)
    if new[0] > worth[0] or (new[0] == worth[0] and new[1] >= worth[1]):
        return False
    worth[:] = new
    seq[0] = trial[0]
    refresh_timed(legs, seq, sums)
    return True


@kernel
def _improve(
    travel: Travel,
    visits: Visits,
    shifts: Shifts,
    shift: Int,
    names: Ints,
    legs: Ints,
    seq: Ints,
    sums: Ints,
    worth: Ints,
    limits: Ints,
    tariff: Floats,
    queue: Ints,
    scratch: Ints,
    trial: Ints,
    p: Int,
) -> Int:
    """Make one exchange around position ``p``; return 0 for none, 1 turned, 2 swapped."""
    m = names.shape[0]
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
                    travel,
                    visits,
                    shifts,
                    shift,
                    names,
                    legs,
                    seq,
                    sums,
                    worth,
                    limits,
                    scratch,
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
    travel: Travel,
    visits: Visits,
    shifts: Shifts,
    shift: Int,
    names: Ints,
    legs: Ints,
    seq: Ints,
    sums: Ints,
    worth: Ints,
    limits: Ints,
    tariff: Floats,
    queue: Ints,
    scratch: Ints,
    trial: Ints,
    steps: Int,
) -> Int:
    """Make up to ``steps`` better exchanges; return the kind of the last, as ``_improve``."""
    last: Int = np.int64(0)
    while steps > 0 and waiting(queue) > 0:
        node = pop(queue)
        made = _improve(
            travel,
            visits,
            shifts,
            shift,
            names,
            legs,
            seq,
            sums,
            worth,
            limits,
            tariff,
            queue,
            scratch,
            trial,
            seq[1, node],
        )
        if made > 0:
            last = made
            steps -= 1
            push(queue, node)
    return last


@kernel
def kick_and_repair_timed(
    travel: Travel,
    visits: Visits,
    shifts: Shifts,
    shift: Int,
    names: Ints,
    legs: Ints,
    seq: Ints,
    sums: Ints,
    worth: Ints,
    limits: Ints,
    tariff: Floats,
    queue: Ints,
    scratch: Ints,
    trial: Ints,
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
        price_timed(travel, visits, shifts, shift, names, seq, scratch, worth)
        descend_timed(
            travel,
            visits,
            shifts,
            shift,
            names,
            legs,
            seq,
            sums,
            worth,
            limits,
            tariff,
            queue,
            scratch,
            trial,
            1 << 40,
        )
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
