"""Checks of a travel table as a whole: reachability, asymmetry, triangles, speeds, lengths."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from scipy.sparse import csr_array
from scipy.sparse.csgraph import connected_components

from georoute.domain.findings import Finding, Severity
from georoute.kernels.table_checks import triangle_breaks
from georoute.measure.finding_log import pair_name, plain
from georoute.measure.grid import cell_finding
from georoute.measure.straight import geodesic_matrix_m

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.measure.finding_log import FindingLog
    from georoute.measure.grid import Grid

__all__ = ["FASTEST_KMH", "TRIANGLE_TOLERANCE_S", "check_consistency"]

FASTEST_KMH = 200.0
"""Faster than this is taken for a slip of units or digits."""

SLOWEST_KMH = 1.0
"""A whole table slower than a walk is taken for a slip of units."""

TRIANGLE_TOLERANCE_S = 1.5
"""Three figures rounded to whole seconds may differ by this much without any break."""

_TRIANGLE_WORK = 2_000_000_000
"""Triples tried at most (about 1,260 places in full), so that the check takes seconds."""

_STRAIGHT_TOLERANCE = 0.98
_STRAIGHT_FREE_M = 200.0
"""A length may undercut the straight line by 2 % and 200 m: roads are reached off the gate."""

_KMH_PER_MS = 3.6


def check_consistency(grid: Grid, log: FindingLog) -> None:
    """Report what is odd about the table as a whole: warnings and notes, and one fault.

    The fault is a table in which nothing can be reached from anywhere.
    """
    if len(grid.places.ids) == 1:
        return
    _check_reachable(grid, log)
    _note_asymmetry(grid, log)
    _check_triangles(grid, log)
    _check_speeds(grid, log)
    _check_straight(grid, log)


def _check_reachable(grid: Grid, log: FindingLog) -> None:
    """Report pairs without a way, and the places outside the largest group that has ways."""
    seconds = grid.seconds
    closed = np.isposinf(seconds.values)
    count = int(np.count_nonzero(closed))
    if count == 0:
        return
    ids = grid.places.ids
    n = len(ids)
    i, j = (int(k) for k in np.argwhere(closed)[0])
    everything = count == n * (n - 1)
    ways: Any = csr_array(~closed)  # the stubs of scipy disagree on its shape between versions
    groups, label = connected_components(ways, directed=True, connection="strong")
    log.add(
        cell_finding(
            grid,
            seconds,
            i,
            j,
            severity=Severity.FAULT if everything else Severity.WARNING,
            code="nothing_reachable" if everything else "unreachable_pairs",
            message=(
                f"no way, as for {count:,} of {n * (n - 1):,} pairs (first one shown). The "
                f"places fall into {groups:,} group{'s' if groups > 1 else ''} within which "
                "each can be reached from each."
            ),
            remedy="Fill in the figures if there is a way.",
            value="",
        )
    )
    if everything or groups == 1:
        return
    main = int(np.argmax(np.bincount(label)))
    for k in np.flatnonzero(label != main):
        log.add(_cut_off(grid, int(k), label == main, closed))


def _cut_off(grid: Grid, k: int, main: NDArray[np.bool_], closed: NDArray[np.bool_]) -> Finding:
    """Return the warning about a place outside the largest group."""
    in_way, out_way = not closed[main, k].all(), not closed[k, main].all()
    what = (
        "can be entered from the largest group of places but not left again"
        if in_way
        else "can be left towards the largest group of places but not entered"
        if out_way
        else "has no way to or from the largest group of places"
    )
    other = int(np.flatnonzero(main)[0])
    row = int(grid.seconds.rows[k, other])
    name = grid.places.ids[k]
    return Finding(
        severity=Severity.WARNING,
        code="unreachable_place",
        message=f"{name} {what} ({int(np.count_nonzero(main)):,} places).",
        remedy="Fill in the figures if there is a way; its visits cannot be placed otherwise.",
        file=grid.seconds.file,
        row=row or None,
        column=grid.places.ids[other] if grid.seconds.square else grid.seconds.name,
        value=name,
        subject=name,
    )


def _note_asymmetry(grid: Grid, log: FindingLog) -> None:
    """Tell how much the ways there differ from the ways back."""
    for layer in (grid.seconds, grid.metres):
        values = layer.values
        both = np.isfinite(values) & np.isfinite(values.T)
        np.fill_diagonal(both, val=False)
        total = float(values[both].sum())
        if total <= 0:
            continue
        share = float(np.abs(values[both] - values.T[both]).sum())
        log.add(
            Finding(
                severity=Severity.NOTE,
                code="asymmetry",
                message=(
                    f"{layer.name}: way there and way back differ by {100 * share / total:.1f} % "
                    "of the mean figure, on average. Both are used as given."
                ),
                file=layer.file,
                column=layer.name,
                value=f"{100 * share / total:.1f} %",
            )
        )


def _check_triangles(grid: Grid, log: FindingLog) -> None:
    """Report pairs that are quicker over a third place than directly."""
    values = grid.seconds.values
    n = values.shape[0]
    third = min(n, max(1, _TRIANGLE_WORK // (n * n)))
    over = np.unique(np.linspace(0, n - 1, third).astype(np.int64))
    found = triangle_breaks(values, over, TRIANGLE_TOLERANCE_S)
    sample = "" if third == n else f" (tried over {over.size:,} of {n:,} places)"
    if found.breaks:
        i, j, k = int(found.worst_from), int(found.worst_over), int(found.worst_to)
        log.add(
            cell_finding(
                grid,
                grid.seconds,
                i,
                k,
                severity=Severity.WARNING,
                code="triangle_break",
                message=(
                    f"{plain(values[i, k])} s directly, but {plain(values[i, j])} + "
                    f"{plain(values[j, k])} s over {grid.places.ids[j]}: the worst of "
                    f"{found.breaks:,} pairs that are quicker over a third place{sample}."
                ),
                remedy="Check the figure; a table of quickest ways has no such pair.",
                value=plain(values[i, k]),
            )
        )
    if found.gaps:
        i, k = int(found.gap_from), int(found.gap_to)
        log.add(
            cell_finding(
                grid,
                grid.seconds,
                i,
                k,
                severity=Severity.WARNING,
                code="way_over_third_place",
                message=(
                    f"no direct way, but one over a third place; so {found.gaps:,} "
                    f"pairs{sample}. Tours do not use it."
                ),
                remedy="Fill in the figures of the way over the third place.",
                value="",
            )
        )


def _check_speeds(grid: Grid, log: FindingLog) -> None:
    """Report pairs that are too fast to drive, and a table whose units look wrong."""
    with np.errstate(divide="ignore", invalid="ignore"):
        speed = _KMH_PER_MS * grid.metres.values / grid.seconds.values
    usable = np.isfinite(grid.seconds.values) & (grid.seconds.values >= 0)
    usable &= np.isfinite(grid.metres.values) & (grid.metres.values > 0)
    np.fill_diagonal(usable, val=False)
    if not usable.any():
        return
    median = float(np.median(speed[usable]))
    if not SLOWEST_KMH <= median <= FASTEST_KMH:
        log.add(_odd_units(grid, median))
    fast = np.where(usable & (speed > FASTEST_KMH), speed, 0.0)
    cells = np.flatnonzero(fast)
    room = log.room(Severity.WARNING, "implausible_speed")
    worst = cells[np.argsort(-fast.flat[cells], kind="stable")[:room]]
    log.count_only(Severity.WARNING, "implausible_speed", max(0, cells.size - room))
    for i, j in zip(*np.unravel_index(worst, fast.shape), strict=True):
        seconds, metres = grid.seconds.values[i, j], grid.metres.values[i, j]
        log.add(
            cell_finding(
                grid,
                grid.seconds,
                int(i),
                int(j),
                severity=Severity.WARNING,
                code="implausible_speed",
                message=(
                    f"{plain(metres)} m in {plain(seconds)} s"
                    + (f", or {fast[i, j]:,.0f} km/h." if seconds else ", in no time.")
                ),
                remedy="Check both figures and their units: seconds and metres.",
                value=plain(seconds),
            )
        )


def _odd_units(grid: Grid, median_kmh: float) -> Finding:
    return Finding(
        severity=Severity.WARNING,
        code="odd_units",
        message=f"Half of all pairs are travelled at {median_kmh:.3g} km/h or less.",
        remedy="Check the units of the whole table: seconds (not minutes), metres (not km).",
        file=grid.seconds.file,
        row=1,
        column=grid.seconds.name,
        value=f"{median_kmh:.3g} km/h",
    )


def _check_straight(grid: Grid, log: FindingLog) -> None:
    """Report lengths below the straight line between the coordinates: often a mixed-up id."""
    straight = geodesic_matrix_m(grid.places.lat_deg, grid.places.lon_deg)
    least = _STRAIGHT_TOLERANCE * straight - _STRAIGHT_FREE_M
    short = np.where(grid.metres.values >= 0, least - grid.metres.values, 0.0)
    count = int(np.count_nonzero(short > 0))
    if count == 0:
        return
    i, j = (int(k) for k in np.unravel_index(int(np.argmax(short)), short.shape))
    log.add(
        cell_finding(
            grid,
            grid.metres,
            i,
            j,
            severity=Severity.WARNING,
            code="shorter_than_straight_line",
            message=(
                f"{plain(grid.metres.values[i, j])} m, but {straight[i, j]:,.0f} m in a straight "
                f"line; the worst of {count:,} pairs."
            ),
            remedy=f"Check the ids and the coordinates of {pair_name(grid.places, i, j)}.",
            value=plain(grid.metres.values[i, j]),
        )
    )
