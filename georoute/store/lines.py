"""Straight lines on the map, cut where they cross the antimeridian."""

from __future__ import annotations

from itertools import pairwise

__all__ = ["Line", "Point", "split_at_antimeridian"]

Point = tuple[float, float]
Line = tuple[Point, ...]

HALF_TURN_DEG = 180.0


def split_at_antimeridian(line: Line) -> tuple[Line, ...]:
    """Cut a line of (lon, lat) corners in degrees where a step is more than half a turn wide.

    Such a step goes the short way, across longitude 180 degrees; the latitude of the crossing is
    interpolated, as section 3.1.9 of RFC 7946 has it done.
    """
    parts: list[Line] = []
    part: list[Point] = [line[0]]
    for (lon, lat), (next_lon, next_lat) in pairwise(line):
        if abs(next_lon - lon) > HALF_TURN_DEG:
            edge = HALF_TURN_DEG if lon > 0 else -HALF_TURN_DEG
            unrolled = next_lon + 2 * edge
            share = (edge - lon) / (unrolled - lon) if unrolled != lon else 0.0
            crossing = lat + share * (next_lat - lat)
            parts.append((*part, (edge, crossing)))
            part = [(-edge, crossing)]
        part.append((next_lon, next_lat))
    return (*parts, tuple(part))
