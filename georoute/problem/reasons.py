"""Why a visit is not in the plan: the arithmetic, and the sentence that says it.

Times are in minutes, loads in the user's unit. A reason is one of three kinds:

- *proven* before any search (``cannot_fit``): the visit fits no shift even as its only stop;
- ``load_limit`` and ``no_working_time_left``, found after the search: they speak of the tours
  as they are planned, and say what is missing there;
- ``not_found_by_search``: nothing proves it impossible, the search has not found a place.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.plan import ReasonCode
from georoute.kernels import alone
from georoute.kernels.arrays import UNREACHABLE
from georoute.kernels.board import (
    CLOSE,
    DRIVE,
    LIMIT,
    LOADED,
    MOST_LOAD,
    OPEN,
    WORKED,
    WRITE_UP,
)
from georoute.kernels.shortage import least_shortage
from georoute.problem.board import make_board
from georoute.problem.eligibility import WhyNot
from georoute.problem.pack import LOAD_TICKS
from georoute.problem.sentences import reason_text

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from georoute.kernels.board import Board
    from georoute.problem.arrays import Problem, Solution

    Figures = Mapping[str, float]
    Reason = tuple[int, ReasonCode, Figures]
    Ways = tuple[NDArray[np.int64], NDArray[np.int64], NDArray[np.int64], NDArray[np.int64]]

__all__ = ["cannot_fit", "explain_unplaced", "fits_alone", "reason_text"]

MS_PER_MIN = 60_000.0


def _ways(problem: Problem, *, shortest: bool) -> Ways:
    """Return the ways out (A, V) and back (B, V) in ms, and the row of each for each shift."""
    rows = []
    for ends, outward in ((problem.shifts.start_place, 1), (problem.shifts.end_place, 0)):
        bases, row_of = np.unique(ends, return_inverse=True)
        ways = np.zeros((bases.shape[0], problem.visit_count), np.int64)
        for row, base in zip(ways, bases, strict=True):
            if shortest:
                all_places = np.zeros(problem.plane_x_m.shape[0], np.int64)
                alone.shortest_ways(problem.travel, base, outward, all_places)
                row[:] = all_places[problem.visits.place]
            else:
                alone.direct_ways(problem.travel, base, problem.visits.place, outward, row)
        rows.append((ways, row_of.astype(np.int64)))
    (outs, out_row), (backs, back_row) = rows
    return outs, backs, out_row, back_row


def _judge(problem: Problem, ways: Ways) -> tuple[NDArray[np.int8], NDArray[np.int64]]:
    shape = (problem.visit_count, problem.shift_count)
    kind, short = np.zeros(shape, np.int8), np.zeros(shape, np.int64)
    alone.judge_alone(problem.visits, problem.shifts, *ways, kind, short)
    return kind, short


def fits_alone(problem: Problem) -> NDArray[np.bool_]:
    """Tell for each visit and shift (bool, (V, S)) whether it fits as the only stop."""
    kind, _ = _judge(problem, _ways(problem, shortest=False))
    fits: NDArray[np.bool_] = (kind == alone.FITS) & problem.visits.eligible
    return fits


def _no_shift_allowed(codes: NDArray[np.int8] | None) -> tuple[ReasonCode, Figures]:
    """Return the reason of a visit that is eligible for no shift; ``codes`` are its why-nots."""
    figures = {"allowed_shifts": 0.0}
    if codes is None:
        return ReasonCode.NO_WORKING_TIME_LEFT, figures
    figures |= {
        "shifts_before_earliest": float((codes == WhyNot.BEFORE_EARLIEST).sum()),
        "shifts_after_latest": float((codes == WhyNot.AFTER_LATEST).sum()),
        "shifts_of_others": float((codes == WhyNot.OTHER_INSPECTOR).sum()),
    }
    if figures["shifts_after_latest"] > 0:
        return ReasonCode.AFTER_LATEST, figures
    if figures["shifts_before_earliest"] > 0:
        return ReasonCode.BEFORE_EARLIEST, figures
    return ReasonCode.NO_WORKING_TIME_LEFT, figures


def _long_day(problem: Problem, v: int, s: int, ways: Ways) -> dict[str, float]:
    """Return the arithmetic of shift ``s`` with visit ``v`` as its only stop, in minutes."""
    outs, backs, out_row, back_row = ways
    shifts = problem.shifts
    parts = {
        "out_min": int(outs[out_row[s], v]),
        "work_min": int(problem.visits.work_ms[v]),
        "back_min": int(backs[back_row[s], v]),
        "write_up_min": int(shifts.write_up_ms[s]),
    }
    room = min(int(shifts.limit_ms[s]), int(shifts.close_ms[s] - shifts.open_ms[s]))
    parts |= {"needed_min": sum(parts.values()), "shift_min": room}
    return {name: ms / MS_PER_MIN for name, ms in parts.items()}


def _alone_reason(
    problem: Problem, v: int, kind: NDArray[np.int8], short: NDArray[np.int64], ways: Ways
) -> tuple[ReasonCode, Figures]:
    """Return why visit ``v`` fits none of its shifts: the shift where least is missing."""
    mine = np.flatnonzero(problem.visits.eligible[v])
    timed = mine[np.isin(kind[v, mine], (alone.CLOSED, alone.WAITS, alone.TOO_LONG))]
    if timed.size == 0:
        loaded = mine[kind[v, mine] == alone.LOAD]
        if loaded.size == 0:
            return ReasonCode.UNREACHABLE, {"allowed_shifts": float(mine.size)}
        limit = int(problem.shifts.load_limit[loaded].max())
        need = int(problem.visits.load[v])
        return ReasonCode.LOAD_LIMIT, {
            "load": need / LOAD_TICKS,
            "load_limit": limit / LOAD_TICKS,
            "over_load": (need - limit) / LOAD_TICKS,
        }
    s = int(timed[np.argmin(short[v, timed])])
    figures = _long_day(problem, v, s, ways) | {"short_min": float(short[v, s]) / MS_PER_MIN}
    if kind[v, s] == alone.TOO_LONG:
        return ReasonCode.TOO_FAR_FOR_SHIFT, figures
    first, last = problem.visits.window_ptr[v], problem.visits.window_ptr[v + 1]
    arrive = int(problem.shifts.open_ms[s]) / MS_PER_MIN + figures["out_min"]
    opens = problem.visits.window_open_ms[first:last]
    closes = problem.visits.window_close_ms[first:last]
    ahead = np.flatnonzero(closes / MS_PER_MIN >= arrive)
    w = int(ahead[0]) if ahead.size > 0 else last - first - 1
    return ReasonCode.CLOSED, figures | {
        "arrive_min": arrive,
        "opens_min": float(opens[w]) / MS_PER_MIN,
        "closes_min": float(closes[w]) / MS_PER_MIN,
        "late": float(kind[v, s] == alone.CLOSED),
    }


def cannot_fit(problem: Problem, *, why_not: NDArray[np.int8] | None = None) -> tuple[Reason, ...]:
    """Return the visits that fit no shift even as its only stop, with reason and arithmetic.

    Parameters
    ----------
    problem
        The array problem.
    why_not
        ``WhyNot`` codes (int8, (V, S)) that tell date from inspector where no shift is allowed.

    Returns
    -------
    tuple
        ``(visit, reason code, figures)`` of each such visit, ascending. It is a proof: ways out
        and back are the shortest through any other places, so that no stops before or after
        could make them shorter; figures are those of the shift where least is missing.
        ``arrive_min``, ``opens_min`` and ``closes_min`` count from midnight of the first date.
    """
    eligible = problem.visits.eligible
    stuck = ~fits_alone(problem).any(axis=1)
    if not stuck.any():
        return ()
    ways = _ways(problem, shortest=True)
    kind, short = _judge(problem, ways)
    reasons: list[Reason] = []
    for v in np.flatnonzero(stuck).tolist():
        if not eligible[v].any():
            codes = None if why_not is None else why_not[v]
            reasons.append((v, *_no_shift_allowed(codes)))
        elif not (eligible[v] & (kind[v] == alone.FITS)).any():
            reasons.append((v, *_alone_reason(problem, v, kind, short, ways)))
    return tuple(reasons)


def _room_ms(board: Board) -> NDArray[np.int64]:
    """Return the working time of each shift that is not used for travel, work or write-up."""
    shift, tour = board.shift, board.tour
    room = np.minimum(shift[:, LIMIT], shift[:, CLOSE] - shift[:, OPEN])
    used = shift[:, WRITE_UP] + np.where(tour[:, WORKED] > 0, tour[:, DRIVE], 0)
    free: NDArray[np.int64] = np.maximum(0, room - used - tour[:, WORKED])
    return free


def _among_tours(problem: Problem, board: Board, v: int) -> tuple[ReasonCode, Figures]:
    """Return why visit ``v`` is in no tour, by what is missing in the tours as planned."""
    mine = np.flatnonzero(problem.visits.eligible[v])
    need = int(problem.visits.load[v])
    spare_load = board.shift[mine, MOST_LOAD] - board.tour[mine, LOADED]
    light = mine[spare_load >= need]
    if light.size == 0:
        most = int(spare_load.max())
        return ReasonCode.LOAD_LIMIT, {
            "load": need / LOAD_TICKS,
            "free_load": most / LOAD_TICKS,
            "over_load": (need - most) / LOAD_TICKS,
        }
    pairs = [least_shortage(board, s, v) for s in light]
    missing, added = (np.array(column, np.int64) for column in zip(*pairs, strict=True))
    free = int(_room_ms(board)[light].sum(dtype=np.float64))
    figures = {
        "short_min": float(missing.min()) / MS_PER_MIN,
        "needed_min": float(added.min()) / MS_PER_MIN,
        "free_min": free / MS_PER_MIN,
        "allowed_shifts": float(mine.size),
    }
    if added.min() >= UNREACHABLE:
        return ReasonCode.NOT_FOUND_BY_SEARCH, {"allowed_shifts": float(mine.size)}
    if missing.min() > 0 and free < added.min():
        return ReasonCode.NO_WORKING_TIME_LEFT, figures
    return ReasonCode.NOT_FOUND_BY_SEARCH, figures


def explain_unplaced(
    problem: Problem, solution: Solution, *, why_not: NDArray[np.int8] | None = None
) -> tuple[Reason, ...]:
    """Return reason and arithmetic of every visit that is in no tour of ``solution``.

    Parameters
    ----------
    problem
        The array problem.
    solution
        Tours that keep every limit.
    why_not
        As for ``cannot_fit``.

    Returns
    -------
    tuple
        ``(visit, reason code, figures)``, ascending. What ``cannot_fit`` proves comes from
        there. For the others the tours are taken as planned. ``load_limit``: in every allowed
        shift the load left is too small. ``no_working_time_left``: it fits nowhere, and all
        allowed shifts together have less working time left than its work and its least detour
        take (``short_min``: what is missing at the best place; ``free_min``: what is left in
        all; ``needed_min``: work and detour). Else ``not_found_by_search``: time is left, but
        not in one piece or not at the right hours, and no exchange was found that makes room;
        this proves nothing. ``short_min`` 0 there means that it would fit as planned: the search
        ended before placing it.
    """
    proven = {reason[0]: reason for reason in cannot_fit(problem, why_not=why_not)}
    board = make_board(problem, solution, neighbours=0)
    return tuple(
        proven[v] if v in proven else (v, *_among_tours(problem, board, v))
        for v in solution.unplaced(problem.visit_count).tolist()
    )
