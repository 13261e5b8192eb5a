"""The long form of a travel table: one row a pair, ``from_id, to_id, drive_s, dist_m``."""

from __future__ import annotations

from collections import Counter
from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.findings import Finding, Severity
from georoute.measure.cells import cell_batches, numbers, report_bad_cells
from georoute.measure.grid import (
    METRES,
    SECONDS,
    Grid,
    IdIndex,
    Layer,
    empty_layer_arrays,
    unknown_id,
)

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from georoute.domain.costs import Places
    from georoute.measure.cells import Sheet
    from georoute.measure.finding_log import FindingLog

__all__ = ["LONG_COLUMNS", "is_long", "read_long"]

LONG_COLUMNS = ("from_id", "to_id", SECONDS, METRES)


def is_long(header: Sequence[str]) -> bool:
    """Tell whether a header means the long form, complete or not."""
    return "to_id" in header or (SECONDS in header[1:] or METRES in header[1:])


def read_long(sheet: Sheet, places: Places, log: FindingLog) -> Grid | None:
    """Read all rows; return ``None`` where columns are missing."""
    missing = [name for name in LONG_COLUMNS if name not in sheet.header]
    for name in missing:
        log.add(
            Finding(
                severity=Severity.FAULT,
                code="missing_column",
                message=f"Expected a column {name}, got {', '.join(sheet.header)[:120]}.",
                remedy=f"Give the table the columns {', '.join(LONG_COLUMNS)}.",
                file=sheet.name,
                row=1,
                column=name,
            )
        )
    if missing:
        return None
    reader = _LongReader(sheet, places, log)
    for batch in cell_batches(sheet, log):
        reader.take(batch.rows, batch.cells)
    reader.report_unknown()
    return reader.grid()


class _LongReader:
    """Fill the arrays of a table batch by batch."""

    def __init__(self, sheet: Sheet, places: Places, log: FindingLog) -> None:
        n = len(places.ids)
        self._sheet, self._places, self._log = sheet, places, log
        self._index = IdIndex(places.ids)
        self._seconds, self._rows = empty_layer_arrays(n)
        self._metres = np.full((n, n), np.nan)
        self._columns = [sheet.header.index(name) for name in LONG_COLUMNS]
        self._unknown: Counter[str] = Counter()
        self._unknown_at: dict[str, tuple[int, str]] = {}

    def take(self, rows: NDArray[np.int32], cells: list[list[str]]) -> None:
        """Put one batch of rows into the arrays."""
        columns = list(zip(*cells, strict=True))
        from_text, to_text, *figures = (columns[k] for k in self._columns)
        i = self._look_up(from_text, "from_id", rows)
        j = self._look_up(to_text, "to_id", rows)
        known = np.flatnonzero((i >= 0) & (j >= 0))
        passed_over = (i < 0) | (j < 0)
        read = []
        for name, texts in zip((SECONDS, METRES), figures, strict=True):
            values = numbers(texts, decimal_comma=self._sheet.decimal_comma)
            values[passed_over] = np.inf
            report_bad_cells(
                texts,
                values,
                file=self._sheet.name,
                rows=rows,
                columns=[name] * len(texts),
                subjects=from_text,
                log=self._log,
            )
            read.append(values)
        fresh = known[self._first_of_pair(i[known], j[known], rows[known])]
        self._seconds[i[fresh], j[fresh]] = read[0][fresh]
        self._metres[i[fresh], j[fresh]] = read[1][fresh]

    def _look_up(
        self, texts: Sequence[str], column: str, rows: NDArray[np.int32]
    ) -> NDArray[np.int64]:
        found = np.fromiter(map(self._index.__getitem__, texts), np.int64, len(texts))
        for k in np.flatnonzero(found < 0).tolist():
            name = texts[k]
            self._unknown[name] += 1
            self._unknown_at.setdefault(name, (int(rows[k]), column))
        return found

    def _first_of_pair(
        self, i: NDArray[np.int64], j: NDArray[np.int64], rows: NDArray[np.int32]
    ) -> NDArray[np.bool_]:
        """Tell which rows are the first of their pair; report the others."""
        _, first, group = np.unique(
            i * len(self._places.ids) + j, return_index=True, return_inverse=True
        )
        fresh: NDArray[np.bool_] = first[group] == np.arange(i.shape[0])
        fresh &= self._rows[i, j] == 0
        self._rows[i[fresh], j[fresh]] = rows[fresh]
        for k in np.flatnonzero(~fresh):
            pair = (self._places.ids[i[k]], self._places.ids[j[k]])
            earlier = int(self._rows[i[k], j[k]])
            self._log.add(
                Finding(
                    severity=Severity.FAULT,
                    code="duplicate_pair",
                    message=f"{pair[0]} → {pair[1]} is already in row {earlier}.",
                    remedy="Keep one row for each pair.",
                    file=self._sheet.name,
                    row=int(rows[k]),
                    column="from_id",
                    value=pair[0],
                    subject=pair[0],
                )
            )
        return fresh

    def report_unknown(self) -> None:
        """Report each id that is no site and no base, once."""
        for name, count in self._unknown.items():
            row, column = self._unknown_at[name]
            self._log.add(unknown_id(name, count, file=self._sheet.name, row=row, column=column))

    def grid(self) -> Grid:
        """Return what has been read."""
        name = self._sheet.name
        return Grid(
            places=self._places,
            seconds=Layer(
                name=SECONDS, file=name, values=self._seconds, rows=self._rows, square=False
            ),
            metres=Layer(
                name=METRES, file=name, values=self._metres, rows=self._rows, square=False
            ),
        )
