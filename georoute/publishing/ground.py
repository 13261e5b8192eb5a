"""What lies under the tours: roads in three grades, ferries, shore and water, cut to a view."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
import shapely
from shapely.geometry import MultiLineString
from shapely.geometry.base import BaseGeometry

from georoute.domain.roads import BackdropKind
from georoute.publishing.island import differences, island_json
from georoute.publishing.road_lines import Flat
from georoute.publishing.shore import water_in

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from numpy.typing import NDArray

    from georoute.domain.plan import Plan

__all__ = ["DETAILS", "MAIN_ONLY", "Detail", "Ground", "box_around", "fitting"]

_FINEST_M = 6.0
_SHORTEST_M = 12.0
"""A piece of road shorter than this is not drawn."""
_ROUND = 2
_RING = 4
"""The rim of a water has this many points at least, the last like the first."""
_WIDEST = 1.9
"""A map may be this many times as wide as high, or as high as wide."""
_WATER_BEYOND = 2.0
"""Water is cut this many times farther out than roads: it takes few bytes, and its cut shows."""
_KEYS = {
    BackdropKind.MAIN: "main",
    BackdropKind.MINOR: "minor",
    BackdropKind.LOCAL: "local",
    BackdropKind.FERRY: "ferry",
    BackdropKind.COAST: "coast",
}
Named = tuple[str, BaseGeometry]


@dataclass(frozen=True, slots=True, kw_only=True)
class Detail:
    """How much of the ground a page shows: metres around the tour, and how coarsely."""

    local_m: float
    minor_m: float
    tolerance_m: float = _FINEST_M


DETAILS = (
    Detail(local_m=800, minor_m=800),
    Detail(local_m=400, minor_m=800),
    Detail(local_m=150, minor_m=800),
    Detail(local_m=0, minor_m=800),
    Detail(local_m=0, minor_m=300),
    Detail(local_m=0, minor_m=0),
    Detail(local_m=0, minor_m=0, tolerance_m=20),
    Detail(local_m=0, minor_m=0, tolerance_m=60),
)
"""The local roads go first, then the minor ones, then the main ones are told more shortly."""
MAIN_ONLY = tuple(Detail(local_m=0, minor_m=0, tolerance_m=fine) for fine in (10.0, 25.0, 80.0))
"""What an overview shows."""


def box_around(points_m: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return the view around points, as west, south, east, north: room for any shape of screen."""
    low, high = points_m.min(axis=0), points_m.max(axis=0)
    middle, half = (low + high) / 2, np.maximum((high - low) / 2, 400.0)
    half = np.maximum(half, half[::-1] * _WIDEST) * 1.3
    return np.concatenate([middle - half, middle + half])


def _grown(box: NDArray[np.float64], times: float) -> NDArray[np.float64]:
    middle, half = (box[:2] + box[2:]) / 2, (box[2:] - box[:2]) / 2
    return np.concatenate([middle - half * times, middle + half * times])


def _lines(shape: BaseGeometry) -> Iterator[BaseGeometry]:
    for part in shapely.get_parts(shape):
        if part.geom_type == "LineString" and part.length >= _SHORTEST_M:
            yield part
        elif part.geom_type.startswith(("Multi", "GeometryC")):
            yield from _lines(part)


@dataclass(frozen=True, slots=True, kw_only=True)
class Ground:
    """The backdrop of a plan in metres, merged by kind and name."""

    flat: Flat
    lines: dict[BackdropKind, list[Named]]
    lakes: list[BaseGeometry]
    _coarser: dict[tuple[BackdropKind, float], list[Named]] = field(default_factory=dict)

    @classmethod
    def of(cls, plan: Plan) -> Ground:
        """Merge the backdrop of ``plan``."""
        base = plan.programme.bases[0]
        flat = Flat(base.lat_deg, base.lon_deg)
        groups: dict[tuple[BackdropKind, str], list[NDArray[np.float64]]] = defaultdict(list)
        lakes = []
        for line in plan.backdrop:
            points = flat.forward(line.path)
            if line.kind is BackdropKind.WATER:
                lakes += (
                    [shapely.make_valid(shapely.Polygon(points))] if len(points) >= _RING else []
                )
            elif len(points) > 1:
                groups[line.kind, line.name].append(points)
        merged: dict[BackdropKind, list[Named]] = {kind: [] for kind in _KEYS}
        for (kind, name), paths in sorted(groups.items()):
            shape = shapely.line_merge(MultiLineString(paths), directed=kind is BackdropKind.COAST)
            merged[kind] += [(name, part) for part in shapely.get_parts(shape)]
        return cls(flat=flat, lines=merged, lakes=lakes)

    def thinned(self, kind: BackdropKind, tolerance_m: float) -> list[Named]:
        """Return the lines of a kind, simplified; kept for the next page."""
        key = (kind, tolerance_m)
        if key not in self._coarser:
            named = self.lines[kind]
            shapes = shapely.simplify(np.array([s for _, s in named], object), tolerance_m)
            self._coarser[key] = list(zip([n for n, _ in named], shapes, strict=True))
        return self._coarser[key]

    def inside(
        self, kind: BackdropKind, box: NDArray[np.float64], tolerance_m: float
    ) -> list[Named]:
        """Return the lines of a kind within a box."""
        found = []
        for name, shape in self.thinned(kind, tolerance_m):
            found += [(name, part) for part in _lines(shapely.clip_by_rect(shape, *box))]
        return found

    def near(self, kind: BackdropKind, area: BaseGeometry, tolerance_m: float) -> list[Named]:
        """Return the lines of a kind within an area."""
        named = self.thinned(kind, tolerance_m)
        shapes = np.array([shape for _, shape in named], object)
        shapely.prepare(area)
        touched = np.flatnonzero(shapely.intersects(area, shapes))
        whole = shapely.contains(area, shapes[touched])
        found: list[Named] = []
        for k, all_of_it in zip(touched, whole, strict=True):
            shape = shapes[k] if all_of_it else shapely.intersection(shapes[k], area)
            found += [(named[k][0], part) for part in _lines(shape)]
        return found

    def water(self, box: NDArray[np.float64]) -> BaseGeometry:
        """Return lakes and sea within a box."""
        coast = [shape for _, shape in self.lines[BackdropKind.COAST]]
        return water_in(box, coast, self.lakes)

    def view(
        self, box: NDArray[np.float64], tours: Sequence[NDArray[np.float64]], detail: Detail
    ) -> dict[str, object]:
        """Return what lies in a box, ready for the data island of a page.

        ``tours`` are lines in metres; minor and local roads are kept near them alone.
        """
        fine = detail.tolerance_m
        named = {
            kind: self.inside(kind, box, fine)
            for kind in (BackdropKind.MAIN, BackdropKind.FERRY, BackdropKind.COAST)
        }
        for kind, reach in (
            (BackdropKind.MINOR, detail.minor_m),
            (BackdropKind.LOCAL, detail.local_m),
        ):
            area = _around(tours, reach) if reach else None
            named[kind] = self.near(kind, area, fine) if area is not None else []
        return self._told(named, self.water(_grown(box, _WATER_BEYOND)).simplify(fine))

    def _told(
        self, named: dict[BackdropKind, list[Named]], water: BaseGeometry
    ) -> dict[str, object]:
        streets = sorted({name for lines in named.values() for name, _ in lines if name})
        number = {name: k for k, name in enumerate(streets)} | {"": -1}
        told: dict[str, object] = {"streets": streets}
        for kind, key in _KEYS.items():
            lines = [(number[name], shapely.get_coordinates(s)) for name, s in named[kind]]
            if lines:
                told[key] = self._flat_lines(lines)
        rings = [
            (-1, shapely.get_coordinates(ring))
            for part in shapely.get_parts(water)
            if part.geom_type == "Polygon"
            for ring in (part.exterior, *part.interiors)
        ]
        if rings:
            told["water"] = self._flat_lines(rings)
        return told

    def _flat_lines(self, lines: list[tuple[int, NDArray[np.float64]]]) -> dict[str, list[int]]:
        """Return lines as one list of differences, with their sizes and the names of each."""
        all_steps = self.flat.steps(np.vstack([points for _, points in lines]))
        ends = np.cumsum([0, *(len(points) for _, points in lines)]).tolist()
        steps = [(name, all_steps[ends[k] : ends[k + 1]]) for k, (name, _) in enumerate(lines)]
        # neighbours one after the other: the way from the end of one to the next is short
        steps.sort(key=lambda line: (line[1][0][0] // 400, line[1][0][1], line[1]))
        return {
            "sizes": [len(points) for _, points in steps],
            "names": [name for name, _ in steps],
            "flat": differences([point for _, points in steps for point in points]),
        }


def _around(tours: Sequence[NDArray[np.float64]], reach_m: float) -> BaseGeometry:
    lines = [shapely.LineString(t).simplify(reach_m / 20) for t in tours if len(t) > 1]
    return shapely.union_all([line.buffer(reach_m, quad_segs=_ROUND) for line in lines])


def _bytes(told: dict[str, object]) -> int:
    return len(island_json(told).encode("utf-8", "replace"))


def fitting(
    ground: Ground,
    box: NDArray[np.float64],
    tours: Sequence[NDArray[np.float64]],
    budget: int,
    details: Sequence[Detail] = DETAILS,
) -> dict[str, object]:
    """Return the most of the ground that takes no more than ``budget`` bytes of a page.

    Where not even the coarsest main roads fit, the view is drawn in, and at last left empty.
    """
    for detail in details:
        told = ground.view(box, tours, detail)
        if _bytes(told) <= budget:
            return told
    for share in (0.7, 0.5, 0.35):
        told = ground.view(_grown(box, share), tours, details[-1])
        if _bytes(told) <= budget:
            return told
    return {"streets": []}
