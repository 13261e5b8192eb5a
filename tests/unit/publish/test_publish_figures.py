"""Figures as people read them. Expected values are worked out by hand; the change of clocks in
Chile on 5 April 2026 (24:00 becomes 23:00 the evening before) is that of the IANA time zones.
"""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, date, datetime, timedelta
from zoneinfo import ZoneInfo

import pytest

from georoute.publishing.figures import Figures
from georoute.publishing.looks import HUES, looks_of
from georoute.publishing.words import words_for
from tests.publish_helpers import programme

ZONE = ZoneInfo("America/Santiago")
DAY = date(2026, 3, 2)


def figures(
    *, language: str = "en", currency: str = "EUR", estimated: bool = True, high: float = 1.5
) -> Figures:
    return Figures(words_for(language), ZONE, currency, estimated, 0.5, high)


@pytest.mark.parametrize(
    ("seconds", "round_up", "expected"),
    [
        (29, None, "09:00"),
        (30, None, "09:01"),
        (59, False, "09:00"),
        (1, True, "09:01"),
        (0, True, "09:00"),
    ],
)
def test_clock_rounds_as_asked(seconds: int, round_up: bool | None, expected: str) -> None:
    moment = datetime(2026, 3, 2, 9, 0, seconds, tzinfo=ZONE)
    assert figures().clock(moment, DAY, round_up=round_up) == expected


def test_clock_tells_the_next_day() -> None:
    assert figures().clock(datetime(2026, 3, 3, 1, 5, tzinfo=ZONE), DAY) == "01:05 next day"


def test_clock_is_local_across_a_change_of_clocks() -> None:
    before = datetime(2026, 4, 5, 2, 30, tzinfo=UTC)
    assert figures().clock(before, date(2026, 4, 4)) == "23:30"
    assert figures().clock(before + timedelta(hours=1), date(2026, 4, 4)) == "23:30"
    assert figures().clock(before + timedelta(hours=2), date(2026, 4, 5)) == "00:30"


@pytest.mark.parametrize(
    ("seconds", "expected"),
    [(0, "0 min"), (89, "1 min"), (3570, "1 h 00 min"), (8040, "2 h 14 min")],
)
def test_duration(seconds: float, expected: str) -> None:
    assert figures().duration(seconds) == expected


def test_drive_carries_its_interval() -> None:
    assert figures().drive(1200) == "≈\u202f20 min (10 to 30 min)"
    assert figures().drive(4800) == "≈\u202f1 h 20 min (40 min to 2 h 00 min)"
    assert figures(estimated=False).drive(1200) == "20 min"
    assert figures(high=0.5).drive(1200) == "≈\u202f20 min"  # no interval is claimed


def test_lengths_and_money_follow_language_and_currency() -> None:
    assert figures().length(5149) == "≈\u202f5.1 km"
    assert figures(language="es").length(5149) == "≈\u202f5,1 km"
    assert figures(estimated=False).length(123_456) == "123 km"
    assert figures().money(1234567.891) == "≈\u202f1\u202f234\u202f567.89 EUR"
    # ISO 4217: the peso of Chile has no minor unit
    assert figures(language="es", currency="CLP").money(86746.2) == "≈\u202f86\u202f746 CLP"


def test_a_short_wait_never_reads_as_none() -> None:
    assert [figures().minutes(s) for s in (0, 1, 29, 91)] == [0, 1, 1, 2]


def test_issue_time_is_said_or_said_to_be_absent() -> None:
    assert figures().issued(None) == "not issued"
    at = datetime(2026, 3, 1, 17, 5, tzinfo=UTC)
    assert figures().issued(at) == "issued 2026-03-01 14:05 (America/Santiago)"


def test_dates() -> None:
    assert figures().date_long(DAY) == "Monday 2 March 2026"
    assert figures(language="es").date_long(DAY) == "lunes 2 de marzo de 2026"
    assert figures().date_short(DAY) == "Mon 2 Mar"


def test_hue_is_the_inspectors_and_mark_the_weekdays() -> None:
    people = programme(people=3).inspectors
    week = [DAY + timedelta(days=k) for k in range(7)]
    looks = [[looks_of(people, person.inspector_id, day) for day in week] for person in people]
    assert [len({look.hue for look in row}) for row in looks] == [1, 1, 1]
    assert len({row[0].hue for row in looks}) == 3
    assert len({look.mark for look in looks[0]}) == len({look.dash for look in looks[0]}) == 7
    assert [look.mark for look in looks[0]] == [look.mark for look in looks[1]]


def test_more_inspectors_than_hues_are_outlined() -> None:
    (person,) = programme().inspectors
    people = [replace(person, inspector_id=str(k)) for k in range(8)]
    looks = [looks_of(people, str(k), DAY) for k in range(8)]
    assert len({(look.hue, look.outlined) for look in looks}) == 8
    assert [look.outlined for look in looks] == [False] * 6 + [True] * 2


def test_vermillion_is_no_hue_of_a_tour() -> None:
    assert "#D55E00" not in {hue.upper() for hue in HUES}
