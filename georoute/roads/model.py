"""What every source of roads comes down to: one table of stretches, and the turns that are banned.

A stretch is a piece of road between two junctions (or ends). An *arc* is a stretch driven in one
direction: arc ``2 * e`` is stretch ``e`` from ``start`` to ``end``, arc ``2 * e + 1`` the way back.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import IntFlag
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

__all__ = ["Access", "RoadRemark", "RoadTable", "Seeds"]


class Access(IntFlag):
    """What is special about a stretch. ``THROUGH`` (0) is an ordinary road.

    ``LOCAL``: open to those whose trip begins or ends there, not to through traffic
    (``access=destination``, ``customers``, ``private``, ``no``: the last, and then the first, leg
    only). ``FERRY``: a ship.
    """

    THROUGH = 0
    LOCAL = 1
    FERRY = 2


@dataclass(frozen=True, slots=True, kw_only=True)
class RoadRemark:
    """Something a reader noticed: how often, with an example, for the description of a network.

    ``code`` is machine-readable (``restriction_read``, ``restriction_conditional``, …).
    """

    code: str
    count: int
    text: str
    example: str = ""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class RoadTable:
    """E stretches between N nodes; the one form all sources are brought into.

    ``node_lat``, ``node_lon``: float64 (N,), WGS 84 degrees. ``start``, ``end``: int64 (E,), index
    of a node. ``way``: int64 (E,), id of the way in its source. ``point_ptr`` (int64, (E + 1,)),
    ``point_lat``, ``point_lon``: the shape of each stretch from start to end, both included.
    ``length_mm``: int64 (E,), along the shape on the WGS 84 ellipsoid. ``forward_ms``,
    ``backward_ms``: int64 (E,), time to drive it; ``UNREACHABLE`` where that direction is closed.
    ``road_class``: int16 (E,), index into ``classes``. ``name``: int32 (E,), index into ``names``
    (0: no name). ``access``: uint8 (E,), see ``Access``.

    ``ban_ptr`` (int64, (B + 1,)), ``ban_arc`` (int64): sequences of two or more arcs that follow
    one another and may not be driven so; an ``only_*`` rule is the bans of everything else.

    ``source`` and ``credit`` are said on pages; ``remarks`` is what the reader noticed.
    """

    node_lat: NDArray[np.float64]
    node_lon: NDArray[np.float64]
    start: NDArray[np.int64]
    end: NDArray[np.int64]
    way: NDArray[np.int64]
    point_ptr: NDArray[np.int64]
    point_lat: NDArray[np.float64]
    point_lon: NDArray[np.float64]
    length_mm: NDArray[np.int64]
    forward_ms: NDArray[np.int64]
    backward_ms: NDArray[np.int64]
    road_class: NDArray[np.int16]
    name: NDArray[np.int32]
    access: NDArray[np.uint8]
    ban_ptr: NDArray[np.int64]
    ban_arc: NDArray[np.int64]
    classes: tuple[str, ...]
    names: tuple[str, ...]
    source: str
    credit: str = ""
    remarks: tuple[RoadRemark, ...] = field(default=())


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Seeds:
    """Where the searches of P places begin (or end): some nodes each, with what it takes to them.

    ``ptr``: int64 (P + 1,). ``node``, ``ms``, ``mm``: int64, the nodes of place p are
    ``ptr[p]:ptr[p + 1]``; times and lengths are from the place to the node (or from the node to
    the place, where searches end).
    """

    ptr: NDArray[np.int64]
    node: NDArray[np.int64]
    ms: NDArray[np.int64]
    mm: NDArray[np.int64]
