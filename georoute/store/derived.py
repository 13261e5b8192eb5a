"""Check the columns and shapes of a plan file that only repeat the plan for its readers."""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import TYPE_CHECKING

from georoute.domain.findings import Finding, Severity
from georoute.store.geopackage import read_tables, write_sheets
from georoute.store.plan_file import read_plan
from georoute.store.sheets import sheets_of

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

__all__ = ["check_derived"]

Rows = list[dict[str, object]]


def _differences(expected: Rows, got: Rows) -> Iterator[tuple[int | None, str, str]]:
    """Yield row, column and value of every cell of a table that is not as expected."""
    if len(expected) != len(got):
        yield None, "", f"{len(got)} rows, expected {len(expected)}"
        return
    for number, (right, row) in enumerate(zip(expected, got, strict=True), start=1):
        for column in right:
            if row.get(column) != right[column]:
                value = row.get(column)
                yield number, column, "a shape" if isinstance(value, bytes) else str(value)


def _compared(
    path: Path, expected: Mapping[str, Rows], got: Mapping[str, Rows]
) -> Iterator[Finding]:
    for name, rows in expected.items():
        for row, column, value in _differences(rows, got.get(name, [])):
            yield Finding(
                severity=Severity.FAULT,
                code="derived_value_changed",
                message=f"table {name} no longer says what the plan says",
                remedy="restore the file, or make it anew with `plan`; change a plan by its inputs",
                file=str(path),
                row=row,
                column=f"{name}.{column}" if column else name,
                value=value,
            )


def check_derived(path: Path) -> tuple[Finding, ...]:
    """Compare every table and shape of a plan file with those its plan would be written with.

    A plan is read from the columns that define it; names, minutes, statuses and geometries
    stand beside them for people and GIS. A file written by an older version, which has other
    columns, is compared in the columns it should have.

    Raises
    ------
    PlanFileError
        The file is missing, damaged, or no plan file.
    """
    plan = read_plan(path)
    with tempfile.TemporaryDirectory() as folder:
        fresh = Path(folder) / "fresh.gpkg"
        write_sheets(fresh, sheets_of(plan))
        return tuple(_compared(path, read_tables(fresh), read_tables(path)))
