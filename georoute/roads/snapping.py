"""Put places on the roads: the nearest stretch that trips can use, cut where it is met.

A place is never moved to a junction: the stretch is cut at the foot of the place, and trips leave
and arrive in every direction that is open there. The side of the road is free.
"""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypedDict

import numpy as np
import shapely
from pyproj import Geod

from georoute.roads.model import Access
from georoute.roads.network import Standing, network_plane

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import ArrayLike, NDArray

    from georoute.projection import LocalPlane
    from georoute.roads.network import RoadNetwork

__all__ = [
    "LIMIT_M",
    "STREET_REACH_M",
    "RoadIndex",
    "Snapped",
    "plain_name",
    "road_index",
    "snap",
]

LIMIT_M = 500.0
"""Farther than this from any road a place is reported, not moved."""

STREET_REACH_M = 100.0
"""The street of the address is preferred when it is at most this much farther than the nearest."""

_MM_PER_M = 1000.0
_FIRST_RING_M = 50.0
_WIDENING = 3.0
_NEVER_MAIN = (Standing.CLOSED, Standing.FERRY, Standing.NO_STOPPING)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class RoadIndex:
    """The stretches of a network on a plane, ready to be searched.

    ``candidate``: bool (E,), whether a place may be put there. ``lines``: (E,) shapes on the plane;
    ``along_m``: float64, running length on the plane over all points of the table. ``streets``:
    number of each plain name; ``street``: int64 (E,), number of the street of a stretch, -1: none.
    """

    plane: LocalPlane
    candidate: NDArray[np.bool_]
    lines: NDArray[np.object_]
    along_m: NDArray[np.float64]
    tree: shapely.STRtree
    streets: dict[str, int]
    street: NDArray[np.int64]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Snapped:
    """P places on the roads; all arrays (P,).

    ``lat_deg``, ``lon_deg``: the places as given. ``stretch``: int64, -1 where none is within the
    limit. ``offset_mm``: int64, from the start of the stretch to the cut, along it. ``segment``:
    int64, the point of the table after which the cut is. ``road_lat_deg``, ``road_lon_deg``: the
    cut. ``distance_m``: from place to cut, on the ellipsoid; NaN where there is none.
    ``is_on_street``: the stretch bears the name of the site's street. ``skipped``: int64, a nearer
    stretch that was passed over, -1: none; ``skipped_m``: how far that one is.
    """

    lat_deg: NDArray[np.float64]
    lon_deg: NDArray[np.float64]
    stretch: NDArray[np.int64]
    offset_mm: NDArray[np.int64]
    segment: NDArray[np.int64]
    road_lat_deg: NDArray[np.float64]
    road_lon_deg: NDArray[np.float64]
    distance_m: NDArray[np.float64]
    is_on_street: NDArray[np.bool_]
    skipped: NDArray[np.int64]
    skipped_m: NDArray[np.float64]
    limit_m: float

    @property
    def places(self) -> int:
        """Number of places."""
        return int(self.stretch.size)

    @property
    def is_far(self) -> NDArray[np.bool_]:
        """Which places have no road within the limit that trips could use."""
        return self.stretch < 0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Found:
    """The nearest candidate of each place (-1: none; metres infinite), and a nearer other one."""

    nearest: NDArray[np.int64]
    nearest_m: NDArray[np.float64]
    skipped: NDArray[np.int64]
    skipped_m: NDArray[np.float64]

    @classmethod
    def empty(cls, places: int) -> _Found:
        return cls(
            nearest=np.full(places, -1, np.int64),
            nearest_m=np.full(places, np.inf),
            skipped=np.full(places, -1, np.int64),
            skipped_m=np.full(places, np.nan),
        )


class _Cut(TypedDict):
    """The fields of ``Snapped`` that tell where the chosen stretches are cut."""

    offset_mm: NDArray[np.int64]
    segment: NDArray[np.int64]
    road_lat_deg: NDArray[np.float64]
    road_lon_deg: NDArray[np.float64]
    distance_m: NDArray[np.float64]


def plain_name(name: str) -> str:
    """Return a street name without accents, case and doubled blanks, for comparison."""
    letters = unicodedata.normalize("NFKD", name.casefold())
    return " ".join("".join(c for c in letters if not unicodedata.combining(c)).split())


def road_index(network: RoadNetwork, *, islands: bool = False) -> RoadIndex:
    """Return the stretches of a network ready to be searched.

    Parameters
    ----------
    network
        The network.
    islands
        Put places on the nearest road even if no trip leads from there to the main part of the
        network, or back. Ships, motorways and closed roads stay out.

    Returns
    -------
    The index.
    """
    table = network.table
    x, y = network.point_x, network.point_y
    counts = np.diff(table.point_ptr)
    owner = np.repeat(np.arange(counts.size), counts)
    lines = np.asarray(shapely.linestrings(np.stack((x, y), axis=1), indices=owner), np.object_)
    step = np.zeros(x.size)
    step[1:] = np.hypot(np.diff(x), np.diff(y))
    step[table.point_ptr[:-1]] = 0.0
    standing = network.standing
    candidate = ~np.isin(standing, _NEVER_MAIN) if islands else standing == Standing.MAIN
    streets: dict[str, int] = {}
    numbers = [streets.setdefault(plain_name(name), len(streets)) for name in table.names]
    street = np.array(numbers, np.int64)[table.name]
    street[table.name == 0] = -1
    return RoadIndex(
        plane=network_plane(table),
        candidate=candidate,
        lines=lines,
        along_m=np.cumsum(step),
        tree=shapely.STRtree(list(lines)),
        streets=streets,
        street=street,
    )


def snap(
    network: RoadNetwork,
    lat_deg: ArrayLike,
    lon_deg: ArrayLike,
    *,
    limit_m: float = LIMIT_M,
    street: Sequence[str | None] | None = None,
    index: RoadIndex | None = None,
) -> Snapped:
    """Put places on the roads.

    Parameters
    ----------
    network
        The network.
    lat_deg, lon_deg
        WGS 84 degrees, shape (P,).
    limit_m
        Places farther than this from every road that trips can use get none.
    street
        For each place the street of its address, where it has one: a road of that name (accents
        and case apart) is taken when it is not more than ``STREET_REACH_M`` farther than the
        nearest.
    index
        From ``road_index``; made anew when absent.

    Returns
    -------
    Where each place is on the roads, and what nearer stretch was passed over.
    """
    index = road_index(network) if index is None else index
    lat = np.asarray(lat_deg, np.float64).reshape(-1)
    lon = np.asarray(lon_deg, np.float64).reshape(-1)
    x, y = index.plane.forward(lon, lat)
    known = np.isfinite(x) & np.isfinite(y)
    points = np.full(lat.size, None, np.object_)
    points[known] = shapely.points(x[known], y[known])
    found = _nearest(network, index, points, limit_m)
    chosen, is_on_street = found.nearest, np.zeros(lat.size, np.bool_)
    skipped, skipped_m = found.skipped, found.skipped_m
    if street is not None:
        chosen, is_on_street = _same_street(index, points, found, street, limit_m)
        moved = (chosen != found.nearest) & (skipped < 0)
        skipped = np.where(moved, found.nearest, skipped)
        skipped_m = np.where(moved, found.nearest_m, skipped_m)
    return Snapped(
        lat_deg=lat,
        lon_deg=lon,
        stretch=chosen,
        is_on_street=is_on_street,
        skipped=skipped,
        skipped_m=skipped_m,
        limit_m=limit_m,
        **_cut(network, index, points, chosen, (lat, lon)),
    )


def _nearest(
    network: RoadNetwork, index: RoadIndex, points: NDArray[np.object_], limit_m: float
) -> _Found:
    """Return the nearest candidate of each point and what nearer stretch is none.

    The search widens: few places need more than the first ring.
    """
    found = _Found.empty(points.size)
    is_one_way = np.asarray((network.after.reshape(-1, 2) < 0).any(axis=1))
    is_local = (network.table.access & Access.LOCAL) > 0
    waiting, reach = np.flatnonzero(shapely.is_geometry(points)), min(_FIRST_RING_M, limit_m)
    while waiting.size:
        which, stretch = index.tree.query(_squares(points[waiting], reach))
        metres = np.asarray(shapely.distance(points[waiting[which]], index.lines[stretch]))
        near = metres <= reach
        place, stretch, metres = waiting[which[near]], stretch[near], metres[near]
        # Of several at one distance (a place before a junction): a two-way road open to all,
        # then the first of the table.
        order = np.lexsort((stretch, is_one_way[stretch], is_local[stretch], metres, place))
        place, stretch, metres = place[order], stretch[order], metres[order]
        good = index.candidate[stretch]
        first = _first(place[good])
        taken = place[good][first]
        found.nearest[taken] = stretch[good][first]
        found.nearest_m[taken] = metres[good][first]
        nearer = ~good & (metres < found.nearest_m[place])
        first = _first(place[nearer])
        found.skipped[place[nearer][first]] = stretch[nearer][first]
        found.skipped_m[place[nearer][first]] = metres[nearer][first]
        waiting = waiting[found.nearest[waiting] < 0] if reach < limit_m else waiting[:0]
        reach = min(reach * _WIDENING, limit_m)
    return found


def _first(sorted_values: NDArray[np.int64]) -> NDArray[np.bool_]:
    """Return which entries are the first of their value."""
    first = np.ones(sorted_values.size, np.bool_)
    first[1:] = sorted_values[1:] != sorted_values[:-1]
    return first


def _squares(
    points: NDArray[np.object_], reach: NDArray[np.float64] | float
) -> NDArray[np.object_]:
    x, y = shapely.get_x(points), shapely.get_y(points)
    return np.asarray(shapely.box(x - reach, y - reach, x + reach, y + reach), np.object_)


def _same_street(
    index: RoadIndex,
    points: NDArray[np.object_],
    found: _Found,
    street: Sequence[str | None],
    limit_m: float,
) -> tuple[NDArray[np.int64], NDArray[np.bool_]]:
    """Return the stretches with those on the sites' own streets preferred, and which are such."""
    nearest = found.nearest
    wanted = np.array([index.streets.get(plain_name(s), -1) if s else -1 for s in street], np.int64)
    is_on_street = (wanted >= 0) & (nearest >= 0) & (index.street[nearest] == wanted)
    asking = np.flatnonzero((wanted >= 0) & (nearest >= 0) & ~is_on_street)
    chosen = nearest.copy()
    if asking.size == 0:
        return chosen, is_on_street
    reach = np.minimum(found.nearest_m[asking] + STREET_REACH_M, limit_m)
    which, stretch = index.tree.query(_squares(points[asking], reach))
    named = (index.street[stretch] == wanted[asking[which]]) & index.candidate[stretch]
    which, stretch = which[named], stretch[named]
    metres = np.asarray(shapely.distance(points[asking[which]], index.lines[stretch]))
    near = metres <= reach[which]
    which, stretch, metres = which[near], stretch[near], metres[near]
    order = np.lexsort((stretch, metres, which))
    order = order[_first(which[order])]
    chosen[asking[which[order]]] = stretch[order]
    is_on_street[asking[which[order]]] = True
    return chosen, is_on_street


def _cut(
    network: RoadNetwork,
    index: RoadIndex,
    points: NDArray[np.object_],
    stretch: NDArray[np.int64],
    place: tuple[NDArray[np.float64], NDArray[np.float64]],
) -> _Cut:
    """Return where the chosen stretches are cut, as the fields of ``Snapped``."""
    table, geod = network.table, Geod(ellps="WGS84")
    on = np.flatnonzero(stretch >= 0)
    edge = stretch[on]
    first, last = table.point_ptr[edge], table.point_ptr[edge + 1] - 1
    foot = index.along_m[first] + shapely.line_locate_point(index.lines[edge], points[on])
    segment = np.searchsorted(index.along_m, foot, side="right") - 1
    segment = np.clip(segment, first, last - 1)
    span = index.along_m[segment + 1] - index.along_m[segment]
    share = np.clip((foot - index.along_m[segment]) / np.where(span > 0, span, 1.0), 0.0, 1.0)
    lat0, lon0 = table.point_lat[segment], table.point_lon[segment]
    lat = lat0 + share * (table.point_lat[segment + 1] - lat0)
    lon = lon0 + share * (table.point_lon[segment + 1] - lon0)
    # The plane found the foot; how far along it is, is measured on the ellipsoid.
    metres = np.asarray(geod.inv(lon0, lat0, lon, lat)[2])
    offset = np.rint(network.point_mm[segment] + metres * _MM_PER_M)
    distance = np.asarray(geod.inv(place[1][on], place[0][on], lon, lat)[2])

    def spread(values: NDArray[np.float64]) -> NDArray[np.float64]:
        whole = np.full(stretch.size, np.nan)
        whole[on] = values
        return whole

    offset_mm = np.zeros(stretch.size, np.int64)
    offset_mm[on] = np.clip(offset, 0, table.length_mm[edge])
    segments = np.full(stretch.size, -1, np.int64)
    segments[on] = segment
    return {
        "offset_mm": offset_mm,
        "segment": segments,
        "road_lat_deg": spread(lat),
        "road_lon_deg": spread(lon),
        "distance_m": spread(distance),
    }
