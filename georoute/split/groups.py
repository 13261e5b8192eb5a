"""One group of visits and shifts that belong together: clusters, days, balance."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.optimize import linear_sum_assignment
from sklearn.cluster import KMeans
from threadpoolctl import threadpool_limits

from georoute.kernels.balance import deal_out
from georoute.kernels.clock import time_tour, tour_cost
from georoute.kernels.first_order import nearest_first

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.problem import Problem
    from georoute.split.estimate import Estimate

__all__ = ["Group", "cluster_group"]

ATTEMPTS = 6
"""More days are tried so often."""
BREACH = 10.0
"""Time beyond a limit is priced at so many times the hourly rate."""
TOLERANCE = 0.01
"""Share of the working time by which days may be overfull: estimates are no better."""
BALANCE_ROUNDS = 10
FEW_VISITS = 1_000
"""Up to so many visits the clusters are started afresh several times."""
FAR_MS = 1e9
"""Stands for a way that does not exist, where costs are added up."""
WRONG_DAY = 10.0
"""A visit that may not go on a shift counts this many times its busy time against it."""
LATER_MS = 1_000.0
"""A day later counts like this much travel: enough to prefer the earlier of equals."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Group:
    """Visits (n,) and shifts (m,) by index; ``suitable`` (bool, (n, m)) where each may go."""

    problem: Problem
    figures: Estimate
    visits: NDArray[np.int64]
    shifts: NDArray[np.int64]
    suitable: NDArray[np.bool_]

    @property
    def points_m(self) -> NDArray[np.float64]:
        """Where the visits are: (n, 2)."""
        figures = self.figures
        return np.column_stack([figures.x_m[self.visits], figures.y_m[self.visits]])

    @property
    def busy_ms(self) -> NDArray[np.float64]:
        """Work and share of travel of each visit: (n,)."""
        busy: NDArray[np.float64] = self.figures.busy_ms[self.visits]
        return busy

    @property
    def room_ms(self) -> NDArray[np.float64]:
        """Paid time of each shift less its write-up: (m,)."""
        every = self.problem.shifts
        usable = np.minimum(every.limit_ms, every.close_ms - every.open_ms)
        paid = np.minimum(every.paid_ms, usable) - every.write_up_ms
        room: NDArray[np.float64] = np.maximum(1, paid[self.shifts]).astype(np.float64)
        return room

    @property
    def carry(self) -> NDArray[np.int64]:
        """Load limit of each shift: (m,)."""
        return self.problem.shifts.load_limit[self.shifts]

    @property
    def round_ms(self) -> NDArray[np.float64]:
        """Way out and back for each visit and shift: (n, m)."""
        rows = self.figures.round_ms[self.figures.pair_of[self.shifts]][:, self.visits]
        return np.minimum(rows.T.astype(np.float64), FAR_MS)


def _days_needed(group: Group) -> int:
    """Return how many days the work, the travel and the load need at the least."""
    room = np.cumsum(np.sort(group.room_ms)[::-1])
    days = np.arange(1, room.size + 1)
    outing = float(np.mean(group.round_ms.min(axis=1)))
    enough = room >= group.busy_ms.sum() + outing * days
    carry = np.cumsum(np.sort(group.carry)[::-1].astype(np.float64))
    enough &= carry >= float(group.problem.visits.load[group.visits].sum())
    return int(days[enough][0]) if enough.any() else room.size


def _clusters(group: Group, count: int, seed: int) -> NDArray[np.int64]:
    """Return the cluster of each visit: k-means, weighted by the time a visit takes."""
    points = group.points_m
    distinct = np.unique(points, axis=0).shape[0]
    model = KMeans(
        n_clusters=min(count, distinct),
        n_init=4 if points.shape[0] <= FEW_VISITS else 1,
        max_iter=100,
        random_state=seed % 2**32,
    )
    # Several threads add up in any order; one thread gives the same bits every time.
    with threadpool_limits(limits=1):
        labels = model.fit_predict(points, sample_weight=np.maximum(1.0, group.busy_ms))
    return np.asarray(labels, np.int64)


def _match(group: Group, labels: NDArray[np.int64]) -> NDArray[np.int64]:
    """Return a shift (0 .. m - 1) for each cluster: near its base, with room, on its dates."""
    busy = group.busy_ms
    member = (labels[:, None] == np.arange(labels.max() + 1)).astype(np.float64)
    size = member.sum(axis=0)
    away = (member.T @ group.round_ms) / size[:, None]
    wrong = member.T @ (busy[:, None] * ~group.suitable)
    over = np.maximum(0.0, (member.T @ busy)[:, None] + away - group.room_ms)
    day = group.problem.shifts.day[group.shifts]
    _, later = np.unique(day, return_inverse=True)
    cost = away + WRONG_DAY * wrong + over + LATER_MS * later.reshape(-1)
    _, shifts = linear_sum_assignment(cost)
    return np.asarray(shifts, np.int64)


def _open_more(group: Group, opened: NDArray[np.int64], count: int) -> NDArray[np.int64]:
    """Add shifts until there are ``count`` and each visit may go on one of them, earliest first."""
    chosen = opened.tolist()
    by_date = np.argsort(group.problem.shifts.day[group.shifts], kind="stable").tolist()
    while True:
        lost = ~group.suitable[:, chosen].any(axis=1)
        gain = group.suitable[lost].sum(axis=0)
        if not gain.any():
            break
        chosen.append(max(by_date, key=lambda s: gain[s]))
    spare = [s for s in by_date if s not in set(chosen)]
    chosen += spare[: max(0, count - len(chosen))]
    return np.array(chosen, np.int64)


class _Days:
    """The opened shifts while visits are dealt out to them, again and again."""

    def __init__(
        self, group: Group, opened: NDArray[np.int64], centres_m: NDArray[np.float64]
    ) -> None:
        self.points_m, self.busy_ms = group.points_m, group.busy_ms
        self.room_ms, self.carry = group.room_ms[opened], group.carry[opened]
        self.load = group.problem.visits.load[group.visits]
        self.trips_ms = group.round_ms[:, opened]
        self.allowed = group.suitable[:, opened]
        self.ms_per_m = max(group.figures.ms_per_m, 1e-9)
        self.centres_m = centres_m
        self.outing_ms = np.full(opened.size, float(np.mean(self.trips_ms.min(axis=1))))
        self.radius_m = np.full(opened.size, float(np.median(self._gap_m().min(axis=1))))

    def _gap_m(self) -> NDArray[np.float64]:
        gap: NDArray[np.float64] = np.hypot(
            self.points_m[:, :1] - self.centres_m[:, 0],
            self.points_m[:, 1:] - self.centres_m[:, 1],
        )
        return gap

    def deal(self) -> tuple[NDArray[np.int64], tuple[float, float]]:
        """Deal out; return the day of each visit, and the time too much and the distance."""
        gap = self._gap_m()
        # On the way out and back a day passes its base anyway: far bases attract nothing.
        distance = np.where(self.allowed, gap * self.ms_per_m + self.trips_ms / 4, np.inf)
        # Outside twice the mean radius of its day a visit costs a way of its own.
        apart = np.maximum(0.0, gap - 2.0 * self.radius_m) * self.ms_per_m
        takes = self.busy_ms[:, None] + 2.0 * apart
        ranked = np.sort(distance, axis=1)
        lost = ranked[:, min(1, ranked.shape[1] - 1)] - ranked[:, 0]
        queue = np.argsort(-np.nan_to_num(lost, posinf=FAR_MS), kind="stable")
        used = self.outing_ms.copy()
        day_of = np.zeros(self.busy_ms.size, np.int64)
        deal_out(distance, queue, takes, self.load, used, self.room_ms, self.carry, day_of)
        excess = float(np.maximum(0.0, used - self.room_ms).sum())
        return day_of, (excess, float(distance[np.arange(day_of.size), day_of].sum()))

    def move(self, day_of: NDArray[np.int64]) -> None:
        """Move the centres to what the days got, and learn how far out and wide they are."""
        days, every = self.room_ms.size, np.arange(day_of.size)
        weight = np.bincount(day_of, self.busy_ms, days)
        filled = weight > 0
        for axis in (0, 1):
            total = np.bincount(day_of, self.busy_ms * self.points_m[:, axis], days)
            self.centres_m[filled, axis] = total[filled] / weight[filled]
        members = np.maximum(1, np.bincount(day_of, minlength=days))
        away = np.bincount(day_of, self.trips_ms[every, day_of], days) / members
        spread = np.bincount(day_of, self._gap_m()[every, day_of], days) / members
        self.outing_ms = np.where(filled, away, self.outing_ms)
        self.radius_m = np.where(spread > 0, spread, self.radius_m)


def _balance(
    group: Group, opened: NDArray[np.int64], centres_m: NDArray[np.float64]
) -> tuple[NDArray[np.int64], float]:
    """Deal the visits out to the opened shifts; return shift of each, and the time too much.

    Each round deals out by the distance to the centres and moves the centres to what they got;
    the round with the least excess, then the least distance, counts.
    """
    days = _Days(group, opened, centres_m)
    chosen, best = days.deal()
    day_of = chosen
    for _ in range(BALANCE_ROUNDS - 1):
        days.move(day_of)
        day_of, key = days.deal()
        if key < best:
            best, chosen = key, day_of
    return opened[chosen], best[0]


def _attempt(group: Group, count: int, seed: int) -> tuple[NDArray[np.int64], float]:
    """Return the shift of each visit with ``count`` days opened, and the time too much."""
    labels = _clusters(group, count, seed)
    opened = _open_more(group, _match(group, labels), count)
    busy, points = np.maximum(1.0, group.busy_ms), group.points_m
    weight = np.bincount(labels, busy)
    centres = np.column_stack(
        [np.bincount(labels, busy * points[:, axis]) / weight for axis in (0, 1)]
    )
    # Days beyond the clusters start where most is to be done.
    heaviest = np.argsort(-weight, kind="stable")
    extra = heaviest[np.arange(opened.size - weight.size) % weight.size]
    return _balance(group, opened, np.concatenate([centres, centres[extra]]))


def _bill(group: Group, shift_of: NDArray[np.int64]) -> float:
    """Return the money of the days in the nearest neighbour's order, breaches priced high."""
    problem, total = group.problem, 0.0
    for day in np.unique(shift_of):
        s = group.shifts[day]
        members = group.visits[shift_of == day]
        start = problem.shifts.start_place[s]
        order = nearest_first(problem.travel, problem.visits.place, start, members)
        times = time_tour(problem.travel, problem.visits, problem.shifts, s, order)
        breach_ms = float(times.late_ms) + float(times.excess_ms)
        rate = max(float(problem.shifts.hour_rate[s]), float(problem.shifts.overtime_rate[s]), 1.0)
        total += float(tour_cost(problem.shifts, s, times)) + BREACH * rate * breach_ms
    return total


def cluster_group(group: Group, *, seed: int) -> NDArray[np.int64]:
    """Return the shift (0 .. m - 1) of each visit of the group.

    More days are opened as long as the visits do not fit, or as it makes the plan cheaper.
    """
    n_visits, n_shifts = group.suitable.shape
    most = min(n_shifts, n_visits)
    count = min(_days_needed(group), most)
    typical = float(np.mean(group.room_ms))
    shift_of, excess = _attempt(group, count, seed)
    bill = _bill(group, shift_of)
    for _ in range(ATTEMPTS):
        if count == most:
            break
        crowded = excess > TOLERANCE * typical * count
        count = min(most, count + max(1, int(excess // typical)))
        other, excess = _attempt(group, count, seed)
        other_bill = _bill(group, other)
        if other_bill >= bill and not crowded:
            break
        if other_bill < bill:
            shift_of, bill = other, other_bill
    return shift_of
