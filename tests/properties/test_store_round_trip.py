"""Any plan comes back from its file as it went in: every text, figure, instant and order."""

from __future__ import annotations

import tempfile
from collections.abc import Mapping, Sequence
from dataclasses import replace
from datetime import UTC, date, datetime
from pathlib import Path
from types import MappingProxyType
from typing import TypeVar
from zoneinfo import ZoneInfo

from hypothesis import given, settings
from hypothesis import strategies as st

from georoute.audit.clock import moments_of
from georoute.domain.costs import Tariff
from georoute.domain.people import Inspector, WorkingCalendar
from georoute.domain.plan import (
    Bound,
    DayTour,
    Exchange,
    Leg,
    Plan,
    ReasonCode,
    StageCost,
    Stop,
    StopRule,
    Unplaced,
)
from georoute.domain.programme import Programme, RegisterSource
from georoute.domain.run import Effort
from georoute.domain.sites import Base, OpenInterval, Site, Visit
from georoute.store import read_plan, write_plan
from tests.examples import at_most
from tests.store_helpers import example_plan, example_programme

K = TypeVar("K")
T = TypeVar("T")

ZONES = (
    "Europe/Paris",
    "America/Santiago",
    "Australia/Lord_Howe",  # changes its clocks by half an hour
    "Asia/Kathmandu",
    "Africa/Casablanca",
    "UTC",
)

texts = st.text(max_size=12)
figures = st.floats(allow_nan=False)
numbers = st.integers(-(2**63), 2**63 - 1)
days = st.dates(date(1990, 1, 1), date(2090, 1, 1))
times = st.times()
degrees = st.floats(-90, 90)


def moments(zone: ZoneInfo) -> st.SearchStrategy[datetime]:
    """Instants around the changes of clocks of 2026, and anywhere else."""
    around = st.sampled_from(
        [datetime(2026, m, d, tzinfo=UTC) for m, d in ((3, 29), (4, 5), (9, 6), (10, 4), (10, 25))]
    )
    near = st.builds(
        lambda day, s: datetime.fromtimestamp(day.timestamp() + s, UTC),
        around,
        st.floats(-86_400, 86_400),
    )
    anywhere = st.integers(0, 2**31).map(lambda s: datetime.fromtimestamp(s, UTC))
    return st.one_of(near, anywhere).map(lambda moment: moment.astimezone(zone))


def tuples(items: st.SearchStrategy[T]) -> st.SearchStrategy[tuple[T, ...]]:
    return st.lists(items, max_size=3).map(tuple)


def mappings(
    keys: st.SearchStrategy[K], values: st.SearchStrategy[T]
) -> st.SearchStrategy[Mapping[K, T]]:
    return st.dictionaries(keys, values, max_size=3).map(MappingProxyType)


def maybe(items: st.SearchStrategy[T]) -> st.SearchStrategy[T | None]:
    return st.none() | items


def inspectors() -> st.SearchStrategy[Inspector]:
    calendars = st.builds(
        WorkingCalendar,
        weekdays=st.frozensets(st.integers(1, 7)),
        days_off=st.frozensets(days, max_size=3),
        holidays=mappings(days, texts),
    )
    return st.builds(
        Inspector,
        inspector_id=texts,
        name=texts,
        start_base_id=texts,
        end_base_id=texts,
        shift_start=times,
        shift_end=times,
        paid_s=figures,
        overtime_limit_s=figures,
        calendar=calendars,
        write_up_s=figures,
        load_limit=maybe(figures),
    )


def visits(zone: ZoneInfo) -> st.SearchStrategy[Visit]:
    return st.builds(
        Visit,
        visit_id=texts,
        site_id=texts,
        task=texts,
        work_s=figures,
        access_s=figures,
        occurrence=numbers,
        load=figures,
        earliest=maybe(days),
        due=maybe(days),
        latest=maybe(days),
        open_intervals=tuples(st.builds(OpenInterval, opens=moments(zone), closes=moments(zone))),
        inspector_ids=st.frozensets(texts, max_size=3),
        worth=maybe(figures),
        must=st.booleans(),
    )


def tours(zone: ZoneInfo) -> st.SearchStrategy[DayTour]:
    moment = moments(zone)
    stops = st.builds(
        Stop,
        visit_id=texts,
        site_id=texts,
        order=numbers,
        arrive=moment,
        start=moment,
        leave=moment,
        latest_arrive=moment,
    )
    legs = st.builds(
        Leg,
        from_id=texts,
        to_id=texts,
        order=numbers,
        depart=moment,
        arrive=moment,
        drive_s=figures,
        dist_m=figures,
    )
    bounds = st.builds(Bound, value=figures, method=texts, exact=st.booleans())
    sums = ("work_s", "drive_s", "wait_s", "write_up_s", "overtime_s", "dist_m", "load", "cost")
    return st.builds(
        DayTour,
        tour_id=texts,
        inspector_id=texts,
        day=days,
        start_base_id=texts,
        end_base_id=texts,
        depart=moment,
        back=moment,
        finish=moment,
        stops=tuples(stops),
        legs=tuples(legs),
        bound=maybe(bounds),
        **dict.fromkeys(sums, figures),
    )


def sites(headers: Sequence[str]) -> st.SearchStrategy[Site]:
    known = st.sampled_from(headers) if headers else texts
    return st.builds(
        Site,
        site_id=texts,
        lat_deg=degrees,
        lon_deg=degrees,
        name=texts,
        address=texts,
        contact=texts,
        notes=texts,
        row=maybe(numbers),
        extra=mappings(known | texts, texts),
    )


def unplaced() -> st.SearchStrategy[Unplaced]:
    return st.builds(
        Unplaced,
        visit_id=texts,
        site_id=texts,
        code=st.sampled_from(ReasonCode),
        message=texts,
        figures=mappings(texts, figures),
    )


def exchanges() -> st.SearchStrategy[Exchange]:
    pairs = tuples(st.tuples(texts, texts))
    return st.builds(
        Exchange,
        tour_id=texts,
        step=numbers,
        kind=texts,
        legs_out=pairs,
        legs_in=pairs,
        cost_before=figures,
        cost_after=figures,
    )


@st.composite
def programmes(draw: st.DrawFn) -> Programme:
    programme = example_programme()
    bases = st.builds(Base, base_id=texts, name=texts, lat_deg=degrees, lon_deg=degrees)
    tariffs = st.builds(
        Tariff,
        currency=texts,
        hour=figures,
        km=figures,
        overtime_hour=figures,
        day_opened=figures,
    )
    efforts = st.builds(
        Effort,
        name=texts,
        kicks_per_stop=numbers,
        relocation_rounds=numbers,
        seconds=maybe(figures),
    )
    registers = st.builds(
        RegisterSource,
        path=texts,
        columns=mappings(texts, texts),
        sheet=maybe(texts),
        layer=maybe(texts),
        crs=maybe(texts),
        credit=texts,
    )
    return replace(
        programme,
        title=draw(texts),
        zone=draw(st.sampled_from(ZONES)),
        first_date=draw(days),
        bases=draw(tuples(bases)),
        inspectors=draw(tuples(inspectors())),
        tariff=draw(tariffs),
        seed=draw(st.integers()),
        effort=draw(efforts),
        register=draw(registers),
    )


@st.composite
def plans(draw: st.DrawFn) -> Plan:
    plan, programme = example_plan(), draw(programmes())
    zone = ZoneInfo(programme.zone)
    headers = draw(st.lists(texts | st.sampled_from(["NAME", "fid", "geom"]), unique=True))
    stages = st.builds(StageCost, stage=texts, cost=figures, placed=numbers)
    return replace(
        plan,
        plan_id=draw(texts),
        programme=programme,
        sites=draw(tuples(sites(headers))),
        visits=draw(tuples(visits(zone))),
        tours=draw(tuples(tours(zone))),
        unplaced=draw(tuples(unplaced())),
        stages=draw(tuples(stages)),
        exchanges=draw(tuples(exchanges())),
        provenance=replace(
            plan.provenance,
            issued=draw(maybe(moments(ZoneInfo(draw(st.sampled_from(ZONES)))))),
            stop_rule=draw(st.sampled_from(StopRule)),
            revision=draw(numbers),
        ),
        extra_columns=tuple(headers),
    )


def wall_times(plan: Plan) -> list[str]:
    """Every clock time with its offset; Python's equality passes over the hour that is twice."""
    times = [moment for tour in plan.tours for _, moment in moments_of(tour)]
    times += [t for v in plan.visits for i in v.open_intervals for t in (i.opens, i.closes)]
    times += [plan.provenance.issued] if plan.provenance.issued else []
    return [moment.isoformat() for moment in times]


@settings(max_examples=at_most(25))
@given(plans())
def test_any_plan_comes_back_as_it_was(plan: Plan) -> None:
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "plan.gpkg"
        write_plan(plan, path)
        found = read_plan(path)
    assert found == plan
    assert wall_times(found) == wall_times(plan)
    assert [list(site.extra) for site in found.sites] == [
        [key for key in _key_order(plan) if key in site.extra] for site in plan.sites
    ]


def _key_order(plan: Plan) -> list[str]:
    keys = dict.fromkeys(plan.extra_columns)
    for site in plan.sites:
        keys.update(dict.fromkeys(site.extra))
    return list(keys)
