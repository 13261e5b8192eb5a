"""What is worth telling about where places were put on the roads."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from georoute.roads.network import Standing

if TYPE_CHECKING:
    from georoute.roads.network import RoadNetwork
    from georoute.roads.snapping import Snapped

__all__ = ["LONG_GAP_M", "SnapNote", "snap_notes"]

LONG_GAP_M = 100.0
"""A place this far from its road is told, though it is within the limit."""

_WHY = {
    Standing.ISLAND: "no way leads from it to the main roads or back",
    Standing.NO_WAY_IN: "no way leads to it from the main roads",
    Standing.NO_WAY_OUT: "no way leads back from it to the main roads",
    Standing.CLOSED: "it is closed",
    Standing.FERRY: "it is a ship's way",
    Standing.NO_STOPPING: "nobody may stop there",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class SnapNote:
    """One place and its road.

    ``place``: its index. ``road``: name of its road, "" where it has none or the name is unknown;
    ``distance_m``: how far that is, ``None`` where no road is within the limit. ``skipped_road``,
    ``skipped_m``, ``why``: the nearer road that was passed over, if one was; ``nodes``: how many
    nodes of the network hang together with that one. ``text``: all of it as a sentence.
    """

    place: int
    road: str
    distance_m: float | None
    skipped_road: str
    skipped_m: float | None
    why: str
    nodes: int
    text: str

    @property
    def is_far(self) -> bool:
        """Whether the place has no road."""
        return self.distance_m is None


def snap_notes(
    network: RoadNetwork, snapped: Snapped, *, long_gap_m: float = LONG_GAP_M
) -> tuple[SnapNote, ...]:
    """Return notes on places without a road, far from it, or with a nearer one passed over.

    Parameters
    ----------
    network
        The network.
    snapped
        The places on it.
    long_gap_m
        Tell of places farther than this from their road.

    Returns
    -------
    The notes, in the order of the places.
    """
    is_long = np.nan_to_num(snapped.distance_m, nan=np.inf) > long_gap_m
    worth = np.flatnonzero(is_long | (snapped.skipped >= 0))
    return tuple(_note(network, snapped, int(place)) for place in worth)


def _note(network: RoadNetwork, snapped: Snapped, place: int) -> SnapNote:
    table = network.table
    stretch, skipped = int(snapped.stretch[place]), int(snapped.skipped[place])
    road = table.names[table.name[stretch]] if stretch >= 0 else ""
    distance = float(snapped.distance_m[place]) if stretch >= 0 else None
    if distance is None:
        text = f"no road that trips can use within {snapped.limit_m:.0f} m"
    else:
        text = f"put on {road or 'a road without a name'}, {distance:.0f} m away"
    if skipped < 0:
        return SnapNote(
            place=place,
            road=road,
            distance_m=distance,
            skipped_road="",
            skipped_m=None,
            why="",
            nodes=0,
            text=text,
        )
    other, metres = table.names[table.name[skipped]], float(snapped.skipped_m[place])
    nodes = network.nodes_around(skipped)
    standing = Standing(int(network.standing[skipped]))
    why = _WHY.get(standing, "the address is on another street")
    part = f"; {nodes} junctions hang together there" if standing == Standing.ISLAND else ""
    name = other or "a road without a name"
    return SnapNote(
        place=place,
        road=road,
        distance_m=distance,
        skipped_road=other,
        skipped_m=metres,
        why=why,
        nodes=nodes,
        text=f"{text}; {name} is nearer ({metres:.0f} m), but {why}{part}",
    )
