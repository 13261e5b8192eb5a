"""The arrays every kernel works on, and the look-up of a leg.

Times are int64 milliseconds since local midnight of the horizon's first day, counted in UTC;
lengths int64 millimetres; money int64 micro-units of the currency.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Int, kernel

__all__ = ["MUST", "UNREACHABLE", "Shifts", "Travel", "Visits", "leg_mm", "leg_ms"]

UNREACHABLE = 1 << 50
"""Time and length of a leg that does not exist: longer than any horizon, safe to add up."""

MUST = 1 << 60
"""Worth of a visit that may be left out only when nothing else helps."""


class Travel(NamedTuple):
    """Travel between P places: a dense table, or points on a plane with the leg made on the fly.

    ``dense`` 1: ``time_ms`` and ``length_mm`` are int64 (P, P), entry [i, j] from i to j, maybe
    asymmetric. ``dense`` 0: the tables have shape (0, 0) and a leg is the plane distance of
    ``x``, ``y`` (float64 (P,)) times ``time_scale`` (ms per unit) or ``length_scale`` (mm per
    unit), rounded half up to whole multiples of ``step`` ticks.
    """

    dense: int
    time_ms: NDArray[np.int64]
    length_mm: NDArray[np.int64]
    x: NDArray[np.float64]
    y: NDArray[np.float64]
    time_scale: float
    length_scale: float
    step: int


class Visits(NamedTuple):
    """V visits. All int64 (V,) unless said otherwise.

    ``place``: index into the places. ``work_ms``: access and work together. ``load``.
    ``window_ptr`` (V + 1,): work of visit v may start within the closed intervals
    ``window_open_ms[k] .. window_close_ms[k]`` for k in ``window_ptr[v]:window_ptr[v+1]``, in
    ascending order and disjoint; none at all means any time. ``worth``: money lost when left
    out, ``MUST`` at the most. ``level``: rank of the loss, 0 first. ``eligible``: bool (V, S).
    """

    place: NDArray[np.int64]
    work_ms: NDArray[np.int64]
    load: NDArray[np.int64]
    window_ptr: NDArray[np.int64]
    window_open_ms: NDArray[np.int64]
    window_close_ms: NDArray[np.int64]
    worth: NDArray[np.int64]
    level: NDArray[np.int64]
    eligible: NDArray[np.bool_]


class Shifts(NamedTuple):
    """S shifts, one inspector on one date each. All int64 (S,) unless said otherwise.

    ``start_place``, ``end_place``: index into the places. The tour leaves at ``open_ms`` at the
    earliest; return plus ``write_up_ms`` is at ``close_ms`` at the latest. The duration from
    leaving to the end of the write-up costs ``hour_rate`` (float64, micro-units per ms) up to
    ``paid_ms`` and ``overtime_rate`` beyond, and never exceeds ``limit_ms``. ``length_rate``
    (float64) is micro-units per mm; ``day_cost`` is paid once by a shift with any visit.
    ``load_limit``. ``day``: index of the date; ``inspector``: index of the person.
    """

    start_place: NDArray[np.int64]
    end_place: NDArray[np.int64]
    open_ms: NDArray[np.int64]
    close_ms: NDArray[np.int64]
    paid_ms: NDArray[np.int64]
    limit_ms: NDArray[np.int64]
    write_up_ms: NDArray[np.int64]
    load_limit: NDArray[np.int64]
    hour_rate: NDArray[np.float64]
    overtime_rate: NDArray[np.float64]
    length_rate: NDArray[np.float64]
    day_cost: NDArray[np.int64]
    day: NDArray[np.int64]
    inspector: NDArray[np.int64]


@kernel
def _plane_leg(travel: Travel, i: Int, j: Int, scale: float) -> Int:
    dx = travel.x[i] - travel.x[j]
    dy = travel.y[i] - travel.y[j]
    steps = np.floor(np.sqrt(dx * dx + dy * dy) * scale / travel.step + 0.5)
    return np.int64(steps) * travel.step


@kernel
def leg_ms(travel: Travel, i: Int, j: Int) -> Int:
    """Return the travel time from place ``i`` to place ``j`` in ms, or ``UNREACHABLE``."""
    if travel.dense:
        return travel.time_ms[i, j]
    return _plane_leg(travel, i, j, travel.time_scale)


@kernel
def leg_mm(travel: Travel, i: Int, j: Int) -> Int:
    """Return the length from place ``i`` to place ``j`` in mm, or ``UNREACHABLE``."""
    if travel.dense:
        return travel.length_mm[i, j]
    return _plane_leg(travel, i, j, travel.length_scale)
