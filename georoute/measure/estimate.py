"""Estimates of travel from straight lines, where no roads and no table are at hand."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.costs import CostMatrix
from georoute.domain.programme import TravelMethod
from georoute.errors import InputError
from georoute.kernels.detour import detour_rows, straight_rows
from georoute.measure.straight import geodesic_matrix_m, great_circle_matrix_m

if TYPE_CHECKING:
    from georoute.domain.costs import Places
    from georoute.domain.programme import DetourModel, TravelSettings
    from georoute.domain.run import Progress

__all__ = ["estimate_straight", "estimate_with_detour"]

_MS_PER_KMH = 1000.0 / 3600.0


def estimate_straight(places: Places, travel: TravelSettings, *, progress: Progress) -> CostMatrix:
    """Return travel along straight lines times the circuity, at one speed.

    Parameters
    ----------
    places
        The places, WGS 84 degrees.
    travel
        Method ``geodesic`` or ``great_circle``, ``circuity`` and ``speed_kmh``.
    progress
        Told the share of rows done.

    Returns
    -------
    Seconds and metres, marked as estimated; no interval is claimed.

    Raises
    ------
    InputError
        The speed is not above 0, the circuity is below 1, or a coordinate is unusable.
    """
    _refuse_unless(
        math.isfinite(travel.speed_kmh) and travel.speed_kmh > 0,
        f"Expected speed_kmh above 0, got {travel.speed_kmh}.",
    )
    _refuse_unless(
        math.isfinite(travel.circuity) and travel.circuity >= 1,
        f"Expected circuity of at least 1 (no road is shorter than the straight line), "
        f"got {travel.circuity}.",
    )
    if travel.method is TravelMethod.GREAT_CIRCLE:
        line = "great circle"
        length = great_circle_matrix_m(places.lat_deg, places.lon_deg, progress=progress)
    else:
        line = "geodesic (WGS 84)"
        length = geodesic_matrix_m(places.lat_deg, places.lon_deg, progress=progress)
    travel_s = np.empty_like(length)
    straight_rows(
        length, travel_s, 0, length.shape[0], travel.circuity, travel.speed_kmh * _MS_PER_KMH
    )
    return CostMatrix(
        place_ids=places.ids,
        travel_s=travel_s,
        length_m=length,
        source=f"{line} x {travel.circuity:g} at {travel.speed_kmh:g} km/h, not along roads",
        estimated=True,
    )


def estimate_with_detour(places: Places, model: DetourModel, *, progress: Progress) -> CostMatrix:
    """Return travel by the log-log detour model on geodesic lengths.

    Parameters
    ----------
    places
        The places, WGS 84 degrees.
    model
        Coefficients and interval of the model.
    progress
        Told the share of rows done.

    Returns
    -------
    Seconds and metres, marked as estimated, with the interval of the model.

    Raises
    ------
    InputError
        A coefficient is not above 0, the interval does not hold the estimate itself, or a
        coordinate is unusable.
    """
    _check_model(model)
    length = geodesic_matrix_m(places.lat_deg, places.lon_deg, progress=progress)
    travel_s = np.empty_like(length)
    detour_rows(
        length,
        travel_s,
        0,
        length.shape[0],
        model.length_at_1km,
        model.length_exponent,
        model.time_at_1km_min,
        model.time_exponent,
    )
    low, high = 100 * (model.low_factor - 1), 100 * (model.high_factor - 1)
    return CostMatrix(
        place_ids=places.ids,
        travel_s=travel_s,
        length_m=length,
        source=(
            f"log-log detour model on the geodesic (WGS 84), {low:+.0f} % to {high:+.0f} % in "
            "time, not along roads"
        ),
        estimated=True,
        low_factor=model.low_factor,
        high_factor=model.high_factor,
    )


def _check_model(model: DetourModel) -> None:
    for name in ("length_at_1km", "length_exponent", "time_at_1km_min", "time_exponent"):
        value = getattr(model, name)
        _refuse_unless(
            math.isfinite(value) and value > 0,
            f"Expected {name} of the detour model above 0, got {value}.",
        )
    _refuse_unless(
        0 < model.low_factor <= 1 <= model.high_factor < math.inf,
        f"Expected low_factor above 0 and at most 1, and high_factor of at least 1, "
        f"got {model.low_factor} and {model.high_factor}.",
    )


def _refuse_unless(good: bool, message: str) -> None:  # noqa: FBT001 - the condition is the operand
    if not good:
        msg = f"{message} Correct the travel settings of the programme."
        raise InputError(msg)
