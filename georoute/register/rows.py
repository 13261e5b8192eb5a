"""Read the rows of a register, one by one; what is wrong with a row becomes findings."""

from __future__ import annotations

import math
import unicodedata
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from georoute.register.codes import Code, nearest_words, new_finding
from georoute.register.columns import DEFAULT_TASK, ColumnKind, column_named
from georoute.register.tables import RawRow, Unusable, cell_text, is_blank
from georoute.register.values import Refusal, read_date, read_number, read_yes_no

if TYPE_CHECKING:
    from datetime import date

    from georoute.domain.findings import Finding
    from georoute.domain.programme import Programme
    from georoute.register.headers import Layout
    from georoute.register.tables import Cell, RawTable

__all__ = ["ParsedRow", "parse_rows"]

_DAY_MIN = 24 * 60.0
_TEXTS = ("name", "address", "contact", "notes")


@dataclass(slots=True, kw_only=True)
class ParsedRow:
    """What one row says. ``x`` and ``y`` are in the file's own coordinate system.

    A coordinate is ``None`` where it is missing or unreadable, which has been reported then.
    """

    number: int
    site_id: str = ""
    task: str = DEFAULT_TASK
    texts: dict[str, str] = field(default_factory=dict)
    x: float | None = None
    y: float | None = None
    minutes: dict[str, float] = field(default_factory=dict)
    numbers: dict[str, float] = field(default_factory=dict)
    dates: dict[str, date] = field(default_factory=dict)
    must: bool = False
    inspectors: frozenset[str] = frozenset()
    extra: dict[str, str] = field(default_factory=dict)


class _RowReader:
    """Reads rows of one table; what it finds wrong collects in ``findings``."""

    def __init__(self, table: RawTable, layout: Layout, programme: Programme | None) -> None:
        self.table = table
        self.layout = layout
        self.programme = programme
        self.inspectors = (
            None if programme is None else {i.inspector_id for i in programme.inspectors}
        )
        self.findings: list[Finding] = []
        self.row = RawRow(number=0, cells=())
        self.out = ParsedRow(number=0)

    def add(
        self, code: Code, message: str, remedy: str, *, name: str = "", value: object = ""
    ) -> None:
        self.findings.append(
            new_finding(
                code,
                message,
                remedy,
                row=self.row.number,
                column=self.layout.written.get(name, name),
                value=value,
                subject=self.out.site_id,
            )
        )

    def cell(self, name: str) -> Cell:
        """Return the cell of a column; blank where the column is absent."""
        index = self.layout.known.get(name)
        return None if index is None or index >= len(self.row.cells) else self.row.cells[index]

    def refuse(self, refusal: Refusal, name: str, cell: Cell) -> None:
        code = refusal.code
        if column_named(name).kind is ColumnKind.COORDINATE and code is Code.TEXT_IN_NUMBER:
            self.add(
                Code.UNREADABLE_COORDINATE,
                "the coordinate is not a number",
                "write decimal degrees such as -29.9045, without letters or degree signs",
                name=name,
                value=cell_text(cell),
            )
            return
        self.add(code, refusal.message, refusal.remedy, name=name, value=cell_text(cell))

    def read(self, row: RawRow) -> ParsedRow | None:
        """Read one row; ``None`` where its cells cannot be told apart."""
        self.row = row
        self.out = ParsedRow(number=row.number)
        self.read_id()
        if self.is_ragged():
            return None
        self.read_texts()
        self.read_place()
        self.read_minutes()
        self.read_numbers()
        self.read_dates()
        self.read_must()
        self.read_inspectors()
        return self.out

    def is_ragged(self) -> bool:
        cells, width = self.row.cells, self.layout.width
        surplus = [cell for cell in cells[width:] if not is_blank(cell)]
        if len(cells) >= width and not surplus:
            return False
        self.add(
            Code.RAGGED_ROW,
            f"the row has {len(cells)} cells, the headers {width}",
            "look for a separator too many or too few; a cell with a separator in it needs "
            "quotation marks",
            value=cell_text(surplus[0]) if surplus else "",
        )
        return True

    def text(self, name: str) -> str:
        """Return a text cell as it is written; a spreadsheet error is reported."""
        cell = self.cell(name)
        if isinstance(cell, Unusable):
            refusal = read_yes_no(cell)
            if isinstance(refusal, Refusal):
                self.refuse(refusal, name, cell)
            return ""
        return cell_text(cell)

    def read_id(self) -> None:
        self.out.site_id = site_id = self.text("site_id")
        if "site_id" not in self.layout.known or isinstance(self.cell("site_id"), Unusable):
            return
        if not site_id.strip():
            self.out.site_id = ""
            self.add(
                Code.MISSING_ID,
                "the row has no id",
                "give the site an id of its own, or delete the row",
                name="site_id",
            )
        elif any(unicodedata.category(letter) in {"Cc", "Zl", "Zp"} for letter in site_id):
            self.add(
                Code.CONTROL_CHARACTER,
                "the id holds a character that cannot be seen (line break, tab or the like)",
                "type the id anew",
                name="site_id",
                value=ascii(site_id)[1:-1],
            )
        elif site_id != site_id.strip():
            self.add(
                Code.BLANKS_IN_ID,
                "the id begins or ends with blanks; they are kept",
                "delete the blanks if they do not belong to the id",
                name="site_id",
                value=f"`{site_id}`",
            )

    def read_texts(self) -> None:
        for name in _TEXTS:
            self.out.texts[name] = self.text(name)
        self.out.task = self.text("task").strip() or DEFAULT_TASK
        for header, index in self.layout.extra:
            cell = self.row.cells[index] if index < len(self.row.cells) else None
            self.out.extra[header] = cell_text(cell)

    def read_place(self) -> None:
        if self.table.has_geometry:
            self.read_geometry()
            return
        for name, attribute in (("lon", "x"), ("lat", "y")):
            if name not in self.layout.known:
                continue
            cell = self.cell(name)
            if is_blank(cell):
                self.add(
                    Code.MISSING_COORDINATE,
                    "the coordinate is empty",
                    "look the place up and write its decimal degrees",
                    name=name,
                )
            else:
                setattr(self.out, attribute, self._number(name, cell))

    def read_geometry(self) -> None:
        if self.row.shape:
            self.add(
                Code.NOT_A_POINT,
                f"the feature is a {self.row.shape}; a site is a point",
                "give one point per site, for instance where the inspector parks",
                name="geometry",
                value=self.row.shape,
            )
        elif self.row.point is None:
            self.add(
                Code.MISSING_COORDINATE,
                "the feature has no geometry",
                "draw its point in a GIS, or delete the feature",
                name="geometry",
            )
        elif not all(map(math.isfinite, self.row.point)):
            self.add(
                Code.NOT_FINITE,
                "a coordinate of the point is infinite or not a number",
                "draw the point anew in a GIS",
                name="geometry",
            )
        else:
            self.out.x, self.out.y = self.row.point

    def _number(self, name: str, cell: Cell) -> float | None:
        number = read_number(cell, decimal_comma=self.table.decimal_comma)
        if isinstance(number, Refusal):
            self.refuse(number, name, cell)
            return None
        return number

    def read_minutes(self) -> None:
        for name in ("work_min", "access_min"):
            cell = self.cell(name)
            minutes = None if is_blank(cell) else self._number(name, cell)
            if minutes is None:
                continue
            self.out.minutes[name] = minutes
            if minutes < 0:
                self.add(
                    Code.NEGATIVE_TIME,
                    "the time is below 0",
                    "write the minutes without a sign, or leave the cell empty for the default",
                    name=name,
                    value=cell_text(cell),
                )
            elif minutes > _DAY_MIN:
                self.add(
                    Code.ABSURD_TIME,
                    "the time is longer than a day",
                    "write minutes; split work that takes several days into several rows",
                    name=name,
                    value=cell_text(cell),
                )
            elif 0 < minutes < 1 and name == "work_min":
                self.add(
                    Code.TINY_TIME,
                    "the work takes less than a minute",
                    "write minutes, not hours",
                    name=name,
                    value=cell_text(cell),
                )

    def read_numbers(self) -> None:
        for name in ("load", "worth"):
            cell = self.cell(name)
            number = None if is_blank(cell) else self._number(name, cell)
            if number is None:
                continue
            self.out.numbers[name] = number
            if number < 0:
                self.add(
                    Code.NEGATIVE_NUMBER,
                    f"the {name} is below 0",
                    "write a number of 0 or more, or leave the cell empty",
                    name=name,
                    value=cell_text(cell),
                )

    def read_dates(self) -> None:
        dates = self.out.dates
        for name in ("earliest_date", "due_date", "latest_date"):
            cell = self.cell(name)
            if is_blank(cell):
                continue
            day = read_date(cell)
            if isinstance(day, Refusal):
                self.refuse(day, name, cell)
            else:
                dates[name] = day
        earliest, due = dates.get("earliest_date"), dates.get("due_date")
        latest = dates.get("latest_date")
        if earliest and latest and latest < earliest:
            self.add(
                Code.LATEST_BEFORE_EARLIEST,
                f"the latest date {latest} is before the earliest {earliest}",
                "exchange the two, or correct one",
                name="latest_date",
                value=latest,
            )
        elif due and ((earliest and due < earliest) or (latest and due > latest)):
            self.add(
                Code.DUE_OUTSIDE_DATES,
                f"the due date {due} is not between the earliest and the latest date",
                "look whether one of the three dates is wrong",
                name="due_date",
                value=due,
            )
        else:
            self._compare_with_horizon(earliest, latest)

    def _compare_with_horizon(self, earliest: date | None, latest: date | None) -> None:
        if self.programme is None:
            return
        first, last = self.programme.first_date, self.programme.last_date
        if latest and latest < first:
            name, day, words = "latest_date", latest, f"before the programme begins on {first}"
        elif earliest and earliest > last:
            name, day, words = "earliest_date", earliest, f"after the programme ends on {last}"
        else:
            return
        self.add(
            Code.OUTSIDE_HORIZON,
            f"the {name.replace('_', ' ')} {day} is {words}; the visit cannot be placed",
            "correct the date, or take the visit into another programme",
            name=name,
            value=day,
        )

    def read_must(self) -> None:
        cell = self.cell("must")
        if is_blank(cell):
            return
        answer = read_yes_no(cell)
        if isinstance(answer, Refusal):
            self.refuse(answer, "must", cell)
        else:
            self.out.must = answer

    def read_inspectors(self) -> None:
        words = self.text("inspector").replace(",", ";").split(";")
        self.out.inspectors = frozenset(word.strip() for word in words if word.strip())
        if self.inspectors is None:
            return
        for word in sorted(self.out.inspectors - self.inspectors):
            self.add(
                Code.UNKNOWN_INSPECTOR,
                f"the programme has no inspector `{word}`",
                nearest_words(word, sorted(self.inspectors)),
                name="inspector",
                value=word,
            )


def parse_rows(
    table: RawTable, layout: Layout, *, programme: Programme | None
) -> tuple[list[ParsedRow], list[Finding]]:
    """Read all rows of a table.

    Parameters
    ----------
    table
        The table.
    layout
        Where its columns stand.
    programme
        The programme the register is for, where there is one.

    Returns
    -------
    rows : list of ParsedRow
        The rows whose cells can be told apart, in file order.
    findings : list of Finding
        All that is wrong within single rows.
    """
    reader = _RowReader(table, layout, programme)
    rows = [parsed for row in table.rows if (parsed := reader.read(row)) is not None]
    return rows, reader.findings
