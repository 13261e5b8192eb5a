"""One group of visits and shifts that belong together: clusters, days, balance."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.optimize import linear_sum_assignment
from sklearn.cluster import KMeans
from threadpoolctl import threadpool_limits

from georoute.kernels.balance import deal_out

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.problem import Problem
    from georoute.split.estimate import Estimate

__all__ = ["Group", "cluster_group"]

ATTEMPTS = 6
"""More days are tried so often when the visits do not fit into as many as estimated."""
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


def _balance(
    group: Group, opened: NDArray[np.int64], centres_m: NDArray[np.float64]
) -> tuple[NDArray[np.int64], float]:
    """Deal the visits out to the opened shifts; return shift of each, and the time too much.

    Each round deals out by the distance to the centres and moves the centres to what they got;
    the round with the least excess, then the least distance, counts.
    """
    points, busy = group.points_m, group.busy_ms
    room, trips = group.room_ms[opened], group.round_ms[:, opened]
    load, carry = group.problem.visits.load[group.visits], group.carry[opened]
    allowed = group.suitable[:, opened]
    outing = np.full(opened.size, float(np.mean(trips.min(axis=1))))
    best: tuple[float, float] | None = None
    chosen = np.zeros(points.shape[0], np.int64)
    for _ in range(BALANCE_ROUNDS):
        gap = np.hypot(points[:, :1] - centres_m[:, 0], points[:, 1:] - centres_m[:, 1])
        # On the way out and back a day passes its base anyway: far bases attract nothing.
        distance = np.where(allowed, gap * max(group.figures.ms_per_m, 1e-9) + trips / 4, np.inf)
        ranked = np.sort(distance, axis=1)
        lost = ranked[:, min(1, opened.size - 1)] - ranked[:, 0]
        queue = np.argsort(-np.nan_to_num(lost, posinf=FAR_MS), kind="stable")
        used = outing.copy()
        day_of = np.zeros(points.shape[0], np.int64)
        deal_out(distance, queue, busy, load, used, room, carry, day_of)
        excess = float(np.maximum(0.0, used - room).sum())
        key = (excess, float(distance[np.arange(day_of.size), day_of].sum()))
        if best is None or key < best:
            best, chosen = key, day_of
        weight = np.bincount(day_of, busy, opened.size)
        filled = weight > 0
        for axis in (0, 1):
            total = np.bincount(day_of, busy * points[:, axis], opened.size)
            centres_m[filled, axis] = total[filled] / weight[filled]
        members = np.bincount(day_of, minlength=opened.size)
        away = np.bincount(day_of, trips[np.arange(day_of.size), day_of], opened.size)
        outing = np.where(members > 0, away / np.maximum(1, members), outing)
    return opened[chosen], best[0] if best is not None else 0.0


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


def cluster_group(group: Group, *, seed: int) -> NDArray[np.int64]:
    """Return the shift (0 .. m - 1) of each visit of the group."""
    n_visits, n_shifts = group.suitable.shape
    if n_shifts == 1:
        return np.zeros(n_visits, np.int64)
    typical = float(np.mean(group.room_ms))
    count = min(_days_needed(group), n_visits)
    shift_of, excess = _attempt(group, count, seed)
    for _ in range(ATTEMPTS):
        if excess <= TOLERANCE * typical * count or count == min(n_shifts, n_visits):
            break
        count = min(n_shifts, n_visits, count + max(1, int(excess // typical)))
        shift_of, excess = _attempt(group, count, seed)
    return shift_of
