"""The one table of finding codes of register and programme file, and how findings are made."""

from __future__ import annotations

import difflib
from enum import StrEnum
from types import MappingProxyType
from typing import TYPE_CHECKING

from georoute.domain.findings import Finding, Severity

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

__all__ = ["CODE_MEANINGS", "Code", "nearest", "nearest_words", "new_finding", "severity_of"]

_SHOWN = 80
"""Longer values are cut in findings; a report is read by a person."""


class Code(StrEnum):
    """What can be found in a register or a programme file; the words are stable."""

    # the file
    FILE_NOT_FOUND = "file_not_found"
    NOT_READABLE = "not_readable"
    UNKNOWN_FORMAT = "unknown_format"
    DAMAGED_FILE = "damaged_file"
    EMPTY_FILE = "empty_file"
    NO_ROWS = "no_rows"
    UNKNOWN_ENCODING = "unknown_encoding"
    BROKEN_QUOTES = "broken_quotes"
    WRONG_SHEET = "wrong_sheet"
    WRONG_LAYER = "wrong_layer"
    UNKNOWN_CRS = "unknown_crs"
    ENCODING_ASSUMED = "encoding_assumed"
    SEPARATOR_ASSUMED = "separator_assumed"
    DECIMAL_COMMA_ASSUMED = "decimal_comma_assumed"
    SHEET_ASSUMED = "sheet_assumed"
    LAYER_ASSUMED = "layer_assumed"
    CONVERTED_TO_WGS84 = "converted_to_wgs84"
    SETTING_NOT_USED = "setting_not_used"
    READER_REMARK = "reader_remark"
    # its headers
    MISSING_COLUMN = "missing_column"
    DUPLICATE_HEADER = "duplicate_header"
    EMPTY_HEADER = "empty_header"
    MAPPED_HEADER_ABSENT = "mapped_header_absent"
    UNKNOWN_MAPPING = "unknown_mapping"
    SIMILAR_COLUMN = "similar_column"
    SECOND_COLUMN = "second_column"
    COLUMN_WITHOUT_EFFECT = "column_without_effect"
    # its rows
    RAGGED_ROW = "ragged_row"
    MISSING_ID = "missing_id"
    DUPLICATE_ID = "duplicate_id"
    DUPLICATE_VISIT = "duplicate_visit"
    SIMILAR_ID = "similar_id"
    BLANKS_IN_ID = "blanks_in_id"
    CONTROL_CHARACTER = "control_character"
    SEPARATOR_IN_ID = "separator_in_id"
    ID_OF_A_BASE = "id_of_a_base"
    MISSING_COORDINATE = "missing_coordinate"
    UNREADABLE_COORDINATE = "unreadable_coordinate"
    NOT_A_POINT = "not_a_point"
    ZERO_COORDINATE = "zero_coordinate"
    COORDINATE_OUT_OF_RANGE = "coordinate_out_of_range"
    COORDINATES_NOT_DEGREES = "coordinates_not_degrees"
    COORDINATE_OUTSIDE_CRS = "coordinate_outside_crs"
    SWAPPED_AXES = "swapped_axes"
    FAR_OUTLIER = "far_outlier"
    SAME_PLACE = "same_place"
    TEXT_IN_NUMBER = "text_in_number"
    DECIMAL_COMMA = "decimal_comma"
    DECIMAL_POINT = "decimal_point"
    NOT_FINITE = "not_finite"
    NEGATIVE_TIME = "negative_time"
    ABSURD_TIME = "absurd_time"
    TINY_TIME = "tiny_time"
    NEGATIVE_NUMBER = "negative_number"
    UNREADABLE_DATE = "unreadable_date"
    AMBIGUOUS_DATE = "ambiguous_date"
    ABSURD_DATE = "absurd_date"
    LATEST_BEFORE_EARLIEST = "latest_before_earliest"
    DUE_OUTSIDE_DATES = "due_outside_dates"
    OUTSIDE_HORIZON = "outside_horizon"
    UNREADABLE_YES_NO = "unreadable_yes_no"
    UNKNOWN_INSPECTOR = "unknown_inspector"
    FORMULA_WITHOUT_VALUE = "formula_without_value"
    ERROR_CELL = "error_cell"
    # the programme file
    TOML_SYNTAX = "toml_syntax"
    UNKNOWN_KEY = "unknown_key"
    MISSING_KEY = "missing_key"
    WRONG_TYPE = "wrong_type"
    VALUE_OUT_OF_RANGE = "value_out_of_range"
    EMPTY_TEXT = "empty_text"
    UNKNOWN_ZONE = "unknown_zone"
    LAST_BEFORE_FIRST = "last_before_first"
    HORIZON_TOO_LONG = "horizon_too_long"
    UNKNOWN_BASE = "unknown_base"
    NO_WORKING_DAY = "no_working_day"
    INSPECTOR_WITHOUT_DAY = "inspector_without_day"
    UNKNOWN_HOLIDAYS = "unknown_holidays"
    UNKNOWN_WEEKDAY = "unknown_weekday"
    SHIFT_TIMES_EQUAL = "shift_times_equal"
    NO_TIME_LEFT = "no_time_left"
    OVERTIME_BEYOND_SHIFT = "overtime_beyond_shift"
    NEGATIVE_MONEY = "negative_money"
    UNKNOWN_TRAVEL_METHOD = "unknown_travel_method"
    UNKNOWN_AIM = "unknown_aim"
    UNKNOWN_EFFORT = "unknown_effort"
    MISSING_TABLE = "missing_table"
    MISSING_ROADS = "missing_roads"
    UNKNOWN_ROAD_CLASS = "unknown_road_class"


_F, _W, _N = Severity.FAULT, Severity.WARNING, Severity.NOTE

CODE_MEANINGS: Mapping[Code, tuple[Severity, str]] = MappingProxyType(
    {
        Code.FILE_NOT_FOUND: (_F, "There is no such file."),
        Code.NOT_READABLE: (_F, "The file may not be read, or is a folder."),
        Code.UNKNOWN_FORMAT: (_F, "The file is of no format that can be read."),
        Code.DAMAGED_FILE: (_F, "The file is not what its name says, or is damaged."),
        Code.EMPTY_FILE: (_F, "The file has no content."),
        Code.NO_ROWS: (_F, "The file has headers and no rows."),
        Code.UNKNOWN_ENCODING: (_F, "The file is not text in UTF-8, UTF-16 or Windows-1252."),
        Code.BROKEN_QUOTES: (_F, "Quotation marks break the rules of RFC 4180."),
        Code.WRONG_SHEET: (_F, "The workbook has no sheet of that name."),
        Code.WRONG_LAYER: (_F, "The file has no layer of that name."),
        Code.UNKNOWN_CRS: (_F, "The coordinate system is not stated, or its name is not known."),
        Code.ENCODING_ASSUMED: (_N, "Which encoding was assumed, and why."),
        Code.SEPARATOR_ASSUMED: (_N, "Cells are separated by something else than commas."),
        Code.DECIMAL_COMMA_ASSUMED: (_N, "Numbers are written with a decimal comma throughout."),
        Code.SHEET_ASSUMED: (_N, "The workbook has several sheets and none was chosen."),
        Code.LAYER_ASSUMED: (_N, "The file has several layers and none was chosen."),
        Code.CONVERTED_TO_WGS84: (_N, "From which system coordinates were converted to WGS 84."),
        Code.SETTING_NOT_USED: (_N, "A setting does not apply to this file."),
        Code.READER_REMARK: (_N, "A remark of the library that read the file."),
        Code.MISSING_COLUMN: (_F, "A column that is needed is absent."),
        Code.DUPLICATE_HEADER: (_F, "Two columns have the same header, or the same meaning."),
        Code.EMPTY_HEADER: (_W, "A column has values and no header."),
        Code.MAPPED_HEADER_ABSENT: (_F, "The column mapping names a header the file lacks."),
        Code.UNKNOWN_MAPPING: (_F, "The column mapping names a column that does not exist."),
        Code.SIMILAR_COLUMN: (_W, "An unknown header looks like a misspelt known one."),
        Code.SECOND_COLUMN: (_W, "A second column of the same meaning is only carried through."),
        Code.COLUMN_WITHOUT_EFFECT: (_W, "A known column that does not shape the plan."),
        Code.RAGGED_ROW: (_F, "A row has more or fewer cells than there are headers."),
        Code.MISSING_ID: (_F, "The id is empty."),
        Code.DUPLICATE_ID: (_F, "Two rows or two entries have the same id."),
        Code.DUPLICATE_VISIT: (_F, "Two rows name the same site, task and occurrence together."),
        Code.SIMILAR_ID: (_W, "Two ids differ only in capitals or blanks."),
        Code.BLANKS_IN_ID: (_W, "An id begins or ends with blanks."),
        Code.CONTROL_CHARACTER: (_F, "An id holds a character that cannot be seen."),
        Code.SEPARATOR_IN_ID: (_F, "An inspector's id holds `;` or `,`, which part ids."),
        Code.ID_OF_A_BASE: (_F, "A site has the id of a base."),
        Code.MISSING_COORDINATE: (_F, "A coordinate is empty."),
        Code.UNREADABLE_COORDINATE: (_F, "A coordinate is not a number."),
        Code.NOT_A_POINT: (_F, "A feature is a line or an area; sites are points."),
        Code.ZERO_COORDINATE: (_F, "Both coordinates are 0: an empty form, hardly a place."),
        Code.COORDINATE_OUT_OF_RANGE: (_F, "Latitude beyond 90 or longitude beyond 180 degrees."),
        Code.COORDINATES_NOT_DEGREES: (_F, "Coordinates of the whole file are no degrees."),
        Code.COORDINATE_OUTSIDE_CRS: (_F, "A coordinate lies outside its coordinate system."),
        Code.SWAPPED_AXES: (_F, "Latitude and longitude are exchanged, judged by the rest."),
        Code.FAR_OUTLIER: (_W, "A site lies far from all the others."),
        Code.SAME_PLACE: (_W, "Two sites have the same coordinates."),
        Code.TEXT_IN_NUMBER: (_F, "A cell that must be a number holds text."),
        Code.DECIMAL_COMMA: (_F, "A decimal comma in a file written with decimal points."),
        Code.DECIMAL_POINT: (_F, "A decimal point in a file written with decimal commas."),
        Code.NOT_FINITE: (_F, "A number is infinite or not a number (NaN)."),
        Code.NEGATIVE_TIME: (_F, "A length of time is below 0."),
        Code.ABSURD_TIME: (_F, "A length of time is longer than a day."),
        Code.TINY_TIME: (_W, "Work of less than a minute: is it in hours?"),
        Code.NEGATIVE_NUMBER: (_F, "A load or a worth is below 0."),
        Code.UNREADABLE_DATE: (_F, "A date is not written as YYYY-MM-DD (ISO 8601)."),
        Code.AMBIGUOUS_DATE: (_F, "A date can be read in two ways."),
        Code.ABSURD_DATE: (_F, "A date before 1950 or after 2199."),
        Code.LATEST_BEFORE_EARLIEST: (_F, "The latest date is before the earliest."),
        Code.DUE_OUTSIDE_DATES: (_W, "The due date is before the earliest or after the latest."),
        Code.OUTSIDE_HORIZON: (_W, "The visit's dates lie outside the programme's dates."),
        Code.UNREADABLE_YES_NO: (_F, "A cell that must be yes or no is neither."),
        Code.UNKNOWN_INSPECTOR: (_F, "A row names an inspector the programme does not have."),
        Code.FORMULA_WITHOUT_VALUE: (_F, "A cell has a formula whose value was never computed."),
        Code.ERROR_CELL: (_F, "A cell holds a spreadsheet error such as #N/A."),
        Code.TOML_SYNTAX: (_F, "The programme file breaks the rules of TOML 1.0."),
        Code.UNKNOWN_KEY: (_F, "A key that does not exist."),
        Code.MISSING_KEY: (_F, "A key that is needed is absent."),
        Code.WRONG_TYPE: (_F, "A value is of the wrong kind."),
        Code.VALUE_OUT_OF_RANGE: (_F, "A number is too small or too large."),
        Code.EMPTY_TEXT: (_F, "A text that is needed is empty."),
        Code.UNKNOWN_ZONE: (_F, "A time zone that is not in the IANA list."),
        Code.LAST_BEFORE_FIRST: (_F, "The last date is before the first."),
        Code.HORIZON_TOO_LONG: (_F, "The programme is longer than 366 days."),
        Code.UNKNOWN_BASE: (_F, "An inspector names a base that does not exist, or none."),
        Code.NO_WORKING_DAY: (_F, "Nobody works on any date of the programme."),
        Code.INSPECTOR_WITHOUT_DAY: (_W, "An inspector works on no date of the programme."),
        Code.UNKNOWN_HOLIDAYS: (_F, "A country or subdivision whose holidays are not known."),
        Code.UNKNOWN_WEEKDAY: (_F, "A weekday that does not exist."),
        Code.SHIFT_TIMES_EQUAL: (_F, "A shift ends at the time it starts."),
        Code.NO_TIME_LEFT: (_F, "The write-up leaves no time for the tour."),
        Code.OVERTIME_BEYOND_SHIFT: (_W, "The shift ends before the overtime limit is reached."),
        Code.NEGATIVE_MONEY: (_F, "A price is below 0."),
        Code.UNKNOWN_TRAVEL_METHOD: (_F, "A travel method that does not exist."),
        Code.UNKNOWN_AIM: (_F, "An aim that does not exist."),
        Code.UNKNOWN_EFFORT: (_F, "An effort that does not exist."),
        Code.MISSING_TABLE: (_F, "The travel method is `table` and no table is named."),
        Code.UNKNOWN_ROAD_CLASS: (_F, "A class of road that does not exist."),
        Code.MISSING_ROADS: (_F, "The travel method is `roads` and no roads are named."),
    }
)


def severity_of(code: Code) -> Severity:
    """Return the severity that all findings of a code have."""
    return CODE_MEANINGS[code][0]


def _shown(value: object) -> str:
    text = str(value)
    return text if len(text) <= _SHOWN else f"{text[: _SHOWN - 1]}…"


def new_finding(  # noqa: PLR0913 - a finding has that many sides
    code: Code,
    message: str,
    remedy: str,
    *,
    row: int | None = None,
    column: str = "",
    value: object = "",
    subject: str = "",
) -> Finding:
    """Make a finding; its severity follows from the code, its file is set by the reader."""
    return Finding(
        severity=severity_of(code),
        code=code.value,
        message=message,
        remedy=remedy,
        row=row,
        column=column,
        value=_shown(value),
        subject=subject,
    )


def nearest(word: str, known: Iterable[str], *, count: int = 3) -> tuple[str, ...]:
    """Return the known words most like ``word``, the most like first; case does not matter."""
    by_folded: dict[str, str] = {}
    for candidate in known:
        by_folded.setdefault(candidate.casefold(), candidate)
    # Only the beginning of a monstrous word is compared: the cost is quadratic.
    close = difflib.get_close_matches(word.casefold()[:_SHOWN], by_folded, n=count, cutoff=0.6)
    return tuple(by_folded[folded] for folded in close)


def nearest_words(word: str, known: Iterable[str], *, count: int = 3) -> str:
    """Return a sentence that names the nearest known words, or all of them where none is near."""
    names = tuple(known)
    close = nearest(word, names, count=count)
    if close:
        return "did you mean " + " or ".join(f"`{name}`" for name in close) + "?"
    return "known are " + ", ".join(f"`{name}`" for name in names) if names else "none is known"
