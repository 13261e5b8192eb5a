"""Pack a problem and a solution into the tables that the kernels of the days work on."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy.spatial import cKDTree

from georoute.kernels.arrays import MUST
from georoute.kernels.board import COUNT, Board, refresh
from georoute.problem.arrays import Solution

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.problem.arrays import Problem

__all__ = ["losses", "make_board", "most_stops", "solution_of"]

NEIGHBOURS = 24


def _most(sizes: NDArray[np.int64], room: int) -> int:
    """Return how many of ``sizes`` (ascending, not negative) go into ``room``."""
    return int(np.searchsorted(np.cumsum(sizes), room, side="right"))


def most_stops(problem: Problem) -> int:
    """Return a number of stops that no tour within its limits can exceed."""
    visits, shifts = problem.visits, problem.shifts
    usable = np.minimum(shifts.limit_ms, shifts.close_ms - shifts.open_ms) - shifts.write_up_ms
    most = 0
    seen = set()
    for s in range(problem.shift_count):
        allowed = visits.eligible[:, s]
        key = (allowed.tobytes(), int(usable[s]), int(shifts.load_limit[s]))
        if key in seen:
            continue
        seen.add(key)
        by_work = _most(np.sort(visits.work_ms[allowed]), int(usable[s]))
        by_load = _most(np.sort(visits.load[allowed]), int(shifts.load_limit[s]))
        most = max(most, min(by_work, by_load))
    return most


def _near(problem: Problem, neighbours: int) -> NDArray[np.int64]:
    """Return the nearest other visits of each visit on the plane, nearest first."""
    count = min(neighbours, problem.visit_count - 1)
    if count < 1:
        return np.zeros((problem.visit_count, 0), np.int64)
    place = problem.visits.place
    points = np.column_stack([problem.plane_x_m[place], problem.plane_y_m[place]])
    found = np.asarray(cKDTree(points).query(points, k=count + 1)[1], np.int64)
    near = np.empty((problem.visit_count, count), np.int64)
    for v in range(problem.visit_count):
        row = found[v]
        near[v] = row[row != v][:count]
    return near


def losses(problem: Problem) -> NDArray[np.int64]:
    """Return class, amount and rank of the loss when each visit is left out: (V, 3).

    Visits worth ``MUST`` are a class of their own, before all levels, and each counts as one.
    Within a level the worth counts, and a visit without worth still as a little.
    """
    must = problem.visits.worth >= MUST
    level = np.where(must, -1, problem.visits.level)
    _, kind = np.unique(level, return_inverse=True)
    amount = np.where(must, 1, np.maximum(1, problem.visits.worth))
    _, rank = np.unique(np.column_stack([kind, -amount]), axis=0, return_inverse=True)
    return np.column_stack([kind, amount, rank.reshape(-1)]).astype(np.int64)


def _visit_table(problem: Problem) -> NDArray[np.int64]:
    visits = problem.visits
    columns = [
        visits.place,
        visits.work_ms,
        visits.load,
        visits.window_ptr[:-1],
        visits.window_ptr[1:],
    ]
    return np.ascontiguousarray(np.column_stack([*columns, losses(problem)]).astype(np.int64))


def _shift_table(problem: Problem) -> NDArray[np.int64]:
    shifts = problem.shifts
    columns = [
        shifts.start_place,
        shifts.end_place,
        shifts.open_ms,
        shifts.close_ms,
        shifts.paid_ms,
        shifts.limit_ms,
        shifts.write_up_ms,
        shifts.load_limit,
        shifts.day_cost,
    ]
    return np.ascontiguousarray(np.column_stack(columns).astype(np.int64))


def make_board(problem: Problem, solution: Solution, *, neighbours: int = NEIGHBOURS) -> Board:
    """Return the problem and the tours of ``solution``, packed for the kernels of the days.

    ``neighbours`` nearby visits are listed for each visit.

    A visit that is in more than one order, or twice in one, stays in the first place only.
    """
    travel, shifts, visits = problem.travel, problem.shifts, problem.visits
    n_visits, n_shifts = problem.visit_count, problem.shift_count
    longest = max((order.shape[0] for order in solution.orders), default=0)
    width = max(1, longest, most_stops(problem))
    rates = [shifts.hour_rate, shifts.overtime_rate, shifts.length_rate]
    board = Board(
        time=np.ascontiguousarray(travel.time_ms),
        length=np.ascontiguousarray(travel.length_mm),
        x=np.ascontiguousarray(travel.x),
        y=np.ascontiguousarray(travel.y),
        plane=np.array([travel.time_scale, travel.length_scale, travel.step], np.float64),
        visit=_visit_table(problem),
        eligible=np.ascontiguousarray(visits.eligible),
        opens=np.ascontiguousarray(visits.window_open_ms),
        closes=np.ascontiguousarray(visits.window_close_ms),
        shift=_shift_table(problem),
        rate=np.ascontiguousarray(np.column_stack(rates).astype(np.float64)),
        near=_near(problem, neighbours),
        stops=np.full((n_shifts, width), -1, np.int64),
        tour=np.zeros((n_shifts, 8), np.int64),
        ahead=np.zeros((n_shifts, width + 1, 4), np.int64),
        spot=np.full((n_visits, 2), -1, np.int64),
    )
    seen: set[int] = set()
    for s, order in enumerate(solution.orders):
        once = [v for v in dict.fromkeys(order.tolist()) if v not in seen]
        seen.update(once)
        board.stops[s, : len(once)] = once
        board.tour[s, COUNT] = len(once)
        refresh(board, s)
    return board


def solution_of(board: Board) -> Solution:
    """Return the orders as they are now."""
    return Solution(
        orders=tuple(
            board.stops[s, : board.tour[s, COUNT]].copy() for s in range(board.tour.shape[0])
        )
    )
