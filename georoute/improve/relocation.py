"""Move visits between days: first until every limit holds, then as long as it pays."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.run import never_stop, no_progress
from georoute.improve.moves import Move, RelocateResult, read_move
from georoute.improve.prime import prime
from georoute.improve.state import make_step
from georoute.kernels.board import COUNT, FITS, INFEASIBLE, MONEY, RANK, WHERE, WINDOWED
from georoute.kernels.day_step import begin_step, keep_step, step_in, step_out
from georoute.kernels.insertion import best_place
from georoute.kernels.placement import (
    cheapest_push,
    excess_visit,
    fill_rises,
    next_pick,
    push_out,
    trade_place,
)
from georoute.kernels.random_stream import new_stream
from georoute.kernels.rearrangement import MOST_TRIED, rearrange
from georoute.kernels.relocation import close_day, relocate_one, swap_one
from georoute.problem import MICRO
from georoute.problem.board import make_board, solution_of

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from georoute.domain.run import Effort, Progress, ShouldStop
    from georoute.kernels._jit import Int
    from georoute.problem import Problem, Solution

__all__ = ["relocate"]

WORK_PER_CALL = 20_000
"""Positions judged between two looks at the clock: some milliseconds."""
WIDE_UP_TO = 600
"""Up to so many visits every search for a place goes through all tours."""
STOPS_PER_CALL = 400
"""Stops of the tours gone through between two looks at the clock, where each is taken out."""
LOCAL_SCAN = 1_000
"""Positions judged for one visit where only nearby tours are looked at."""
ABSENT_PER_ROUND = 20
VISITS_PER_TRY = 20
"""Each round makes one rearrangement for so many visits, and at least ``LEAST_TRIES``."""
LEAST_TRIES = 8
TRIES_PER_CALL = 8


class _Ended(Exception):  # noqa: N818 - not an error: the way out of nested loops
    """The caller wants the search to end."""


class _Relocation:
    """The state of one relocation."""

    def __init__(self, problem: Problem, solution: Solution, should_stop: ShouldStop) -> None:
        self.problem = problem
        self.board = make_board(problem, solution)
        self.step = make_step(self.board)
        self.should_stop = should_stop
        self.moves: list[Move] = []
        self.cost = sum(self.board.tour[:, MONEY].tolist())
        everywhere = problem.visit_count + problem.shift_count
        self.wide = int(problem.visit_count <= WIDE_UP_TO)
        positions = everywhere if self.wide else LOCAL_SCAN + problem.shift_count
        # In a tour with windows a position is judged by walking the stops after it.
        walk = 1 + int(self.board.tour[:, COUNT].max(initial=0)) // 8
        self.scan = positions * (walk if self.board.tour[:, WINDOWED].any() else 1)

    def look(self) -> None:
        """End the search if the caller wants that.

        Raises
        ------
        _Ended
            The caller wants the search to end.
        """
        if self.should_stop():
            raise _Ended

    def keep(self, kind: str) -> None:
        """Log the step just made, and leave it as it is."""
        move = read_move(kind, self.board, self.step, cost_before=self.cost)
        self.cost = move.cost_after
        self.moves.append(move)
        keep_step(self.step)

    def absent(self) -> NDArray[np.int64]:
        """Return the visits in no tour, those to be left out last first."""
        missing = np.flatnonzero(self.board.spot[:, WHERE] < 0)
        return missing[np.argsort(self.board.visit[missing, RANK], kind="stable")]

    def mend(self) -> None:
        """Take visits out of tours that break a limit; not stopped by anything."""
        for s in np.flatnonzero(self.board.tour[:, FITS] == 0):
            while self.board.tour[s, FITS] == 0:
                v = excess_visit(self.board, s)
                begin_step(self.step)
                step_out(self.board, self.step, v)
                self.keep("take_out")

    def place(self) -> None:
        """Put in whatever fits somewhere: the gravest loss first, then by regret."""
        bank = self.absent()
        n_shifts = self.problem.shift_count
        all_shifts = np.arange(n_shifts)
        rises = np.full((bank.shape[0], n_shifts), INFEASIBLE, np.int64)
        everything = self.problem.visit_count + n_shifts
        chunk = max(1, WORK_PER_CALL // everything)
        for begin in range(0, bank.shape[0], chunk):
            rows = np.arange(begin, min(begin + chunk, bank.shape[0]))
            fill_rises(self.board, bank, rows, all_shifts, rises)
            self.look()
        rows = np.arange(bank.shape[0])
        while True:
            i, s = next_pick(self.board, bank, rises)
            if i < 0:
                return
            _, p = best_place(self.board, s, bank[i], INFEASIBLE)
            begin_step(self.step)
            step_in(self.board, self.step, s, p, bank[i])
            self.keep("put_in")
            fill_rises(self.board, bank, rows, np.array([s], np.int64), rises)
            self.look()

    def make_room(self, v: int) -> bool:
        """Find a place for ``v``, left out until now, by moving one other visit."""
        shifts = np.flatnonzero(self.problem.visits.eligible[v])
        longest = int(self.board.tour[:, COUNT].max(initial=0))
        several = max(1, STOPS_PER_CALL // max(1, longest))
        stops = max(1, WORK_PER_CALL // (self.scan + longest))
        for first in range(0, shifts.size, several):
            some = shifts[first : first + several]
            # Only where tours are very long is one of them too much for a call.
            width = longest if several > 1 else stops
            for begin in range(0, longest, max(1, width)):
                if trade_place(self.board, self.step, v, some, begin, begin + width):
                    self.keep("make_room")
                    return True
                self.look()
        return False

    def push_in(self, v: int) -> bool:
        """Put ``v`` in at the price of visits that are left out before it, the least loss."""
        spare = np.empty(self.problem.visit_count, np.int64)
        found = np.zeros(2 + self.step.lost.shape[0], np.int64)
        found[0] = -1
        shifts = np.flatnonzero(self.problem.visits.eligible[v])
        longest = int(self.board.tour[:, COUNT].max(initial=0))
        several = max(1, STOPS_PER_CALL // max(1, longest))
        for first in range(0, shifts.size, several):
            some = shifts[first : first + several]
            cheapest_push(self.board, self.step, v, some, spare, found)
            self.look()
        if found[0] >= 0 and push_out(self.board, self.step, v, int(found[0]), spare):
            self.keep("push_out")
            return True
        return False

    def find_room(self, visits: NDArray[np.int64]) -> None:
        """Try the harder ways to place each of ``visits`` that is left out."""
        least_grave = int(self.board.visit[:, RANK].max(initial=0))
        for v in visits.tolist():
            if self.board.spot[v, WHERE] >= 0 or self.make_room(v):
                continue
            if self.board.visit[v, RANK] < least_grave:
                self.push_in(v)

    def descend(self, queue: NDArray[np.int64]) -> None:
        """Relocate and swap until neither pays for any visit."""
        moving: tuple[tuple[str, Callable[..., tuple[Int, bool]], int, tuple[int, ...]], ...] = (
            ("relocate", relocate_one, max(1, WORK_PER_CALL // self.scan), (self.wide,)),
            ("swap", swap_one, max(1, WORK_PER_CALL // 256), ()),
        )
        quiet = False
        while not quiet:
            quiet = True
            for kind, kernel, chunk, more in moving:
                begin = 0
                while begin < queue.shape[0]:
                    end = min(begin + chunk, queue.shape[0])
                    nxt, moved = kernel(self.board, self.step, queue, begin, end, *more)
                    begin = int(nxt)
                    if moved:
                        quiet = False
                        self.keep(kind)
                    self.look()

    def close_days(self) -> None:
        """Close each day whose visits are cheaper on other days, the emptiest first."""
        spare = np.empty(max(1, self.board.stops.shape[1]), np.int64)
        for s in np.argsort(self.board.tour[:, COUNT], kind="stable"):
            # A day so full that emptying it would take long does not pay to close.
            busy = int(self.board.tour[s, COUNT])
            if busy > 0 and busy * self.scan <= 50 * WORK_PER_CALL:
                if close_day(self.board, self.step, s, spare, self.wide):
                    self.keep("close_day")
                self.look()

    def shake(self, stream: NDArray[np.uint64]) -> None:
        """Rearrange a few visits at a time, here and there."""
        tries = max(LEAST_TRIES, self.problem.visit_count // VISITS_PER_TRY)
        bank = np.empty(self.board.near.shape[1] + MOST_TRIED + 1, np.int64)
        absent = self.absent()
        while tries > 0:
            done, kept = rearrange(
                self.board,
                self.step,
                absent,
                bank,
                stream,
                min(tries, TRIES_PER_CALL),
                self.wide,
            )
            tries -= int(done)
            if kept:
                self.keep("rearrange")
                absent = self.absent()
            self.look()


def _search(state: _Relocation, effort: Effort, seed: int, progress: Progress) -> None:
    """Place what can be placed, then improve, round after round.

    Raises
    ------
    _Ended
        The caller wants the search to end.
    """
    if state.problem.visit_count == 0 or state.problem.shift_count == 0:
        return  # there is nothing to draw from
    state.place()
    state.find_room(state.absent())
    if state.problem.shift_count == 1 and state.absent().size == 0:
        return  # one day with everything in it: there is nowhere to move to
    generator = np.random.default_rng(np.random.SeedSequence(seed, spawn_key=(1,)))
    stream = new_stream(seed)
    calm_at = -1
    for number in range(effort.relocation_rounds):
        state.look()
        queue = generator.permutation(state.problem.visit_count)
        if len(state.moves) != calm_at:
            state.descend(queue)
            state.close_days()
            missing = state.absent()
            if missing.size > 0:
                shifted = np.roll(missing, -number * ABSENT_PER_ROUND)
                state.find_room(shifted[:ABSENT_PER_ROUND])
            calm_at = len(state.moves)
        state.shake(stream)
        money = state.cost / MICRO
        share = (number + 1) / effort.relocation_rounds
        progress("relocate", fraction=share, cost=money, best_cost=money)
    state.place()


def relocate(
    problem: Problem,
    solution: Solution,
    *,
    effort: Effort,
    seed: int,
    progress: Progress = no_progress,
    should_stop: ShouldStop = never_stop,
) -> RelocateResult:
    """Move visits between days until every limit holds, then as long as it saves money.

    What comes first: that few visits are left out, those worth ``MUST`` before all others, then
    level by level by their worth; after that the money of the tours. A visit that fits is
    never left out to save money. Tours that break a limit lose visits; each visit without a
    tour is put where it costs least, or where one other visit can make room for it, or instead
    of visits that are left out before it. Then visits are moved and swapped between tours, days
    are closed, and small groups are taken out and put in again, as many rounds as ``effort``
    says.

    Parameters
    ----------
    problem
        The array problem.
    solution
        Orders to begin with; they may break limits.
    effort
        ``relocation_rounds`` counts the rounds of improvement.
    seed
        Same problem, solution, effort and seed: same result.
    progress
        Told the fraction of rounds done and the money of all tours.
    should_stop
        Asked every few milliseconds; once true the search ends.

    Returns
    -------
    RelocateResult
        Orders that keep every limit, whenever the search ends, also on an interrupt from the
        keyboard.
    """
    prime()
    state = _Relocation(problem, solution, should_stop)
    stopped = False
    try:
        state.mend()
        _search(state, effort, seed, progress)
    except (_Ended, KeyboardInterrupt):
        stopped = True
        state.mend()
    return RelocateResult(
        solution=solution_of(state.board), moves=tuple(state.moves), stopped=stopped
    )
