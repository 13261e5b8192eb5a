"""The roads of a run sheet's sketch: cords along them, main roads with names, shore and water."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
import shapely
from shapely import affinity

from georoute.domain.roads import BackdropKind
from georoute.publishing.leg_paths import APART_M, pieces_of
from georoute.publishing.road_lines import moved_aside, thinned

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

    from numpy.typing import NDArray
    from shapely.geometry.base import BaseGeometry

    from georoute.domain.plan import DayTour
    from georoute.publishing.ground import Ground

__all__ = [
    "Cord",
    "GroundSketch",
    "SketchName",
    "cord_segments",
    "cords_of",
    "ground_sketch",
    "off_lines",
]

_ASIDE = 2.4
_THIN = 0.6
_BARB_EVERY, _SHORT_CORD = 130.0, 26.0
_FINE_UNIT_M = 16.0
"""On sketches finer than this many metres a unit, minor roads are drawn too."""
_MOST_NAMES = 14
_LETTER, _HALF_HIGH = 5.3, 5.6
"""The width of a letter of a name, and half its height; the face may differ, so it is wide."""
_BESIDE = _HALF_HIGH + 5.5
_BESIDES = (0.0, -_BESIDE, _BESIDE, -_BESIDE - 6.0, _BESIDE + 6.0)
"""Where the name of a road that carries a cord may stand, across its line."""
_TRIES = 15
_BEND = 3.4


@dataclass(frozen=True, slots=True, eq=False)
class Cord:
    """A piece of a leg on paper: its line, shape (n, 2), of which kind it is, and its barbs.

    ``kind`` is ``way``, ``home`` or ``ferry``; ``barbs`` are short lines in driving direction.
    """

    line: NDArray[np.float64]
    kind: str
    barbs: tuple[NDArray[np.float64], ...] = ()

    @property
    def middle(self) -> tuple[float, float]:
        """The point half-way along."""
        x, y = _along(self.line, 0.5)
        return round(float(x), 1), round(float(y), 1)


@dataclass(frozen=True, slots=True, kw_only=True)
class SketchName:
    """A street name: its middle, its turn in degrees, and the text."""

    x: float
    y: float
    turn: float
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class GroundSketch:
    """What lies under the cords on paper, as paths by kind, and the names on it."""

    paths: dict[str, str] = field(default_factory=dict)
    names: tuple[SketchName, ...] = ()


def _along(line: NDArray[np.float64], share: float) -> NDArray[np.float64]:
    shape = shapely.LineString(line)
    point = shape.interpolate(share, normalized=True)
    return np.array([point.x, point.y])


def _barbs(line: NDArray[np.float64]) -> tuple[NDArray[np.float64], ...]:
    shape = shapely.LineString(line)
    if shape.length < _SHORT_CORD:
        return ()
    count = max(1, min(5, int(shape.length // _BARB_EVERY)))
    half = 4.0 / shape.length
    shares = [(k + 0.5) / count for k in range(count)]
    return tuple(
        np.concatenate([_along(line, share - half), _along(line, share + half)]) for share in shares
    )


def cords_of(
    tour: DayTour,
    ground: Ground,
    on_paper: Callable[[NDArray[np.float64]], NDArray[np.float64]],
    side: int,
) -> list[list[Cord]]:
    """Return the cords of each leg; a straight leg has none.

    ``on_paper`` takes metres of the ground, shape (n, 2), to units of the sketch.
    """
    legs = []
    for number, leg in enumerate(tour.legs):
        cords = []
        for piece in pieces_of(leg, ground):
            line = moved_aside(thinned(on_paper(piece.points), _THIN), _ASIDE * side)
            if len(line) <= 1:
                continue
            home = number == len(tour.legs) - 1
            kind = "ferry" if piece.ferry else "home" if home else "way"
            cords.append(Cord(line, kind, () if piece.ferry else _barbs(line)))
        legs.append(cords)
    return legs


def cord_segments(legs: list[list[Cord]]) -> NDArray[np.float64]:
    """Return all steps of cords, shape (m, 4), for plates to keep clear of."""
    parts = [
        np.column_stack([line[:-1], line[1:]])
        for cords in legs
        for line in (thinned(cord.line, 1.5) for cord in cords)
    ]
    return np.vstack(parts) if parts else np.zeros((0, 4))


def _path(lines: Iterable[NDArray[np.float64]], *, closed: bool = False) -> str:
    end = "Z" if closed else ""
    return "".join("M" + "L".join(f"{x:g} {y:g}" for x, y in line.round(1)) + end for line in lines)


def _inside(shape: BaseGeometry, frame: tuple[float, float]) -> list[NDArray[np.float64]]:
    clipped = shapely.clip_by_rect(shape, 0.0, 0.0, *frame)
    parts = [p for p in shapely.get_parts(clipped) if p.geom_type == "LineString" and p.length > 1]
    return [np.asarray(shapely.get_coordinates(part), np.float64) for part in parts]


def _box_on(line: BaseGeometry, middle: float, half: float) -> tuple[BaseGeometry, float] | None:
    """Return the box of a name on a line, and its turn; ``None`` where the line bends too much."""
    at = shapely.get_coordinates(line.interpolate([middle + half * k / 3 for k in range(-3, 4)]))
    chord = at[-1] - at[0]
    length = float(np.hypot(*chord))
    if length < 1.85 * half:
        return None
    off = np.abs(chord[0] * (at[:, 1] - at[0, 1]) - chord[1] * (at[:, 0] - at[0, 0])) / length
    if off.max() > _BEND:
        return None
    turn = math.degrees(math.atan2(chord[1], chord[0]))
    turn -= 180.0 * round(turn / 180.0)
    x, y = (at[0] + at[-1]) / 2
    flat = shapely.box(x - half, y - _HALF_HIGH, x + half, y + _HALF_HIGH)
    return affinity.rotate(flat, turn, origin=(x, y)), turn


def _place_name(
    line: BaseGeometry, text: str, obstacles: BaseGeometry, frame: BaseGeometry, *, driven: bool
) -> tuple[BaseGeometry, SketchName] | None:
    half = len(text) * _LETTER / 2 + 2
    free = line.length - 2 * half
    if free < 0:
        return None
    for k in range(_TRIES):
        from_middle = (k + 1) // 2 * (-1 if k % 2 else 1) * free / _TRIES
        found = _box_on(line, line.length / 2 + from_middle, half)
        if found is None:
            continue
        box, turn = found
        across = math.radians(turn + 90)
        for off in _BESIDES if driven else (0.0,):
            moved = affinity.translate(box, off * math.cos(across), off * math.sin(across))
            if frame.contains(moved) and not obstacles.intersects(moved):
                x, y = moved.centroid.x, moved.centroid.y
                name = SketchName(x=round(x, 1), y=round(y, 1), turn=round(turn, 1), text=text)
                return moved, name
    return None


def _names(
    lines: list[tuple[str, NDArray[np.float64]]],
    driven: set[str],
    obstacles: BaseGeometry,
    frame: tuple[float, float],
) -> tuple[SketchName, ...]:
    """Return names of the longest lines, those driven first, each once, clear of all else."""
    longest = sorted(
        ((name, shapely.LineString(line)) for name, line in lines if name),
        key=lambda named: (named[0] not in driven, -named[1].length, named[0]),
    )
    paper = shapely.box(3, 3, frame[0] - 3, frame[1] - 3)
    placed: dict[str, SketchName] = {}
    for name, line in longest:
        if name in placed or len(placed) >= _MOST_NAMES:
            continue
        found = _place_name(line, name, obstacles, paper, driven=name in driven)
        if found is not None:
            placed[name] = found[1]
            obstacles = obstacles.union(found[0].buffer(2))
    return tuple(placed.values())


def ground_sketch(
    ground: Ground,
    tour: DayTour,
    on_paper: Callable[[NDArray[np.float64]], NDArray[np.float64]],
    view: tuple[NDArray[np.float64], float, tuple[float, float]],
    obstacles: BaseGeometry,
) -> GroundSketch:
    """Return the ground of a sketch.

    ``view`` is the box in metres, the metres of one unit, and width and height in units.
    ``obstacles`` is what names keep clear of.
    """
    box, unit_m, frame = view
    kinds = {"main": BackdropKind.MAIN, "coast": BackdropKind.COAST}
    if unit_m <= _FINE_UNIT_M:
        kinds["minor"] = BackdropKind.MINOR
    paths, named = {}, []
    for key, kind in kinds.items():
        lines = []
        for name, shape in ground.inside(kind, box, unit_m * _THIN):
            drawn = on_paper(np.asarray(shapely.get_coordinates(shape), np.float64))
            inside = _inside(shapely.LineString(drawn), frame)
            lines += inside
            named += [(name, line) for line in inside] if key != "coast" else []
        if lines:
            paths[key] = _path(lines)
    rings = [
        on_paper(np.asarray(shapely.get_coordinates(ring), np.float64))
        for part in shapely.get_parts(ground.water(box).simplify(unit_m * _THIN))
        if part.geom_type == "Polygon"
        for ring in (part.exterior, *part.interiors)
    ]
    if rings:
        paths["water"] = _path(rings, closed=True)
    driven = {name for leg in tour.legs for name, _ in leg.roads if name}
    return GroundSketch(paths=paths, names=_names(named, driven, obstacles, frame))


def off_lines(
    places: NDArray[np.float64], ends: dict[int, NDArray[np.float64]], unit_m: float
) -> str:
    """Return thin lines from places to where driving ends (by number of place), as one path."""
    far = [
        np.vstack([places[k], end])
        for k, end in ends.items()
        if float(np.hypot(*(places[k] - end))) * unit_m >= APART_M
    ]
    return _path(far)
