"""Measure travel between all pairs of places, by the method of the programme."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.domain.programme import TravelMethod
from georoute.domain.run import no_progress
from georoute.errors import InputError, RoadError, TableError
from georoute.measure.estimate import estimate_straight, estimate_with_detour
from georoute.measure.table import read_table
from georoute.projection import local_plane

if TYPE_CHECKING:
    from georoute.domain.costs import CostMatrix, Places
    from georoute.domain.findings import Finding
    from georoute.domain.programme import TravelSettings
    from georoute.domain.run import Progress

__all__ = ["measure"]


def measure(
    places: Places, travel: TravelSettings, *, progress: Progress = no_progress
) -> tuple[CostMatrix, tuple[Finding, ...]]:
    """Return travel between all pairs of places, in seconds and metres.

    Parameters
    ----------
    places
        The places, in the order the matrix will have.
    travel
        The method and its coefficients.
    progress
        Told the share of rows done.

    Returns
    -------
    The matrix (float64, never rounded), and the warnings and notes about it.

    Raises
    ------
    TableError
        The user's own table is not named or has faults; ``findings`` lists them all.
    RoadError
        The source of roads cannot be used.
    InputError
        A coordinate or a coefficient is unusable.
    """
    findings = _span(places)
    progress("measure", fraction=0.0)
    if travel.method is TravelMethod.TABLE:
        if travel.table_path is None:
            msg = (
                "Expected table_path with the travel method 'table', got none. "
                "Name the table in the travel settings of the programme."
            )
            raise TableError(msg)
        costs, of_table = read_table(travel.table_path, places)
        findings = (*findings, *of_table)
    elif travel.method is TravelMethod.ROADS:
        costs, of_roads = _on_roads(places, travel, progress)
        findings = (*findings, *of_roads)
    elif travel.method is TravelMethod.DETOUR:
        costs = estimate_with_detour(places, travel.detour, progress=progress)
    else:
        costs = estimate_straight(places, travel, progress=progress)
    progress("measure", fraction=1.0)
    return costs, findings


def _on_roads(
    places: Places, travel: TravelSettings, progress: Progress
) -> tuple[CostMatrix, tuple[Finding, ...]]:
    # Roads bring libraries that the other methods do without.
    from georoute.measure.on_roads import measure_on_roads  # noqa: PLC0415 - see above

    if travel.roads is None:
        msg = (
            "Expected roads with the travel method 'roads', got none. Name an extract under "
            "[travel.roads] in the programme."
        )
        raise RoadError(msg)
    return measure_on_roads(places, travel.roads, progress=progress)


def _span(places: Places) -> tuple[Finding, ...]:
    """Return a warning where the places span too much of the Earth to be grouped on a plane."""
    try:
        return local_plane(places.lon_deg, places.lat_deg).findings()
    except InputError:
        # No plane at all is the projecting stage's error; lengths can be measured all the same.
        return ()
