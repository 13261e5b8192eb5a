"""Distances on the WGS 84 ellipsoid and on the sphere, without iteration.

The ellipsoidal length is the expansion of the geodesic in powers of the flattening about the
great circle of the auxiliary sphere (parametric latitudes), known by the names of Andoyer and
Lambert in first order, here to second order as in Thomas.

References
----------
H. Andoyer, "Formule donnant la longueur de la géodésique joignant 2 points de l'ellipsoïde
donnés par leurs coordonnées géographiques", Bulletin Géodésique 34 (1932) 77-81.
W. D. Lambert, "The distance between two widely separated points on the surface of the Earth",
Journal of the Washington Academy of Sciences 32 (1942) 125-130.
P. D. Thomas, "Spheroidal geodesics, reference systems, and local geometry", SP-138,
U.S. Naval Oceanographic Office (1970): the terms in f and f squared.

Where this differs from the papers: the haversine, and the products of half sums and half
differences of latitude, are taken from differences of points on the unit sphere. So no cosine of
a small angle is ever subtracted from one, and metres apart are as good as kilometres apart.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Float, kernel

__all__ = [
    "EQUATOR_RADIUS_M",
    "FLATTENING",
    "MEAN_RADIUS_M",
    "fill_geodesic_rows",
    "fill_great_circle_rows",
    "geodesic_pairs",
    "great_circle_pairs",
    "parametric_points",
    "sphere_points",
]

EQUATOR_RADIUS_M = 6_378_137.0
"""Semi-major axis of WGS 84 (NIMA TR8350.2, third edition, 1997: defining parameters)."""

FLATTENING = 1.0 / 298.257223563
"""Flattening of WGS 84 (same place)."""

MEAN_RADIUS_M = 6_371_008.7714
"""Mean radius of the semi-axes of WGS 84 (same report, derived constants)."""


@kernel
def _points(
    lat_deg: NDArray[np.float64], lon_deg: NDArray[np.float64], axis_ratio: float
) -> NDArray[np.float64]:
    n = lat_deg.shape[0]
    points = np.empty((n, 3), np.float64)
    for i in range(n):
        lat = np.radians(lat_deg[i])
        lon = np.radians(lon_deg[i])
        up = axis_ratio * np.sin(lat)
        out = np.cos(lat)
        norm = np.hypot(up, out)
        out /= norm
        points[i, 0] = out * np.cos(lon)
        points[i, 1] = out * np.sin(lon)
        points[i, 2] = up / norm
    return points


@kernel
def parametric_points(
    lat_deg: NDArray[np.float64], lon_deg: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Return unit vectors (n, 3) at the parametric latitudes of WGS 84 degrees (n,)."""
    return _points(lat_deg, lon_deg, 1.0 - FLATTENING)


@kernel
def sphere_points(
    lat_deg: NDArray[np.float64], lon_deg: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Return unit vectors (n, 3) at latitudes and longitudes in degrees (n,)."""
    return _points(lat_deg, lon_deg, 1.0)


@kernel
def _haversine(x1: Float, y1: Float, z1: Float, x2: Float, y2: Float, z2: Float) -> Float:
    """Return the squared sine of half the angle between two unit vectors."""
    dx = x1 - x2
    dy = y1 - y2
    dz = z1 - z2
    return 0.25 * (dx * dx + dy * dy + dz * dz)


@kernel
def _geodesic(x1: Float, y1: Float, z1: Float, x2: Float, y2: Float, z2: Float) -> Float:
    """Return the length in metres, or ``inf`` beyond a quarter circle, where it is not known.

    Symbols as in Thomas (1970): L is the haversine of the spherical angle d, T = d / sin d.
    """
    L = _haversine(x1, y1, z1, x2, y2, z2)
    if L == 0.0:
        return 0.0
    if L > 0.5:
        return np.inf
    d = 2.0 * np.arcsin(np.sqrt(L))
    sin_d = 2.0 * np.sqrt(L * (1.0 - L))
    sum_z = z1 + z2
    dif_z = z1 - z2
    U = 0.5 * sum_z * sum_z / (1.0 - L)
    V = 0.5 * dif_z * dif_z / L
    X = U + V
    Y = U - V
    T = d / sin_d
    D = 4.0 * T * T
    E = 2.0 - 4.0 * L
    A = D * E
    B = 2.0 * D
    C = T - 0.5 * (A - E)
    first = 0.25 * FLATTENING * (T * X - Y)
    second = FLATTENING * FLATTENING / 64.0 * (X * (A + C * X) - Y * (B + E * Y) + D * X * Y)
    return EQUATOR_RADIUS_M * sin_d * (T - first + second)


@kernel
def _great_circle(x1: Float, y1: Float, z1: Float, x2: Float, y2: Float, z2: Float) -> Float:
    """Return the length in metres; near the antipode from the sum of the two vectors."""
    h = _haversine(x1, y1, z1, x2, y2, z2)
    if h <= 0.5:
        return 2.0 * MEAN_RADIUS_M * np.arcsin(np.sqrt(h))
    rest = _haversine(x1, y1, z1, -x2, -y2, -z2)
    return MEAN_RADIUS_M * (np.pi - 2.0 * np.arcsin(np.sqrt(rest)))


@kernel
def geodesic_pairs(p: NDArray[np.float64], q: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return the lengths in metres (n,) between the points ``p`` and ``q`` (n, 3), pair by pair.

    Points come from ``parametric_points``. ``inf`` beyond a quarter circle.
    """
    n = p.shape[0]
    out = np.empty(n, np.float64)
    for i in range(n):
        out[i] = _geodesic(p[i, 0], p[i, 1], p[i, 2], q[i, 0], q[i, 1], q[i, 2])
    return out


@kernel
def great_circle_pairs(p: NDArray[np.float64], q: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return the lengths in metres (n,) between points of ``sphere_points``, pair by pair."""
    n = p.shape[0]
    out = np.empty(n, np.float64)
    for i in range(n):
        out[i] = _great_circle(p[i, 0], p[i, 1], p[i, 2], q[i, 0], q[i, 1], q[i, 2])
    return out


@kernel
def fill_geodesic_rows(
    points: NDArray[np.float64], first: int, last: int, out: NDArray[np.float64]
) -> None:
    """Fill rows ``first`` to ``last`` (excluded) of ``out`` (n, n) with lengths in metres."""
    n = points.shape[0]
    for i in range(first, last):
        x, y, z = points[i, 0], points[i, 1], points[i, 2]
        for j in range(n):
            out[i, j] = _geodesic(x, y, z, points[j, 0], points[j, 1], points[j, 2])


@kernel
def fill_great_circle_rows(
    points: NDArray[np.float64], first: int, last: int, out: NDArray[np.float64]
) -> None:
    """Fill rows ``first`` to ``last`` (excluded) of ``out`` (n, n) with lengths in metres."""
    n = points.shape[0]
    for i in range(first, last):
        x, y, z = points[i, 0], points[i, 1], points[i, 2]
        for j in range(n):
            out[i, j] = _great_circle(x, y, z, points[j, 0], points[j, 1], points[j, 2])
