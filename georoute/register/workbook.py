"""Read a register from an Excel workbook (.xlsx, .xlsm)."""

from __future__ import annotations

import io
import re
import struct
import warnings
import zipfile
import zlib
from datetime import date, datetime, timedelta
from typing import TYPE_CHECKING, Any

import openpyxl
from openpyxl.utils.exceptions import InvalidFileException

from georoute.register.codes import Code, nearest_words, new_finding
from georoute.register.tables import (
    Cell,
    RawRow,
    RawTable,
    UnreadableFileError,
    Unusable,
    drop_empty_rows,
    is_blank,
    padded,
)

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from openpyxl.workbook.workbook import Workbook

    from georoute.domain.findings import Finding

__all__ = ["read_workbook"]

_DAMAGED = (
    # What openpyxl was seen to let through for files that are not, or only partly, workbooks.
    InvalidFileException,
    zipfile.BadZipFile,
    zlib.error,
    struct.error,
    SyntaxError,  # ElementTree.ParseError is one
    ArithmeticError,
    AssertionError,
    AttributeError,
    EOFError,
    LookupError,
    NotImplementedError,
    OSError,
    RuntimeError,
    TypeError,
    ValueError,
)

_FORMULA = re.compile(rb"<(?:\w+:)?f[\s>/]")


def read_workbook(data: bytes, *, sheet: str | None) -> RawTable:
    """Read one sheet of a workbook.

    Parameters
    ----------
    data
        The bytes of the file.
    sheet
        Name of the sheet; ``None`` takes the first, and says so where there are several.

    Returns
    -------
    RawTable
        Cells as numbers, dates and text; a formula whose value was never computed and a
        spreadsheet error are `Unusable`.

    Raises
    ------
    UnreadableFileError
        If the file is no workbook, has no such sheet, or the sheet is empty.
    """
    if not data:
        raise UnreadableFileError([_empty("the file is empty")])
    try:
        values = _open(data, values=True)
        name, notes = _choose_sheet(values, sheet)
        rows = list(_value_rows(values, name))
        values.close()
        if _has_formulas(data):
            rows = _mark_formulas(rows, data, name)
    except UnreadableFileError:
        raise
    except _DAMAGED as error:
        raise UnreadableFileError([_damaged()]) from error
    return _table(rows, notes, name)


def _damaged() -> Finding:
    return new_finding(
        Code.DAMAGED_FILE,
        "the file is not a readable .xlsx workbook (damaged, protected by a password, or renamed)",
        "open it in the spreadsheet program and save it anew as .xlsx without a password",
    )


def _empty(message: str) -> Finding:
    return new_finding(
        Code.EMPTY_FILE, message, "write a row of headers, then one row per site, and save it"
    )


def _open(data: bytes, *, values: bool) -> Workbook:
    with warnings.catch_warnings():
        # Styles, validations and extensions that openpyxl passes over have no bearing on values.
        warnings.simplefilter("ignore")
        return openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=values)


def _choose_sheet(book: Workbook, wanted: str | None) -> tuple[str, list[Finding]]:
    names = [sheet.title for sheet in book.worksheets]
    if not names:
        raise UnreadableFileError([_empty("the workbook has no sheet with cells")])
    listed = ", ".join(f"`{name}`" for name in names)
    if wanted is not None:
        if wanted in names:
            return wanted, []
        fault = new_finding(
            Code.WRONG_SHEET,
            f"the workbook has no sheet `{wanted}`; its sheets are {listed}",
            f"name one of its sheets: {nearest_words(wanted, names)}",
            column="sheet",
            value=wanted,
        )
        raise UnreadableFileError([fault])
    if len(names) == 1:
        return names[0], []
    note = new_finding(
        Code.SHEET_ASSUMED,
        f"the workbook has {len(names)} sheets ({listed}); the first, `{names[0]}`, was read",
        "name the sheet in the programme ([register] sheet) if that is not right",
        value=names[0],
    )
    return names[0], [note]


def _iterate(book: Workbook, name: str) -> Iterator[tuple[Any, ...]]:
    sheet: Any = book[name]
    sheet.reset_dimensions()  # some writers state a wrong extent
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # as in _open: cells are read only now
        yield from sheet.iter_rows()


def _value_rows(book: Workbook, name: str) -> Iterator[tuple[Cell, ...]]:
    for cells in _iterate(book, name):
        yield tuple(_cell(cell) for cell in cells)


def _cell(cell: Any) -> Cell:  # noqa: ANN401 - openpyxl's read-only cells share no type
    value = cell.value
    if value is None:
        return None
    if cell.data_type == "e":
        return Unusable(code=Code.ERROR_CELL, text=str(value))
    if isinstance(value, int) and not isinstance(value, bool):
        return padded(value, cell.number_format) or value
    if isinstance(value, timedelta):
        return str(value)
    if isinstance(value, (str, int, float, bool, datetime, date)):
        return value
    return str(value)


def _has_formulas(data: bytes) -> bool:
    """Look for formulas in the sheets' own text: a second reading costs as much as the first."""
    with zipfile.ZipFile(io.BytesIO(data)) as archive:
        return any(
            _FORMULA.search(archive.read(name)) is not None
            for name in archive.namelist()
            if name.startswith("xl/worksheets/")
        )


def _mark_formulas(rows: list[tuple[Cell, ...]], data: bytes, name: str) -> list[tuple[Cell, ...]]:
    """Mark cells that have a formula and no value."""
    book = _open(data, values=False)
    marked = list(rows)
    for k, cells in enumerate(_iterate(book, name)):
        if k >= len(rows):
            break
        found = list(rows[k])
        for j, cell in enumerate(cells[: len(found)]):
            if found[j] is None and cell.data_type == "f":
                found[j] = Unusable(code=Code.FORMULA_WITHOUT_VALUE, text=_formula_text(cell.value))
        marked[k] = tuple(found)
    book.close()
    return marked


def _formula_text(value: object) -> str:
    return value if isinstance(value, str) else "=…"


def _table(rows: Sequence[tuple[Cell, ...]], notes: list[Finding], name: str) -> RawTable:
    start = next((k for k, row in enumerate(rows) if not all(map(is_blank, row))), None)
    if start is None:
        raise UnreadableFileError([_empty(f"the sheet `{name}` is empty")])
    width = max(map(_used, rows[start:]))
    body = [
        RawRow(number=k + 1, cells=_fitted(rows[k], width)) for k in range(start + 1, len(rows))
    ]
    return RawTable(
        headers=tuple(_header_text(cell) for cell in _fitted(rows[start], width)),
        rows=drop_empty_rows(body),
        findings=tuple(notes),
        header_row=start + 1,
    )


def _header_text(cell: Cell) -> str:
    if isinstance(cell, str):
        return cell
    return "" if cell is None else str(cell.text if isinstance(cell, Unusable) else cell)


def _used(row: Sequence[Cell]) -> int:
    """Return the number of cells up to the last one with content."""
    return max((k + 1 for k, cell in enumerate(row) if not is_blank(cell)), default=0)


def _fitted(row: Sequence[Cell], width: int) -> tuple[Cell, ...]:
    """Bring a row to the width of the sheet; it has no ragged rows, only empty cells."""
    return (*row[:width], *([None] * (width - len(row))))
