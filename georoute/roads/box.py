"""The part of the earth whose roads are wanted."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from georoute.errors import RoadError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

__all__ = ["KM_PER_DEGREE", "Box"]

KM_PER_DEGREE = 111.2
"""Length of a degree of latitude, near enough for a margin."""

_POLE_DEG = 90.0
_HALF_TURN_DEG = 180.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Box:
    """A rectangle in degrees (WGS 84); ``west_deg`` above ``east_deg`` crosses the 180th meridian.

    Raises
    ------
    RoadError
        If a side is not a finite number in range, or south lies north of north.
    """

    south_deg: float
    west_deg: float
    north_deg: float
    east_deg: float

    def __post_init__(self) -> None:
        """Refuse what is no rectangle on the earth."""
        across = (self.south_deg, self.north_deg)
        along = (self.west_deg, self.east_deg)
        good = (
            all(math.isfinite(side) for side in across + along)
            and all(abs(side) <= _POLE_DEG for side in across)
            and all(abs(side) <= _HALF_TURN_DEG for side in along)
            and self.south_deg <= self.north_deg
        )
        if not good:
            msg = (
                f"a box needs south <= north within -90..90 and west, east within -180..180 "
                f"degrees; got south {self.south_deg}, west {self.west_deg}, "
                f"north {self.north_deg}, east {self.east_deg}"
            )
            raise RoadError(msg)

    @classmethod
    def around(cls, lat_deg: ArrayLike, lon_deg: ArrayLike, *, margin_km: float) -> Box:
        """Return the box of some places and a margin on all sides of it.

        Places on both sides of the 180th meridian, less than half a turn apart, give a box that
        crosses it.

        Raises
        ------
        RoadError
            If there is no place, or a coordinate is not a finite number.
        """
        lat, lon = np.atleast_1d(lat_deg).astype(float), np.atleast_1d(lon_deg).astype(float)
        if lat.size == 0 or not (np.isfinite(lat).all() and np.isfinite(lon).all()):
            msg = "a box around places needs at least one place with finite coordinates"
            raise RoadError(msg)
        high = margin_km / KM_PER_DEGREE
        south = max(-_POLE_DEG, float(lat.min()) - high)
        north = min(_POLE_DEG, float(lat.max()) + high)
        narrowest = max(0.01, math.cos(math.radians(max(abs(south), abs(north)))))
        wide = high / narrowest
        west, east = float(lon.min()), float(lon.max())
        if east - west > _HALF_TURN_DEG:
            west, east = float(lon[lon > 0].min()), float(lon[lon <= 0].max())
        west, east = west - wide, east + wide
        if east - west >= 2 * _HALF_TURN_DEG:
            west, east = -_HALF_TURN_DEG, _HALF_TURN_DEG
        return cls(south_deg=south, west_deg=_turn(west), north_deg=north, east_deg=_turn(east))

    def overlaps(
        self,
        low_lat: NDArray[np.float64],
        high_lat: NDArray[np.float64],
        low_lon: NDArray[np.float64],
        high_lon: NDArray[np.float64],
    ) -> NDArray[np.bool_]:
        """Tell of each of many rectangles (degrees) whether it touches the box."""
        across = (high_lat >= self.south_deg) & (low_lat <= self.north_deg)
        if self.west_deg <= self.east_deg:
            return across & (high_lon >= self.west_deg) & (low_lon <= self.east_deg)
        return across & ((high_lon >= self.west_deg) | (low_lon <= self.east_deg))

    def described(self) -> str:
        """Return the box as people read it."""
        return (
            f"latitude {self.south_deg:.4f} to {self.north_deg:.4f}, "
            f"longitude {self.west_deg:.4f} to {self.east_deg:.4f}"
        )


def _turn(lon: float) -> float:
    """Bring a longitude into -180..180 degrees."""
    if abs(lon) <= _HALF_TURN_DEG:
        return lon
    return (lon + _HALF_TURN_DEG) % (2 * _HALF_TURN_DEG) - _HALF_TURN_DEG
