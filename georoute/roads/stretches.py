"""Ways cut into stretches: at junctions, barriers, missing nodes, and the edge of the box."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from pyproj import Geod

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.model import Access
from georoute.roads.speeds import FERRY_KMH
from georoute.roads.tags import Barrier

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.roads.box import Box
    from georoute.roads.osm_passes import RawRoads
    from georoute.roads.remarks import Tally

__all__ = ["Stretches", "cut_stretches", "driving_ms", "segment_lengths_m"]

_MS_KMH_PER_MM = 3.6  # 1 mm at 1 km/h takes 3.6 ms
_FASTEST_SHIP_KMH = 100.0
_SLOWEST_SHIP_KMH = 1.0
_GEOD = Geod(ellps="WGS84")


class Stretches(NamedTuple):
    """E stretches of W ways between N nodes, as in ``RoadTable``.

    ``of_way``: int64 (E,), index of the way in what was read. ``node_ref``: int64 (N,), ids of
    the nodes in the source; a node that a barrier closes is there once for each stretch.
    """

    node_ref: NDArray[np.int64]
    node_lat: NDArray[np.float64]
    node_lon: NDArray[np.float64]
    start: NDArray[np.int64]
    end: NDArray[np.int64]
    of_way: NDArray[np.int64]
    point_ptr: NDArray[np.int64]
    point_lat: NDArray[np.float64]
    point_lon: NDArray[np.float64]
    length_mm: NDArray[np.int64]
    forward_ms: NDArray[np.int64]
    backward_ms: NDArray[np.int64]
    access: NDArray[np.uint8]


def segment_lengths_m(
    lat: NDArray[np.float64], lon: NDArray[np.float64], at: NDArray[np.int64]
) -> NDArray[np.float64]:
    """Return the geodesic length in metres from each point of ``at`` to the one after it."""
    if not at.size:
        return np.empty(0)
    metres = _GEOD.inv(lon[at], lat[at], lon[at + 1], lat[at + 1])[2]
    return np.asarray(metres, np.float64)


def driving_ms(length_mm: NDArray[np.int64], kmh: NDArray[np.float64]) -> NDArray[np.int64]:
    """Return the time in ms to drive lengths at real speeds; ``UNREACHABLE`` where that is 0.

    A stretch takes 1 ms at least, so that none is free to drive round and round.
    """
    open_ = kmh > 0
    time = np.floor(length_mm * _MS_KMH_PER_MM / np.where(open_, kmh, 1.0) + 0.5)
    return np.where(open_, np.maximum(1, time), UNREACHABLE).astype(np.int64)


class _Points(NamedTuple):
    """The points of all ways; the same node twice running is there once."""

    way: NDArray[np.int64]
    ref: NDArray[np.int64]
    lat: NDArray[np.float64]
    lon: NDArray[np.float64]


def _points(raw: RawRoads) -> _Points:
    way = np.repeat(np.arange(raw.way.size), np.diff(raw.ptr))
    fresh = np.ones(raw.ref.size, np.bool_)
    fresh[1:] = (way[1:] != way[:-1]) | (raw.ref[1:] != raw.ref[:-1])
    return _Points(way[fresh], raw.ref[fresh], raw.lat[fresh], raw.lon[fresh])


def _joined_to_next(points: _Points) -> NDArray[np.bool_]:
    """Tell of each point whether it and the next are neighbours on a way and both are there."""
    there = np.isfinite(points.lat) & np.isfinite(points.lon)
    joined = np.zeros(points.ref.size, np.bool_)
    joined[:-1] = (points.way[1:] == points.way[:-1]) & there[1:] & there[:-1]
    return joined


def _in_box(points: _Points, at: NDArray[np.int64], within: Box) -> NDArray[np.bool_]:
    lat, lon = points.lat, points.lon
    return within.overlaps(
        np.minimum(lat[at], lat[at + 1]),
        np.maximum(lat[at], lat[at + 1]),
        np.minimum(lon[at], lon[at + 1]),
        np.maximum(lon[at], lon[at + 1]),
    )


def _breaks(
    points: _Points, joined: NDArray[np.bool_], barriers: dict[int, Barrier]
) -> NDArray[np.bool_]:
    """Tell of each point whether stretches end there: at junctions and barriers."""
    used = joined.copy()
    used[1:] |= joined[:-1]
    _, place, times = np.unique(points.ref[used], return_inverse=True, return_counts=True)
    breaks = np.zeros(points.ref.size, np.bool_)
    breaks[used] = times[place] > 1
    breaks |= np.isin(points.ref, np.array(list(barriers), np.int64))
    return breaks


def _number_nodes(
    ref: NDArray[np.int64], closed: NDArray[np.bool_]
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Give each end the number of its node; a closed end is a node of its own.

    Returns the node of each end, and an end that stands for each node.
    """
    _, first, place = np.unique(ref[~closed], return_index=True, return_inverse=True)
    node = np.empty(ref.size, np.int64)
    node[~closed] = place
    node[closed] = first.size + np.arange(np.count_nonzero(closed))
    return node, np.concatenate([np.flatnonzero(~closed)[first], np.flatnonzero(closed)])


def _way_speeds(
    raw: RawRoads, points: _Points, joined: NDArray[np.bool_], tally: Tally
) -> NDArray[np.float64]:
    """Return the real speeds along and against each way, float64 (W, 2), km/h.

    A ferry that tells its duration is as fast as that makes it, if all of it is in the file.
    """
    table = np.array([(rule.forward_kmh, rule.backward_kmh) for rule in raw.rules])
    speeds = table.reshape(-1, 2)[raw.rule]
    duration = np.array([rule.duration_s or 0.0 for rule in raw.rules])[raw.rule]
    ships = np.flatnonzero(duration > 0)
    if not ships.size:
        return speeds
    at = np.flatnonzero(joined & np.isin(points.way, ships))
    metres = np.zeros(raw.way.size)
    np.add.at(metres, points.way[at], segment_lengths_m(points.lat, points.lon, at))
    cut = np.zeros(raw.way.size, np.bool_)
    cut[points.way[~np.isfinite(points.lat)]] = True
    for ship in ships.tolist():
        kmh = metres[ship] / duration[ship] * 3.6
        if not _SLOWEST_SHIP_KMH <= kmh <= _FASTEST_SHIP_KMH or cut[ship]:
            tally.add("ferry_duration_unread", f"way {raw.way[ship]}: {duration[ship]:g} s")
            kmh = FERRY_KMH
        speeds[ship] = np.where(speeds[ship] > 0, kmh, 0.0)
    return speeds


def _barriers_met(
    raw: RawRoads, ref: NDArray[np.int64], tally: Tally
) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """Tell of each end whether a barrier closes it, or keeps through traffic out; count them."""
    met = []
    for kind in (Barrier.CLOSED, Barrier.LOCAL):
        nodes = np.array([n for n, b in raw.barriers.items() if b is kind], np.int64)
        here = np.isin(ref, nodes)
        stand, ends = np.unique(ref[here], return_counts=True)
        crossing = stand[ends > 2]  # noqa: PLR2004 - a barrier on one road has two sides
        on_road = np.setdiff1d(stand, crossing)
        for where, code in (
            (on_road, f"barrier_{kind.value}"),
            (crossing, f"{kind.value}_on_junction"),
        ):
            tally.add(code, f"node {where[0]}" if where.size else "", count=where.size)
        if kind is Barrier.LOCAL:
            here &= ~np.isin(ref, crossing)  # which of the roads the gate shuts is not told
        met.append(here)
    return met[0], met[1]


def cut_stretches(raw: RawRoads, *, within: Box | None, tally: Tally) -> Stretches:
    """Cut ways into stretches; with a box, pieces that do not touch it are left out."""
    points = _points(raw)
    whole = _joined_to_next(points)
    joined = whole.copy()
    at = np.flatnonzero(joined)
    if within is not None:
        joined[at] = _in_box(points, at, within)
        at = np.flatnonzero(joined)
    lacking = np.unique(points.way[~np.isfinite(points.lat)])
    tally.add("way_cut", f"way {raw.way[lacking[0]]}" if lacking.size else "", count=lacking.size)

    begins = _breaks(points, joined, raw.barriers)[at] | ~joined[at - 1]
    begins[:1] = True
    first = np.flatnonzero(begins)
    last = np.append(first, at.size)[1:] - 1
    from_, to = at[first], at[last] + 1
    length_mm = np.zeros(0, np.int64)
    if first.size:
        metres = np.add.reduceat(segment_lengths_m(points.lat, points.lon, at), first)
        length_mm = np.floor(metres * 1000 + 0.5).astype(np.int64)

    count = to - from_ + 1
    ptr = np.concatenate([[0], np.cumsum(count)]).astype(np.int64)
    shape = np.repeat(from_ - ptr[:-1], count) + np.arange(ptr[-1])
    ends = np.concatenate([from_, to])
    closed, local = _barriers_met(raw, points.ref[ends], tally)
    node, stands_for = _number_nodes(points.ref[ends], closed)
    of_way = points.way[from_]
    kmh = _way_speeds(raw, points, whole, tally)[of_way]
    access = np.array([rule.access for rule in raw.rules], np.uint8)[raw.rule[of_way]]
    gated = local[: from_.size] | local[from_.size :]
    access[gated] |= np.uint8(Access.LOCAL)
    return Stretches(
        node_ref=points.ref[ends][stands_for],
        node_lat=points.lat[ends][stands_for],
        node_lon=points.lon[ends][stands_for],
        start=node[: from_.size],
        end=node[from_.size :],
        of_way=of_way,
        point_ptr=ptr,
        point_lat=points.lat[shape],
        point_lon=points.lon[shape],
        length_mm=length_mm,
        forward_ms=driving_ms(length_mm, kmh[:, 0]),
        backward_ms=driving_ms(length_mm, kmh[:, 1]),
        access=access,
    )
