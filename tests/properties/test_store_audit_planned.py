"""Tours timed by the product's own clock pass the audit, which times them a second way.

Orders are drawn at random and kept where the product calls them feasible; nothing is searched.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from datetime import date, timedelta
from types import MappingProxyType

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from georoute.audit import audit
from georoute.domain.costs import Places
from georoute.domain.plan import Plan, ReasonCode, StageCost, TravelNote, Unplaced
from georoute.domain.programme import Programme, TravelMethod
from georoute.domain.sites import Base, OpenInterval, Site, Visit
from georoute.measure import measure
from georoute.problem import Packed, Solution, pack
from georoute.problem.capacity import capacity
from georoute.timetable import is_feasible, tours_of
from tests.examples import at_most
from tests.store_clock import after
from tests.store_helpers import FRIDAY, example_plan, example_programme, local

METHODS = (TravelMethod.DETOUR, TravelMethod.GEODESIC, TravelMethod.GREAT_CIRCLE)


@st.composite
def visits(draw: st.DrawFn, sites: tuple[Site, ...]) -> tuple[Visit, ...]:
    found = []
    for k in range(draw(st.integers(1, 12))):
        site = draw(st.sampled_from(sites))
        opens = [
            local(FRIDAY + timedelta(days=d), draw(st.integers(6, 14)))
            for d in range(4)
            if draw(st.booleans())
        ]
        windows = [
            OpenInterval(opens=moment, closes=after(moment, draw(st.integers(0, 14_400))))
            for moment in opens
        ]
        found.append(
            Visit(
                visit_id=f"{site.site_id}|task {k}|1",
                site_id=site.site_id,
                task=f"task {k}",
                work_s=draw(st.floats(0, 5_400)),
                access_s=draw(st.floats(0, 600)),
                load=draw(st.floats(0, 2)),
                open_intervals=tuple(windows) if draw(st.booleans()) else (),
                inspector_ids=draw(st.sampled_from([frozenset(), frozenset({"anna"})])),
                earliest=draw(st.none() | st.just(date(2026, 10, 24))),
            )
        )
    return tuple(found)


@st.composite
def registers(draw: st.DrawFn) -> tuple[tuple[Site, ...], tuple[Visit, ...]]:
    sites = tuple(
        Site(
            site_id=f"s{k}",
            lat_deg=45 + draw(st.floats(-0.3, 0.3)),
            lon_deg=5 + draw(st.floats(-0.3, 0.3)),
        )
        for k in range(draw(st.integers(1, 6)))
    )
    return sites, draw(visits(sites))


def packed_of(
    programme: Programme, sites: tuple[Site, ...], found: tuple[Visit, ...]
) -> tuple[Packed, TravelNote]:
    spots: list[Base | Site] = [*programme.bases, *sites]
    places = Places(
        ids=(*(b.base_id for b in programme.bases), *(s.site_id for s in sites)),
        lat_deg=np.array([spot.lat_deg for spot in spots]),
        lon_deg=np.array([spot.lon_deg for spot in spots]),
    )
    costs, _ = measure(places, programme.travel)
    note = TravelNote(
        source=costs.source,
        estimated=costs.estimated,
        low_factor=costs.low_factor,
        high_factor=costs.high_factor,
    )
    return pack(programme, found, places, costs), note


def random_orders(packed: Packed, shifts: list[int]) -> tuple[NDArray[np.int64], ...]:
    """Put each visit at the end of the order drawn for it where that stays feasible."""
    orders = [np.zeros(0, np.int64) for _ in packed.shifts]
    for v, drawn in enumerate(shifts):
        s = drawn % len(orders)
        longer = np.append(orders[s], v)
        if is_feasible(packed.problem, s, longer):
            orders[s] = longer
    return tuple(orders)


def left_out(visit: Visit) -> Unplaced:
    figures: Mapping[str, float] = MappingProxyType({"work_s": visit.work_s})
    return Unplaced(
        visit_id=visit.visit_id,
        site_id=visit.site_id,
        code=ReasonCode.NOT_FOUND_BY_SEARCH,
        message="Not drawn.",
        figures=figures,
    )


def assembled(
    packed: Packed, note: TravelNote, sites: tuple[Site, ...], solution: Solution
) -> Plan:
    tours = tours_of(packed, solution)
    placed = sum(len(tour.stops) for tour in tours)
    unplaced = solution.unplaced(len(packed.visits)).tolist()
    return replace(
        example_plan(),
        programme=packed.programme,
        sites=sites,
        visits=packed.visits,
        tours=tours,
        unplaced=tuple(left_out(packed.visits[v]) for v in unplaced),
        capacity=capacity(packed.problem),
        travel=note,
        stages=(StageCost(stage="drawn", cost=sum(t.cost for t in tours), placed=placed),),
        exchanges=(),
        extra_columns=(),
    )


@settings(max_examples=at_most(40))
@given(
    registers(),
    st.sampled_from(METHODS),
    st.lists(st.integers(0, 2), min_size=12, max_size=12),
)
def test_feasible_tours_of_the_product_pass(
    register: tuple[tuple[Site, ...], tuple[Visit, ...]], method: TravelMethod, shifts: list[int]
) -> None:
    sites, found = register
    packed, note = packed_of(example_programme(method), sites, found)
    orders = random_orders(packed, shifts[: len(found)])
    plan = assembled(packed, note, sites, Solution(orders=orders))
    assert [(f.code, f.message) for f in audit(plan)] == []
