"""Checks of single figures of a travel table: absent, negative, on the diagonal, absurd."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.findings import Finding, Severity
from georoute.measure.finding_log import plain
from georoute.measure.grid import cell_finding

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.measure.finding_log import FindingLog
    from georoute.measure.grid import Grid, Layer

__all__ = ["LARGEST_FIGURE", "check_figures"]

LARGEST_FIGURE = 1e8
"""Seconds or metres beyond this (three years; twice round the Earth) are no travel."""


def check_figures(grid: Grid, log: FindingLog) -> None:
    """Report every faulty figure; leave zeros on the diagonal where nothing was wrong with it."""
    layers = (grid.seconds, grid.metres)
    for layer in layers:
        if layer is grid.seconds or layer.rows is not grid.seconds.rows:
            _check_coverage(grid, layer, log)
        _check_diagonal(grid, layer, log)
        _check_negative(grid, layer, log)
        _check_largest(grid, layer, log)
        _check_all_zero(grid, layer, log)
    _check_halves(grid, log)


def _each(mask: NDArray[np.bool_], log: FindingLog, code: str) -> list[tuple[int, int]]:
    """Return the cells of ``mask`` that still find room in the log; count the others."""
    cells = np.argwhere(mask)
    room = log.room(Severity.FAULT, code)
    if cells.shape[0] > room:
        log.count_only(Severity.FAULT, code, cells.shape[0] - room)
    return [(int(i), int(j)) for i, j in cells[:room]]


def _check_coverage(grid: Grid, layer: Layer, log: FindingLog) -> None:
    """Report places that the table does not know, and pairs it leaves out."""
    ids = grid.places.ids
    n = len(ids)
    if n == 1:
        return
    given = layer.rows > 0
    np.fill_diagonal(given, val=False)
    no_way_out: NDArray[np.bool_] = ~np.any(given, axis=1)
    no_way_in: NDArray[np.bool_] = ~np.any(given, axis=0)
    for k in np.flatnonzero(no_way_out | no_way_in):
        what = "to" if not no_way_out[k] else "from" if not no_way_in[k] else "from or to"
        log.add(
            Finding(
                severity=Severity.FAULT,
                code="place_not_in_table",
                message=f"Expected the table to cover {ids[k]}, found nothing {what} it.",
                remedy="Add the place under exactly this id.",
                file=layer.file,
                row=1 if layer.square else None,
                column=ids[k] if layer.square else "from_id, to_id",
                value=ids[k],
                subject=ids[k],
            )
        )
    missing = ~given
    np.fill_diagonal(missing, val=False)
    missing[no_way_out] = False
    missing[:, no_way_in] = False
    for i, j in _each(missing, log, "missing_pair"):
        log.add(
            cell_finding(
                grid,
                layer,
                i,
                j,
                severity=Severity.FAULT,
                code="missing_pair",
                message="expected a figure, the table has no row for this pair.",
                remedy="Add the row; leave its figures empty where there is no way.",
                value="",
            )
        )


def _check_diagonal(grid: Grid, layer: Layer, log: FindingLog) -> None:
    """Report places that cost travel to themselves; absent and empty mean zero."""
    diagonal = layer.values.diagonal()
    for k in np.flatnonzero(np.isfinite(diagonal) & (diagonal != 0)):
        log.add(
            cell_finding(
                grid,
                layer,
                int(k),
                int(k),
                severity=Severity.FAULT,
                code="diagonal_not_zero",
                message=f"expected 0 from a place to itself, got {plain(diagonal[k])}.",
                remedy="Enter 0. Time on site belongs in work_min and access_min.",
                value=plain(diagonal[k]),
            )
        )
    np.fill_diagonal(layer.values, 0.0)


def _check_negative(grid: Grid, layer: Layer, log: FindingLog) -> None:
    for i, j in _each(layer.values < 0, log, "negative"):
        value = plain(layer.values[i, j])
        log.add(
            cell_finding(
                grid,
                layer,
                i,
                j,
                severity=Severity.FAULT,
                code="negative",
                message=f"expected 0 or more, got {value}.",
                remedy="Correct the figure; leave it empty where there is no way.",
                value=value,
            )
        )


def _check_largest(grid: Grid, layer: Layer, log: FindingLog) -> None:
    absurd = np.isfinite(layer.values) & (layer.values > LARGEST_FIGURE)
    for i, j in _each(absurd, log, "absurd_figure"):
        value = plain(layer.values[i, j])
        log.add(
            cell_finding(
                grid,
                layer,
                i,
                j,
                severity=Severity.FAULT,
                code="absurd_figure",
                message=f"expected at most {plain(LARGEST_FIGURE)}, got {value}.",
                remedy="Leave the cell empty where there is no way; a large figure is no mark.",
                value=value,
            )
        )


def _check_all_zero(grid: Grid, layer: Layer, log: FindingLog) -> None:
    """Report a layer without any travel, unless all places could be one and the same."""
    places = grid.places
    known = (layer.rows > 0) & np.isfinite(layer.values)
    np.fill_diagonal(known, val=False)
    if not known.any() or layer.values[known].any():
        return
    if np.ptp(places.lat_deg) == 0 and np.ptp(places.lon_deg) == 0:
        return
    log.add(
        Finding(
            severity=Severity.FAULT,
            code="all_zero",
            message=f"Expected travel between places, got 0 in every figure of {layer.name}.",
            remedy="Export the table again; the places do not lie on one point.",
            file=layer.file,
            row=int(layer.rows[known].min()),
            column=layer.name,
            value="0",
        )
    )


def _check_halves(grid: Grid, log: FindingLog) -> None:
    """Report pairs that have seconds but no metres, or the reverse."""
    seconds, metres = grid.seconds, grid.metres
    known = ~np.isnan(seconds.values) & ~np.isnan(metres.values)
    half = known & (np.isposinf(seconds.values) != np.isposinf(metres.values))
    for i, j in _each(half, log, "half_given"):
        empty, full = (seconds, metres) if np.isposinf(seconds.values[i, j]) else (metres, seconds)
        log.add(
            cell_finding(
                grid,
                empty,
                i,
                j,
                severity=Severity.FAULT,
                code="half_given",
                message=(
                    f"expected both figures or none, {empty.name} is empty while {full.name} is "
                    f"{plain(full.values[i, j])}."
                ),
                remedy="Enter both figures, or neither where there is no way.",
                value="",
            )
        )
