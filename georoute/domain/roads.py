"""What a plan keeps of the roads: ways of legs, points where places meet them, what lies around."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum
from typing import Protocol

__all__ = ["BackdropKind", "BackdropLine", "LegShape", "RoadPoint", "Way", "Ways"]

Way = tuple[tuple[float, float], ...]
"""Corners as (latitude, longitude) in degrees, WGS 84."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LegShape:
    """How a leg is driven: see ``Leg`` of a plan. An empty path is a straight line."""

    path: Way = ()
    roads: tuple[tuple[str, float], ...] = ()
    ferry: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class RoadPoint:
    """Where a base or a site meets the road: driving ends here, ``distance_m`` from the place.

    It lies ``offset_m`` from the start of stretch ``stretch`` of the network; ``skipped`` tells of
    a nearer road that was not taken.
    """

    place_id: str
    lat_deg: float
    lon_deg: float
    distance_m: float
    road: str
    stretch: int
    offset_m: float
    skipped: str = ""


class BackdropKind(StrEnum):
    """What a line around the tours is. ``WATER`` is closed: the rim of a lake or a river bed."""

    MAIN = "main road"
    MINOR = "minor road"
    LOCAL = "local road"
    FERRY = "ferry"
    COAST = "coast"
    WATER = "water"


@dataclass(frozen=True, slots=True, kw_only=True)
class BackdropLine:
    """A line to draw under the tours, with its name; ``path`` is (latitude, longitude).

    On a coast the land lies to the left, as in OpenStreetMap.
    """

    kind: BackdropKind
    name: str
    path: Way


class Ways(Protocol):
    """Knows how the legs of a table of travel are driven; places are indices into the table.

    ``network`` and ``credit``: see ``TravelNote`` of a plan.
    """

    network: str
    credit: str

    def legs(self, pairs: Sequence[tuple[int, int]]) -> tuple[LegShape, ...]:
        """Return the shape of each leg."""

    def points(self) -> tuple[RoadPoint, ...]:
        """Return where the places meet the road."""

    def backdrop(self, ways: Sequence[Way]) -> tuple[BackdropLine, ...]:
        """Return what to draw under tours that take these ways."""
