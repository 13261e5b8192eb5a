"""Lines between named nodes, of any source, made into the table of roads."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from georoute.errors import RoadError
from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.model import Access, RoadTable
from georoute.roads.speeds import ROAD_CLASSES
from georoute.roads.stretches import driving_ms, segment_lengths_m

if TYPE_CHECKING:
    from collections.abc import Hashable

    from numpy.typing import NDArray

    from georoute.roads.box import Box
    from georoute.roads.remarks import Tally

__all__ = ["Line", "table_of_lines"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Line:
    """A stretch as a source tells it. ``lat``, ``lon``: its points, degrees, two or more.

    ``forward_kmh``, ``backward_kmh``: real speeds; 0: closed. ``length_m`` and ``time_s`` are
    used as they are where the source tells them.
    """

    from_node: Hashable
    to_node: Hashable
    lat: NDArray[np.float64]
    lon: NDArray[np.float64]
    forward_kmh: float
    backward_kmh: float
    way: int = 0
    road_class: str = "road"
    name: str = ""
    length_m: float | None = None
    time_s: float | None = None
    access: Access = field(default=Access.THROUGH)


def _numbers(values: list[float | None], fallback: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return values with the fallback where one is missing."""
    given = np.array(values, np.float64)
    return np.where(np.isfinite(given), given, fallback)


def _within(lines: list[Line], within: Box | None) -> list[Line]:
    if within is None or not lines:
        return lines
    low_lat, high_lat = (np.array([f(line.lat) for line in lines]) for f in (np.min, np.max))
    low_lon, high_lon = (np.array([f(line.lon) for line in lines]) for f in (np.min, np.max))
    keep = within.overlaps(low_lat, high_lat, low_lon, high_lon)
    return [line for line, stays in zip(lines, keep.tolist(), strict=True) if stays]


def _complain(lines: list[Line], within: Box | None, source: str) -> RoadError:
    if within is None or not lines:
        msg = f"{source}: holds no road for cars; give a table with lines between nodes"
        return RoadError(msg)
    lat = np.concatenate([line.lat for line in lines])
    lon = np.concatenate([line.lon for line in lines])
    msg = (
        f"{source}: none of its roads touches the wanted area ({within.described()}); its roads "
        f"lie within latitude {lat.min():.4f} to {lat.max():.4f}, longitude {lon.min():.4f} to "
        f"{lon.max():.4f}; give a table of the area"
    )
    return RoadError(msg)


def table_of_lines(
    lines: list[Line], *, within: Box | None, tally: Tally, source: str, credit: str
) -> RoadTable:
    """Make the table of roads of lines; ``source`` names them in messages and on pages.

    Raises
    ------
    RoadError
        If there is no line, or none touches the box.
    """
    chosen = _within(lines, within)
    if not chosen:
        raise _complain(lines, within, source)
    count = np.array([line.lat.size for line in chosen], np.int64)
    ptr = np.concatenate([[0], np.cumsum(count)]).astype(np.int64)
    lat = np.concatenate([line.lat for line in chosen])
    lon = np.concatenate([line.lon for line in chosen])
    number: dict[Hashable, int] = {}
    ends = [(line.from_node, line.to_node) for line in chosen]
    node = np.array([number.setdefault(key, len(number)) for pair in ends for key in pair])
    at = np.column_stack([ptr[:-1], ptr[1:] - 1]).ravel()
    _, first = np.unique(node, return_index=True)

    joined = np.ones(lat.size, np.bool_)
    joined[ptr[1:] - 1] = False
    measured = segment_lengths_m(lat, lon, np.flatnonzero(joined))
    total = np.add.reduceat(measured, ptr[:-1] - np.arange(count.size))
    metres = _numbers([line.length_m for line in chosen], total)
    length_mm = np.floor(metres * 1000 + 0.5).astype(np.int64)
    told_ms = np.maximum(1.0, np.array([line.time_s for line in chosen], np.float64) * 1000)
    times = []
    for kmh in ([x.forward_kmh for x in chosen], [x.backward_kmh for x in chosen]):
        ms = driving_ms(length_mm, np.array(kmh, np.float64))
        use = np.isfinite(told_ms) & (ms < UNREACHABLE)
        times.append(np.where(use, np.floor(np.nan_to_num(told_ms) + 0.5), ms).astype(np.int64))
    classes = tuple(dict.fromkeys((*ROAD_CLASSES, *(line.road_class for line in chosen))))
    names = tuple(dict.fromkeys(("", *(line.name for line in chosen))))
    return RoadTable(
        node_lat=lat[at[first]],
        node_lon=lon[at[first]],
        start=node[0::2].astype(np.int64),
        end=node[1::2].astype(np.int64),
        way=np.array([line.way for line in chosen], np.int64),
        point_ptr=ptr,
        point_lat=lat,
        point_lon=lon,
        length_mm=length_mm,
        forward_ms=times[0],
        backward_ms=times[1],
        road_class=_places([line.road_class for line in chosen], classes).astype(np.int16),
        name=_places([line.name for line in chosen], names).astype(np.int32),
        access=np.array([line.access for line in chosen], np.uint8),
        ban_ptr=np.zeros(1, np.int64),
        ban_arc=np.zeros(0, np.int64),
        classes=classes,
        names=names,
        source=source,
        credit=credit,
        remarks=tally.remarks(),
    )


def _places(values: list[str], among: tuple[str, ...]) -> NDArray[np.int64]:
    place = {value: index for index, value in enumerate(among)}
    return np.array([place[value] for value in values], np.int64)
