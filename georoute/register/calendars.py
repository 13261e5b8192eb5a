"""Working calendars: weekdays, days off, public holidays by the kept library."""

from __future__ import annotations

from dataclasses import dataclass
from types import MappingProxyType
from typing import TYPE_CHECKING

import holidays

from georoute.domain.people import WorkingCalendar
from georoute.register.codes import Code, nearest_words, new_finding

if TYPE_CHECKING:
    from collections.abc import Mapping
    from datetime import date

    from georoute.domain.findings import Finding
    from georoute.register.schema import CalendarKeys, CalendarSection

__all__ = ["CalendarRules", "calendar_of", "merged", "unknown_holidays"]

_MONDAY_TO_FRIDAY = frozenset({1, 2, 3, 4, 5})


@dataclass(frozen=True, slots=True, kw_only=True)
class CalendarRules:
    """The rules of one inspector's calendar, shared ones included."""

    weekdays: frozenset[int]
    days_off: frozenset[date]
    country: str
    subdivision: str
    extra: Mapping[date, str]


def merged(shared: CalendarSection, own: CalendarKeys) -> CalendarRules:
    """Return an inspector's rules: days off and extra holidays add up, the rest is replaced."""
    weekdays = own.weekdays if own.weekdays is not None else shared.weekdays
    country, subdivision = own.holiday_country, own.holiday_subdivision
    if country is None:
        country = shared.holiday_country
        subdivision = shared.holiday_subdivision if subdivision is None else subdivision
    extra = {
        day.date: day.name or "holiday" for day in (*shared.extra_holidays, *own.extra_holidays)
    }
    return CalendarRules(
        weekdays=_MONDAY_TO_FRIDAY if weekdays is None else frozenset(weekdays),
        days_off=frozenset((*shared.days_off, *own.days_off)),
        country=(country or "").strip(),
        subdivision=(subdivision or "").strip(),
        extra=MappingProxyType(extra),
    )


def unknown_holidays(keys: CalendarKeys, *, country: str, subdivision: str) -> Finding | None:
    """Return a fault where the holiday library does not know a country or its part.

    Parameters
    ----------
    keys
        The section the country was written in; the finding names its key.
    country
        Code of the country; ``""`` asks for no holidays.
    subdivision
        Code of its part; ``""`` asks for those of the whole country.

    Returns
    -------
    Finding or None
        The fault, without its place in the file.
    """
    if not country and not subdivision:
        return None
    known = holidays.list_supported_countries(include_aliases=True)
    if country not in known:
        column = "holiday_country" if keys.holiday_country is not None else "holiday_subdivision"
        return new_finding(
            Code.UNKNOWN_HOLIDAYS,
            f"no holidays are known for the country `{country}`",
            f"write its two-letter code (ISO 3166-1): {_close_countries(country, known)}; "
            "or leave it empty and list extra_holidays",
            column=column,
            value=country,
        )
    parts = known[country]
    if subdivision and subdivision not in parts:
        return new_finding(
            Code.UNKNOWN_HOLIDAYS,
            f"no holidays are known for the part `{subdivision}` of `{country}`",
            nearest_words(subdivision, parts),
            column="holiday_subdivision",
            value=subdivision,
        )
    return None


def _close_countries(country: str, known: Mapping[str, object]) -> str:
    upper = country.upper()
    if upper in known:
        return f"`{upper}`"
    starts = [code for code in known if upper[:1] and code.startswith(upper[:1])]
    return "for instance " + ", ".join(f"`{code}`" for code in starts[:6] or ["CL", "DE", "GB"])


def calendar_of(rules: CalendarRules, *, first: date, last: date) -> WorkingCalendar:
    """Return the calendar of a horizon; only holidays within it are kept.

    Parameters
    ----------
    rules
        Rules whose country and part are known.
    first, last
        First and last date of the horizon.

    Returns
    -------
    WorkingCalendar
        Holidays carry their names in the country's own language.
    """
    found: dict[date, str] = {}
    if rules.country:
        years = range(first.year, last.year + 1)
        listed = holidays.country_holidays(
            rules.country, subdiv=rules.subdivision or None, years=years, expand=False
        )
        # Named in the country's own language; else the language of the machine would decide.
        language = listed.default_language
        if language is not None:
            listed = holidays.country_holidays(
                rules.country,
                subdiv=rules.subdivision or None,
                years=years,
                expand=False,
                language=language,
            )
        found = {day: str(name) for day, name in sorted(listed.items())}
    found |= dict(rules.extra)
    return WorkingCalendar(
        weekdays=rules.weekdays,
        days_off=rules.days_off,
        holidays=MappingProxyType({d: found[d] for d in sorted(found) if first <= d <= last}),
    )
