"""Lines on the ground and on paper: flattening, thinning, and moving aside without spikes."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import shapely

from georoute.publishing.island import differences

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

__all__ = ["STEP_DEG", "Flat", "moved_aside", "steps_of", "thinned"]

STEP_DEG = 1e-5
"""Lines are told in whole steps of this, about a metre."""
_M_PER_DEG = 111_195.0
_GENTLE = 1.0
"""1 + the cosine of a turn from which corners are mitred: turns up to 90 degrees."""
_ARC_STEP = math.pi / 6
_CORNERED = 3
"""A line with a corner has this many points."""
_ON_THE_SPOT = 1e-9


@dataclass(frozen=True, slots=True)
class Flat:
    """Metres east and north of a place: enough for drawing, far from the poles.

    Longitudes are taken on the side of the date line where the place is.
    """

    lat0_deg: float
    lon0_deg: float

    @property
    def _east_m(self) -> float:
        return _M_PER_DEG * max(0.05, math.cos(math.radians(self.lat0_deg)))

    def forward(self, path: Sequence[tuple[float, float]]) -> NDArray[np.float64]:
        """Return (latitude, longitude) pairs in metres, shape (n, 2), x east and y north."""
        lat, lon = np.asarray(path, np.float64).reshape(-1, 2).T
        lon = self.lon0_deg + (lon - self.lon0_deg + 180.0) % 360.0 - 180.0
        x = (lon - self.lon0_deg) * self._east_m
        return np.column_stack([x, (lat - self.lat0_deg) * _M_PER_DEG])

    def back(
        self, points_m: NDArray[np.float64]
    ) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Return metres, shape (n, 2), as latitudes and longitudes."""
        lat = self.lat0_deg + points_m[:, 1] / _M_PER_DEG
        return lat, self.lon0_deg + points_m[:, 0] / self._east_m

    def steps(self, points_m: NDArray[np.float64]) -> list[tuple[int, int]]:
        """Return metres, shape (n, 2), as latitude and longitude in whole steps."""
        rows = np.rint(np.column_stack(self.back(points_m)) / STEP_DEG).astype(np.int64)
        return [(a, b) for a, b in rows.tolist()]


def thinned(points: NDArray[np.float64], tolerance: float) -> NDArray[np.float64]:
    """Return a line, shape (n, 2), without what lies within ``tolerance`` of it; ends stay."""
    if len(points) < _CORNERED:
        return points
    line = shapely.LineString(points).simplify(tolerance, preserve_topology=False)
    kept = np.asarray(shapely.get_coordinates(line), np.float64)
    # a line that comes back to its start within the tolerance keeps its farthest point
    if len(kept) < _CORNERED and np.allclose(kept[0], kept[1]):
        far = np.hypot(*(points - points[0]).T).argmax()
        kept = points[[0, int(far), -1]]
    return kept


def steps_of(points: list[tuple[int, int]]) -> list[int]:
    """Return whole steps as differences; a step on the spot is left out."""
    fresh = [p for k, p in enumerate(points) if k == 0 or p != points[k - 1]]
    return differences(fresh if len(fresh) > 1 else points[:2])


def _arc(
    corner: NDArray[np.float64], first: NDArray[np.float64], last: NDArray[np.float64], by: float
) -> list[NDArray[np.float64]]:
    """Return the corner of a line rounded from one side of it to the other."""
    start = math.atan2(first[1] * by, first[0] * by)
    sweep = math.atan2(last[1] * by, last[0] * by) - start
    sweep = (sweep + math.pi) % (2 * math.pi) - math.pi
    count = max(1, math.ceil(abs(sweep) / _ARC_STEP))
    angles = [start + sweep * k / count for k in range(count + 1)]
    return [corner + abs(by) * np.array([math.cos(a), math.sin(a)]) for a in angles]


def moved_aside(points: NDArray[np.float64], by: float) -> NDArray[np.float64]:
    """Return a line, shape (n, 2), moved ``by`` to the side that (-dy, dx) of its steps points to.

    Gentle corners are mitred, outer sharp ones rounded; at inner sharp ones the line touches its
    corner. So no point is farther than 1.42 times ``by`` from the line, however sharp it turns.
    """
    step = np.diff(points, axis=0)
    length = np.hypot(step[:, 0], step[:, 1])
    kept = length > _ON_THE_SPOT
    points = np.vstack([points[:1], points[1:][kept]])
    step, length = step[kept], length[kept]
    if len(points) <= 1:
        return points
    normal = np.column_stack([-step[:, 1], step[:, 0]]) / length[:, None]
    moved = [points[0] + normal[0] * by]
    for k in range(1, len(points) - 1):
        before, after, corner = normal[k - 1], normal[k], points[k]
        open_ = 1.0 + float(before @ after)
        turn = float(before[0] * after[1] - before[1] * after[0])
        inner = turn * by > 0
        room = min(length[k - 1], length[k])
        reach = abs(by * turn) / max(open_, _ON_THE_SPOT)
        if open_ >= _GENTLE and (not inner or reach <= room):
            moved.append(corner + (before + after) / open_ * by)
        elif inner:
            moved += [corner + before * by, corner, corner + after * by]
        else:
            moved += _arc(corner, before, after, by)
    moved.append(points[-1] + normal[-1] * by)
    return np.vstack(moved)
