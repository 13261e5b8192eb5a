"""A slow clock for whole plans: plain arithmetic, no kernel and no stage of the product."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from datetime import UTC, date, datetime, time, timedelta
from itertools import pairwise
from zoneinfo import ZoneInfo

from geographiclib.geodesic import Geodesic

from georoute.domain.people import Inspector
from georoute.domain.plan import DayTour, Exchange, Leg, Stop
from georoute.domain.programme import Programme, TravelMethod
from georoute.domain.sites import Base, Site, Visit

MEAN_RADIUS_M = 6_371_008.7714

Measure = Callable[[str, str], tuple[float, float]]
Span = tuple[datetime, datetime, datetime]
"""Arrival, start of work, leaving."""


def after(moment: datetime, seconds: float) -> datetime:
    return (moment.astimezone(UTC) + timedelta(seconds=seconds)).astimezone(moment.tzinfo)


def between(start: datetime, end: datetime) -> float:
    return (end.astimezone(UTC) - start.astimezone(UTC)).total_seconds()


def _great_circle_m(a: Site | Base, b: Site | Base) -> float:
    """Angle between position vectors by their dot and cross products."""

    def vector(spot: Site | Base) -> tuple[float, float, float]:
        lat, lon = math.radians(spot.lat_deg), math.radians(spot.lon_deg)
        return math.cos(lat) * math.cos(lon), math.cos(lat) * math.sin(lon), math.sin(lat)

    (ax, ay, az), (bx, by, bz) = vector(a), vector(b)
    cross = math.hypot(ay * bz - az * by, az * bx - ax * bz, ax * by - ay * bx)
    return MEAN_RADIUS_M * math.atan2(cross, ax * bx + ay * by + az * bz)


def measure_of(programme: Programme, sites: Sequence[Site]) -> Measure:
    """Seconds and metres of a leg, rounded to thousandths; geodesics by geographiclib."""
    spots: dict[str, Site | Base] = {base.base_id: base for base in programme.bases}
    spots |= {site.site_id: site for site in sites}
    travel = programme.travel

    def measure(from_id: str, to_id: str) -> tuple[float, float]:
        a, b = spots[from_id], spots[to_id]
        line = Geodesic.WGS84.Inverse(a.lat_deg, a.lon_deg, b.lat_deg, b.lon_deg)
        straight_m = float(line["s12"])
        if travel.method is TravelMethod.GREAT_CIRCLE:
            straight_m = _great_circle_m(a, b)
        if travel.method is not TravelMethod.DETOUR:
            length_m = travel.circuity * straight_m
            return round(length_m * 3.6 / travel.speed_kmh, 3), round(length_m, 3)
        km = straight_m / 1000
        length_km = max(km, travel.detour.length_at_1km * km**travel.detour.length_exponent)
        minutes = travel.detour.time_at_1km_min * km**travel.detour.time_exponent
        return round(minutes * 60, 3), round(length_km * 1000, 3)

    return measure


@dataclass(frozen=True)
class SlowClock:
    """Times one tour stop by stop, forwards for the clock and backwards for latest arrivals."""

    programme: Programme
    visits: Mapping[str, Visit]
    measure: Measure

    def _at(self, day: date, wall: time) -> datetime:
        return datetime.combine(day, wall, ZoneInfo(self.programme.zone))

    def _start(self, visit: Visit, arrive: datetime) -> datetime:
        for interval in visit.open_intervals:
            if between(arrive, interval.closes) >= 0:
                return arrive if between(arrive, interval.opens) <= 0 else interval.opens
        assert not visit.open_intervals, "the example leaves nothing outside opening hours"
        return arrive

    def _latest(self, visit: Visit, bound: datetime) -> datetime:
        for interval in reversed(visit.open_intervals):
            if between(interval.opens, bound) >= 0:
                return bound if between(bound, interval.closes) >= 0 else interval.closes
        return bound

    def _forwards(
        self, depart: datetime, picked: Sequence[Visit], places: Sequence[str]
    ) -> tuple[tuple[Leg, ...], list[Span]]:
        legs, spans, now = [], [], depart
        for k, (a, b) in enumerate(pairwise(places)):
            drive_s, dist_m = self.measure(a, b)
            arrive = after(now, drive_s)
            legs.append(
                Leg(
                    from_id=a,
                    to_id=b,
                    order=k + 1,
                    depart=now,
                    arrive=arrive,
                    drive_s=drive_s,
                    dist_m=dist_m,
                )
            )
            if k < len(picked):
                start = self._start(picked[k], arrive)
                now = after(start, picked[k].work_s + picked[k].access_s)
                spans.append((arrive, start, now))
        return tuple(legs), spans

    def _backwards(
        self, person: Inspector, depart: datetime, picked: Sequence[Visit], legs: Sequence[Leg]
    ) -> list[datetime]:
        overnight = person.shift_end <= person.shift_start
        ends = self._at(depart.date() + timedelta(days=overnight), person.shift_end)
        limit = after(depart, person.paid_s + person.overtime_limit_s)
        bound = after(limit if between(limit, ends) > 0 else ends, -person.write_up_s)
        latest: list[datetime] = []
        for visit, leg in zip(reversed(picked), reversed(legs), strict=False):
            away_s = leg.drive_s + visit.work_s + visit.access_s
            bound = self._latest(visit, after(bound, -away_s))
            latest.insert(0, bound)
        return latest

    def cost(self, person: Inspector, duration_s: float, dist_m: float) -> float:
        tariff = self.programme.tariff
        paid_s = min(duration_s, person.paid_s)
        hours = tariff.hour * paid_s + tariff.overtime_hour * (duration_s - paid_s)
        return round(hours / 3600 + tariff.km * dist_m / 1000 + tariff.day_opened, 6)

    def tour(self, inspector_id: str, day: date, order: Sequence[str]) -> DayTour:
        (person,) = (p for p in self.programme.inspectors if p.inspector_id == inspector_id)
        picked = [self.visits[visit_id] for visit_id in order]
        places = [person.start_base_id, *(v.site_id for v in picked), person.end_base_id]
        depart = self._at(day, person.shift_start)
        legs, spans = self._forwards(depart, picked, places)
        latest = self._backwards(person, depart, picked, legs)
        finish = after(legs[-1].arrive, person.write_up_s)
        duration_s = between(depart, finish)
        dist_m = round(sum(leg.dist_m for leg in legs), 3)
        return DayTour(
            tour_id=f"{day}|{inspector_id}",
            inspector_id=inspector_id,
            day=day,
            start_base_id=person.start_base_id,
            end_base_id=person.end_base_id,
            depart=depart,
            back=legs[-1].arrive,
            finish=finish,
            stops=_stops(picked, spans, latest),
            legs=legs,
            work_s=sum(v.work_s + v.access_s for v in picked),
            drive_s=round(sum(leg.drive_s for leg in legs), 3),
            wait_s=round(sum(between(arrive, start) for arrive, start, _ in spans), 3),
            write_up_s=person.write_up_s,
            overtime_s=round(max(0.0, duration_s - person.paid_s), 3),
            dist_m=dist_m,
            load=sum(v.load for v in picked),
            cost=self.cost(person, duration_s, dist_m),
        )


def _stops(
    picked: Sequence[Visit], spans: Sequence[Span], latest: Sequence[datetime]
) -> tuple[Stop, ...]:
    return tuple(
        Stop(
            visit_id=visit.visit_id,
            site_id=visit.site_id,
            order=k,
            arrive=arrive,
            start=start,
            leave=leave,
            latest_arrive=late,
        )
        for k, (visit, (arrive, start, leave), late) in enumerate(
            zip(picked, spans, latest, strict=True), 1
        )
    )


def _travel_cost(programme: Programme, measure: Measure, places: Sequence[str]) -> float:
    figures = [measure(a, b) for a, b in pairwise(places)]
    tariff = programme.tariff
    hours, km = sum(s for s, _ in figures) / 3600, sum(m for _, m in figures) / 1000
    return round(tariff.hour * hours + tariff.km * km, 6)


def exchange_log(programme: Programme, measure: Measure, tour: DayTour) -> tuple[Exchange, ...]:
    """A log of two exchanges that ends in ``tour``: rotated, then reversed, then as it is."""
    sites = [stop.site_id for stop in tour.stops]
    orders = [[*sites[1:], sites[0]], sites[::-1], sites]
    chains = [[tour.start_base_id, *order, tour.end_base_id] for order in orders]
    entries = []
    for step, (before, later) in enumerate(pairwise(chains), 1):
        went = Counter(tuple(sorted(leg)) for leg in pairwise(before))
        came = Counter(tuple(sorted(leg)) for leg in pairwise(later))
        if went == came:
            continue  # the same round the other way
        entries.append(
            Exchange(
                tour_id=tour.tour_id,
                step=step,
                kind="or_opt" if step == 1 else "two_opt",
                legs_out=tuple((a, b) for a, b in (went - came).elements()),
                legs_in=tuple((a, b) for a, b in (came - went).elements()),
                cost_before=_travel_cost(programme, measure, before),
                cost_after=_travel_cost(programme, measure, later),
            )
        )
    return tuple(entries)
