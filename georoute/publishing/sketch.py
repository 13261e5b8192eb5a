"""The sketch map of a run sheet: where everything lies on paper, worked out beforehand."""

from __future__ import annotations

import functools
import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np
import shapely

from georoute.projection import local_plane
from georoute.publishing.leg_paths import any_roads
from georoute.publishing.placing import Scene, leader_ends, place_boxes
from georoute.publishing.sketch_roads import (
    GroundSketch,
    cord_segments,
    cords_of,
    ground_sketch,
    off_lines,
)

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from shapely.geometry.base import BaseGeometry

    from georoute.domain.sites import Base
    from georoute.projection import LocalPlane
    from georoute.publishing.day_view import DayView
    from georoute.publishing.ground import Ground
    from georoute.publishing.sketch_roads import Cord
    from georoute.publishing.words import Words

__all__ = ["HEIGHT", "PLATE_HEIGHT", "WIDTH", "Plate", "Sketch", "sketch_of"]

WIDTH = 700.0
HEIGHT = 380.0
PLATE_HEIGHT = 18.0
_MARGIN_X, _MARGIN_Y = 92.0, 36.0
_KM = 1000.0
_SMALLEST_SPAN_M = 400.0
_LETTER = 6.3
"""Width of a letter of a plate; the face may differ, so it is taken wide."""
_PAD = 6.0
_ASIDE = 2.2
_SHORT_LEG = 28.0
_LONGEST_SCALE = 130.0
_CORNERS = np.array(
    [
        [WIDTH - 32.0, 0.0, 32.0, 52.0],  # north
        [0.0, HEIGHT - 30.0, _LONGEST_SCALE + 20.0, 30.0],  # scale
        [WIDTH - 330.0, HEIGHT - 18.0, 330.0, 18.0],  # what the lines are
    ]
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Plate:
    """A plate on paper: box, leader (x1, y1, x2, y2), and what it says.

    ``parted`` is where the line between number and text stands. The plate of a base has no number.
    """

    x: float
    y: float
    width: float
    leader: tuple[float, float, float, float]
    number: str
    text: str
    state: str
    parted: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Sketch:
    """Everything on the sketch, in its own units; straight legs are (x1, y1, x2, y2, home).

    ``cords`` are the pieces of legs along roads, ``off_road`` the path from them to the sites.
    """

    plates: tuple[Plate, ...]
    bases: tuple[tuple[float, float], ...]
    legs: tuple[tuple[float, float, float, float, bool], ...]
    barbs: tuple[str, ...]
    scale_width: float
    scale_text: str
    cords: tuple[Cord, ...] = ()
    ground: GroundSketch | None = None
    off_road: str = ""

    @property
    def road_ways(self) -> tuple[tuple[str, str], ...]:
        """The legs along roads: way, ferry and home, each kind as one path."""
        kinds = []
        for kind in ("way", "ferry", "home"):
            lines = [cord.line.round(1) for cord in self.cords if cord.kind == kind]
            paths = ["M" + "L".join(f"{x:g} {y:g}" for x, y in line) for line in lines]
            if paths:
                kinds.append((kind, "".join(paths)))
        return tuple(kinds)

    @property
    def ferries(self) -> tuple[tuple[float, float], ...]:
        """Where the signs of ferries stand."""
        return tuple(cord.middle for cord in self.cords if cord.kind == "ferry")

    @property
    def ways(self) -> tuple[tuple[bool, str], ...]:
        """The legs on the way and the leg home, each kind as one path."""
        kinds = []
        for home in (False, True):
            lines = [f"M{a} {b}L{c} {d}" for a, b, c, d, last in self.legs if last is home]
            if lines:
                kinds.append((home, "".join(lines)))
        return tuple(kinds)

    @property
    def leaders(self) -> str:
        """The leaders of all plates as one path."""
        return "".join(f"M{a} {b}L{c} {d}" for a, b, c, d in (p.leader for p in self.plates))


def _bases(view: DayView) -> list[Base]:
    same = view.start_base.base_id == view.end_base.base_id
    return [view.start_base] if same else [view.start_base, view.end_base]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Paper:
    """How the Earth comes on paper: a plane, its middle in metres, and the metres of one unit."""

    plane: LocalPlane
    middle_m: tuple[float, float]
    unit_m: float

    def of_metres(self, ground: Ground, points_m: NDArray[np.float64]) -> NDArray[np.float64]:
        """Return metres of the ground on paper, shape (n, 2)."""
        lat, lon = ground.flat.back(points_m)
        x_m, y_m = self.plane.forward(lon, lat)
        x = WIDTH / 2 + (x_m - self.middle_m[0]) / self.unit_m
        return np.column_stack([x, HEIGHT / 2 - (y_m - self.middle_m[1]) / self.unit_m])

    def box_m(self, ground: Ground) -> NDArray[np.float64]:
        """Return the sheet in metres of the ground, with a little more on each side."""
        lon, lat = self.plane.inverse(*([value] for value in self.middle_m))
        middle = ground.flat.forward([(float(lat[0]), float(lon[0]))])[0]
        half = np.array([WIDTH, HEIGHT]) / 2 * self.unit_m * 1.05
        return np.concatenate([middle - half, middle + half])


def _to_paper(view: DayView) -> tuple[NDArray[np.float64], _Paper]:
    """Return places on paper, shape (n, 2), bases first, and how they come there."""
    bases = _bases(view)
    lon = np.array([b.lon_deg for b in bases] + [stop.lon_deg for stop in view.stops])
    lat = np.array([b.lat_deg for b in bases] + [stop.lat_deg for stop in view.stops])
    places = len(lon)
    if any_roads(view.tour.legs):  # the ways between them have to find room as well
        paths = np.array([place for leg in view.tour.legs for place in leg.path])
        lat, lon = np.concatenate([lat, paths[:, 0]]), np.concatenate([lon, paths[:, 1]])
    plane = local_plane(lon, lat)
    x_m, y_m = plane.forward(lon, lat)
    wide = max(float(np.ptp(x_m)), _SMALLEST_SPAN_M)
    high = max(float(np.ptp(y_m)), _SMALLEST_SPAN_M)
    unit_m = max(wide / (WIDTH - 2 * _MARGIN_X), high / (HEIGHT - 2 * _MARGIN_Y))
    middle = (float(x_m.max() + x_m.min()) / 2, float(y_m.max() + y_m.min()) / 2)
    x = WIDTH / 2 + (x_m - middle[0]) / unit_m
    y = HEIGHT / 2 - (y_m - middle[1]) / unit_m
    paper = _Paper(plane=plane, middle_m=middle, unit_m=unit_m)
    return np.column_stack([x, y])[:places], paper


def _legs(points: NDArray[np.float64], bases: int, side: int) -> NDArray[np.float64]:
    """Return the legs in order, shape (stops + 1, 4), on the side that is driven on."""
    order = [0, *range(bases, len(points)), bases - 1]
    start, end = points[order[:-1]], points[order[1:]]
    step = end - start
    length = np.maximum(np.hypot(step[:, 0], step[:, 1]), 1e-9)[:, None]
    aside = np.column_stack([-step[:, 1], step[:, 0]]) / length * _ASIDE * side
    return np.column_stack([start + aside, end + aside])


def _barb(leg: NDArray[np.float64]) -> str:
    """Return the path of an arrow in the middle of a leg."""
    x, y = (leg[0] + leg[2]) / 2, (leg[1] + leg[3]) / 2
    angle = math.atan2(leg[3] - leg[1], leg[2] - leg[0])
    corners = []
    for along, across in ((6.0, 0.0), (-5.0, 4.2), (-2.2, 0.0), (-5.0, -4.2)):
        px = x + along * math.cos(angle) - across * math.sin(angle)
        py = y + along * math.sin(angle) + across * math.cos(angle)
        corners.append(f"{px:.1f} {py:.1f}")
    return f"M{'L'.join(corners)}Z"


def _scale(unit_m: float, words: Words) -> tuple[float, str]:
    """Return the longest round scale that fits, and its text."""
    limit_m = _LONGEST_SCALE * unit_m
    power = 10.0 ** math.floor(math.log10(limit_m))
    metres = max(step * power for step in (1, 2, 5) if step * power <= limit_m)
    text = (
        words("kilometres", km=f"{metres / _KM:g}")
        if metres >= _KM
        else words("scale_metres", metres=f"{metres:g}")
    )
    return round(metres / unit_m, 1), text


def _texts(view: DayView) -> list[tuple[str, str, str]]:
    """Return number, text and state of each plate, bases first."""
    texts = [("", base.name, "base") for base in _bases(view)]
    for stop in view.stops:
        text = f"{stop.arrive} · {stop.note}" if stop.note else stop.arrive
        texts.append((str(stop.number), text, stop.state))
    return texts


def _ends(view: DayView, legs: list[list[Cord]], bases: int) -> dict[int, NDArray[np.float64]]:
    """Return where driving to each place ends on paper, by number of place, bases first."""
    order = [*range(bases, bases + len(legs) - 1), bases - 1]
    ends = {place: cords[-1].line[-1] for place, cords in zip(order, legs, strict=True) if cords}
    if legs[0] and view.tour.legs:
        ends.setdefault(0, legs[0][0].line[0])
    return ends


def _obstacles(
    boxes: NDArray[np.float64],
    leaders: NDArray[np.float64],
    points: NDArray[np.float64],
    segments: NDArray[np.float64],
) -> BaseGeometry:
    """Return what street names keep clear of: plates, leaders, dots, cords, the corners."""
    rims = np.vstack([boxes, _CORNERS])
    low, high = rims[:, :2], rims[:, :2] + rims[:, 2:]
    shapes = [
        shapely.box(low[:, 0] - 2, low[:, 1] - 2, high[:, 0] + 2, high[:, 1] + 2),
        shapely.buffer(shapely.linestrings(leaders.reshape(-1, 2, 2)), 2.5),
        shapely.buffer(shapely.points(points), 9.0),
        shapely.buffer(shapely.linestrings(segments.reshape(-1, 2, 2)), 4.0),
    ]
    found = shapely.union_all([shapely.union_all(some) for some in shapes])
    shapely.prepare(found)
    return found


def sketch_of(
    view: DayView, words: Words, *, side: int = 1, ground: Ground | None = None
) -> Sketch:
    """Return the sketch of a tour; cords lie right (``side`` 1) or left (-1) of their way.

    With a ``ground`` legs along roads are drawn on it.
    """
    points, paper = _to_paper(view)
    bases = len(_bases(view))
    straight = _legs(points, bases, side)
    if ground is None or not any_roads(view.tour.legs):
        return _drawn(view, words, (points, paper.unit_m), straight, straight)
    on_paper = functools.partial(paper.of_metres, ground)
    legs = cords_of(view.tour, ground, on_paper, side)
    bare = np.array([not cords for cords in legs])
    segments = np.vstack([cord_segments(legs), straight[bare]])
    sketch = _drawn(view, words, (points, paper.unit_m), straight, segments)
    plates = np.array([(p.x, p.y, p.width, PLATE_HEIGHT) for p in sketch.plates])
    leaders = np.array([plate.leader for plate in sketch.plates])
    return replace(
        sketch,
        legs=tuple(leg for leg, cords in zip(sketch.legs, legs, strict=True) if not cords),
        barbs=(
            *(_barb(leg) for leg in straight[bare] if _length(leg) > _SHORT_LEG),
            *(_barb(barb) for cords in legs for cord in cords for barb in cord.barbs),
        ),
        cords=tuple(cord for cords in legs for cord in cords),
        off_road=off_lines(points, _ends(view, legs, bases), paper.unit_m),
        ground=ground_sketch(
            ground,
            view.tour,
            on_paper,
            (paper.box_m(ground), paper.unit_m, (WIDTH, HEIGHT)),
            _obstacles(plates, leaders, points, segments),
        ),
    )


def _length(leg: NDArray[np.float64]) -> float:
    return math.hypot(leg[2] - leg[0], leg[3] - leg[1])


def _drawn(
    view: DayView,
    words: Words,
    scale: tuple[NDArray[np.float64], float],
    legs: NDArray[np.float64],
    segments: NDArray[np.float64],
) -> Sketch:
    """Return the sketch with straight legs; plates keep clear of ``segments``.

    ``scale`` holds the places on paper and the metres of one unit.
    """
    points, unit_m = scale
    bases = len(_bases(view))
    texts = _texts(view)
    parted = [len(number) * _LETTER + 2 * _PAD if number else 0.0 for number, _, _ in texts]
    late = [2 * _PAD if state == "late" else 0.0 for _, _, state in texts]
    widths = np.array(
        [
            part + len(text) * _LETTER + 2 * _PAD + more
            for (_, text, _), part, more in zip(texts, parted, late, strict=True)
        ]
    )
    scene = Scene(width=WIDTH, height=HEIGHT, dots=points, cords=segments, blocked=_CORNERS)
    boxes = place_boxes(points, widths, PLATE_HEIGHT, scene).round(1)
    leaders = leader_ends(boxes, points).round(1)
    plates = tuple(
        Plate(
            x=float(boxes[k, 0]),
            y=float(boxes[k, 1]),
            width=float(boxes[k, 2]),
            leader=(
                float(leaders[k, 0]),
                float(leaders[k, 1]),
                float(leaders[k, 2]),
                float(leaders[k, 3]),
            ),
            number=number,
            text=text,
            state=state,
            parted=parted[k],
        )
        for k, (number, text, state) in enumerate(texts)
    )
    lengths = np.hypot(legs[:, 2] - legs[:, 0], legs[:, 3] - legs[:, 1])
    scale_width, scale_text = _scale(unit_m, words)
    return Sketch(
        plates=plates,
        bases=tuple((float(x), float(y)) for x, y in points[:bases].round(1)),
        legs=tuple(
            (float(a), float(b), float(c), float(d), k == len(legs) - 1)
            for k, (a, b, c, d) in enumerate(legs.round(1))
        ),
        barbs=tuple(
            _barb(leg) for leg, length in zip(legs, lengths, strict=True) if length > _SHORT_LEG
        ),
        scale_width=scale_width,
        scale_text=scale_text,
    )
