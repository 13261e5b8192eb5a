"""Random problems, and a slow clock in plain Python that shares nothing with the kernels."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import pairwise, permutations, product

import numpy as np
from numpy.typing import NDArray

from georoute.kernels.arrays import MUST, UNREACHABLE, Shifts, Travel, Visits
from georoute.problem import Problem, Solution

MIN = 60_000
HOUR = 60 * MIN
DAY = 24 * HOUR
NO_LIMIT = 1 << 60


@dataclass(frozen=True, slots=True, kw_only=True)
class Recipe:
    """What a random problem looks like. Shares are probabilities per visit or shift."""

    visits: int = 12
    shifts: int = 4
    bases: int = 2
    span_m: float = 30_000.0
    speed_m_per_s: float = 12.0
    asymmetry: float = 0.25
    work_min: tuple[int, int] = (10, 60)
    paid_min: tuple[int, int] = (420, 480)
    overtime_min: tuple[int, int] = (0, 60)
    write_up_min: tuple[int, int] = (0, 30)
    windowed: float = 0.3
    double_windowed: float = 0.1
    loaded: float = 0.3
    load_limited: float = 0.5
    restricted: float = 0.3
    must: float = 0.1
    levels: int = 2
    unreachable: float = 0.0
    day_cost: int = 40_000_000
    one_way_shifts: float = 0.3
    planar: bool = False
    clusters: int = 0


@dataclass(slots=True)
class _Draw:
    recipe: Recipe
    rng: np.random.Generator
    x: NDArray[np.float64] = field(default_factory=lambda: np.zeros(0))
    y: NDArray[np.float64] = field(default_factory=lambda: np.zeros(0))

    def minutes(self, low_high: tuple[int, int], size: int) -> NDArray[np.int64]:
        low, high = low_high
        return self.rng.integers(low, high + 1, size).astype(np.int64) * MIN

    def chance(self, share: float, size: int) -> NDArray[np.bool_]:
        return np.asarray(self.rng.random(size) < share)

    def points(self) -> None:
        recipe, rng = self.recipe, self.rng
        count = recipe.bases + recipe.visits
        spots = rng.random((count, 2)) * recipe.span_m
        if recipe.clusters:
            centres = rng.random((recipe.clusters, 2)) * recipe.span_m
            member = rng.integers(0, recipe.clusters, count)
            spots = centres[member] + rng.normal(0.0, recipe.span_m / 25, (count, 2))
        self.x, self.y = spots[:, 0].copy(), spots[:, 1].copy()

    def travel(self) -> Travel:
        recipe, rng = self.recipe, self.rng
        if recipe.planar:
            no_table = np.zeros((0, 0), np.int64)
            per_m = 1000.0 / recipe.speed_m_per_s
            return Travel(0, no_table, no_table, self.x, self.y, per_m, 1000.0, 1)
        gap = np.hypot(self.x[:, None] - self.x, self.y[:, None] - self.y)
        factor = 1.0 + recipe.asymmetry * rng.random(gap.shape)
        length_mm = np.floor(gap * factor * 1000.0).astype(np.int64)
        time_ms = np.floor(gap * factor / recipe.speed_m_per_s * 1000.0).astype(np.int64)
        if recipe.unreachable > 0.0:
            cut = self.chance(recipe.unreachable, gap.size).reshape(gap.shape)
            np.fill_diagonal(cut, val=False)
            length_mm[cut] = UNREACHABLE
            time_ms[cut] = UNREACHABLE
        return Travel(1, time_ms, length_mm, np.zeros(0), np.zeros(0), 1.0, 1.0, 1)

    def windows(self, days: int) -> tuple[list[int], list[int], list[int]]:
        """Return the pointer, opening and closing times: one or two windows on each day."""
        recipe, rng = self.recipe, self.rng
        pointer, opens, closes = [0], [], []
        for _ in range(recipe.visits):
            draw = rng.random()
            if draw < recipe.windowed:
                for day in range(days):
                    first = int(rng.integers(7 * 60, 13 * 60)) * MIN + day * DAY
                    opens.append(first)
                    closes.append(first + int(rng.integers(30, 240)) * MIN)
                    if draw < recipe.double_windowed:
                        opens.append(closes[-1] + 30 * MIN)
                        closes.append(opens[-1] + int(rng.integers(15, 120)) * MIN)
            pointer.append(len(opens))
        return pointer, opens, closes

    def visits(self, days: int) -> Visits:
        recipe, rng = self.recipe, self.rng
        count = recipe.visits
        pointer, opens, closes = self.windows(days)
        eligible = np.ones((count, recipe.shifts), np.bool_)
        tied = self.chance(recipe.restricted, count)
        eligible[tied] = rng.random((int(tied.sum()), recipe.shifts)) < 0.5
        must = self.chance(recipe.must, count)
        worth = rng.integers(1, 200, count).astype(np.int64) * 1_000_000
        return Visits(
            place=np.arange(count, dtype=np.int64) + recipe.bases,
            work_ms=self.minutes(recipe.work_min, count),
            load=np.where(self.chance(recipe.loaded, count), rng.integers(1, 9, count), 0),
            window_ptr=np.array(pointer, np.int64),
            window_open_ms=np.array(opens, np.int64),
            window_close_ms=np.array(closes, np.int64),
            worth=np.where(must, MUST, worth),
            level=np.where(must, 0, rng.integers(0, recipe.levels, count)).astype(np.int64),
            eligible=eligible,
        )

    def shifts(self, people: int) -> Shifts:
        recipe, rng = self.recipe, self.rng
        count = recipe.shifts
        index = np.arange(count, dtype=np.int64)
        start = rng.integers(0, recipe.bases, count).astype(np.int64)
        other = rng.integers(0, recipe.bases, count).astype(np.int64)
        open_ms = index // people * DAY + self.minutes((7 * 60, 9 * 60), count)
        paid_ms = self.minutes(recipe.paid_min, count)
        limit_ms = paid_ms + self.minutes(recipe.overtime_min, count)
        limited = self.chance(recipe.load_limited, count)
        return Shifts(
            start_place=start,
            end_place=np.where(self.chance(recipe.one_way_shifts, count), other, start),
            open_ms=open_ms,
            close_ms=open_ms + limit_ms + self.minutes((0, 60), count),
            paid_ms=paid_ms,
            limit_ms=limit_ms,
            write_up_ms=self.minutes(recipe.write_up_min, count),
            load_limit=np.where(limited, rng.integers(8, 30, count), NO_LIMIT).astype(np.int64),
            hour_rate=np.full(count, 38_000_000 / HOUR),
            overtime_rate=np.full(count, 57_000_000 / HOUR),
            length_rate=np.full(count, 0.42),
            day_cost=np.full(count, recipe.day_cost, np.int64),
            day=index // people,
            inspector=index % people,
        )


def random_problem(seed: int, recipe: Recipe | None = None) -> Problem:
    """Return the problem of this seed: bases are the first places, visits the rest."""
    recipe = recipe or Recipe()
    draw = _Draw(recipe, np.random.default_rng(seed))
    draw.points()
    people = max(1, round(recipe.shifts**0.5))
    shifts = draw.shifts(people)
    return Problem(
        travel=draw.travel(),
        visits=draw.visits(int(shifts.day.max(initial=0)) + 1),
        shifts=shifts,
        plane_x_m=draw.x,
        plane_y_m=draw.y,
    )


def random_orders(problem: Problem, seed: int) -> Solution:
    """Return every visit in a random shift, in random order: seldom within any limit."""
    rng = np.random.default_rng(seed)
    shift_of = rng.integers(0, problem.shift_count, problem.visit_count)
    shuffled = rng.permutation(problem.visit_count)
    return Solution(
        orders=tuple(shuffled[shift_of[shuffled] == s] for s in range(problem.shift_count))
    )


# The slow clock -----------------------------------------------------------------------------


@dataclass(frozen=True, slots=True, kw_only=True)
class SlowTimes:
    """What the slow clock says of a tour; ``breaches`` names every rule it breaks."""

    depart: int
    finish: int
    length: int
    cost: int
    breaches: tuple[str, ...]


def slow_leg(problem: Problem, i: int, j: int) -> tuple[int, int]:
    """Return time (ms) and length (mm) from place ``i`` to place ``j``."""
    travel = problem.travel
    if travel.dense:
        return int(travel.time_ms[i, j]), int(travel.length_mm[i, j])
    gap = float(np.hypot(travel.x[i] - travel.x[j], travel.y[i] - travel.y[j]))
    step = travel.step
    ticks = [
        int(gap * scale / step + 0.5) * step for scale in (travel.time_scale, travel.length_scale)
    ]
    return ticks[0], ticks[1]


def _pass(
    problem: Problem, shift: int, order: Sequence[int], depart: int
) -> tuple[int, list[int], bool, bool]:
    """Return the return to base, the window used at each stop, and: too late, cut off."""
    visits = problem.visits
    now, here = depart, int(problem.shifts.start_place[shift])
    used, late, cut = [], False, False
    for v in order:
        leg, _ = slow_leg(problem, here, int(visits.place[v]))
        cut = cut or leg >= UNREACHABLE
        now, here = now + leg, int(visits.place[v])
        span = range(int(visits.window_ptr[v]), int(visits.window_ptr[v + 1]))
        usable = [w for w in span if now <= visits.window_close_ms[w]]
        if usable:
            now = max(now, int(visits.window_open_ms[usable[0]]))
        used.append(usable[0] if usable else -1)
        late = late or (len(span) > 0 and not usable)
        now += int(visits.work_ms[v])
    leg, _ = slow_leg(problem, here, int(problem.shifts.end_place[shift]))
    return now + leg, used, late, cut or leg >= UNREACHABLE


def _latest_departure(problem: Problem, shift: int, order: Sequence[int]) -> int:
    """Return the latest departure with the same return and windows, by bisection."""
    earliest = int(problem.shifts.open_ms[shift])
    back, used, late, _ = _pass(problem, shift, order, earliest)
    if late or all(w < 0 for w in used):
        return earliest
    low, high = earliest, back
    while low < high:
        middle = (low + high + 1) // 2
        if _pass(problem, shift, order, middle)[:3] == (back, used, False):
            low = middle
        else:
            high = middle - 1
    return low


def slow_tour(problem: Problem, shift: int, order: Sequence[int]) -> SlowTimes:
    """Time and price a tour with at least one stop, leaving as late as does no harm."""
    shifts, visits = problem.shifts, problem.visits
    depart = _latest_departure(problem, shift, order)
    back, _, late, cut = _pass(problem, shift, order, depart)
    finish = back + int(shifts.write_up_ms[shift])
    places = [
        int(shifts.start_place[shift]),
        *(int(visits.place[v]) for v in order),
        int(shifts.end_place[shift]),
    ]
    length = sum(slow_leg(problem, i, j)[1] for i, j in pairwise(places))
    duration = finish - depart
    paid = min(duration, int(shifts.paid_ms[shift]))
    money = float(shifts.hour_rate[shift]) * paid
    money += float(shifts.overtime_rate[shift]) * (duration - paid)
    money += float(shifts.length_rate[shift]) * length
    broken = {
        "late": late,
        "cut off": cut,
        "not back": finish > shifts.close_ms[shift],
        "too long": duration > shifts.limit_ms[shift],
        "load": sum(int(visits.load[v]) for v in order) > shifts.load_limit[shift],
        "not eligible": not all(visits.eligible[v, shift] for v in order),
        "twice": len(set(order)) < len(order),
    }
    return SlowTimes(
        depart=depart,
        finish=finish,
        length=length,
        cost=int(np.floor(money + 0.5)) + int(shifts.day_cost[shift]),
        breaches=tuple(name for name, is_broken in broken.items() if is_broken),
    )


def slow_breaches(problem: Problem, solution: Solution) -> list[str]:
    """Return every breach of every tour, and visits that are in two tours."""
    found = []
    everything = [int(v) for order in solution.orders for v in order]
    if len(everything) != len(set(everything)):
        found.append("a visit is in two tours")
    for s, order in enumerate(solution.orders):
        if order.shape[0] > 0:
            found += [f"shift {s}: {b}" for b in slow_tour(problem, s, order.tolist()).breaches]
    return found


def slow_cost(problem: Problem, solution: Solution) -> int:
    """Return the money of all tours."""
    return sum(
        slow_tour(problem, s, order.tolist()).cost
        for s, order in enumerate(solution.orders)
        if order.shape[0] > 0
    )


def slow_loss(problem: Problem, solution: Solution) -> tuple[int, ...]:
    """Return what is left out: the number of musts, then the worth at each level."""
    visits = problem.visits
    placed = {int(v) for order in solution.orders for v in order}
    out = [v for v in range(problem.visit_count) if v not in placed]
    musts = sum(int(visits.worth[v] >= MUST) for v in out)
    others = [v for v in out if visits.worth[v] < MUST]
    levels = sorted({int(level) for level in visits.level})
    losses = [
        sum(max(1, int(visits.worth[v])) for v in others if visits.level[v] == k) for k in levels
    ]
    return musts, *losses


def best_by_brute_force(
    problem: Problem, *, fewest_days: bool = False
) -> tuple[tuple[int, ...], int]:
    """Return loss and money of the best plan, by trying everything (few visits only).

    With ``fewest_days`` the number of tours stands behind the loss.
    """
    n_visits, n_shifts = problem.visit_count, problem.shift_count
    tours: list[dict[frozenset[int], tuple[int, tuple[int, ...]]]] = []
    for s in range(n_shifts):
        cheapest: dict[frozenset[int], tuple[int, tuple[int, ...]]] = {}
        allowed = [v for v in range(n_visits) if problem.visits.eligible[v, s]]
        for size in range(1, len(allowed) + 1):
            for order in permutations(allowed, size):
                times = slow_tour(problem, s, order)
                key = frozenset(order)
                if not times.breaches and (key not in cheapest or times.cost < cheapest[key][0]):
                    cheapest[key] = (times.cost, order)
        tours.append(cheapest)
    best: tuple[tuple[int, ...], int] | None = None
    for choice in product(range(-1, n_shifts), repeat=n_visits):
        sets = [frozenset(v for v in range(n_visits) if choice[v] == s) for s in range(n_shifts)]
        if any(members and members not in tours[s] for s, members in enumerate(sets)):
            continue
        orders = [
            np.array(tours[s][members][1] if members else (), np.int64)
            for s, members in enumerate(sets)
        ]
        money = sum(tours[s][members][0] for s, members in enumerate(sets) if members)
        days = (sum(map(bool, sets)),) if fewest_days else ()
        outcome = ((*slow_loss(problem, Solution(orders=tuple(orders))), *days), money)
        if best is None or outcome < best:
            best = outcome
    assert best is not None
    return best
