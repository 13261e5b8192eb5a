"""The one place that projects: a plane centred on the data.

The plane is the ellipsoidal azimuthal equidistant projection (J. P. Snyder, "Map projections: a
working manual", USGS Professional Paper 1395 (1987), chapter 25), not a UTM zone: it has no zone
edges, so data across a zone border, across 180 degrees or over a pole need no special case, and
its error is known beforehand. Distances from the centre are true; across them a plane of radius
``r`` stretches by about ``(r / R)² / 6``: 0.03 % at 250 km, 0.4 % at 1000 km.

The plane serves clusters, neighbours and drawing only. Lengths come from ``georoute.measure``.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from pyproj import Geod, Proj

from georoute.domain.findings import Finding, Severity
from georoute.errors import InputError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

__all__ = ["WIDE_SCALE_ERROR", "LocalPlane", "local_plane"]

WIDE_SCALE_ERROR = 0.01
"""A plane that stretches by more than this is reported as too wide (about 1560 km of radius)."""

_HALF_THE_EARTH_M = 10_000_000.0
_POLE_DEG = 90.0
_RADIUS_M = 6_371_008.7714
_NO_DIRECTION = 1e-9
"""Mean of unit vectors shorter than this: the data have no middle."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LocalPlane:
    """A plane in metres that touches the Earth at ``lat0_deg``, ``lon0_deg``.

    ``radius_m`` is the distance from there to the farthest of the data it was made for.
    """

    lat0_deg: float
    lon0_deg: float
    radius_m: float
    _projection: Proj

    def forward(
        self, lon_deg: ArrayLike, lat_deg: ArrayLike
    ) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Return ``x_m`` (east) and ``y_m`` (north) of degrees, in the shape given."""
        x, y = self._projection(np.asarray(lon_deg, np.float64), np.asarray(lat_deg, np.float64))
        return np.asarray(x, np.float64), np.asarray(y, np.float64)

    def inverse(
        self, x_m: ArrayLike, y_m: ArrayLike
    ) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Return ``lon_deg`` and ``lat_deg`` (-180 to 180) of metres, in the shape given."""
        lon, lat = self._projection(
            np.asarray(x_m, np.float64), np.asarray(y_m, np.float64), inverse=True
        )
        return np.asarray(lon, np.float64), np.asarray(lat, np.float64)

    @property
    def scale_error(self) -> float:
        """Largest stretch among the data, as a share: ``c / sin c - 1`` at the rim.

        ``c`` is the radius as an angle on the mean sphere (Snyder 1987, equation 25-2).
        """
        angle = self.radius_m / _RADIUS_M
        return float(1.0 / np.sinc(angle / np.pi) - 1.0)

    def findings(self) -> tuple[Finding, ...]:
        """Return a warning where the data span too much of the Earth for a plane."""
        error = self.scale_error
        if error <= WIDE_SCALE_ERROR:
            return ()
        return (
            Finding(
                severity=Severity.WARNING,
                code="span_too_wide_for_plane",
                message=(
                    f"The places reach {self.radius_m / 1000:,.0f} km from their middle; a plane "
                    f"stretches distances there by up to {100 * error:.1f} %. Days are grouped on "
                    "that plane; lengths and times are not taken from it."
                ),
                remedy="Check for a place far off; plan regions apart if they are meant.",
                value=f"{self.radius_m / 1000:.0f} km",
            ),
        )


def local_plane(lon_deg: ArrayLike, lat_deg: ArrayLike) -> LocalPlane:
    """Return a plane centred on the data.

    Parameters
    ----------
    lon_deg, lat_deg
        WGS 84 degrees, shape (n,), n of at least 1.

    Returns
    -------
    The plane, with its radius.

    Raises
    ------
    InputError
        There is no point, a coordinate is no place on Earth, or the points lie all round the
        Earth, so that no plane can hold them.
    """
    lon = np.asarray(lon_deg, np.float64).reshape(-1)
    lat = np.asarray(lat_deg, np.float64).reshape(-1)
    if lon.size == 0 or not np.all((np.abs(lat) <= _POLE_DEG) & np.isfinite(lon)):
        msg = (
            f"Expected at least one place with latitude from -90 to 90 and a finite longitude, "
            f"got {lon.size} places. Check the coordinates of the register and of the bases."
        )
        raise InputError(msg)
    lon0, lat0 = _mean_direction(lon, lat)
    first = _touching(lon0, lat0, lon, lat)
    x, y = first.forward(lon, lat)
    # The middle of the box, not the mean: a town on one side must not push the rim outwards.
    middle = first.inverse((x.min() + x.max()) / 2, (y.min() + y.max()) / 2)
    second = _touching(float(middle[0]), float(middle[1]), lon, lat)
    return second if second.radius_m <= first.radius_m else first


def _mean_direction(lon: NDArray[np.float64], lat: NDArray[np.float64]) -> tuple[float, float]:
    """Return the degrees of the mean of unit vectors, which knows neither poles nor 180°."""
    phi, lam = np.radians(lat), np.radians(lon)
    x = float(np.mean(np.cos(phi) * np.cos(lam)))
    y = float(np.mean(np.cos(phi) * np.sin(lam)))
    z = float(np.mean(np.sin(phi)))
    if np.hypot(np.hypot(x, y), z) < _NO_DIRECTION:
        raise InputError(_ALL_ROUND)
    return float(np.degrees(np.arctan2(y, x))), float(np.degrees(np.arctan2(z, np.hypot(x, y))))


def _touching(
    lon0: float, lat0: float, lon: NDArray[np.float64], lat: NDArray[np.float64]
) -> LocalPlane:
    n = lon.shape[0]
    _, _, reach = Geod(ellps="WGS84").inv(np.full(n, lon0), np.full(n, lat0), lon, lat)
    radius = float(np.max(reach))
    if radius > _HALF_THE_EARTH_M:
        raise InputError(_ALL_ROUND)
    plane = Proj(proj="aeqd", lon_0=lon0, lat_0=lat0, ellps="WGS84", units="m")
    return LocalPlane(lat0_deg=lat0, lon0_deg=lon0, radius_m=radius, _projection=plane)


_ALL_ROUND = (
    "Expected places within half of the Earth, got places all round it: no plane can hold them. "
    "Check for swapped or missing coordinates; plan far regions apart."
)
