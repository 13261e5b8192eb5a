"""Turn straight-line lengths into legs: a constant factor, or a log-log model.

The log-log form is common practice in location science: road length and travel time as powers
of the straight line (R. F. Love and J. G. Morris, "Modelling inter-city road distances by
mathematical functions", Operational Research Quarterly 23 (1972) 61-71, for lengths).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import kernel

__all__ = ["detour_rows", "straight_rows"]


@kernel
def straight_rows(
    length_m: NDArray[np.float64],
    travel_s: NDArray[np.float64],
    first: int,
    last: int,
    circuity: float,
    speed_ms: float,
) -> None:
    """Turn rows of straight lengths ``length_m`` (n, n) into legs in place; fill ``travel_s``."""
    for i in range(first, last):
        for j in range(length_m.shape[1]):
            leg = circuity * length_m[i, j]
            length_m[i, j] = leg
            travel_s[i, j] = leg / speed_ms


@kernel
def detour_rows(
    length_m: NDArray[np.float64],
    travel_s: NDArray[np.float64],
    first: int,
    last: int,
    length_at_1km: float,
    length_exponent: float,
    time_at_1km_min: float,
    time_exponent: float,
) -> None:
    """Turn rows of straight lengths ``length_m`` (n, n) into legs in place; fill ``travel_s``.

    A leg is never shorter than its straight line. Places at one point are no travel apart.
    """
    for i in range(first, last):
        for j in range(length_m.shape[1]):
            km = length_m[i, j] / 1000.0
            if km > 0.0:
                leg_km = length_at_1km * km**length_exponent
                length_m[i, j] = 1000.0 * max(km, leg_km)
                travel_s[i, j] = 60.0 * time_at_1km_min * km**time_exponent
            else:
                travel_s[i, j] = 0.0
