"""Straight lines: geodesic of WGS 84, and great circle of the mean sphere.

The kernel is used up to ``KERNEL_LIMIT_M``; longer lines, and so all that are nearly antipodal,
are measured by ``pyproj.Geod`` (C. F. F. Karney, "Algorithms for geodesics", Journal of Geodesy
87 (2013) 43-55).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from pyproj import Geod

from georoute.domain.run import no_progress
from georoute.errors import InputError
from georoute.kernels.geodesic import (
    fill_geodesic_rows,
    fill_great_circle_rows,
    geodesic_pairs,
    great_circle_pairs,
    parametric_points,
    sphere_points,
)

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from georoute.domain.run import Progress

__all__ = [
    "KERNEL_LIMIT_M",
    "geodesic_m",
    "geodesic_matrix_m",
    "great_circle_m",
    "great_circle_matrix_m",
]

KERNEL_LIMIT_M = 1_000_000.0
"""Lines up to this length come from the kernel (within 3e-9 of their length)."""

_ROWS_A_STEP = 256
_POLE_DEG = 90.0


def geodesic_m(
    lat1_deg: ArrayLike, lon1_deg: ArrayLike, lat2_deg: ArrayLike, lon2_deg: ArrayLike
) -> NDArray[np.float64]:
    """Return the length of the geodesic on WGS 84 between any two points, in metres.

    Parameters
    ----------
    lat1_deg, lon1_deg, lat2_deg, lon2_deg
        Degrees; numbers or arrays that broadcast to one shape.

    Returns
    -------
    Lengths in metres, of the common shape.

    Raises
    ------
    InputError
        A coordinate is not a finite number, or a latitude lies beyond a pole.
    """
    lat1, lon1, lat2, lon2, shape = _common(lat1_deg, lon1_deg, lat2_deg, lon2_deg)
    length = geodesic_pairs(parametric_points(lat1, lon1), parametric_points(lat2, lon2))
    far = np.flatnonzero(length > KERNEL_LIMIT_M)
    if far.size:
        length[far] = _exact(lat1[far], lon1[far], lat2[far], lon2[far])
    return length.reshape(shape)


def great_circle_m(
    lat1_deg: ArrayLike, lon1_deg: ArrayLike, lat2_deg: ArrayLike, lon2_deg: ArrayLike
) -> NDArray[np.float64]:
    """Return the length of the great circle on the mean sphere of WGS 84, in metres.

    Parameters
    ----------
    lat1_deg, lon1_deg, lat2_deg, lon2_deg
        Degrees; numbers or arrays that broadcast to one shape.

    Returns
    -------
    Lengths in metres, of the common shape; within -0.45 % to +0.57 % of the geodesic.

    Raises
    ------
    InputError
        A coordinate is not a finite number, or a latitude lies beyond a pole.
    """
    lat1, lon1, lat2, lon2, shape = _common(lat1_deg, lon1_deg, lat2_deg, lon2_deg)
    return great_circle_pairs(sphere_points(lat1, lon1), sphere_points(lat2, lon2)).reshape(shape)


def geodesic_matrix_m(
    lat_deg: ArrayLike, lon_deg: ArrayLike, *, progress: Progress = no_progress
) -> NDArray[np.float64]:
    """Return the geodesic lengths between all pairs of points, in metres.

    Parameters
    ----------
    lat_deg, lon_deg
        Degrees, shape (n,).
    progress
        Told the share of rows done.

    Returns
    -------
    Symmetric array of shape (n, n), zero on the diagonal.

    Raises
    ------
    InputError
        A coordinate is not a finite number, or a latitude lies beyond a pole.
    """
    lat, lon = _degrees(lat_deg), _degrees(lon_deg)
    _refuse_bad(lat, lon)
    points = parametric_points(lat, lon)
    n = lat.shape[0]
    out = np.empty((n, n), np.float64)
    for first in range(0, n, _ROWS_A_STEP):
        last = min(first + _ROWS_A_STEP, n)
        fill_geodesic_rows(points, first, last, out)
        progress("measure", fraction=last / n)
    _measure_far_pairs(out, lat, lon)
    return out


def great_circle_matrix_m(
    lat_deg: ArrayLike, lon_deg: ArrayLike, *, progress: Progress = no_progress
) -> NDArray[np.float64]:
    """Return the great circle lengths between all pairs of points, in metres.

    Parameters
    ----------
    lat_deg, lon_deg
        Degrees, shape (n,).
    progress
        Told the share of rows done.

    Returns
    -------
    Symmetric array of shape (n, n), zero on the diagonal.

    Raises
    ------
    InputError
        A coordinate is not a finite number, or a latitude lies beyond a pole.
    """
    lat, lon = _degrees(lat_deg), _degrees(lon_deg)
    _refuse_bad(lat, lon)
    points = sphere_points(lat, lon)
    n = lat.shape[0]
    out = np.empty((n, n), np.float64)
    for first in range(0, n, _ROWS_A_STEP):
        last = min(first + _ROWS_A_STEP, n)
        fill_great_circle_rows(points, first, last, out)
        progress("measure", fraction=last / n)
    return out


def _measure_far_pairs(
    out: NDArray[np.float64], lat: NDArray[np.float64], lon: NDArray[np.float64]
) -> None:
    """Replace the entries beyond the limit of the kernel, both ways at once."""
    for i in np.flatnonzero((out > KERNEL_LIMIT_M).any(axis=1)):
        far = i + 1 + np.flatnonzero(out[i, i + 1 :] > KERNEL_LIMIT_M)
        here = np.full(far.shape, i)
        exact = _exact(lat[here], lon[here], lat[far], lon[far])
        out[i, far] = exact
        out[far, i] = exact


def _exact(
    lat1: NDArray[np.float64],
    lon1: NDArray[np.float64],
    lat2: NDArray[np.float64],
    lon2: NDArray[np.float64],
) -> NDArray[np.float64]:
    _, _, length = Geod(ellps="WGS84").inv(lon1, lat1, lon2, lat2)
    return np.asarray(length, np.float64)


def _common(
    *degrees: ArrayLike,
) -> tuple[
    NDArray[np.float64],
    NDArray[np.float64],
    NDArray[np.float64],
    NDArray[np.float64],
    tuple[int, ...],
]:
    """Bring four operands to one flat shape, checked, and tell the shape they came in."""
    lat1, lon1, lat2, lon2 = np.broadcast_arrays(*(np.asarray(d, np.float64) for d in degrees))
    shape = lat1.shape
    flat = [np.ascontiguousarray(part).reshape(-1) for part in (lat1, lon1, lat2, lon2)]
    _refuse_bad(flat[0], flat[1])
    _refuse_bad(flat[2], flat[3])
    return flat[0], flat[1], flat[2], flat[3], shape


def _degrees(values: ArrayLike) -> NDArray[np.float64]:
    return np.ascontiguousarray(values, np.float64)


def _refuse_bad(lat: NDArray[np.float64], lon: NDArray[np.float64]) -> None:
    """Raise where a coordinate is no place on Earth: a wrong length would go unnoticed."""
    bad = np.flatnonzero(~((np.abs(lat) <= _POLE_DEG) & np.isfinite(lon)))
    if bad.size:
        k = int(bad[0])
        msg = (
            f"Expected latitudes from -90 to 90 and finite longitudes, got latitude {lat[k]}, "
            f"longitude {lon[k]} (point {k} of {lat.size}, counted from 0). "
            "Check that the two are not swapped and that none is missing."
        )
        raise InputError(msg)
