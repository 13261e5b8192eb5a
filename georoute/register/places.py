"""Bring coordinates to WGS 84 and judge each place against the rest of the register."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import pyproj
from numpy.typing import NDArray

from georoute.register.codes import Code, new_finding

if TYPE_CHECKING:
    from collections.abc import Sequence

    from georoute.domain.findings import Finding
    from georoute.domain.sites import Base
    from georoute.register.crs import Crs
    from georoute.register.rows import ParsedRow

__all__ = ["Located", "locate"]

_Floats = NDArray[np.float64]

_GEOD = pyproj.Geod(ellps="WGS84")
_FULL_TURN = 360.0
_LAT_LIMIT, _LON_LIMIT = 90.0, 180.0

_CUT = 3.5
"""Modified z-score beyond which a value is an outlier (Iglewicz and Hoaglin 1993, section 3.3)."""

_MAD_TO_SIGMA = 0.6745
"""The third quartile of the standard normal: makes the MAD comparable to a standard deviation."""

_MEAN_TO_SIGMA = float(np.sqrt(np.pi / 2.0))
"""The same for the mean absolute deviation."""

_NEAR_M = 50.0
"""Distances below this are taken as this: the width of a property, before taking logarithms."""

_FEWEST = 4
"""With fewer places there is no rest to judge one against."""

_MANY = 10
"""With fewer places the MAD is hardly known, and an outlier has to be clearly one."""

_FEW = 0.1
"""A larger share of far sites than this is a second area, reported once, not site by site."""

_SAME_PLACE_DIGITS = 6
"""Decimals of a degree that are compared: 0.1 m."""

_CLEARLY = 10.0
"""Axes count as exchanged only where that brings a place so many times nearer to the rest."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Located:
    """Latitude and longitude in degrees, shape (n,); NaN where a row has no usable place."""

    lat_deg: _Floats
    lon_deg: _Floats
    findings: tuple[Finding, ...]


class _Judge:
    """Judges places; what it finds collects in ``findings``, and what is bad in ``good``."""

    def __init__(
        self, rows: Sequence[ParsedRow], crs: Crs, columns: tuple[str, str], bases: Sequence[Base]
    ) -> None:
        self.rows = rows
        self.crs = crs
        self.columns = columns
        self.bases = bases
        self.findings: list[Finding] = []
        self.x = np.array([np.nan if row.x is None else row.x for row in rows], dtype=np.float64)
        self.y = np.array([np.nan if row.y is None else row.y for row in rows], dtype=np.float64)
        self.good = np.isfinite(self.x) & np.isfinite(self.y)
        self.lon, self.lat = self.to_degrees(self.x, self.y)
        self.other_lon, self.other_lat = self.to_degrees(self.y, self.x)

    def to_degrees(self, x: _Floats, y: _Floats) -> tuple[_Floats, _Floats]:
        """Convert to longitude and latitude; infinite where the system does not reach."""
        if self.crs.transformer is None:
            return x.copy(), y.copy()
        finite = np.isfinite(x) & np.isfinite(y)
        lon, lat = np.full(len(x), np.nan), np.full(len(x), np.nan)
        lon[finite], lat[finite] = self.crs.transformer.transform(x[finite], y[finite])
        return lon, lat

    def add(
        self, code: Code, message: str, remedy: str, *, k: int | None = None, column: str = ""
    ) -> None:
        row = None if k is None else self.rows[k]
        self.findings.append(
            new_finding(
                code,
                message,
                remedy,
                row=None if row is None else row.number,
                column=column or ", ".join(dict.fromkeys(self.columns)),
                value="" if k is None else f"{self.y[k]:.12g}, {self.x[k]:.12g}",
                subject="" if row is None else row.site_id,
            )
        )

    def within(self, lon: _Floats, lat: _Floats) -> NDArray[np.bool_]:
        return np.asarray((np.abs(lat) <= _LAT_LIMIT) & (np.abs(lon) <= _LON_LIMIT))

    def judge_zero(self) -> None:
        for k in np.flatnonzero(self.good & (self.x == 0.0) & (self.y == 0.0)):
            self.good[k] = False
            self.add(
                Code.ZERO_COORDINATE,
                "both coordinates are 0, which is what an empty form leaves behind",
                "look the place up and write its coordinates",
                k=int(k),
            )

    def judge_whole(self) -> bool:
        """Judge the file as a whole; true where that explains what is wrong with its rows."""
        count = int(self.good.sum())
        if count == 0:
            return False
        x, y = self.x[self.good], self.y[self.good]
        if self.crs.transformer is None:
            metres = (np.abs(x) > _FULL_TURN) | (np.abs(y) > _FULL_TURN)
            if 2 * int(metres.sum()) > count:
                self.add(
                    Code.COORDINATES_NOT_DEGREES,
                    "the coordinates are not degrees; they look like metres of a national grid",
                    "name the grid by its EPSG code in the programme, for instance "
                    '[register] crs = "EPSG:32719"',
                )
                return True
        if self._whole_exchanged(count):
            lat, lon = self.columns
            self.add(
                Code.SWAPPED_AXES,
                "latitude and longitude are exchanged in the whole file",
                f"exchange the headers `{lat}` and `{lon}`, or name the right ones in "
                "[register.columns]",
            )
            return True
        return False

    def _whole_exchanged(self, count: int) -> bool:
        other = self.good & self.within(self.other_lon, self.other_lat)
        beyond = other & ~self.within(self.lon, self.lat)
        if 2 * int(beyond.sum()) > count:
            return True
        both = other & self.within(self.lon, self.lat)
        if not self.bases or 2 * int(both.sum()) <= count:
            return False
        base = _centre(
            np.array([base.lon_deg for base in self.bases]),
            np.array([base.lat_deg for base in self.bases]),
        )
        own = np.median(_distances(base, self.lon[both], self.lat[both]))
        exchanged = np.median(_distances(base, self.other_lon[both], self.other_lat[both]))
        return bool(own > _CLEARLY * max(float(exchanged), _NEAR_M))

    def judge_range_and_axes(self) -> None:
        """Find places out of range, and places that fit the rest only with exchanged axes."""
        inside = self.good & self.within(self.lon, self.lat)
        other = self.good & self.within(self.other_lon, self.other_lat)
        swapped = np.zeros(len(self.rows), dtype=np.bool_)
        if int(inside.sum()) >= _FEWEST - 1:
            centre = _centre(self.lon[inside], self.lat[inside])
            own, exchanged = np.full((2, len(self.rows)), np.inf)
            own[inside] = _distances(centre, self.lon[inside], self.lat[inside])
            exchanged[other] = _distances(centre, self.other_lon[other], self.other_lat[other])
            # On plain distances the rule bears nearly half of the rows exchanged; on logarithms
            # it knows how far the ordinary remote sites of a scattered register lie.
            for reach in (_plain_reach(own[inside]), _reach(own[inside])):
                swapped |= (own > reach) & (exchanged <= reach)
            # Near the line where latitude equals longitude an exchange hardly moves a site.
            swapped &= self.good & (own > _CLEARLY * exchanged)
        for k in np.flatnonzero(self.good):
            if swapped[k]:
                self._swapped(int(k))
            elif not inside[k]:
                self._out_of_range(int(k))
        self.good &= inside & ~swapped

    def _swapped(self, k: int) -> None:
        self.add(
            Code.SWAPPED_AXES,
            "latitude and longitude look exchanged: exchanged, the site lies among the others",
            f"write latitude {self.x[k]:.12g} and longitude {self.y[k]:.12g}"
            if self.crs.transformer is None
            else "exchange the two coordinates of this row",
            k=k,
        )

    def _out_of_range(self, k: int) -> None:
        if self.crs.transformer is not None:
            self.add(
                Code.COORDINATE_OUTSIDE_CRS,
                f"the coordinate lies outside {self.crs.name}",
                "look for a digit too many or too few, or correct the crs setting",
                k=k,
            )
            return
        lat, lon = self.columns
        self.add(
            Code.COORDINATE_OUT_OF_RANGE,
            "latitude lies between -90 and 90 degrees, longitude between -180 and 180",
            "look for a missing decimal point",
            k=k,
            column=lat if abs(self.lat[k]) > _LAT_LIMIT else lon,
        )

    def judge_outliers(self) -> None:
        where = np.flatnonzero(self.good)
        if len(where) < _FEWEST:
            return
        lon, lat = self.lon[where], self.lat[where]
        distances = _distances(_centre(lon, lat), lon, lat)
        reach = _reach(distances)
        if len(where) < _MANY:
            reach = max(reach, _CLEARLY * float(np.median(distances)))
        far = np.flatnonzero(distances > reach)
        remedy = "look whether the coordinates are right; if they are, nothing to do"
        if len(far) > max(1, int(_FEW * len(where))) and len(far) > _FEWEST - 1:
            self.add(
                Code.FAR_OUTLIER,
                f"{len(far)} of {len(where)} sites lie more than {reach / 1000:.0f} km from the "
                "middle of the rest: is there a second area?",
                remedy,
            )
            return
        for k in far:
            self.add(
                Code.FAR_OUTLIER,
                f"the site lies {distances[k] / 1000:.0f} km from the middle of the register; "
                f"half of the sites lie within {np.median(distances) / 1000:.1f} km",
                remedy,
                k=int(where[k]),
            )

    def judge_same_place(self) -> None:
        first: dict[tuple[float, float], int] = {}
        for k in map(int, np.flatnonzero(self.good)):
            place = (
                round(float(self.lat[k]), _SAME_PLACE_DIGITS),
                round(float(self.lon[k]), _SAME_PLACE_DIGITS),
            )
            if place in first:
                self.add(
                    Code.SAME_PLACE,
                    f"the site has the coordinates of row {first[place]}",
                    "delete one if both are the same site; if both stand there, nothing to do",
                    k=k,
                )
            first.setdefault(place, self.rows[k].number)


def _centre(lon: _Floats, lat: _Floats) -> tuple[float, float]:
    """Return the middle of places in degrees: the median of unit vectors, true across ±180°."""
    lam, phi = np.radians(lon), np.radians(lat)
    vectors = np.stack([np.cos(phi) * np.cos(lam), np.cos(phi) * np.sin(lam), np.sin(phi)])
    x, y, z = np.median(vectors, axis=1)
    return float(np.degrees(np.arctan2(y, x))), float(np.degrees(np.arctan2(z, np.hypot(x, y))))


def _distances(centre: tuple[float, float], lon: _Floats, lat: _Floats) -> _Floats:
    """Return geodesic metres from one place to many."""
    count = len(lon)
    _, _, metres = _GEOD.inv(np.full(count, centre[0]), np.full(count, centre[1]), lon, lat)
    return np.maximum(np.asarray(metres, dtype=np.float64), _NEAR_M)


def _plain_reach(distances: _Floats) -> float:
    """Return the distance beyond which a site is an outlier, judged on distances as they are."""
    middle = float(np.median(distances))
    spread = float(np.median(np.abs(distances - middle)))
    return middle + _CUT * spread / _MAD_TO_SIGMA


def _reach(distances: _Floats) -> float:
    """Return the distance beyond which a site is an outlier.

    Distances from a middle are skewed to the right, so the rule is applied to their logarithms:
    median + 3.5 MAD / 0.6745. Where more than half are equal, so that the MAD is 0, the mean
    absolute deviation stands in for it, as in the same source.
    """
    logs = np.log(distances)
    middle = float(np.median(logs))
    deviations = np.abs(logs - middle)
    sigma = float(np.median(deviations)) / _MAD_TO_SIGMA
    if sigma == 0.0:
        sigma = float(np.mean(deviations)) * _MEAN_TO_SIGMA
    return float(np.exp(middle + _CUT * sigma))


def locate(
    rows: Sequence[ParsedRow], *, crs: Crs, columns: tuple[str, str], bases: Sequence[Base] = ()
) -> Located:
    """Convert the coordinates of rows to WGS 84 and judge them against each other.

    Parameters
    ----------
    rows
        Rows with x and y in ``crs``.
    crs
        The system they are in.
    columns
        Headers of latitude (y) and longitude (x), for findings.
    bases
        Bases of the programme, by which a file with exchanged axes throughout is recognised.

    Returns
    -------
    Located
        Places in degrees, and all that is wrong with them.
    """
    judge = _Judge(rows, crs, columns, bases)
    judge.judge_zero()
    if not judge.judge_whole():
        judge.judge_range_and_axes()
        judge.judge_outliers()
        judge.judge_same_place()
    lat, lon = judge.lat.copy(), judge.lon.copy()
    lat[~judge.good] = np.nan
    lon[~judge.good] = np.nan
    return Located(lat_deg=lat, lon_deg=lon, findings=tuple(judge.findings))
