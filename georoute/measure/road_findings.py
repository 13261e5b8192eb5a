"""What is told about places on roads before anything is planned."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.findings import Finding, Severity
from georoute.kernels.arrays import UNREACHABLE
from georoute.measure.straight import geodesic_m
from georoute.roads.snap_report import snap_notes

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.domain.costs import Places
    from georoute.roads.network import RoadNetwork
    from georoute.roads.snapping import Snapped

__all__ = ["road_findings"]

MM_PER_M = 1_000.0
CIRCUITY_ROWS = 200
SHORTEST_M = 1.0
"""Places nearer to each other than this say nothing about how roads bend."""


def _snapping(network: RoadNetwork, snapped: Snapped, places: Places) -> list[Finding]:
    """Tell of places without a road, far from it, or with a nearer one passed over."""
    found = []
    for note in snap_notes(network, snapped):
        place_id = places.ids[note.place]
        found.append(
            Finding(
                severity=Severity.WARNING if note.is_far else Severity.NOTE,
                code="far_from_roads" if note.is_far else "put_on_road",
                message=f"{place_id}: {note.text}",
                remedy="check its coordinates; raise snap_limit_m under [travel.roads] if they "
                "are right"
                if note.is_far
                else "",
                subject=place_id,
            )
        )
    return found


def _cut_off(snapped: Snapped, ms: NDArray[np.int64], places: Places) -> list[Finding]:
    """Tell of places from which some others cannot be reached."""
    on = np.flatnonzero(~snapped.is_far)
    lost = (ms[np.ix_(on, on)] >= UNREACHABLE).sum(axis=1)
    return [
        Finding(
            severity=Severity.WARNING,
            code="cut_off",
            message=f"{places.ids[p]}: no way leads from here to {count} of "
            f"{on.shape[0] - 1} other places",
            remedy="look at the one-way streets and closures around it",
            subject=places.ids[p],
        )
        for p, count in zip(on.tolist(), lost.tolist(), strict=True)
        if count > 0
    ]


def _circuity(mm: NDArray[np.int64], places: Places) -> list[Finding]:
    """Tell how much longer roads are than straight lines."""
    rows = np.arange(0, mm.shape[0], max(1, mm.shape[0] // CIRCUITY_ROWS))
    lat, lon = places.lat_deg, places.lon_deg
    straight = geodesic_m(lat[rows, None], lon[rows, None], lat[None, :], lon[None, :])
    roads = mm[rows]
    good = (straight > SHORTEST_M) & (roads < UNREACHABLE)
    if not good.any():
        return []
    low, middle, high = np.percentile(roads[good] / MM_PER_M / straight[good], (5, 50, 95))
    return [
        Finding(
            severity=Severity.NOTE,
            code="circuity",
            message=f"roads are {middle:.2f} times as long as the straight line (median of "
            f"{int(good.sum())} pairs; 90 % of them {low:.2f} to {high:.2f})",
        )
    ]


def _remarks(network: RoadNetwork) -> list[Finding]:
    """Tell what the reader of the roads noticed."""
    return [
        Finding(
            severity=Severity.NOTE,
            code=remark.code,
            message=f"{remark.count} {remark.text}"
            + (f", for instance {remark.example}" if remark.example else ""),
        )
        for remark in network.remarks
    ]


def road_findings(
    network: RoadNetwork,
    snapped: Snapped,
    places: Places,
    ms: NDArray[np.int64],
    mm: NDArray[np.int64],
) -> tuple[Finding, ...]:
    """Return all that is worth telling, gravest first.

    Parameters
    ----------
    network
        The network.
    snapped
        The places on it.
    places
        Their ids and coordinates.
    ms, mm
        Times and lengths between them, int64 (P, P).
    """
    told = [
        *_snapping(network, snapped, places),
        *_cut_off(snapped, ms, places),
        *_circuity(mm, places),
        *_remarks(network),
    ]
    return tuple(sorted(told, key=lambda finding: finding.severity is Severity.NOTE))
