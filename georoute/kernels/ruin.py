"""Ruin: take strings of neighbouring stops out of tours that are near each other.

J. Christiaens, G. Vanden Berghe, "Slack induction by string removals for vehicle routing
problems", Transportation Science 54 (2020) 417-433, section 4.1: strings and split strings,
with the paper's constants.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel
from georoute.kernels.random_stream import below, uniform
from georoute.kernels.slack_state import (
    AT,
    COUNT,
    STOP,
    WHERE,
    Facts,
    Rows,
    close_row,
    is_touched,
    save_row,
)

__all__ = ["ruin"]

MEAN_REMOVED = 10.0
LONGEST_STRING = 10
SPLIT_SHARE = 0.5
DEEPER_SHARE = 0.01


@kernel
def _remove_string(
    rows: Rows,
    s: Int,
    column: Int,
    length: Int,
    absent: NDArray[np.int64],
    n_absent: Int,
    stream: NDArray[np.uint64],
) -> Int:
    """Remove a string, or a split string, of ``length`` stops around ``column`` of row ``s``."""
    stop = rows.cell[STOP, s]
    n = rows.sum[s, COUNT]
    kept = np.int64(0)
    if 1 < length < n and uniform(stream) < SPLIT_SHARE:
        kept = np.int64(1)
        while length + kept < n and uniform(stream) < DEEPER_SHARE:
            kept += 1
    span = length + kept
    lowest = max(np.int64(1), column - span + 1)
    highest = min(column, n - span + 1)
    first = lowest + below(stream, highest - lowest + 1)
    # The stretch that is kept lies strictly inside, so that the string is really split.
    kept_from = first + 1 + below(stream, length - 1) if kept > 0 else first + span
    target = first
    for k in range(first, n + 1):
        v = stop[k]
        if k < first + span and not kept_from <= k < kept_from + kept:
            absent[n_absent] = v
            n_absent += 1
            rows.link[WHERE, v] = -1
        else:
            stop[target] = v
            target += 1
    rows.sum[s, COUNT] = target - 1
    return n_absent


@kernel
def _strings(rows: Rows, stream: NDArray[np.uint64]) -> tuple[Int, float]:
    """Draw how many tours lose a string, and the longest string; 0 where nothing is planned."""
    used = np.int64(0)
    stops = np.int64(0)
    for s in range(rows.sum.shape[0]):
        if rows.sum[s, COUNT] > 0:
            used += 1
            stops += rows.sum[s, COUNT]
    if used == 0:
        return np.int64(0), 1.0
    longest = min(np.float64(LONGEST_STRING), stops / used)
    most = 4.0 * MEAN_REMOVED / (1.0 + longest) - 1.0
    return np.int64(np.floor(uniform(stream) * most + 1.0)), longest


@kernel
def ruin(
    facts: Facts,
    rows: Rows,
    near: NDArray[np.int32],
    absent: NDArray[np.int64],
    n_absent: Int,
    touch: NDArray[np.int64],
    backup: Rows,
    stream: NDArray[np.uint64],
) -> Int:
    """Take strings out of tours around a random visit; return the new count of absent visits.

    ``near`` (int32, (V, K)): the nearest visits of each, itself first. ``touch`` (S + 1,):
    ``touch[0]`` counts the rows touched, whose numbers follow; each is saved in ``backup``
    before it changes.
    """
    strings, longest = _strings(rows, stream)
    seed = below(stream, near.shape[0])
    done = np.int64(0)
    for pick in range(near.shape[1]):
        if done >= strings:
            break
        v = np.int64(near[seed, pick])
        s = rows.link[WHERE, v]
        if s < 0 or is_touched(touch, s):
            continue
        save_row(rows, backup, touch, s)
        limit = min(np.float64(rows.sum[s, COUNT]), longest)
        length = min(np.int64(uniform(stream) * limit + 1.0), rows.sum[s, COUNT])
        column = rows.link[AT, v]
        n_absent = _remove_string(rows, s, column, length, absent, n_absent, stream)
        close_row(facts, rows, s)
        done += 1
    return n_absent
