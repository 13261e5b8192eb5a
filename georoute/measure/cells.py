"""Cells of a table file: separators, rows with their numbers, and figures (RFC 4180 CSV)."""

from __future__ import annotations

import csv
from dataclasses import dataclass
from itertools import islice
from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.findings import Finding, Severity

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence
    from pathlib import Path
    from typing import TextIO

    from numpy.typing import NDArray

    from georoute.measure.finding_log import FindingLog

__all__ = ["Batch", "Sheet", "cell_batches", "numbers", "open_sheet", "report_bad_cells"]

_BATCH_ROWS = 20_000
_FIRST_ROW = 2
"""The row below the header, as a person counts."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """A table file that is open at its first row below the header."""

    name: str
    header: tuple[str, ...]
    decimal_comma: bool
    reader: Iterator[list[str]]


@dataclass(frozen=True, slots=True, kw_only=True)
class Batch:
    """Some full rows of a sheet: their cells, and their row numbers as a person sees them."""

    rows: NDArray[np.int32]
    cells: list[list[str]]


def open_sheet(stream: TextIO, path: Path, log: FindingLog) -> Sheet | None:
    """Read the header of a table, or report why there is none and return ``None``.

    Columns are parted by commas, or by semicolons with decimal commas, or by tabs, whichever
    the first row has most of.
    """
    try:
        first_line = stream.readline()
        stream.seek(0)
        delimiter = max(",;\t", key=first_line.count)
        reader = csv.reader(stream, delimiter=delimiter, strict=True)
        header = next(reader, [])
    except (UnicodeDecodeError, csv.Error) as error:
        _report_unreadable(error, path.name, None, log)
        return None
    names = tuple(name.strip() for name in header)
    if not any(names):
        _report_empty(path.name, log)
        return None
    if delimiter != ",":
        _note_delimiter(delimiter, path.name, log)
    return Sheet(name=path.name, header=names, decimal_comma=delimiter == ";", reader=reader)


def cell_batches(sheet: Sheet, log: FindingLog) -> Iterator[Batch]:
    """Yield the rows of a sheet in batches; blank rows are passed over, ragged ones reported."""
    width = len(sheet.header)
    first = _FIRST_ROW
    while True:
        try:
            lines = list(islice(sheet.reader, _BATCH_ROWS))
        except (UnicodeDecodeError, csv.Error) as error:
            _report_unreadable(error, sheet.name, first, log)
            return
        if not lines:
            if first == _FIRST_ROW:
                _report_empty(sheet.name, log)
            return
        rows = np.arange(first, first + len(lines), dtype=np.int32)
        first += len(lines)
        if set(map(len, lines)) != {width}:
            keep = [k for k, line in enumerate(lines) if len(line) == width]
            for k, line in enumerate(lines):
                if len(line) != width and any(line):
                    _report_ragged(len(line), width, sheet.name, int(rows[k]), log)
            rows, lines = rows[keep], [lines[k] for k in keep]
        if lines:
            yield Batch(rows=rows, cells=lines)


def numbers(texts: Sequence[str], *, decimal_comma: bool) -> NDArray[np.float64]:
    """Return the figures of cells; an empty cell is ``inf`` and text is NaN.

    The fast way reads all cells at once; only where one is not a figure each is looked at.
    """
    if decimal_comma:
        texts = [text.replace(",", ".") for text in texts]
    # float() takes "1_000" for a thousand, which no table means.
    if "_" not in "".join(texts):
        try:
            return np.fromiter(map(float, texts), np.float64, len(texts))
        except ValueError:
            pass
    return np.fromiter(map(_number, texts), np.float64, len(texts))


def _number(text: str) -> float:
    if not text.strip():
        return float("inf")
    try:
        return float("nan") if "_" in text else float(text)
    except ValueError:
        return float("nan")


def report_bad_cells(  # noqa: PLR0913 - a cell is told by file, row and column
    texts: Sequence[str],
    values: NDArray[np.float64],
    *,
    file: str,
    rows: NDArray[np.int32],
    columns: Sequence[str],
    subjects: Sequence[str],
    log: FindingLog,
) -> None:
    """Report each cell that is not a figure (NaN in ``values``), as text or as a written NaN."""
    for k in np.flatnonzero(np.isnan(values)).tolist():
        text = texts[k].strip()
        written_nan = text.lower().lstrip("+-") == "nan"
        log.add(
            Finding(
                severity=Severity.FAULT,
                code="not_a_number" if written_nan else "text_in_number",
                message=(
                    "Expected a figure, got NaN (not a number)."
                    if written_nan
                    else f"Expected a figure, got the text {text[:60]!r}."
                ),
                remedy=(
                    "Enter the figure without its unit; leave the cell empty where there is no "
                    "way between the two places."
                ),
                file=file,
                row=int(rows[k]),
                column=columns[k],
                value=text[:60],
                subject=subjects[k],
            )
        )


def _report_unreadable(error: Exception, file: str, row: int | None, log: FindingLog) -> None:
    encoding = isinstance(error, UnicodeDecodeError)
    log.add(
        Finding(
            severity=Severity.FAULT,
            code="unreadable_text" if encoding else "unreadable_csv",
            message=(
                "Expected text in UTF-8, got other bytes."
                if encoding
                else f"Expected rows of CSV, got something else ({error}), in this row or below."
            ),
            remedy="Save the table as CSV UTF-8.",
            file=file,
            row=row,
        )
    )


def _report_ragged(got: int, width: int, file: str, row: int, log: FindingLog) -> None:
    log.add(
        Finding(
            severity=Severity.FAULT,
            code="ragged_row",
            message=f"Expected {width} cells as in the header, got {got}.",
            remedy="Give every row the cells of the header; quote cells that hold a separator.",
            file=file,
            row=row,
            value=str(got),
        )
    )


def _note_delimiter(delimiter: str, file: str, log: FindingLog) -> None:
    name = "semicolons, with decimal commas" if delimiter == ";" else "tabs"
    log.add(
        Finding(
            severity=Severity.NOTE,
            code="delimiter",
            message=f"The columns are parted by {name}.",
            file=file,
            row=1,
        )
    )


def _report_empty(file: str, log: FindingLog) -> None:
    log.add(
        Finding(
            severity=Severity.FAULT,
            code="empty_file",
            message="Expected a header and rows below it, got nothing.",
            remedy="Save the table again with its header and all its rows.",
            file=file,
            row=1,
        )
    )
