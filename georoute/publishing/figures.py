"""Figures as a person reads them: dates, clock times, durations, lengths, money.

A figure that rests on estimated travel carries the mark ≈, and a drive time also its interval.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import TYPE_CHECKING
from zoneinfo import ZoneInfo

if TYPE_CHECKING:
    from datetime import date

    from georoute.domain.plan import Plan
    from georoute.publishing.words import Words

__all__ = ["Figures"]

_MINUTE_S = 60
_HOUR_S = 3600
_NO_MINOR_UNIT = frozenset(
    {"BIF", "CLP", "DJF", "GNF", "ISK", "JPY", "KMF", "KRW"}
    | {"PYG", "RWF", "UGX", "VND", "VUV", "XAF", "XOF", "XPF"}
)
"""Currencies without a minor unit (ISO 4217, list one, from memory)."""
_KM_M = 1000.0
_SHORT_KM = 100.0
"""Below this a length is given to the nearest 100 m, above it to the nearest kilometre."""


@dataclass(frozen=True, slots=True)
class Figures:
    """Formats the figures of one plan in one language."""

    words: Words
    zone: ZoneInfo
    currency: str
    estimated: bool
    low_factor: float
    high_factor: float

    @classmethod
    def of(cls, plan: Plan, words: Words) -> Figures:
        """Return the figures of ``plan``."""
        return cls(
            words=words,
            zone=ZoneInfo(plan.programme.zone),
            currency=plan.programme.tariff.currency,
            estimated=plan.travel.estimated,
            low_factor=plan.travel.low_factor,
            high_factor=plan.travel.high_factor,
        )

    def marked(self, figure: str) -> str:
        """Return a figure that rests on travel, with the mark of an estimate where it is one."""
        return self.words("approx", figure=figure) if self.estimated else figure

    @property
    def has_interval(self) -> bool:
        """Whether the drive times carry an interval."""
        return self.estimated and self.low_factor != self.high_factor

    def clock(self, moment: datetime, day: date, *, round_up: bool | None = None) -> str:
        """Return the local clock time, ``HH:MM``.

        ``round_up`` ``None`` takes the nearest minute, ``False`` the minute before (for times
        that must not be passed), ``True`` the minute after.
        """
        shift_s = {None: _MINUTE_S / 2, False: 0.0, True: _MINUTE_S - 1e-6}[round_up]
        # counted in UTC, so that a change of clocks within the minute does no harm
        instant = moment.astimezone(ZoneInfo("UTC")) + timedelta(seconds=shift_s)
        local = instant.astimezone(self.zone)
        text = f"{local:%H:%M}"
        return text if local.date() <= day else self.words("next_day", clock=text)

    def duration(self, seconds: float) -> str:
        """Return a duration to the minute, without a mark."""
        minutes = round(seconds / _MINUTE_S)
        if minutes < _MINUTE_S:
            return self.words("minutes", minutes=minutes)
        return self.words("hours_minutes", hours=minutes // 60, minutes=minutes % 60)

    def compact(self, seconds: float) -> str:
        """Return a duration for a column of a table, ``h:mm``."""
        minutes = round(seconds / _MINUTE_S)
        return f"{minutes // 60}:{minutes % 60:02d}"

    def minutes(self, seconds: float) -> int:
        """Return whole minutes, at least 1 for anything above zero."""
        return max(1, round(seconds / _MINUTE_S)) if seconds > 0 else 0

    def drive(self, seconds: float) -> str:
        """Return a drive time, marked, with its interval where one is claimed."""
        text = self.marked(self.duration(seconds))
        if not self.has_interval:
            return text
        low_s, high_s = seconds * self.low_factor, seconds * self.high_factor
        # below an hour the unit is said once: "7 to 12 min"
        short = round(high_s / _MINUTE_S) < _MINUTE_S
        low = str(round(low_s / _MINUTE_S)) if short else self.duration(low_s)
        high = self.duration(high_s)
        return f"{text} ({self.words('interval', low=low, high=high)})"

    def share(self, part: float, whole: float) -> str:
        """Return a part of a whole in per cent, to one place; 0 of nothing is 0."""
        return self.words("per_cent", figure=self.number(100 * part / whole if whole else 0.0, 1))

    def metres(self, metres: float) -> str:
        """Return a length measured on straight lines: metres below a kilometre; no mark."""
        if metres < _KM_M:
            return self.words("scale_metres", metres=f"{metres:.0f}")
        return self.words("kilometres", km=self.number(metres / _KM_M, 2))

    def number(self, value: float, digits: int) -> str:
        """Return a number with the decimal sign of the language."""
        return f"{value:.{digits}f}".replace(".", self.words("decimal"))

    def kilometres(self, metres: float) -> str:
        """Return a length as a bare number of kilometres, marked."""
        km = metres / 1000
        return self.marked(self.number(km, 1 if km < _SHORT_KM else 0))

    def length(self, metres: float) -> str:
        """Return a length in kilometres, marked."""
        km = metres / 1000
        text = self.number(km, 1 if km < _SHORT_KM else 0)
        return self.marked(self.words("kilometres", km=text))

    def hours(self, hours: float) -> str:
        """Return a span given in hours."""
        return self.duration(hours * _HOUR_S)

    def money(self, amount: float) -> str:
        """Return an amount with its currency, marked: every cost holds travel."""
        return f"{self.amount(amount)} {self.currency}"

    def amount(self, amount: float) -> str:
        """Return a bare amount of money, marked."""
        return self.marked(self.plain_amount(amount))

    def change(self, amount: float) -> str:
        """Return a bare difference of money with its sign, marked."""
        sign = "\u2212" if amount < 0 else "+"
        return self.marked(f"{sign}{self.plain_amount(abs(amount))}")

    def plain_amount(self, amount: float) -> str:
        """Return a bare amount of money that rests on no travel (a rate of the tariff)."""
        digits = 0 if self.currency in _NO_MINOR_UNIT else 2
        # a narrow space parts thousands, which reads alike with either decimal sign
        whole, point, rest = f"{amount:,.{digits}f}".replace(",", "\u202f").partition(".")
        decimal = self.words("decimal") if point else ""
        return f"{whole}{decimal}{rest}"

    def date_long(self, day: date) -> str:
        """Return a date with its weekday and year."""
        return self.words(
            "date_long",
            weekday=self.words.listed("weekdays")[day.weekday()],
            day=day.day,
            month=self.words.listed("months")[day.month - 1],
            year=day.year,
        )

    def date_short(self, day: date) -> str:
        """Return a date as on tags: ``Tue 4 Mar``."""
        return self.words(
            "date_short",
            weekday=self.words.listed("weekdays_short")[day.weekday()],
            day=day.day,
            month=self.words.listed("months_short")[day.month - 1],
        )

    def issued(self, moment: datetime | None) -> str:
        """Return when the plan was issued, or that it was not."""
        if moment is None:
            return self.words("not_issued")
        local = moment.astimezone(self.zone)
        when = f"{local:%Y-%m-%d %H:%M}"
        return self.words("issued", when=when, zone=self.zone.key)

    def coordinates(self, lat_deg: float, lon_deg: float) -> str:
        """Return latitude, then longitude, in degrees to about a metre."""
        return f"{lat_deg:.5f}, {lon_deg:.5f}"
