"""A small sound plan made by plain arithmetic: no kernel, no stage of the product, a slow clock.

The week-end of the horizon has a change of clocks (Europe/Paris, 25 October 2026, 03:00 back to
02:00), and one inspector works through that night. Places and names are invented.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from datetime import date, datetime, time
from types import MappingProxyType
from zoneinfo import ZoneInfo

from georoute.domain.costs import Tariff
from georoute.domain.people import Inspector, WorkingCalendar
from georoute.domain.plan import (
    Capacity,
    Plan,
    Provenance,
    ReasonCode,
    StageCost,
    StopRule,
    TravelNote,
    Unplaced,
)
from georoute.domain.programme import (
    DetourModel,
    Programme,
    RegisterSource,
    TravelMethod,
    TravelSettings,
)
from georoute.domain.run import Effort
from georoute.domain.sites import Base, OpenInterval, Site, Visit, visit_id_of
from tests.store_clock import SlowClock, exchange_log, measure_of

ZONE = ZoneInfo("Europe/Paris")
FRIDAY, SATURDAY, MONDAY = date(2026, 10, 23), date(2026, 10, 24), date(2026, 10, 26)
HASH = "0123456789abcdef" * 4

DETOUR = DetourModel(
    length_at_1km=1.55,
    length_exponent=0.93,
    time_at_1km_min=2.4,
    time_exponent=0.74,
    low_factor=0.73,
    high_factor=1.37,
)

Orders = Mapping[tuple[str, date], Sequence[str]]


def local(day: date, hour: int, minute: int = 0, *, fold: int = 0) -> datetime:
    return datetime(day.year, day.month, day.day, hour, minute, tzinfo=ZONE, fold=fold)


def example_programme(method: TravelMethod = TravelMethod.DETOUR) -> Programme:
    anna = Inspector(
        inspector_id="anna",
        name="Anna Ørsted",
        start_base_id="north",
        end_base_id="south",
        shift_start=time(8, 0),
        shift_end=time(17, 0),
        paid_s=4 * 3600.0,
        overtime_limit_s=4 * 3600.0,
        calendar=WorkingCalendar(
            weekdays=frozenset({1, 5}),
            days_off=frozenset({date(2026, 10, 20)}),
            holidays=MappingProxyType({date(2026, 11, 1): "Toussaint"}),
        ),
        write_up_s=900.0,
        load_limit=10.0,
    )
    bo = Inspector(
        inspector_id="bo",
        name="Bo | Lund",
        start_base_id="south",
        end_base_id="south",
        shift_start=time(22, 0),
        shift_end=time(6, 0),
        paid_s=8 * 3600.0,
        overtime_limit_s=3600.0,
        calendar=WorkingCalendar(weekdays=frozenset({6})),
    )
    return Programme(
        title="Lifts of the invented county",
        zone="Europe/Paris",
        first_date=FRIDAY,
        last_date=MONDAY,
        bases=(
            Base(base_id="north", name="North yard", lat_deg=45.061, lon_deg=5.012),
            Base(base_id="south", name="South yard", lat_deg=44.983, lon_deg=5.044),
        ),
        inspectors=(anna, bo),
        tariff=Tariff(currency="EUR", hour=41.5, km=0.53, overtime_hour=62.25, day_opened=12.0),
        travel=TravelSettings(method=method, speed_kmh=47.0, circuity=1.31, detour=DETOUR),
        default_work_s=1800.0,
        default_access_s=300.0,
        seed=20_261_023,
        effort=Effort(name="normal", kicks_per_stop=200, relocation_rounds=100),
        register=RegisterSource(
            path="lifts.csv", columns=MappingProxyType({"site_id": "No.", "lat": "Y.Coord"})
        ),
        source="programme.toml",
        sha256=HASH,
    )


def example_sites() -> tuple[Site, ...]:
    """Ten sites on a spiral; only some have every extra column."""
    sites = []
    for k in range(10):
        angle, radius = 2.4 * k, 0.012 * math.sqrt(k + 1)
        extra = {"Name": f"lift {k}", "Baujahr": f"{1990 + k}", "note 'q\"": "=1+1"}
        if k % 3 == 0:
            del extra["Baujahr"]
        sites.append(
            Site(
                site_id=f"0{k}",
                lat_deg=45.02 + radius * math.sin(angle),
                lon_deg=5.03 + 1.4 * radius * math.cos(angle),
                name=f"Invented house {k} <b>",
                address="Rue de l'Exemple 1",
                row=k + 2,
                extra=MappingProxyType(extra),
            )
        )
    return tuple(sites)


def example_visits() -> tuple[Visit, ...]:
    visits = [
        Visit(
            visit_id=visit_id_of(f"0{k}", "lift"),
            site_id=f"0{k}",
            task="lift",
            work_s=1500.0 + 420 * k,
            access_s=240.0,
            load=0.5,
            due=date(2026, 11, 1),
        )
        for k in range(10)
    ]
    friday = (
        OpenInterval(opens=local(FRIDAY, 7), closes=local(FRIDAY, 8)),
        OpenInterval(opens=local(FRIDAY, 10, 30), closes=local(FRIDAY, 12)),
    )
    visits[1] = replace(visits[1], open_intervals=friday, inspector_ids=frozenset({"anna"}))
    visits[4] = replace(visits[4], earliest=SATURDAY, latest=MONDAY, worth=75.0)
    visits[9] = replace(visits[9], latest=date(2026, 10, 22), must=True)
    ladder = Visit(visit_id=visit_id_of("02", "ladder"), site_id="02", task="ladder", work_s=600.5)
    return (*visits, ladder)


EXAMPLE_ORDERS: Orders = {
    ("anna", FRIDAY): ["00|lift|1", "01|lift|1", "02|lift|1", "02|ladder|1"],
    ("bo", SATURDAY): ["03|lift|1", "04|lift|1", "05|lift|1", "06|lift|1"],
    ("anna", MONDAY): ["07|lift|1", "08|lift|1"],
}


def _left_out(visit_id: str) -> Unplaced:
    return Unplaced(
        visit_id=visit_id,
        site_id=visit_id.partition("|")[0],
        code=ReasonCode.AFTER_LATEST,
        message="The latest date 2026-10-22 is before the first shift on 2026-10-23.",
        figures=MappingProxyType({"days_late": 1.0, "work_s": 2040.0}),
    )


def example_plan(method: TravelMethod = TravelMethod.DETOUR) -> Plan:
    """A sound plan: three tours, one through the change of clocks, one visit left out."""
    programme, sites, visits = example_programme(method), example_sites(), example_visits()
    measure = measure_of(programme, sites)
    clock = SlowClock(programme, {visit.visit_id: visit for visit in visits}, measure)
    tours = tuple(clock.tour(who, day, order) for (who, day), order in EXAMPLE_ORDERS.items())
    cost = sum(tour.cost for tour in tours)
    detour = method is TravelMethod.DETOUR
    return Plan(
        plan_id="5e0a3e0c-7c5e-5a0f-9d3c-2f1f6c1f9a10",
        programme=programme,
        sites=sites,
        visits=visits,
        tours=tours,
        unplaced=(_left_out("09|lift|1"),),
        capacity=Capacity(
            visits=len(visits),
            shifts=3,
            work_h=sum(v.work_s + v.access_s for v in visits) / 3600,
            least_travel_h=0.6,
            # Anna: twice 4 h less 15 min, and 4 h more; Bo: 8 h of the 9 that pass, and 1 h more.
            shift_h=2 * 3.75 + 8.0,
            overtime_h=2 * 4.0 + 1.0,
        ),
        travel=TravelNote(
            source="written down for a test",
            estimated=method is not TravelMethod.TABLE,
            low_factor=DETOUR.low_factor if detour else 1.0,
            high_factor=DETOUR.high_factor if detour else 1.0,
        ),
        stages=(
            StageCost(stage="split", cost=cost + 7.25, placed=10),
            StageCost(stage="order", cost=cost, placed=10),
        ),
        exchanges=exchange_log(programme, measure, tours[0])
        + exchange_log(programme, measure, tours[1]),
        provenance=Provenance(
            version="0.1.0",
            register_source="lifts.csv",
            register_sha256=HASH,
            programme_sha256=HASH,
            seed=programme.seed,
            effort="normal",
            seconds=None,
            stop_rule=StopRule.EFFORT_USED,
            issued=datetime(2026, 10, 25, 2, 30, tzinfo=ZONE, fold=1),
        ),
        extra_columns=("Name", "Baujahr", "note 'q\""),
    )
