"""What every reader hands on: a table of cells as they stand in the file."""

from __future__ import annotations

import re
from dataclasses import dataclass
from datetime import date, datetime, time
from typing import TYPE_CHECKING

from georoute.errors import InputError

if TYPE_CHECKING:
    from collections.abc import Sequence

    from georoute.domain.findings import Finding
    from georoute.register.codes import Code

__all__ = [
    "Cell",
    "RawRow",
    "RawTable",
    "UnreadableFileError",
    "Unusable",
    "cell_text",
    "drop_empty_rows",
    "is_blank",
    "padded",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Unusable:
    """A cell without a usable value: a formula never computed, or a spreadsheet error."""

    code: Code
    text: str


Cell = str | int | float | bool | date | datetime | time | Unusable | None


@dataclass(frozen=True, slots=True, kw_only=True)
class RawRow:
    """One row: its number as a person sees it, its cells, and its point where it has one.

    ``point`` is (x, y) in the file's coordinate system; ``shape`` names the kind of geometry
    where it is not a point.
    """

    number: int
    cells: tuple[Cell, ...]
    point: tuple[float, float] | None = None
    shape: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class RawTable:
    """Headers and rows of a file.

    ``decimal_comma`` is true where numbers in text cells are written with one; ``crs`` is the
    coordinate system the file itself states (``""``: none); ``has_geometry`` is true where
    places come from geometries, not from columns. ``header_row`` is ``None`` for files whose
    columns have no row of their own.
    """

    headers: tuple[str, ...]
    rows: tuple[RawRow, ...]
    findings: tuple[Finding, ...] = ()
    header_row: int | None = 1
    decimal_comma: bool = False
    has_geometry: bool = False
    crs: str = ""


class UnreadableFileError(InputError):
    """A file that cannot be read at all; the reader of registers turns it into findings."""

    def __init__(self, findings: Sequence[Finding]) -> None:
        super().__init__(findings[0].message, findings=findings)


def is_blank(cell: Cell) -> bool:
    """Tell whether a cell is empty or holds blanks only."""
    return cell is None or (isinstance(cell, str) and not cell.strip())


_MIDNIGHT = time(0)

_EXACT = 1e15
"""Up to here every whole number is a float of its own."""


def cell_text(cell: Cell) -> str:  # noqa: PLR0911 - one way out per kind of cell
    """Return the text a person would have written for a cell; whole numbers without a point."""
    if cell is None:
        return ""
    if isinstance(cell, str):
        return cell
    if isinstance(cell, bool):
        return "true" if cell else "false"
    if isinstance(cell, float):
        return str(int(cell)) if cell.is_integer() and abs(cell) < _EXACT else repr(cell)
    if isinstance(cell, datetime):
        if cell.timetz() == _MIDNIGHT:
            return cell.date().isoformat()
        return cell.isoformat()
    if isinstance(cell, (date, time)):
        return cell.isoformat()
    return cell.text if isinstance(cell, Unusable) else str(cell)


def drop_empty_rows(rows: Sequence[RawRow]) -> tuple[RawRow, ...]:
    """Leave out rows without any content; spreadsheets are full of them."""
    return tuple(
        row
        for row in rows
        if row.point is not None or row.shape or not all(is_blank(cell) for cell in row.cells)
    )


_ZEROS = re.compile(r"^0+$")


def padded(number: int, number_format: str) -> str | None:
    """Return a whole number with the leading zeros its cell format shows, if it shows any."""
    if number >= 0 and _ZEROS.match(number_format) and len(number_format) > len(str(number)):
        return str(number).zfill(len(number_format))
    return None
