"""The square form of a travel table: two files, a row and a column for each place.

The first row holds the ids that are gone to, the first column those that are left; the cell at
their crossing is the travel from the row's place to the column's. One file has seconds, the
other metres.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.findings import Finding, Severity
from georoute.measure.cells import cell_batches, numbers, report_bad_cells
from georoute.measure.grid import IdIndex, Layer, empty_layer_arrays, unknown_id

if TYPE_CHECKING:
    from collections.abc import Sequence

    from georoute.domain.costs import Places
    from georoute.measure.cells import Sheet
    from georoute.measure.finding_log import FindingLog

__all__ = ["read_square"]


def read_square(sheet: Sheet, places: Places, layer_name: str, log: FindingLog) -> Layer:
    """Read one square file into a layer; what is absent keeps row 0."""
    index = IdIndex(places.ids)
    values, rows = empty_layer_arrays(len(places.ids))
    picked, columns = _columns(sheet, index, log)
    seen: dict[int, int] = {}
    for batch in cell_batches(sheet, log):
        for row, cells in zip(batch.rows.tolist(), batch.cells, strict=True):
            i = _row_place(cells, row, sheet, index, seen, log)
            if i < 0:
                continue
            texts = [cells[k] for k in picked]
            figures = numbers(texts, decimal_comma=sheet.decimal_comma)
            report_bad_cells(
                texts,
                figures,
                file=sheet.name,
                rows=np.full(len(texts), row, np.int32),
                columns=[places.ids[j] for j in columns],
                subjects=[places.ids[i]] * len(texts),
                log=log,
            )
            values[i, columns] = figures
            rows[i, columns] = row
    return Layer(name=layer_name, file=sheet.name, values=values, rows=rows, square=True)


def _columns(sheet: Sheet, index: IdIndex, log: FindingLog) -> tuple[list[int], list[int]]:
    """Return which columns of the file to take, and the place of each."""
    picked: list[int] = []
    columns: list[int] = []
    for k, name in enumerate(sheet.header[1:], start=1):
        j = index[name]
        if j < 0:
            log.add(unknown_id(name, 1, file=sheet.name, row=1, column=name or f"column {k + 1}"))
        elif j in columns:
            log.add(_duplicate(name, "column", 1 + picked[columns.index(j)], sheet.name, 1, name))
        else:
            picked.append(k)
            columns.append(j)
    return picked, columns


def _row_place(
    cells: Sequence[str],
    row: int,
    sheet: Sheet,
    index: IdIndex,
    seen: dict[int, int],
    log: FindingLog,
) -> int:
    """Return the place a row belongs to, -1 where the row is not to be taken."""
    first_column = sheet.header[0] or "column 1"
    i = index[cells[0]]
    if i < 0:
        log.add(unknown_id(cells[0], 1, file=sheet.name, row=row, column=first_column))
        return -1
    if i in seen:
        log.add(_duplicate(cells[0], "row", seen[i], sheet.name, row, first_column))
        return -1
    seen[i] = row
    return i


def _duplicate(name: str, kind: str, earlier: int, file: str, row: int, column: str) -> Finding:
    return Finding(
        severity=Severity.FAULT,
        code="duplicate_id",
        message=f"{name} has already {kind} {earlier}.",
        remedy=f"Keep one {kind} for each place.",
        file=file,
        row=row,
        column=column,
        value=name,
        subject=name,
    )
