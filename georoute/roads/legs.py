"""The shape, the names and the length of a leg, put together from the pieces it drives."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from georoute.roads.model import Access

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.roads.network import RoadNetwork
    from georoute.roads.snapping import Snapped

__all__ = ["RoadLeg", "make_leg"]

_MM_PER_M = 1000.0
_MS_PER_S = 1000.0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class RoadLeg:
    """One leg as it is driven.

    ``lat_deg``, ``lon_deg``: the shape, from the cut at the first place to the cut at the second,
    at least two points. ``length_m``, ``time_s``: driven. ``names``: (road name, metres) in
    driving order, neighbours of one name merged; "" where the map knows no name. ``ferry``: a ship
    is taken. ``arcs``: int64, the arcs of the table in driving order, the first and the last in
    part. ``start_gap_m``, ``end_gap_m``: straight from the place to its cut; on foot or across a
    yard, in neither length nor time.
    """

    lat_deg: NDArray[np.float64]
    lon_deg: NDArray[np.float64]
    length_m: float
    time_s: float
    names: tuple[tuple[str, float], ...]
    ferry: bool
    arcs: NDArray[np.int64]
    start_gap_m: float
    end_gap_m: float


def make_leg(
    network: RoadNetwork,
    snapped: Snapped,
    pair: tuple[int, int],
    arcs: NDArray[np.int64],
    *,
    ms: int,
    mm: int,
) -> RoadLeg:
    """Return the leg that drives some arcs.

    Parameters
    ----------
    network
        The network.
    snapped
        The places on it.
    pair
        From place, to place.
    arcs
        Arcs of the table in driving order, int64 (n,), n of at least 1: the first is the one on
        which the first place lies, the last that of the second place.
    ms, mm
        Time and length.

    Returns
    -------
    The leg.
    """
    lat, lon = _shape(network, snapped, pair, arcs)
    return RoadLeg(
        lat_deg=lat,
        lon_deg=lon,
        length_m=mm / _MM_PER_M,
        time_s=ms / _MS_PER_S,
        names=_names(network, arcs, _driven_mm(network, snapped, pair, arcs)),
        ferry=bool((network.table.access[arcs >> 1] & Access.FERRY).any()),
        arcs=arcs,
        start_gap_m=float(snapped.distance_m[pair[0]]),
        end_gap_m=float(snapped.distance_m[pair[1]]),
    )


def _point_ranges(
    network: RoadNetwork, snapped: Snapped, pair: tuple[int, int], arcs: NDArray[np.int64]
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return the first and the last point of the table that each arc drives over, in its order.

    On an arc driven backwards the numbers fall. The last point of a piece without any, cut twice
    within a segment, lies before its first.
    """
    ptr, stretch = network.table.point_ptr, arcs >> 1
    backwards = arcs % 2 == 1
    low, high = ptr[stretch], ptr[stretch + 1] - 1
    begin, end = np.where(backwards, high, low), np.where(backwards, low, high)
    cut, goal = snapped.segment[pair[0]], snapped.segment[pair[1]]
    begin[0] = cut if backwards[0] else cut + 1
    end[-1] = goal + 1 if backwards[-1] else goal
    return begin, end


def _shape(
    network: RoadNetwork,
    snapped: Snapped,
    pair: tuple[int, int],
    arcs: NDArray[np.int64],
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Return the points from cut to cut, each once."""
    table = network.table
    begin, end = _point_ranges(network, snapped, pair, arcs)
    ways = np.where(arcs % 2 == 1, -1, 1)
    counts = np.maximum((end - begin) * ways + 1, 0)
    each = np.repeat(np.arange(begin.size), counts)
    within = np.arange(each.size) - (np.cumsum(counts) - counts)[each]
    point = begin[each] + ways[each] * within
    i, j = pair
    lat = np.concatenate(
        (snapped.road_lat_deg[[i]], table.point_lat[point], snapped.road_lat_deg[[j]])
    )
    lon = np.concatenate(
        (snapped.road_lon_deg[[i]], table.point_lon[point], snapped.road_lon_deg[[j]])
    )
    new = np.ones(lat.size, np.bool_)
    new[1:] = (lat[1:] != lat[:-1]) | (lon[1:] != lon[:-1])
    new[-1] |= np.count_nonzero(new) == 1
    return lat[new], lon[new]


def _driven_mm(
    network: RoadNetwork, snapped: Snapped, pair: tuple[int, int], arcs: NDArray[np.int64]
) -> NDArray[np.int64]:
    """Return how much of each arc is driven."""
    stretch, backwards = arcs >> 1, arcs % 2 == 1
    whole = network.table.length_mm[stretch]
    offset, goal = snapped.offset_mm[pair[0]], snapped.offset_mm[pair[1]]
    if arcs.size == 1:
        return np.abs(np.array([goal - offset], np.int64))
    driven = np.array(whole, np.int64)
    driven[0] = offset if backwards[0] else whole[0] - offset
    driven[-1] = whole[-1] - goal if backwards[-1] else goal
    return driven


def _names(
    network: RoadNetwork, arcs: NDArray[np.int64], driven_mm: NDArray[np.int64]
) -> tuple[tuple[str, float], ...]:
    """Return road names with the metres driven on them."""
    name = network.table.name[arcs >> 1]
    some = driven_mm > 0
    if some.any():
        name, driven_mm = name[some], driven_mm[some]
    first = np.flatnonzero(np.concatenate(([True], name[1:] != name[:-1])))
    metres = np.add.reduceat(driven_mm, first) / _MM_PER_M
    return tuple(
        (network.table.names[n], m)
        for n, m in zip(name[first].tolist(), metres.tolist(), strict=True)
    )
