"""Where trips begin and end: the cut pieces of the stretches on which the places are."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.model import Seeds

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.roads.network import RoadNetwork
    from georoute.roads.snapping import Snapped

__all__ = ["TripEnds", "along_stretch", "same_stretch", "trip_ends"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TripEnds:
    """Seeds of the searches, and the arcs of the table on which their pieces lie.

    ``source_arc``: int64, one for each seed of ``sources``, the arc driven from the place to the
    node; ``target_arc``: the arc driven from the node to the place.
    """

    sources: Seeds
    source_arc: NDArray[np.int64]
    targets: Seeds
    target_arc: NDArray[np.int64]


def _share(
    whole: NDArray[np.int64], offset: NDArray[np.int64], length: NDArray[np.int64]
) -> NDArray[np.int64]:
    """Return the part of ``whole`` that belongs to the first ``offset`` of ``length``, rounded.

    Both pieces of a cut stretch are taken from this one number, so that they add up to it.
    """
    part = whole * (offset / np.maximum(length, 1))
    return np.rint(part).astype(np.int64)


def _pieces(network: RoadNetwork, snapped: Snapped) -> tuple[NDArray[np.int64], ...]:
    """Return place, arc, and time and length before and after the cut, for every open arc."""
    place = np.repeat(np.flatnonzero(snapped.stretch >= 0), 2)
    stretch = snapped.stretch[place]
    arc = 2 * stretch + np.arange(place.size) % 2
    is_open = network.after[arc] >= 0
    place, stretch, arc = place[is_open], stretch[is_open], arc[is_open]
    length, offset = network.table.length_mm[stretch], snapped.offset_mm[place]
    whole = network.arc_ms[arc]
    from_start = _share(whole, offset, length)
    backwards = arc % 2 == 1
    before_ms = np.where(backwards, whole - from_start, from_start)
    before_mm = np.where(backwards, length - offset, offset)
    return place, arc, before_ms, before_mm, whole - before_ms, length - before_mm


def trip_ends(network: RoadNetwork, snapped: Snapped) -> TripEnds:
    """Return where the searches from and to places begin.

    Parameters
    ----------
    network
        The network.
    snapped
        P places on it; places without a stretch get no seed.

    Returns
    -------
    The seeds: a place is left, and come to, by every open direction of its stretch.
    """
    place, arc, before_ms, before_mm, after_ms, after_mm = _pieces(network, snapped)
    count = network.before_ptr[arc + 1] - network.before_ptr[arc]
    each = np.repeat(np.arange(arc.size), count)
    first = np.cumsum(count) - count
    entry = network.before[network.before_ptr[arc][each] + np.arange(each.size) - first[each]]

    def pointers(of: NDArray[np.int64]) -> NDArray[np.int64]:
        counts = np.bincount(of, minlength=snapped.places)
        return np.concatenate((np.zeros(1, np.int64), np.cumsum(counts)))

    return TripEnds(
        sources=Seeds(ptr=pointers(place), node=network.after[arc], ms=after_ms, mm=after_mm),
        source_arc=arc,
        targets=Seeds(
            ptr=pointers(place[each]), node=entry, ms=before_ms[each], mm=before_mm[each]
        ),
        target_arc=arc[each],
    )


def same_stretch(
    network: RoadNetwork, snapped: Snapped
) -> tuple[NDArray[np.int64], NDArray[np.int64], NDArray[np.int64], NDArray[np.int64]]:
    """Return the pairs of places between which one may drive along their common stretch.

    Returns
    -------
    From place, to place, time in ms and length in mm. On a one-way street only the pairs in its
    direction are there: the others go round the block.
    """
    order = np.argsort(snapped.stretch, kind="stable")
    order = order[snapped.stretch[order] >= 0]
    stretch = snapped.stretch[order]
    begin = np.searchsorted(stretch, stretch, side="left")
    count = np.searchsorted(stretch, stretch, side="right") - begin
    each = np.repeat(np.arange(order.size), count)
    other = begin[each] + np.arange(each.size) - (np.cumsum(count) - count)[each]
    source, target = order[each], order[other]
    _, ms, mm = along_stretch(
        network, stretch[each], snapped.offset_mm[source], snapped.offset_mm[target]
    )
    keep = (ms < UNREACHABLE) & (source != target)
    return source[keep], target[keep], ms[keep], mm[keep]


def along_stretch(
    network: RoadNetwork,
    stretch: NDArray[np.int64],
    begin_mm: NDArray[np.int64],
    end_mm: NDArray[np.int64],
) -> tuple[NDArray[np.int64], NDArray[np.int64], NDArray[np.int64]]:
    """Return the arc, time and length of driving from one cut of a stretch to another.

    Where that direction is closed the time and the length are ``UNREACHABLE``.
    """
    length = network.table.length_mm[stretch]
    arc = 2 * stretch + (end_mm < begin_mm)
    # At the very same cut nothing is driven: any open direction serves.
    arc += (end_mm == begin_mm) & (network.after[arc] < 0)
    whole = network.arc_ms[arc]
    is_open = network.after[arc] >= 0
    whole = np.where(is_open, whole, 0)
    ms = np.abs(_share(whole, end_mm, length) - _share(whole, begin_mm, length))
    mm = np.abs(end_mm - begin_mm)
    return arc, np.where(is_open, ms, UNREACHABLE), np.where(is_open, mm, UNREACHABLE)
