"""One fault at a time planted in a sound plan: the change, and the code it must be found by."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from datetime import date, timedelta
from types import MappingProxyType
from typing import Any, TypeVar

from georoute.domain.costs import Tariff
from georoute.domain.plan import Bound, Plan
from tests.store_clock import after
from tests.store_helpers import MONDAY

T = TypeVar("T")
Breach = Callable[[Plan], Plan]


def _swap(items: tuple[T, ...], k: int, item: T) -> tuple[T, ...]:
    return (*items[:k], item, *items[k + 1 :])


def tour(plan: Plan, t: int, **changes: Any) -> Plan:
    return replace(plan, tours=_swap(plan.tours, t, replace(plan.tours[t], **changes)))


def stop(plan: Plan, t: int, k: int, **changes: Any) -> Plan:
    stops = plan.tours[t].stops
    return tour(plan, t, stops=_swap(stops, k, replace(stops[k], **changes)))


def leg(plan: Plan, t: int, k: int, **changes: Any) -> Plan:
    legs = plan.tours[t].legs
    return tour(plan, t, legs=_swap(legs, k, replace(legs[k], **changes)))


def visit(plan: Plan, k: int, **changes: Any) -> Plan:
    return replace(plan, visits=_swap(plan.visits, k, replace(plan.visits[k], **changes)))


def person(plan: Plan, k: int, **changes: Any) -> Plan:
    people = plan.programme.inspectors
    return programme(plan, inspectors=_swap(people, k, replace(people[k], **changes)))


def programme(plan: Plan, **changes: Any) -> Plan:
    return replace(plan, programme=replace(plan.programme, **changes))


def calendar(plan: Plan, k: int, **changes: Any) -> Plan:
    return person(plan, k, calendar=replace(plan.programme.inspectors[k].calendar, **changes))


def unplaced(plan: Plan, **changes: Any) -> Plan:
    return replace(plan, unplaced=(replace(plan.unplaced[0], **changes),))


def exchange(plan: Plan, k: int, **changes: Any) -> Plan:
    log = plan.exchanges
    return replace(plan, exchanges=_swap(log, k, replace(log[k], **changes)))


def shifted_tour(plan: Plan, t: int, seconds: float) -> Plan:
    """Move every clock time of a tour: each time still follows from the one before."""
    old = plan.tours[t]
    stops = tuple(
        replace(
            s,
            arrive=after(s.arrive, seconds),
            start=after(s.start, seconds),
            leave=after(s.leave, seconds),
        )
        for s in old.stops
    )
    legs = tuple(
        replace(g, depart=after(g.depart, seconds), arrive=after(g.arrive, seconds))
        for g in old.legs
    )
    return tour(
        plan,
        t,
        stops=stops,
        legs=legs,
        depart=after(old.depart, seconds),
        back=after(old.back, seconds),
        finish=after(old.finish, seconds),
    )


def _naive(plan: Plan) -> Plan:
    return stop(plan, 0, 1, arrive=plan.tours[0].stops[1].arrive.replace(tzinfo=None))


def _late_start(plan: Plan) -> Plan:
    begun = after(plan.tours[0].stops[1].start, 1800)
    return stop(plan, 0, 1, start=begun)


def _cheaper(plan: Plan) -> Plan:
    return tour(plan, 1, cost=plan.tours[1].cost - 0.01)


def _moment(plan: Plan, t: int, k: int, name: str, seconds: float) -> Plan:
    return stop(plan, t, k, **{name: after(getattr(plan.tours[t].stops[k], name), seconds)})


def _sum(plan: Plan, t: int, name: str, by: float) -> Plan:
    return tour(plan, t, **{name: getattr(plan.tours[t], name) + by})


def _leg_figure(plan: Plan, name: str, factor: float) -> Plan:
    return leg(plan, 1, 2, **{name: getattr(plan.tours[1].legs[2], name) * factor})


BREACHES: tuple[tuple[str, str, Breach], ...] = (
    ("plan id is no UUID", "plan_id", lambda p: replace(p, plan_id="plan-7")),
    ("two sites of one id", "duplicate_id", lambda p: replace(p, sites=(*p.sites, p.sites[0]))),
    ("two visits of one id", "duplicate_id", lambda p: visit(p, 1, visit_id="00|lift|1")),
    (
        "site with the id of a base",
        "duplicate_id",
        lambda p: replace(p, sites=(*p.sites, replace(p.sites[0], site_id="north"))),
    ),
    ("tour twice", "duplicate_id", lambda p: replace(p, tours=(*p.tours, p.tours[2]))),
    (
        "latitude beyond the pole",
        "bad_coordinates",
        lambda p: replace(p, sites=_swap(p.sites, 9, replace(p.sites[9], lat_deg=95.0))),
    ),
    ("visit of an unknown site", "unknown_site", lambda p: visit(p, 9, site_id="nowhere")),
    ("negative work", "bad_work", lambda p: visit(p, 9, work_s=-60.0)),
    ("work that is no number", "bad_work", lambda p: visit(p, 9, work_s=math.nan)),
    ("visit lost", "visit_lost", lambda p: replace(p, unplaced=())),
    (
        "visit twice in tours",
        "visit_twice",
        lambda p: stop(p, 2, 0, visit_id="00|lift|1", site_id="00"),
    ),
    (
        "visit in a tour and unplaced",
        "visit_twice",
        lambda p: replace(
            p,
            unplaced=(*p.unplaced, replace(p.unplaced[0], visit_id="08|lift|1", site_id="08")),
        ),
    ),
    ("unknown visit unplaced", "unknown_visit", lambda p: unplaced(p, visit_id="77|lift|1")),
    ("unplaced at another site", "wrong_site", lambda p: unplaced(p, site_id="03")),
    ("unplaced without words", "no_reason", lambda p: unplaced(p, message=" ")),
    ("unplaced without figures", "no_figures", lambda p: unplaced(p, figures=MappingProxyType({}))),
    ("unknown visit in a tour", "unknown_visit", lambda p: stop(p, 0, 0, visit_id="x|lift|1")),
    ("stop at another site", "wrong_site", lambda p: stop(p, 0, 0, site_id="03")),
    ("unknown inspector", "unknown_inspector", lambda p: tour(p, 0, inspector_id="carl")),
    ("tour named after another day", "tour_id", lambda p: tour(p, 0, tour_id="2026-10-22|anna")),
    (
        "tour on a day off",
        "not_working_day",
        lambda p: calendar(p, 0, days_off=frozenset({MONDAY})),
    ),
    (
        "tour on a holiday",
        "not_working_day",
        lambda p: calendar(p, 0, holidays=MappingProxyType({MONDAY: "Fair"})),
    ),
    (
        "tour on a free weekday",
        "not_working_day",
        lambda p: calendar(p, 0, weekdays=frozenset({5})),
    ),
    (
        "tour outside the horizon",
        "not_working_day",
        lambda p: programme(p, last_date=date(2026, 10, 25)),
    ),
    ("tours out of order", "tour_order", lambda p: replace(p, tours=p.tours[::-1])),
    ("tour without stops", "empty_tour", lambda p: tour(p, 2, stops=())),
    ("from another base", "wrong_base", lambda p: tour(p, 0, start_base_id="south")),
    ("to another base", "wrong_base", lambda p: tour(p, 0, end_base_id="north")),
    ("leaves before the shift", "before_shift", lambda p: shifted_tour(p, 2, -60.0)),
    ("ends after the shift", "after_shift", lambda p: shifted_tour(p, 2, 6 * 3600.0)),
    ("longer than overtime allows", "too_long", lambda p: person(p, 0, overtime_limit_s=600.0)),
    ("load beyond the limit", "load_limit", lambda p: person(p, 0, load_limit=1.2)),
    ("stop numbers", "stop_order", lambda p: stop(p, 0, 2, order=4)),
    ("leg numbers", "leg_order", lambda p: leg(p, 0, 2, order=7)),
    ("leg missing", "leg_count", lambda p: tour(p, 0, legs=p.tours[0].legs[:-1])),
    ("leg from elsewhere", "leg_chain", lambda p: leg(p, 0, 2, from_id="00")),
    (
        "leg leaves early",
        "leg_depart",
        lambda p: leg(p, 1, 2, depart=after(p.tours[1].legs[2].depart, -1)),
    ),
    (
        "leg arrives early",
        "leg_arrive",
        lambda p: leg(p, 1, 2, arrive=after(p.tours[1].legs[2].arrive, -1)),
    ),
    ("stop arrives early", "stop_arrive", lambda p: _moment(p, 1, 2, "arrive", -1)),
    ("return too early", "tour_back", lambda p: tour(p, 1, back=after(p.tours[1].back, -1))),
    ("no write-up", "tour_finish", lambda p: tour(p, 0, finish=p.tours[0].back)),
    ("leg faster than measured", "leg_time", lambda p: _leg_figure(p, "drive_s", 0.9999)),
    ("leg shorter than measured", "leg_length", lambda p: _leg_figure(p, "dist_m", 0.9999)),
    ("work before arrival", "start_before_arrival", lambda p: _moment(p, 1, 1, "start", -600)),
    ("work before opening", "outside_opening", lambda p: _moment(p, 0, 1, "start", -600)),
    ("work after closing", "outside_opening", lambda p: _moment(p, 0, 1, "start", 7200)),
    ("needless wait", "start_time", _late_start),
    ("work cut short", "work_time", lambda p: _moment(p, 1, 1, "leave", -60)),
    ("latest arrival too late", "latest_arrive", lambda p: _moment(p, 1, 1, "latest_arrive", 2)),
    (
        "latest arrival before arrival",
        "latest_before_arrival",
        lambda p: stop(p, 1, 1, latest_arrive=after(p.tours[1].stops[1].arrive, -60)),
    ),
    ("time without a zone", "no_zone", _naive),
    ("too early a date", "too_early", lambda p: visit(p, 4, earliest=MONDAY)),
    ("too late a date", "too_late", lambda p: visit(p, 7, latest=MONDAY - timedelta(days=1))),
    (
        "inspector not eligible",
        "not_eligible",
        lambda p: visit(p, 4, inspector_ids=frozenset({"anna"})),
    ),
    ("sum of work", "work_sum", lambda p: _sum(p, 1, "work_s", 1.0)),
    ("sum of driving", "drive_sum", lambda p: _sum(p, 1, "drive_s", -1.0)),
    ("sum of waiting", "wait_sum", lambda p: _sum(p, 0, "wait_s", -1.0)),
    ("sum of lengths", "dist_sum", lambda p: _sum(p, 1, "dist_m", -1.0)),
    ("sum of loads", "load_sum", lambda p: _sum(p, 1, "load", 0.5)),
    ("write-up of another length", "write_up", lambda p: _sum(p, 0, "write_up_s", -60.0)),
    ("overtime hidden", "overtime_sum", lambda p: tour(p, 0, overtime_s=0.0)),
    ("cost a cent too low", "tour_cost", _cheaper),
    (
        "other tariff",
        "tour_cost",
        lambda p: programme(
            p, tariff=Tariff(hour=41.5, km=0.53, overtime_hour=62.25, day_opened=0.0)
        ),
    ),
    (
        "bound above the cost",
        "bound",
        lambda p: tour(p, 1, bound=Bound(value=1e6, method="by hand", exact=True)),
    ),
    (
        "total cost",
        "total_cost",
        lambda p: replace(p, stages=(replace(p.stages[-1], cost=p.cost - 1),)),
    ),
    (
        "visits placed",
        "placed_count",
        lambda p: replace(p, stages=(replace(p.stages[-1], placed=11),)),
    ),
    (
        "capacity counts other visits",
        "capacity",
        lambda p: replace(p, capacity=replace(p.capacity, visits=10)),
    ),
    (
        "capacity counts other shifts",
        "capacity",
        lambda p: replace(p, capacity=replace(p.capacity, shifts=4)),
    ),
    (
        "capacity counts other work",
        "capacity",
        lambda p: replace(p, capacity=replace(p.capacity, work_h=p.capacity.work_h - 0.5)),
    ),
    (
        "capacity counts hours that are not there",
        "capacity",
        lambda p: replace(p, capacity=replace(p.capacity, shift_h=16.0)),
    ),
    (
        "capacity counts overtime that is not there",
        "capacity",
        lambda p: replace(p, capacity=replace(p.capacity, overtime_h=10.0)),
    ),
    (
        "travel below nothing",
        "capacity",
        lambda p: replace(p, capacity=replace(p.capacity, least_travel_h=-1.0)),
    ),
    (
        "least travel above what was driven",
        "least_travel",
        lambda p: replace(
            p,
            visits=(*p.visits[:9], p.visits[10]),
            unplaced=(),
            capacity=replace(p.capacity, least_travel_h=5.0),
        ),
    ),
    (
        "estimate called measured",
        "travel_note",
        lambda p: replace(p, travel=replace(p.travel, estimated=False)),
    ),
    (
        "interval narrowed",
        "travel_note",
        lambda p: replace(p, travel=replace(p.travel, high_factor=1.1)),
    ),
    (
        "another seed",
        "provenance",
        lambda p: replace(p, provenance=replace(p.provenance, seed=1)),
    ),
    ("unknown kind of exchange", "exchange_kind", lambda p: exchange(p, 0, kind="magic")),
    ("exchange left out", "exchange_step", lambda p: replace(p, exchanges=p.exchanges[1:])),
    ("exchange costs torn", "exchange_chain", lambda p: exchange(p, 1, cost_before=1.0)),
    ("exchange gain invented", "exchange_gain", lambda p: exchange(p, 0, cost_before=99.0)),
    (
        "exchange of legs never driven",
        "exchange_legs",
        lambda p: exchange(p, 1, legs_in=(("03", "04"), ("05", "06"))),
    ),
    (
        "exchanges end elsewhere",
        "exchange_end",
        lambda p: replace(p, exchanges=p.exchanges[:1]),
    ),
)
