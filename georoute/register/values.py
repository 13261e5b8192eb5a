"""Read single cells: numbers, dates, yes or no; what cannot be read comes back as a refusal."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from datetime import date, datetime
from typing import TYPE_CHECKING

from georoute.register.codes import Code
from georoute.register.tables import Unusable, cell_text

if TYPE_CHECKING:
    from georoute.register.tables import Cell

__all__ = ["Refusal", "read_date", "read_number", "read_yes_no"]

_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?", re.ASCII)
_COMMA_NUMBER = re.compile(r"[+-]?(\d+,\d*|,\d+)", re.ASCII)
_BEGINS_AS_NUMBER = re.compile(r"[+-]?\d+([.,]\d+)?", re.ASCII)
_NOT_FINITE = frozenset({"nan", "inf", "infinity", "-inf", "-infinity", "+inf", "+infinity"})

_ISO_DATE = re.compile(r"(\d{4}-\d{2}-\d{2}|\d{8}|\d{4}-W\d{2}-\d|\d{4}W\d{3})", re.ASCII)
_ISO_MOMENT = re.compile(r"(\d{4}-\d{2}-\d{2}|\d{8})[T ]\d{2}(:?\d{2}){0,2}\S*", re.ASCII)
_LOCALE_DATE = re.compile(r"(\d{1,2})\s*[/.\- ]\s*(\d{1,2})\s*[/.\- ]\s*(\d{4}|\d{2})", re.ASCII)
_YEAR_FIRST = re.compile(r"(\d{4})\s*[/.\- ]\s*(\d{1,2})\s*[/.\- ]\s*(\d{1,2})", re.ASCII)
_SERIAL = re.compile(r"\d{5}(\.\d+)?", re.ASCII)

_FIRST_YEAR, _LAST_YEAR = 1950, 2199
_MONTHS = 12
_YES = frozenset({"yes", "y", "true", "1"})
_NO = frozenset({"no", "n", "false", "0"})
_WRITE_ISO = "write the date as YYYY-MM-DD"


@dataclass(frozen=True, slots=True, kw_only=True)
class Refusal:
    """Why a cell cannot be read, and what to write instead."""

    code: Code
    message: str
    remedy: str


def _unusable(cell: Unusable) -> Refusal:
    if cell.code is Code.FORMULA_WITHOUT_VALUE:
        return Refusal(
            code=cell.code,
            message="the cell has a formula whose value was never computed",
            remedy="open and save the file in the spreadsheet program, or paste the values",
        )
    return Refusal(
        code=cell.code,
        message=f"the cell holds the spreadsheet error {cell.text}",
        remedy="repair the formula, or paste the value",
    )


def read_number(cell: Cell, *, decimal_comma: bool) -> float | Refusal:  # noqa: PLR0911 - exits by kind
    """Read a number from a cell that is not blank.

    Parameters
    ----------
    cell
        The cell.
    decimal_comma
        Whether numbers in text cells of the file are written with a decimal comma.

    Returns
    -------
    float or Refusal
        A finite number, or why there is none.
    """
    if isinstance(cell, Unusable):
        return _unusable(cell)
    if isinstance(cell, (int, float)) and not isinstance(cell, bool):
        return _finite(cell)
    text = cell_text(cell).strip().replace("\u2212", "-")  # the typographic minus sign
    has_point = _NUMBER.fullmatch(text) is not None
    if has_point and not (decimal_comma and "." in text):
        return _finite(float(text))
    has_comma = _COMMA_NUMBER.fullmatch(text) is not None
    if has_point:
        return Refusal(
            code=Code.DECIMAL_POINT,
            message="the number has a decimal point; the file uses decimal commas elsewhere",
            remedy=f"write `{text.replace('.', ',')}` if the point marks decimals",
        )
    if has_comma and not decimal_comma:
        return Refusal(
            code=Code.DECIMAL_COMMA,
            message="the number has a comma; the file uses decimal points elsewhere",
            remedy=f"write `{text.replace(',', '.')}` if the comma marks decimals",
        )
    if has_comma:
        return _finite(float(text.replace(",", ".")))
    return _not_finite() if text.casefold() in _NOT_FINITE else _no_number(text)


def _finite(number: float) -> float | Refusal:
    try:
        value = float(number)
    except OverflowError:
        return _not_finite()
    return value if math.isfinite(value) else _not_finite()


def _not_finite() -> Refusal:
    return Refusal(
        code=Code.NOT_FINITE,
        message="the number is infinite or not a number",
        remedy="write a finite number, or leave the cell empty",
    )


def _no_number(text: str) -> Refusal:
    begin = _BEGINS_AS_NUMBER.match(text)
    what = f"write `{begin[0]}` alone" if begin else "write digits only"
    return Refusal(
        code=Code.TEXT_IN_NUMBER,
        message="the cell must be a number and holds text",
        remedy=f"{what}, or leave the cell empty if there is no value",
    )


def read_date(cell: Cell) -> date | Refusal:
    """Read a date from a cell that is not blank: a date cell, or ISO 8601 text.

    A time of day behind the date is passed over; the date stays as it is written.

    Parameters
    ----------
    cell
        The cell.

    Returns
    -------
    date or Refusal
        The date, or why there is none.
    """
    if isinstance(cell, Unusable):
        return _unusable(cell)
    if isinstance(cell, datetime):
        return _in_years(cell.date())
    if isinstance(cell, date):
        return _in_years(cell)
    text = cell_text(cell).strip()
    begin = text
    if _ISO_MOMENT.fullmatch(text):
        begin = text[:10] if text[4] == "-" else text[:8]
    if _ISO_DATE.fullmatch(begin):
        try:
            return _in_years(date.fromisoformat(begin))
        except ValueError:
            return _unreadable_date("there is no such date in the calendar")
    return _refused_date(text)


def _in_years(day: date) -> date | Refusal:
    if _FIRST_YEAR <= day.year <= _LAST_YEAR:
        return day
    return Refusal(
        code=Code.ABSURD_DATE,
        message=f"the year {day.year} is not between {_FIRST_YEAR} and {_LAST_YEAR}",
        remedy="write the right year, or leave the cell empty",
    )


def _unreadable_date(message: str, remedy: str = _WRITE_ISO) -> Refusal:
    return Refusal(code=Code.UNREADABLE_DATE, message=message, remedy=remedy)


def _refused_date(text: str) -> Refusal:
    locale = _LOCALE_DATE.fullmatch(text)
    if locale is not None:
        return _locale_date(*(int(part) for part in locale.groups()))
    if _YEAR_FIRST.fullmatch(text):
        return _unreadable_date(
            "the date is not in ISO 8601 form",
            f"{_WRITE_ISO}, with two digits for month and day and `-` between",
        )
    if _SERIAL.fullmatch(text):
        return _unreadable_date(
            "the cell holds a spreadsheet's day count, not a date",
            f"give the cell a date format, or {_WRITE_ISO}",
        )
    return _unreadable_date("the cell must be a date")


def _locale_date(first: int, second: int, year: int) -> Refusal:
    """Refuse a date with the year at the end; where both readings exist, name both."""
    year += 2000 if year < 100 else 0  # noqa: PLR2004 - two digits
    if 1 <= first <= _MONTHS and 1 <= second <= _MONTHS and first != second:
        return Refusal(
            code=Code.AMBIGUOUS_DATE,
            message="the date can be read as day first or as month first",
            remedy=(
                f"write {year:04}-{second:02}-{first:02} or {year:04}-{first:02}-{second:02} "
                "(YYYY-MM-DD)"
            ),
        )
    month, day = (second, first) if second <= _MONTHS else (first, second)
    try:
        probably = date(year, month, day)
    except ValueError:
        return _unreadable_date("there is no such date in the calendar")
    return _unreadable_date(
        "the date is not in ISO 8601 form",
        f"write it as YYYY-MM-DD; probably {probably}",
    )


def read_yes_no(cell: Cell) -> bool | Refusal:
    """Read yes or no from a cell that is not blank.

    Parameters
    ----------
    cell
        The cell.

    Returns
    -------
    bool or Refusal
        The answer, or why there is none.
    """
    if isinstance(cell, Unusable):
        return _unusable(cell)
    word = cell_text(cell).strip().casefold()
    if word in _YES:
        return True
    if word in _NO:
        return False
    return Refusal(
        code=Code.UNREADABLE_YES_NO,
        message="the cell must be `yes` or `no`",
        remedy="write `yes` or `no`, or leave the cell empty for no",
    )
