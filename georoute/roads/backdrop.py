"""What is drawn under the tours: roads around them, merged by kind and name and simplified."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import shapely

from georoute.domain.roads import BackdropKind, BackdropLine
from georoute.roads.model import Access
from georoute.roads.network import network_plane

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from numpy.typing import NDArray

    from georoute.domain.roads import Way
    from georoute.projection import LocalPlane
    from georoute.roads.model import RoadTable
    from georoute.roads.network import RoadNetwork

__all__ = ["road_backdrop"]

MAIN_CLASSES = ("motorway", "trunk", "primary", "secondary")
MINOR_CLASSES = ("tertiary", "unclassified", "road")
NEAR_M = 800.0
"""Minor and local roads are kept this near to a tour."""
MARGIN_M = 2_000.0
"""Main roads are kept this far around the tours."""
TOLERANCE_M = 3.0
"""How far a simplified line may lie from the road."""
DIGITS = 6


def _kind(road_class: str) -> BackdropKind:
    plain = road_class.removesuffix("_link")
    if plain in MAIN_CLASSES:
        return BackdropKind.MAIN
    return BackdropKind.MINOR if plain in MINOR_CLASSES else BackdropKind.LOCAL


def _kinds(table: RoadTable) -> list[BackdropKind]:
    by_class = [_kind(name) for name in table.classes]
    ferry = (table.access & Access.FERRY) > 0
    return [
        BackdropKind.FERRY if ship else by_class[number]
        for number, ship in zip(table.road_class.tolist(), ferry.tolist(), strict=True)
    ]


def _on_plane(plane: LocalPlane, ways: Iterable[Way]) -> NDArray[np.object_]:
    lines = []
    for way in ways:
        lat, lon = np.array(way).T
        x, y = plane.forward(lon, lat)
        lines.append(shapely.linestrings(np.column_stack([x, y])))
    return np.array(lines, np.object_)


def _kept(
    lines: NDArray[np.object_], kinds: NDArray[np.str_], tours: NDArray[np.object_]
) -> NDArray[np.bool_]:
    """Tell which stretches are drawn: main roads around the tours, others near to them."""
    around = shapely.box(*shapely.total_bounds(tours)).buffer(MARGIN_M)
    kept: NDArray[np.bool_] = shapely.intersects(lines, around)
    tree = shapely.STRtree(list(tours))
    near = np.zeros(lines.shape[0], np.bool_)
    near[tree.query(lines, predicate="dwithin", distance=NEAR_M)[0]] = True
    everywhere = np.isin(kinds, (BackdropKind.MAIN, BackdropKind.FERRY))
    return kept & (everywhere | near)


def _merged(lines: NDArray[np.object_]) -> Sequence[shapely.LineString]:
    """Join stretches end to end, and leave out corners that do not show."""
    joined = shapely.line_merge(shapely.multilinestrings(lines.tolist()))
    parts = shapely.get_parts(shapely.simplify(joined, TOLERANCE_M))
    return [part for part in parts.tolist() if not part.is_empty]


def road_backdrop(network: RoadNetwork, ways: Sequence[Way]) -> tuple[BackdropLine, ...]:
    """Return the roads to draw under tours.

    Parameters
    ----------
    network
        The roads.
    ways
        The ways of all legs, and at least one: (latitude, longitude) in degrees.

    Returns
    -------
    Lines in a fixed order: by kind, then by name, then from the west.
    """
    table = network.table
    plane = network_plane(table)
    tours = _on_plane(plane, [way for way in ways if len(way) > 1])
    owner = np.repeat(np.arange(table.start.shape[0]), np.diff(table.point_ptr))
    lines = np.asarray(
        shapely.linestrings(np.column_stack([network.point_x, network.point_y]), indices=owner),
        np.object_,
    )
    kinds = np.array(_kinds(table))
    chosen = np.flatnonzero(_kept(lines, kinds, tours))
    groups: dict[tuple[str, str], list[int]] = {}
    for e in chosen.tolist():
        groups.setdefault((str(kinds[e]), table.names[table.name[e]]), []).append(e)
    found = []
    for (kind, name), members in sorted(groups.items()):
        for part in _merged(lines[members]):
            px, py = shapely.get_coordinates(part).T
            lon, lat = (np.round(degrees, DIGITS).tolist() for degrees in plane.inverse(px, py))
            path = tuple(zip(lat, lon, strict=True))
            found.append(BackdropLine(kind=BackdropKind(kind), name=name, path=path))
    return tuple(found)
