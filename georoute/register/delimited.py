"""Read a register from delimited text: RFC 4180, and what spreadsheets make of it.

What is assumed (encoding, separator, decimal mark) is told in notes, never silently.
"""

from __future__ import annotations

import codecs
import csv
import io
import re
import unicodedata
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from georoute.register.codes import Code, new_finding
from georoute.register.columns import folded
from georoute.register.tables import RawRow, RawTable, UnreadableFileError, drop_empty_rows

if TYPE_CHECKING:
    from collections.abc import Sequence

    from georoute.domain.findings import Finding

__all__ = ["KnownHeaders", "read_delimited"]

_SEPARATORS = (",", ";", "\t")
_SEPARATOR_WORDS = {",": "comma", ";": "semicolon", "\t": "tab"}
_COMMA_NUMBER = re.compile(r"^\s*[+\-\u2212]?\d*,\d+\s*$")
_POINT_NUMBER = re.compile(r"^\s*[+\-\u2212]?\d*\.\d+\s*$")
_HARMLESS_CONTROLS = frozenset("\t\r\n\f\x1a")


@dataclass(frozen=True, slots=True, kw_only=True)
class KnownHeaders:
    """Headers, folded, that mean something; and those among them that head numbers."""

    names: frozenset[str] = field(default_factory=frozenset)
    numbers: frozenset[str] = field(default_factory=frozenset)


def read_delimited(data: bytes, *, known: KnownHeaders) -> RawTable:
    """Read delimited text into a table of text cells.

    Parameters
    ----------
    data
        The bytes of the file.
    known
        Headers that mean something; they help to tell the separator and the decimal mark.

    Returns
    -------
    RawTable
        Headers and rows, with notes on what was assumed and faults of quoting.

    Raises
    ------
    UnreadableFileError
        If the bytes are not text, or there is nothing in them.
    """
    text, notes = _decode(data)
    if not text.strip():
        raise UnreadableFileError([_empty()])
    separator = _separator(text, known)
    if separator != ",":
        notes.append(
            new_finding(
                Code.SEPARATOR_ASSUMED,
                f"cells are separated by {_SEPARATOR_WORDS[separator]}s, as the headers show",
                "nothing to do if that is right",
            )
        )
    records, faults = _records(text, separator)
    start = next((k for k, cells in enumerate(records) if any(c.strip() for c in cells)), None)
    if start is None:
        raise UnreadableFileError(faults or [_empty()])
    headers = tuple(records[start])
    rows = [RawRow(number=k + 1, cells=tuple(records[k])) for k in range(start + 1, len(records))]
    decimal_comma = separator != "," and _has_decimal_comma(headers, rows, known)
    if decimal_comma:
        notes.append(
            new_finding(
                Code.DECIMAL_COMMA_ASSUMED,
                "numbers are written with a decimal comma",
                "nothing to do if that is right",
            )
        )
    return RawTable(
        headers=headers,
        rows=drop_empty_rows(rows),
        findings=(*notes, *faults),
        header_row=start + 1,
        decimal_comma=decimal_comma,
    )


def _empty() -> Finding:
    return new_finding(
        Code.EMPTY_FILE,
        "the file is empty",
        "write a row of headers, then one row per site; `site_id,lat,lon` are needed",
    )


def _decode(data: bytes) -> tuple[str, list[Finding]]:
    """Turn bytes into text: a byte order mark wins, then UTF-8, then Windows-1252."""
    marks = (
        (codecs.BOM_UTF8, "utf-8", "UTF-8"),
        (codecs.BOM_UTF16_LE, "utf-16-le", "UTF-16"),
        (codecs.BOM_UTF16_BE, "utf-16-be", "UTF-16"),
    )
    for mark, encoding, word in marks:
        if data.startswith(mark):
            text = _decoded(data[len(mark) :], encoding)
            if text is None:
                raise UnreadableFileError([_not_text()])
            return text, [_encoding_note(f"the file begins with a byte order mark of {word}")]
    text = _decoded(data, "utf-8")
    if text is not None:
        return text, []
    text = _decoded(data, "cp1252")
    if text is None or _looks_binary(text):
        raise UnreadableFileError([_not_text()])
    return text, [
        _encoding_note(
            "the file is not UTF-8; it was read as Windows-1252 (Western European)",
            remedy="look at names with accents; if they are wrong, save the file as UTF-8",
        )
    ]


def _decoded(data: bytes, encoding: str) -> str | None:
    try:
        text = data.decode(encoding)
    except UnicodeDecodeError:
        return None
    return None if "\0" in text else text


def _looks_binary(text: str) -> bool:
    return any(
        unicodedata.category(letter) == "Cc" and letter not in _HARMLESS_CONTROLS
        for letter in set(text)
    )


def _encoding_note(message: str, *, remedy: str = "nothing to do") -> Finding:
    return new_finding(Code.ENCODING_ASSUMED, message, remedy)


def _not_text() -> Finding:
    return new_finding(
        Code.UNKNOWN_ENCODING,
        "the file is not text in UTF-8, UTF-16 or Windows-1252",
        "save it from the spreadsheet as `CSV UTF-8`, or hand in the .xlsx itself",
    )


def _separator(text: str, known: KnownHeaders) -> str:
    """Choose the separator under which the first row shows most known headers, then most cells."""
    first = next(line for line in io.StringIO(text, newline=None) if line.strip())

    def score(separator: str) -> tuple[int, int, int]:
        reader = csv.reader([first], delimiter=separator, strict=False)
        try:
            cells = next(reader, [])
        except csv.Error:
            cells = []
        hits = sum(folded(cell) in known.names for cell in cells)
        return hits, len(cells), -_SEPARATORS.index(separator)

    return max(_SEPARATORS, key=score)


def _records(text: str, separator: str) -> tuple[list[list[str]], list[Finding]]:
    """Split text into records; a record that breaks the rules is a fault and stays empty."""
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=separator, strict=True)
    records: list[list[str]] = []
    faults: list[Finding] = []
    while True:
        try:
            cells = next(reader)
        except StopIteration:
            return records, faults
        except csv.Error as error:
            records.append([])
            faults.append(_broken_quotes(len(records), str(error)))
        else:
            records.append(cells)


def _broken_quotes(row: int, reason: str) -> Finding:
    if "unexpected end" in reason or "field larger" in reason:
        message = "a quotation mark that opens in this row is never closed"
    else:
        message = "after a closing quotation mark comes neither a separator nor the row's end"
    return new_finding(
        Code.BROKEN_QUOTES,
        message,
        'put the whole cell in quotation marks and write marks inside it twice: "a ""b"" c"',
        row=row,
    )


def _has_decimal_comma(headers: Sequence[str], rows: Sequence[RawRow], known: KnownHeaders) -> bool:
    """Tell whether more numbers of the file have a decimal comma than a decimal point."""
    columns = [k for k, header in enumerate(headers) if folded(header) in known.numbers]
    cells = [
        cell
        for row in rows
        for k in columns
        if k < len(row.cells) and isinstance(cell := row.cells[k], str)
    ]
    commas = sum(_COMMA_NUMBER.match(cell) is not None for cell in cells)
    points = sum(_POINT_NUMBER.match(cell) is not None for cell in cells)
    return commas > points
