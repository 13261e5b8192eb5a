"""The best plan of a small array problem, by trying every order of every set of visits.

Plain Python integers, no kernel and no bound: an order is given up only where every longer one
breaks the same limit, because clock, work and load never fall.
"""

from __future__ import annotations

import math
from typing import NamedTuple

from georoute.kernels.arrays import MUST, UNREACHABLE
from georoute.problem import Problem

__all__ = ["Objective", "best_plan", "loss_of"]

Objective = tuple[tuple[int, ...], int]
"""What is left out, gravest class first, and the tours if they count; then micro-units of money."""
FAR = 1 << 60


def loss_of(problem: Problem, left_out: set[int]) -> tuple[int, ...]:
    """Return the number of musts left out, then the worth left out at each level."""
    visits = problem.visits
    levels = sorted({int(level) for level in visits.level})
    musts = sum(1 for v in left_out if int(visits.worth[v]) >= MUST)
    lost = [
        sum(
            max(1, int(visits.worth[v]))
            for v in left_out
            if int(visits.level[v]) == level and int(visits.worth[v]) < MUST
        )
        for level in levels
    ]
    return (musts, *lost)


class _Tour(NamedTuple):
    """A tour under way: the visits in it, where and when its last work ended, and its sums.

    ``wait`` and ``slack``: what has been waited, and how much later the tour could have left
    without any later work.
    """

    mask: int
    here: int
    now: int
    length: int
    load: int
    wait: int
    slack: int


class _Orders:
    """All feasible orders of one shift; the least money for each set of visits (a bit mask)."""

    def __init__(self, problem: Problem, s: int) -> None:
        visits, shifts = problem.visits, problem.shifts
        self.time: list[list[int]] = problem.travel.time_ms.tolist()
        self.length: list[list[int]] = problem.travel.length_mm.tolist()
        self.place: list[int] = visits.place.tolist()
        self.work: list[int] = visits.work_ms.tolist()
        self.load: list[int] = visits.load.tolist()
        pointer = visits.window_ptr.tolist()
        spans = list(
            zip(visits.window_open_ms.tolist(), visits.window_close_ms.tolist(), strict=True)
        )
        self.windows = [spans[pointer[v] : pointer[v + 1]] for v in range(len(self.place))]
        self.allowed = [v for v in range(len(self.place)) if visits.eligible[v, s]]
        self.open, self.close = int(shifts.open_ms[s]), int(shifts.close_ms[s])
        self.paid, self.limit = int(shifts.paid_ms[s]), int(shifts.limit_ms[s])
        self.write_up, self.load_limit = int(shifts.write_up_ms[s]), int(shifts.load_limit[s])
        self.end, self.day_cost = int(shifts.end_place[s]), int(shifts.day_cost[s])
        rates = (shifts.hour_rate[s], shifts.overtime_rate[s], shifts.length_rate[s])
        self.hour_rate, self.overtime_rate, self.length_rate = (float(rate) for rate in rates)
        self.cheapest: dict[int, int] = {0: 0}
        start = int(shifts.start_place[s])
        self.grow(_Tour(mask=0, here=start, now=self.open, length=0, load=0, wait=0, slack=FAR))

    def grow(self, tour: _Tour) -> None:
        """Close the tour here, then try each further visit as its next."""
        if tour.mask:
            self.finish(tour)
        for v in self.allowed:
            if not tour.mask >> v & 1:
                longer = self.longer(tour, v)
                if longer is not None:
                    self.grow(longer)

    def longer(self, tour: _Tour, v: int) -> _Tour | None:
        """Return the tour with one more visit; nothing where no tour that begins so is allowed."""
        there = self.place[v]
        leg = self.time[tour.here][there]
        load = tour.load + self.load[v]
        if leg >= UNREACHABLE or load > self.load_limit:
            return None
        arrive = tour.now + leg
        start, slack, wait = arrive, tour.slack, tour.wait
        if self.windows[v]:
            usable = [span for span in self.windows[v] if arrive <= span[1]]
            if not usable:
                return None
            start = max(arrive, usable[0][0])
            wait += start - arrive
            slack = min(slack, wait + usable[0][1] - start)
        now = start + self.work[v]
        over = now + self.write_up > self.close
        if over or now - self.open - wait + self.write_up > self.limit:
            return None
        length = tour.length + self.length[tour.here][there]
        return _Tour(tour.mask | 1 << v, there, now, length, load, wait, slack)

    def finish(self, tour: _Tour) -> None:
        """Go back to the base, and keep the money if it is the least for this set of visits."""
        leg = self.time[tour.here][self.end]
        finish = tour.now + leg + self.write_up
        duration = finish - self.open - min(tour.slack, tour.wait)
        if leg >= UNREACHABLE or finish > self.close or duration > self.limit:
            return
        paid = min(duration, self.paid)
        length = tour.length + self.length[tour.here][self.end]
        money = self.hour_rate * paid + self.overtime_rate * (duration - paid)
        cost = math.floor(money + self.length_rate * length + 0.5) + self.day_cost
        known = self.cheapest.get(tour.mask)
        if known is None or cost < known:
            self.cheapest[tour.mask] = cost


def best_plan(problem: Problem, *, fewest_days: bool = False) -> Objective:
    """Return loss and money of the best plan over all days, all orders and all that is left out.

    With ``fewest_days`` the number of tours stands behind the loss.
    """
    count = problem.visit_count
    totals: dict[int, tuple[int, int]] = {0: (0, 0)}
    for s in range(problem.shift_count):
        cheapest = _Orders(problem, s).cheapest
        after: dict[int, tuple[int, int]] = {}
        for placed, (days, money) in totals.items():
            for mask, more in cheapest.items():
                if not placed & mask:
                    both = placed | mask
                    sums = (days + (fewest_days and mask > 0), money + more)
                    after[both] = min(sums, after.get(both, sums))
        totals = after
    return min(
        (
            loss_of(problem, {v for v in range(count) if not placed >> v & 1})
            + ((days,) if fewest_days else ()),
            money,
        )
        for placed, (days, money) in totals.items()
    )
