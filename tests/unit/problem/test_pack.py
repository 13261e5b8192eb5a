"""Packing: units, rounding, and what each index stands for."""

from __future__ import annotations

from dataclasses import replace
from datetime import date, datetime
from zoneinfo import ZoneInfo

import numpy as np

from georoute.domain.costs import CostMatrix, Places
from georoute.domain.programme import Programme
from georoute.domain.sites import OpenInterval, Register, Visit
from georoute.kernels.arrays import MUST, UNREACHABLE
from georoute.problem import Packed, WhyNot, pack
from georoute.problem.pack import to_ticks
from tests.spine_helpers import small_programme, small_register

SANTIAGO = ZoneInfo("America/Santiago")


def packed_of(programme: Programme, register: Register) -> Packed:
    ids = ("base", *(site.site_id for site in register.sites))
    n = len(ids)
    lat = np.array([-29.96, *(site.lat_deg for site in register.sites)])
    lon = np.array([-71.33, *(site.lon_deg for site in register.sites)])
    travel_s = np.arange(n * n, dtype=np.float64).reshape(n, n) + 0.0004
    costs = CostMatrix(
        place_ids=ids,
        travel_s=travel_s,
        length_m=travel_s * 10,
        source="by hand",
        estimated=False,
    )
    places = Places(ids=ids, lat_deg=lat, lon_deg=lon)
    return pack(programme, register.visits, places, costs)


REGISTER = small_register([(-29.95, -71.32), (-29.97, -71.34)])


def changed(register: Register, **changes: object) -> Register:
    first: Visit = replace(register.visits[0], **changes)  # type: ignore[arg-type]  # by name
    return replace(register, visits=(first, *register.visits[1:]))


def test_seconds_become_milliseconds_and_metres_millimetres_rounded_half_up() -> None:
    assert to_ticks(np.array([0.0005, 0.0004, 1.2345]), 1_000).tolist() == [1, 0, 1235]
    packed = packed_of(small_programme(), REGISTER)
    assert packed.problem.travel.time_ms[0, 1] == 1_000
    assert packed.problem.travel.length_mm[1, 0] == 30_004


def test_unreachable_stays_unreachable() -> None:
    assert to_ticks(np.array([np.inf]), 1_000)[0] == UNREACHABLE


def test_times_count_from_local_midnight_of_the_first_day() -> None:
    shifts = packed_of(small_programme(), REGISTER).problem.shifts
    hour = 3_600_000
    assert shifts.open_ms.tolist() == [8 * hour, 8 * hour, 32 * hour, 32 * hour]
    assert shifts.close_ms[0] == 17 * hour
    assert shifts.paid_ms[0] == 8 * hour
    assert shifts.limit_ms[0] == 9 * hour
    assert shifts.day.tolist() == [0, 0, 1, 1]


def test_rates_price_an_hour_and_a_kilometre() -> None:
    shifts = packed_of(small_programme(), REGISTER).problem.shifts
    assert round(shifts.hour_rate[0] * 3_600_000) == 30_000_000
    assert round(shifts.overtime_rate[0] * 3_600_000) == 45_000_000
    assert round(shifts.length_rate[0] * 1_000_000) == 500_000
    assert shifts.day_cost[0] == 10_000_000


def test_dates_and_inspectors_decide_who_may_go_when_and_why_not() -> None:
    later_only = packed_of(small_programme(), changed(REGISTER, earliest=date(2027, 3, 2)))
    assert later_only.why_not[0].tolist() == [WhyNot.BEFORE_EARLIEST] * 2 + [WhyNot.ELIGIBLE] * 2
    early_only = packed_of(small_programme(), changed(REGISTER, latest=date(2027, 3, 1)))
    assert early_only.why_not[0].tolist() == [WhyNot.ELIGIBLE] * 2 + [WhyNot.AFTER_LATEST] * 2
    one = packed_of(small_programme(), changed(REGISTER, inspector_ids=frozenset({"i2"})))
    assert one.problem.visits.eligible[0].tolist() == [False, True, False, True]
    assert one.problem.visits.eligible[1].all()


def test_opening_intervals_become_windows_of_the_visit() -> None:
    opens = datetime(2027, 3, 1, 9, tzinfo=SANTIAGO)
    closes = datetime(2027, 3, 1, 10, 30, tzinfo=SANTIAGO)
    interval = OpenInterval(opens=opens, closes=closes)
    visits = packed_of(
        small_programme(), changed(REGISTER, open_intervals=(interval,))
    ).problem.visits
    assert visits.window_ptr.tolist() == [0, 1, 1]
    assert visits.window_open_ms[0] == 9 * 3_600_000
    assert visits.window_close_ms[0] == 10.5 * 3_600_000


def test_must_visits_are_worth_most_and_come_first_in_rank() -> None:
    visits = packed_of(small_programme(), changed(REGISTER, must=True)).problem.visits
    assert visits.worth[0] == MUST
    assert visits.level.tolist() == [0, 1]
    assert visits.worth[1] < MUST


def test_leaving_out_a_visit_is_dearer_than_a_full_day_for_it() -> None:
    visits = packed_of(small_programme(), REGISTER).problem.visits
    full_day = 9 * 45.0 + 10.0
    assert visits.worth[0] > full_day * 1_000_000
