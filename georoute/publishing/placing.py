"""Where plates go on paper: near their dot, clear of each other, of dots, of cords and the edge."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

__all__ = ["Scene", "inside_length", "leader_ends", "place_boxes"]

_RADII = (12.0, 24.0, 40.0, 62.0, 90.0)
_ANGLES = np.arange(16) * math.pi / 8
_ROUNDS = 3
_GAP = 5.0
_DOT = 6.0
_OUTSIDE, _OUTSIDE_PER_UNIT = 400.0, 40.0
_OVERLAP, _ON_DOT, _ACROSS_LEADER, _CORD = 500.0, 160.0, 140.0, 0.55
"""What a spot costs: the worst first; plates on plates and off the paper are the last resort."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Scene:
    """What plates have to keep clear of; all in units of the sketch.

    ``dots`` has shape (n, 2), ``cords`` (m, 4) as x1, y1, x2, y2, ``blocked`` (k, 4) as x, y,
    width, height.
    """

    width: float
    height: float
    dots: NDArray[np.float64]
    cords: NDArray[np.float64]
    blocked: NDArray[np.float64]


def _spots(dot: NDArray[np.float64], width: float, height: float) -> NDArray[np.float64]:
    """Return the boxes to try, shape (s, 4)."""
    radius, angle = (a.ravel() for a in np.meshgrid(_RADII, _ANGLES, indexing="ij"))
    x = dot[0] + np.cos(angle) * (radius + width / 2) - width / 2
    y = dot[1] + np.sin(angle) * (radius + height / 2) - height / 2
    return np.column_stack([x, y, np.full_like(x, width), np.full_like(x, height)])


def _overlap(a: NDArray[np.float64], b: NDArray[np.float64], gap: float) -> NDArray[np.float64]:
    """Return the shared area of boxes (s, 4) and (k, 4), shape (s, k), each grown by a gap."""
    a, b = a[:, None, :], b[None, :, :]
    high = np.minimum(a[..., :2] + a[..., 2:], b[..., :2] + b[..., 2:])
    size = np.maximum(0.0, high - np.maximum(a[..., :2], b[..., :2]) + gap)
    return np.asarray(size[..., 0] * size[..., 1], np.float64)


def inside_length(boxes: NDArray[np.float64], segments: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return the length of each segment (m, 4) inside each box (s, 4), shape (s, m).

    Clipping after Liang and Barsky, "A new concept and method for line clipping", ACM
    Transactions on Graphics 3 (1984) 1-22.
    """
    box, seg = boxes[:, None, :], segments[None, :, :]
    start, step = seg[..., :2], seg[..., 2:] - seg[..., :2]
    low, high = box[..., :2] - start, box[..., :2] + box[..., 2:] - start
    flat = step == 0.0
    safe = np.where(flat, 1.0, step)
    first = np.where(flat, np.where((low <= 0) & (high >= 0), 0.0, 2.0), low / safe)
    last = np.where(flat, 1.0, high / safe)
    enter = np.maximum(np.minimum(first, last), 0.0)
    # a flat segment beside the box enters "after its end" and so never is inside
    enter = np.where(flat, first, enter).max(axis=-1)
    leave = np.where(flat, 1.0, np.minimum(np.maximum(first, last), 1.0)).min(axis=-1)
    share = np.maximum(0.0, leave - enter)
    return np.asarray(share * np.hypot(step[..., 0], step[..., 1]), np.float64)


def leader_ends(boxes: NDArray[np.float64], dots: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return leaders from dots (s, 2) to the nearest points of boxes (s, 4), shape (s, 4)."""
    ends = np.clip(dots, boxes[:, :2], boxes[:, :2] + boxes[:, 2:])
    return np.column_stack([dots, ends])


def _spot_costs(
    spots: NDArray[np.float64],
    dot: NDArray[np.float64],
    taken: NDArray[np.float64],
    taken_dots: NDArray[np.float64],
    scene: Scene,
) -> NDArray[np.float64]:
    """Return the cost of each spot, shape (s,)."""
    low, high = spots[:, :2], spots[:, :2] + spots[:, 2:]
    size = np.array([scene.width, scene.height])
    out = np.maximum(0.0, -low).sum(axis=1) + np.maximum(0.0, high - size).sum(axis=1)
    cost = np.repeat(np.array(_RADII), len(_ANGLES)) * 0.9
    cost += np.where(out > 0, _OUTSIDE + _OUTSIDE_PER_UNIT * out, 0.0)
    around = np.full((len(scene.dots), 2), 2 * _DOT)
    dot_boxes = np.column_stack([scene.dots - _DOT, around])
    cost += _ON_DOT * (_overlap(spots, dot_boxes, 1.0) > 0).sum(axis=1)
    cost += _OVERLAP * (_overlap(spots, scene.blocked, 2.0) > 0).sum(axis=1)
    cost += _CORD * inside_length(spots, scene.cords).sum(axis=1)
    if len(taken):
        shared = _overlap(spots, taken, _GAP)
        cost += (np.where(shared > 0, _OVERLAP, 0.0) + shared).sum(axis=1)
        own = leader_ends(spots, np.broadcast_to(dot, low.shape))
        cost += _ACROSS_LEADER * (inside_length(taken, own).T > 0).sum(axis=1)
        theirs = leader_ends(taken, taken_dots)
        cost += _ACROSS_LEADER * (inside_length(spots, theirs) > 0).sum(axis=1)
    return cost


def place_boxes(
    dots: NDArray[np.float64], widths: NDArray[np.float64], height: float, scene: Scene
) -> NDArray[np.float64]:
    """Return a box for each dot (n, 2), shape (n, 4); three rounds, in the order given."""
    count = len(dots)
    boxes = np.zeros((count, 4))
    placed = np.zeros(count, dtype=bool)
    for _round in range(_ROUNDS):
        for k in range(count):
            others = placed.copy()
            others[k] = False
            spots = _spots(dots[k], float(widths[k]), height)
            costs = _spot_costs(spots, dots[k], boxes[others], dots[others], scene)
            boxes[k] = spots[int(np.argmin(costs))]
            placed[k] = True
    return boxes
