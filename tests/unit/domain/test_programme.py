"""Shifts that follow from a programme, and time across a change of clocks."""

from __future__ import annotations

from dataclasses import replace
from datetime import date, datetime, time
from zoneinfo import ZoneInfo

from georoute.domain.instants import elapsed_s, later
from georoute.domain.people import WorkingCalendar
from tests.spine_helpers import small_programme

# The change of clocks in Chile on Saturday 3 April 2027, 24:00 to 23:00: IANA time zone database.
SANTIAGO = ZoneInfo("America/Santiago")


def test_shifts_come_by_date_and_then_in_the_order_of_the_inspectors() -> None:
    names = [(shift.day.day, shift.inspector_id) for shift in small_programme().shifts()]
    assert names == [(1, "i1"), (1, "i2"), (2, "i1"), (2, "i2")]


def test_weekends_days_off_and_holidays_have_no_shift() -> None:
    programme = small_programme(first_date=date(2027, 3, 1), last_date=date(2027, 3, 7))
    calendar = WorkingCalendar(
        days_off=frozenset({date(2027, 3, 2)}), holidays={date(2027, 3, 3): "Invented day"}
    )
    person = replace(programme.inspectors[0], calendar=calendar)
    shifts = replace(programme, inspectors=(person,)).shifts()
    assert [shift.day.day for shift in shifts] == [1, 4, 5]


def test_a_night_shift_ends_on_the_next_date() -> None:
    programme = small_programme()
    person = replace(programme.inspectors[0], shift_start=time(22), shift_end=time(6))
    shift = replace(programme, inspectors=(person,)).shifts()[0]
    assert shift.latest_end == datetime(2027, 3, 2, 6, tzinfo=SANTIAGO)


def test_elapsed_time_counts_the_hour_that_the_clocks_go_back() -> None:
    before = datetime(2027, 4, 3, 22, 0, tzinfo=SANTIAGO)
    after = datetime(2027, 4, 4, 2, 0, tzinfo=SANTIAGO)
    assert elapsed_s(before, after) == 5 * 3600
    assert later(before, 5 * 3600) == after


def test_the_days_of_the_horizon_include_both_ends() -> None:
    assert small_programme().days == (date(2027, 3, 1), date(2027, 3, 2))
