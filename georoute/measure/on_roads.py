"""Travel along roads: the network of the programme, the places on it, and what lies between."""

from __future__ import annotations

import os
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.costs import CostMatrix
from georoute.domain.roads import LegShape, RoadPoint
from georoute.domain.run import no_progress
from georoute.errors import RoadError
from georoute.kernels.arrays import UNREACHABLE
from georoute.measure.road_findings import road_findings
from georoute.roads.backdrop import road_backdrop
from georoute.roads.box import Box
from georoute.roads.cache import BuiltRoads, cached_roads, settings_key
from georoute.roads.snap_report import snap_notes
from georoute.roads.snapping import snap
from georoute.roads.sources import read_road_source
from georoute.roads.speeds import SpeedProfile, default_profile
from georoute.roads.table_source import EdgeColumns
from georoute.roads.travel import RoadTravel

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from georoute.domain.costs import Places
    from georoute.domain.findings import Finding
    from georoute.domain.programme import RoadSettings
    from georoute.domain.roads import BackdropLine, Way
    from georoute.domain.run import Progress
    from georoute.roads.model import RoadTable

__all__ = ["measure_on_roads", "profile_of", "roads_around"]

MARGIN_KM = 20.0
"""Roads this far around the places are read: ways between them may lead outside."""
GRID_DEG = 0.25
"""The area read is widened to this grid, so that a site more seldom needs another network."""
LARGE_SHARE = 0.5
"""A table of travel that takes more than this share of the machine's memory is refused."""
BYTES_A_PAIR = 64
"""Times and lengths as measured, as written, and as packed for the search."""
MS_PER_S, MM_PER_M = 1_000.0, 1_000.0


class _WaysOnRoads:
    """How the legs between places on roads are driven."""

    def __init__(self, travel: RoadTravel, places: Places, network: str) -> None:
        self._travel, self._places = travel, places
        self.network = network
        self.credit = travel.network.table.credit

    def legs(self, pairs: Sequence[tuple[int, int]]) -> tuple[LegShape, ...]:
        """Return the shape of each leg; one without a way has an empty path."""
        return tuple(
            LegShape()
            if leg is None
            else LegShape(
                path=tuple(zip(leg.lat_deg.tolist(), leg.lon_deg.tolist(), strict=True)),
                roads=leg.names,
                ferry=leg.ferry,
            )
            for leg in self._travel.legs(pairs)
        )

    def points(self) -> tuple[RoadPoint, ...]:
        """Return where the places meet the road."""
        snapped, table = self._travel.snapped, self._travel.network.table
        passed = {note.place: note.why for note in snap_notes(self._travel.network, snapped)}
        return tuple(
            RoadPoint(
                place_id=self._places.ids[p],
                lat_deg=float(snapped.road_lat_deg[p]),
                lon_deg=float(snapped.road_lon_deg[p]),
                distance_m=float(snapped.distance_m[p]),
                road=table.names[table.name[snapped.stretch[p]]],
                stretch=int(snapped.stretch[p]),
                offset_m=int(snapped.offset_mm[p]) / MM_PER_M,
                skipped=passed.get(p, ""),
            )
            for p in np.flatnonzero(~snapped.is_far).tolist()
        )

    def backdrop(self, ways: Sequence[Way]) -> tuple[BackdropLine, ...]:
        """Return what to draw under tours that take these ways."""
        return road_backdrop(self._travel.network, ways)


def profile_of(settings: RoadSettings) -> SpeedProfile:
    """Return the speeds and the vehicle of a programme.

    Raises
    ------
    RoadError
        A class of road is unknown, or a figure is not above 0.
    """
    plain = default_profile(
        settings.country,
        class_speeds_kmh=settings.speeds_kmh,
        real_factor=settings.real_factors or None,
    )
    return replace(
        plain,
        height_m=settings.vehicle_height_m,
        weight_t=settings.vehicle_weight_t,
        width_m=settings.vehicle_width_m,
    )


def _area(places: Places) -> Box:
    """Return the area whose roads are read: around the places, widened to a grid."""
    box = Box.around(places.lat_deg, places.lon_deg, margin_km=MARGIN_KM)
    low = [np.floor(side / GRID_DEG) * GRID_DEG for side in (box.south_deg, box.west_deg)]
    high = [np.ceil(side / GRID_DEG) * GRID_DEG for side in (box.north_deg, box.east_deg)]
    return Box(
        south_deg=max(-90.0, float(low[0])),
        west_deg=max(-180.0, float(low[1])),
        north_deg=min(90.0, float(high[0])),
        east_deg=min(180.0, float(high[1])),
    )


def roads_around(
    settings: RoadSettings, places: Places, *, progress: Progress = no_progress
) -> BuiltRoads:
    """Return the network around places, from the cache where it is kept there.

    Raises
    ------
    RoadError
        The source cannot be used.
    """
    profile, area, source = profile_of(settings), _area(places), Path(settings.path)
    columns = EdgeColumns(**settings.columns) if settings.columns else None

    def read() -> RoadTable:
        return read_road_source(
            source, profile=profile, columns=columns, within=area, progress=progress
        )

    if not source.is_file():
        msg = (
            f"{source}: there is no such file; name the extract under [travel.roads] in the "
            "programme, seen from the programme's folder"
        )
        raise RoadError(msg)
    key = settings_key(profile, area, dict(settings.columns))
    return cached_roads(source, read, settings=key, progress=progress)


def _memory_bytes() -> int:
    return os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES")


def _refuse_too_many(places: int) -> None:
    need, have = places**2 * BYTES_A_PAIR, _memory_bytes()
    if need > LARGE_SHARE * have:
        msg = (
            f"The table of travel between {places} places would need {need / 2**30:.1f} GB of the "
            f"machine's {have / 2**30:.1f} GB. Plan the register in parts, or with another travel "
            "method."
        )
        raise RoadError(msg)


def _in_units(ticks: NDArray[np.int64], a_unit: float) -> NDArray[np.float64]:
    return np.where(ticks >= UNREACHABLE, np.inf, ticks / a_unit)


def measure_on_roads(
    places: Places, settings: RoadSettings, *, progress: Progress = no_progress
) -> tuple[CostMatrix, tuple[Finding, ...]]:
    """Measure travel along roads between all pairs of places.

    Parameters
    ----------
    places
        The places, in the order the table will have.
    settings
        Source, speeds, vehicle and limit.
    progress
        Told what is done.

    Returns
    -------
    The table, in which places too far from any road are reached from nowhere, and what was
    noticed.

    Raises
    ------
    RoadError
        The source cannot be used, no place lies on its roads, or the table would not fit into
        memory.
    """
    _refuse_too_many(len(places.ids))
    built = roads_around(settings, places, progress=progress)
    snapped = snap(built.network, places.lat_deg, places.lon_deg, limit_m=settings.snap_limit_m)
    if snapped.is_far.all():
        msg = (
            f"{settings.path}: none of the {len(places.ids)} places lies within "
            f"{settings.snap_limit_m:g} m of a road that leads anywhere; is it an extract of "
            "another area?"
        )
        raise RoadError(msg)
    travel = RoadTravel(built.network, snapped, built.search)
    ms, mm = travel.matrix(progress=progress)
    costs = CostMatrix(
        place_ids=places.ids,
        travel_s=_in_units(ms, MS_PER_S),
        length_m=_in_units(mm, MM_PER_M),
        source=_source(built.network.table, settings),
        estimated=False,
        ways=_WaysOnRoads(travel, places, built.file_name),
    )
    told = road_findings(built.network, snapped, places, ms, mm)
    return costs, tuple(replace(finding, file=settings.path) for finding in told)


def _source(table: RoadTable, settings: RoadSettings) -> str:
    country = f" of {settings.country}" if settings.country else ""
    return f"roads of {table.source} at the real share of limits and class speeds{country}"
