"""Sea and lakes within a view: which side of the shore is water."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import shapely
from shapely.geometry import GeometryCollection, LineString, Point

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray
    from shapely.geometry.base import BaseGeometry

__all__ = ["water_in"]

_OFF_M = 0.5
"""How far off the shore a point is taken, to see on which side a face lies."""


def _sides(coast: Sequence[BaseGeometry]) -> tuple[list[Point], list[Point]]:
    """Return points just off the shore: those on land (left of it) and those in the water."""
    land: list[Point] = []
    sea: list[Point] = []
    for line in coast:
        points = shapely.get_coordinates(line)
        step = np.diff(points, axis=0)
        length = np.hypot(step[:, 0], step[:, 1])
        for k in np.flatnonzero(length > 4 * _OFF_M):
            middle = (points[k] + points[k + 1]) / 2
            left = np.array([-step[k, 1], step[k, 0]]) / length[k] * _OFF_M
            land.append(Point(middle + left))
            sea.append(Point(middle - left))
    return land, sea


def _sea(box: BaseGeometry, coast: Sequence[BaseGeometry]) -> list[BaseGeometry]:
    """Return the faces that the shore cuts from a box and that lie right of it.

    A shore that breaks off within the box leaves a face with land and water at once: such a face
    is not coloured, because nothing tells where its water ends.
    """
    cut = shapely.union_all([box.boundary, *coast])
    faces = shapely.get_parts(shapely.polygonize([cut]))
    land, sea = _sides(coast)
    found = []
    for face in faces:
        shapely.prepare(face)
        if shapely.contains(face, sea).any() and not shapely.contains(face, land).any():
            found.append(face)
    return found


def water_in(
    box_m: NDArray[np.float64], coast: Sequence[BaseGeometry], lakes: Sequence[BaseGeometry]
) -> BaseGeometry:
    """Return sea and lakes within a box (west, south, east, north), without overlaps."""
    box = shapely.box(*box_m)
    parts = [lake.intersection(box) for lake in lakes if lake.intersects(box)]
    clipped = [shapely.clip_by_rect(line, *box_m) for line in coast]
    lines: list[BaseGeometry] = [
        part
        for shape in clipped
        for part in shapely.get_parts(shape)
        if isinstance(part, LineString) and not part.is_empty
    ]
    if lines:
        parts += _sea(box, lines)
    return shapely.union_all(parts) if parts else GeometryCollection()
