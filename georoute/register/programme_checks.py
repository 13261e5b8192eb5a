"""What a programme file may say in the right form and still be wrong."""

from __future__ import annotations

import zoneinfo
from dataclasses import replace
from datetime import timedelta
from typing import TYPE_CHECKING

from georoute.domain.programme import TravelMethod
from georoute.domain.run import EFFORTS, Aim
from georoute.register.calendars import CalendarRules, calendar_of, merged, unknown_holidays
from georoute.register.codes import Code, nearest, nearest_words
from georoute.register.columns import COLUMNS
from georoute.register.people_checks import check_bases, check_inspectors
from georoute.register.schema_faults import key_path
from georoute.roads.speeds import ROAD_CLASSES

if TYPE_CHECKING:
    from georoute.domain.people import WorkingCalendar
    from georoute.register.programme_parts import Notebook, Parts

__all__ = ["check_parts"]

_LONGEST_DAYS = 366
_FIRST_YEAR, _LAST_YEAR = 1950, 2199


def check_parts(parts: Parts, notebook: Notebook) -> None:
    """Check what could be read of a programme file; findings go to the notebook.

    Parameters
    ----------
    parts
        The sections.
    notebook
        Takes the findings.
    """
    _check_zone(parts, notebook)
    horizon_is_good = _check_horizon(parts, notebook)
    check_bases(parts, notebook)
    check_inspectors(parts, notebook)
    _check_calendars(parts, notebook, horizon_is_good=horizon_is_good)
    _check_choices(parts, notebook)
    _check_sources(parts, notebook)
    _check_mapping(parts, notebook)


def _check_zone(parts: Parts, notebook: Notebook) -> None:
    if parts.zone is None:
        return
    try:
        zoneinfo.ZoneInfo(parts.zone)
    except (zoneinfo.ZoneInfoNotFoundError, ValueError, OSError):
        known = sorted(zoneinfo.available_timezones())
        wanted = parts.zone.casefold().replace(" ", "_").rsplit("/", maxsplit=1)[-1]
        same_town = [
            name for name in known if name.casefold().rsplit("/", maxsplit=1)[-1] == wanted
        ]
        close = same_town[:3] or nearest(parts.zone, known)
        near = " or ".join(f"`{name}`" for name in close)
        notebook.add(
            Code.UNKNOWN_ZONE,
            f"there is no IANA time zone `{parts.zone}`",
            f"did you mean {near}?" if near else "write one such as `America/Santiago`",
            at=("zone",),
            value=parts.zone,
        )


def _check_horizon(parts: Parts, notebook: Notebook) -> bool:
    """Check the dates; true where the horizon can be walked through."""
    first, last = parts.first_date, parts.last_date
    in_years = True
    for key, day in (("first_date", first), ("last_date", last)):
        if day is not None and not _FIRST_YEAR <= day.year <= _LAST_YEAR:
            in_years = False
            notebook.add(
                Code.ABSURD_DATE,
                f"the year {day.year} is not between {_FIRST_YEAR} and {_LAST_YEAR}",
                "write the right year",
                at=(key,),
                value=day,
            )
    if first is None or last is None or not in_years:
        return False
    days = (last - first).days + 1
    if days < 1:
        notebook.add(
            Code.LAST_BEFORE_FIRST,
            f"the last date {last} is before the first {first}",
            "exchange the two, or correct one",
            at=("last_date",),
            value=last,
        )
    elif days > _LONGEST_DAYS:
        latest = first + timedelta(days=_LONGEST_DAYS - 1)
        notebook.add(
            Code.HORIZON_TOO_LONG,
            f"the programme has {days} days, at most {_LONGEST_DAYS} can be planned at once",
            f"let it end on {latest} at the latest, and plan the rest in a second programme",
            at=("last_date",),
            value=last,
        )
    return 1 <= days <= _LONGEST_DAYS


def _check_calendars(parts: Parts, notebook: Notebook, *, horizon_is_good: bool) -> None:
    good = True
    sections = [(("calendar",), parts.calendar, merged(parts.calendar, parts.calendar))]
    own = [
        (("inspector", k), section, merged(parts.calendar, section))
        for k, section in parts.inspectors
    ]
    for at, section, rules in (*sections, *own):
        states_its_own = section.holiday_country or section.holiday_subdivision
        fault = (
            unknown_holidays(section, country=rules.country, subdivision=rules.subdivision)
            if states_its_own
            else None
        )
        if fault is not None:
            good = False
            path = (*at, fault.column)
            notebook.findings.append(
                replace(fault, column=key_path(path), row=notebook.lines.line_of(path))
            )
    if good and horizon_is_good and parts.inspectors:
        _check_working_days(parts, notebook, [(at, rules) for at, _, rules in own])


def _check_working_days(
    parts: Parts, notebook: Notebook, own: list[tuple[tuple[str | int, ...], CalendarRules]]
) -> None:
    if parts.first_date is None or parts.last_date is None:
        return
    count = (parts.last_date - parts.first_date).days + 1
    days = [parts.first_date + timedelta(days=k) for k in range(count)]

    def works(calendar: WorkingCalendar) -> bool:
        return any(calendar.works_on(day) for day in days)

    idle = [
        at
        for at, rules in own
        if not works(calendar_of(rules, first=parts.first_date, last=parts.last_date))
    ]
    horizon = f"{parts.first_date} to {parts.last_date}"
    remedy = "look at the dates, weekdays, days_off and holidays"
    if len(idle) == len(own):
        notebook.add(
            Code.NO_WORKING_DAY,
            f"nobody works on any date from {horizon}",
            remedy,
            at=("last_date",),
            value=parts.last_date,
        )
        return
    for at in idle:
        notebook.add(
            Code.INSPECTOR_WITHOUT_DAY,
            f"this inspector works on no date from {horizon}",
            remedy,
            at=at,
        )


def _check_choices(parts: Parts, notebook: Notebook) -> None:
    """Check every word that is one of a list."""
    travel, search = parts.travel, parts.search
    methods, aims = [m.value for m in TravelMethod], [aim.value for aim in Aim]
    choices = (
        (Code.UNKNOWN_TRAVEL_METHOD, "travel method", travel.method, methods, ("travel", "method")),
        (Code.UNKNOWN_AIM, "aim", search.aim, aims, ("search", "aim")),
        (Code.UNKNOWN_EFFORT, "effort", search.effort, EFFORTS, ("search", "effort")),
        *(
            (
                Code.UNKNOWN_ROAD_CLASS,
                "class of road",
                name,
                ROAD_CLASSES,
                ("travel", "roads", table, name),
            )
            for table in ("speeds", "real_factors")
            for name in getattr(travel.roads, table)
        ),
    )
    for code, what, word, known, at in choices:
        if word not in known:
            message = f"there is no {what} `{word}`"
            notebook.add(code, message, nearest_words(word, known), at=at, value=word)


def _check_sources(parts: Parts, notebook: Notebook) -> None:
    """Check that the travel method has the file it needs."""
    method = parts.travel.method
    if method == TravelMethod.ROADS.value and not parts.writes("travel", "roads", "path"):
        notebook.add(
            Code.MISSING_ROADS,
            "the travel method is `roads` and no roads are named",
            'add a section [travel.roads] with `path = "town.osm.pbf"`',
            at=("travel", "roads", "path"),
        )
    if method == TravelMethod.TABLE.value and not parts.writes("travel", "table"):
        notebook.add(
            Code.MISSING_TABLE,
            "the travel method is `table` and no table is named",
            'add `table = "travel.csv"`',
            at=("travel", "table"),
        )


def _check_mapping(parts: Parts, notebook: Notebook) -> None:
    names = [column.name for column in COLUMNS]
    for key, header in parts.register.columns.items() if parts.register is not None else ():
        if key not in names:
            notebook.add(
                Code.UNKNOWN_MAPPING,
                f"`{key}` is no column of a register",
                f"{nearest_words(key, names)} The mapping is written "
                "`georoute's name = header of the file`",
                at=("register", "columns", key),
                value=header,
            )
