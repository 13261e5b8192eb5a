"""A travel table as read: figures by pairs of places, and where in the file each one stands."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.findings import Finding, Severity

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.domain.costs import Places

__all__ = [
    "METRES",
    "SECONDS",
    "Grid",
    "IdIndex",
    "Layer",
    "cell_finding",
    "empty_layer_arrays",
    "unknown_id",
]

SECONDS = "drive_s"
METRES = "dist_m"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Layer:
    """Seconds or metres of all pairs.

    ``values`` float64 (n, n): ``inf`` no way, NaN absent or faulty. ``rows`` int32 (n, n): the
    row of the file, 0 where the pair is absent. ``square`` tells that columns are place ids.
    """

    name: str
    file: str
    values: NDArray[np.float64]
    rows: NDArray[np.int32]
    square: bool


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Grid:
    """Both layers of a table, in the order of the places."""

    places: Places
    seconds: Layer
    metres: Layer


class IdIndex(dict[str, int]):
    """Places by the ids of a file, -1 for an unknown id; blanks around an id are forgiven.

    A dictionary, so that the millions of look-ups of a long table need no Python each.
    """

    def __init__(self, ids: tuple[str, ...]) -> None:
        super().__init__((name, k) for k, name in enumerate(ids))
        self._bare = {name.strip(): k for k, name in enumerate(ids)}

    def __missing__(self, text: str) -> int:
        """Look the id up without the blanks around it."""
        return self._bare.get(text.strip(), -1)


def cell_finding(  # noqa: PLR0913 - a finding is told in full
    grid: Grid,
    layer: Layer,
    i: int,
    j: int,
    *,
    severity: Severity,
    code: str,
    message: str,
    remedy: str,
    value: str,
) -> Finding:
    """Return a finding about the figure from place ``i`` to place ``j``, with its cell."""
    row = int(layer.rows[i, j])
    return Finding(
        severity=severity,
        code=code,
        message=f"{grid.places.ids[i]} → {grid.places.ids[j]}: {message}",
        remedy=remedy,
        file=layer.file,
        row=row or None,
        column=grid.places.ids[j] if layer.square else layer.name,
        value=value,
        subject=grid.places.ids[i],
    )


def empty_layer_arrays(n: int) -> tuple[NDArray[np.float64], NDArray[np.int32]]:
    """Return values (NaN) and rows (0) of a layer in which nothing stands yet."""
    return np.full((n, n), np.nan), np.zeros((n, n), np.int32)


def unknown_id(name: str, cells: int, *, file: str, row: int, column: str) -> Finding:
    """Return what there is to say about an id that is no place: a fault where it is empty."""
    if not name.strip():
        return Finding(
            severity=Severity.FAULT,
            code="missing_id",
            message=f"Expected the id of a site or base, got an empty cell ({cells:,} in all).",
            remedy="Enter the id as in the register, or remove the row or column.",
            file=file,
            row=row,
            column=column,
        )
    return Finding(
        severity=Severity.WARNING,
        code="unknown_id",
        message=(
            f"{name} is no site of the register and no base; {cells:,} cells with it were "
            "passed over."
        ),
        remedy="Correct the id, or leave it if the table serves a larger register.",
        file=file,
        row=row,
        column=column,
        value=name,
        subject=name,
    )
