"""Simulated annealing by ruin and recreate, in chunks, so that the caller can look in between.

J. Christiaens, G. Vanden Berghe, "Slack induction by string removals for vehicle routing
problems", Transportation Science 54 (2020) 417-433, sections 4 and 4.3 (visits that do not all
fit are counted while absent, and a state with rarer absences is taken).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Float, Int, kernel
from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.handover import hand_over
from georoute.kernels.random_stream import uniform
from georoute.kernels.recreate import recreate
from georoute.kernels.ruin import ruin
from georoute.kernels.slack_state import (
    COUNT,
    DRIVE,
    LOSS,
    MONEY,
    ROOM,
    STOP,
    WHERE,
    WINDOWED,
    WORKED,
    WRITE_UP,
    Facts,
    Rows,
    take_back_row,
)
from georoute.kernels.windowed_rows import Clockwork, breaks_a_limit, price_by_clock

__all__ = ["Book", "Guide", "anneal"]

# Columns of Book.sums
MONEY_NOW, LOSS_NOW, MISSING, BEST_MONEY, BEST_LOSS, IMPROVEMENTS = 0, 1, 2, 3, 4, 5


class Guide(NamedTuple):
    """What guides a search: ``near`` (int32, (V, K)), the nearest visits of each, itself first.

    ``keys`` and ``weights``: orders of insertion, see ``recreate``. ``handover_share``:
    share of the steps that hand whole tours over instead.
    """

    near: NDArray[np.int32]
    keys: NDArray[np.float64]
    weights: NDArray[np.float64]
    handover_share: float


class Book(NamedTuple):
    """What the search keeps: the best tours, absences, and scratch. All int64.

    ``best_stop`` (S, W + 2), ``best_count`` (S,): the best tours. ``changed`` (S,): 1 where a
    tour differs from the best. ``absent``, ``absent_before`` (V,): absent visits. ``absences``
    (V,): how often each was left absent. ``sums`` (6,): money now, loss now, number absent
    now, money of the best, loss of the best, improvements. ``touch`` (S + 1,).
    ``seen`` (kinds,). ``meter`` (3,): see ``recreate``.
    """

    best_stop: NDArray[np.int64]
    best_count: NDArray[np.int64]
    changed: NDArray[np.int64]
    absent: NDArray[np.int64]
    absent_before: NDArray[np.int64]
    absences: NDArray[np.int64]
    sums: NDArray[np.int64]
    touch: NDArray[np.int64]
    seen: NDArray[np.int64]
    meter: NDArray[np.int64]


@kernel
def _broken(clockwork: Clockwork | None, facts: Facts, rows: Rows, s: Int) -> Int:
    """Return 1 where what was taken out left row ``s`` against a limit, else 0.

    Only where travel breaks the triangle inequality, or a leg does not exist.
    """
    if rows.sum[s, COUNT] == 0:
        return np.int64(0)
    if clockwork is not None and rows.sum[s, WINDOWED] > 0:
        return np.int64(breaks_a_limit(clockwork, rows, s))
    duration = rows.sum[s, DRIVE] + rows.sum[s, WORKED] + facts.shift[s, WRITE_UP]
    if rows.sum[s, DRIVE] >= UNREACHABLE:
        return np.int64(1)
    return np.int64(duration > facts.shift[s, ROOM])


@kernel
def _keep_best(rows: Rows, book: Book) -> None:
    for s in range(rows.sum.shape[0]):
        if book.changed[s] == 1:
            n = rows.sum[s, COUNT]
            for k in range(1, n + 1):
                book.best_stop[s, k] = rows.cell[STOP, s, k]
            book.best_count[s] = n
            book.changed[s] = 0
    book.sums[BEST_MONEY] = book.sums[MONEY_NOW]
    book.sums[BEST_LOSS] = book.sums[LOSS_NOW]
    book.sums[IMPROVEMENTS] += 1


@kernel
def _take_back(rows: Rows, backup: Rows, book: Book) -> None:
    """Restore every touched row and the list of absent visits."""
    for i in range(1, book.touch[0] + 1):
        take_back_row(rows, backup, book.touch[i])
    for k in range(book.sums[MISSING]):
        v = book.absent_before[k]
        book.absent[k] = v
        rows.link[WHERE, v] = -1


@kernel
def _wanted(book: Book, money: Int, lost: Int, n_absent: Int, slack: Float) -> bool | np.bool_:
    """Decide whether the changed state replaces the one at hand: first by loss, then by money."""
    if lost == book.sums[LOSS_NOW]:
        return money < book.sums[MONEY_NOW] + slack
    if lost < book.sums[LOSS_NOW]:
        return True
    now = np.int64(0)
    before = np.int64(0)
    for k in range(n_absent):
        now += book.absences[book.absent[k]]
    for k in range(book.sums[MISSING]):
        before += book.absences[book.absent_before[k]]
    return now < before


@kernel
def _price_touched(clockwork: Clockwork | None, rows: Rows, touch: NDArray[np.int64]) -> None:
    if clockwork is not None:
        for i in range(1, touch[0] + 1):
            price_by_clock(clockwork, rows, touch[i])


@kernel
def anneal(
    clockwork: Clockwork | None,
    facts: Facts,
    rows: Rows,
    backup: Rows,
    guide: Guide,
    book: Book,
    steps: Int,
    warmth: Float,
    stream: NDArray[np.uint64],
) -> None:
    """Do ``steps`` rounds of ruin and recreate at temperature ``warmth`` (micro-units of money).

    ``clockwork`` is ``None`` where no visit has windows.
    """
    absent, touch, sums = book.absent, book.touch, book.sums
    for _ in range(steps):
        n_absent = sums[MISSING]
        for k in range(n_absent):
            book.absent_before[k] = absent[k]
        touch[0] = 0
        if guide.handover_share > 0.0 and uniform(stream) < guide.handover_share:
            hand_over(facts, rows, touch, backup, stream)
            _price_touched(clockwork, rows, touch)
        else:
            n_absent = ruin(facts, rows, guide.near, absent, n_absent, touch, backup, stream)
            _price_touched(clockwork, rows, touch)
            n_absent = recreate(
                clockwork,
                facts,
                rows,
                guide.keys,
                guide.weights,
                absent,
                n_absent,
                touch,
                backup,
                book.seen,
                book.meter,
                stream,
            )
        money = sums[MONEY_NOW]
        broken = np.int64(0)
        for i in range(1, touch[0] + 1):
            s = touch[i]
            money += rows.sum[s, MONEY] - backup.sum[s, MONEY]
            broken += _broken(clockwork, facts, rows, s)
        lost = np.int64(0)
        for k in range(n_absent):
            lost += facts.visit[absent[k], LOSS]
        slack = -warmth * np.log(1.0 - uniform(stream))
        if broken > 0 or not _wanted(book, money, lost, n_absent, slack):
            _take_back(rows, backup, book)
            continue
        for i in range(1, touch[0] + 1):
            book.changed[touch[i]] = 1
        sums[MONEY_NOW] = money
        sums[LOSS_NOW] = lost
        sums[MISSING] = n_absent
        for k in range(n_absent):
            book.absences[absent[k]] += 1
        if lost < sums[BEST_LOSS] or (lost == sums[BEST_LOSS] and money < sums[BEST_MONEY]):
            _keep_best(rows, book)
