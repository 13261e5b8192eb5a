"""Plans made by hand for the tests of the pages; all names are invented."""

from __future__ import annotations

import math
import random
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from datetime import date, datetime, time, timedelta
from zoneinfo import ZoneInfo

from georoute.domain.costs import Tariff
from georoute.domain.people import Inspector, WorkingCalendar, shift_id_of
from georoute.domain.plan import (
    Capacity,
    DayTour,
    Leg,
    Plan,
    Provenance,
    ReasonCode,
    StageCost,
    Stop,
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
from georoute.domain.run import EFFORTS
from georoute.domain.sites import Base, OpenInterval, Site, Visit, visit_id_of

ZONE = ZoneInfo("America/Santiago")
FIRST_DAY = date(2026, 3, 2)
BASES = (
    Base(base_id="LS", name="Base La Serena", lat_deg=-29.9045, lon_deg=-71.2489),
    Base(base_id="CQ", name="Base Coquimbo", lat_deg=-29.9665, lon_deg=-71.3330),
)
PEOPLE = (("insp-1", "Rosa Tapia"), ("insp-2", "Nelson Araya"), ("insp-3", "Ingrid Cuevas"))
KINDS = ("Lift", "Boiler", "Playground", "Crane", "Pump house", "Water tank")
STREETS = ("Los Carrera", "Avenida Balmaceda", "Cuatro Esquinas", "Los Plátanos", "El Santo")
HOSTILE = (
    "<script>window.hacked=1</script>",
    "</script><script>window.hacked=2</script>",
    "<img src=x onerror=window.hacked=3>",
    "`${window.hacked=4}` {{ 7*7 }} {% raw %} $& ${1}",
    "\"><svg onload=window.hacked=5> & ' \u2028 <!-- -->",
)


def programme(
    *, days: int = 1, people: int = 1, title: str = "Lifts and boilers, La Serena"
) -> Programme:
    """Return a programme of some days and inspectors from one or two bases."""
    inspectors = tuple(
        Inspector(
            inspector_id=key,
            name=name,
            start_base_id=BASES[k % 2].base_id,
            end_base_id=BASES[k % 2].base_id,
            shift_start=time(8, 0),
            shift_end=time(18, 0),
            paid_s=8.5 * 3600,
            overtime_limit_s=3600,
            calendar=WorkingCalendar(),
            write_up_s=1800,
        )
        for k, (key, name) in enumerate(PEOPLE[:people])
    )
    detour = DetourModel(
        length_at_1km=1.5,
        length_exponent=0.95,
        time_at_1km_min=2.9,
        time_exponent=0.74,
        low_factor=0.73,
        high_factor=1.37,
    )
    return Programme(
        title=title,
        zone=ZONE.key,
        first_date=FIRST_DAY,
        last_date=FIRST_DAY + timedelta(days=days - 1),
        bases=BASES[: min(people, 2)],
        inspectors=inspectors,
        tariff=Tariff(currency="CLP", hour=9000, km=250, overtime_hour=13500, day_opened=0),
        travel=TravelSettings(
            method=TravelMethod.DETOUR, speed_kmh=32, circuity=1.4, detour=detour
        ),
        default_work_s=1200,
        default_access_s=0,
        seed=1,
        effort=EFFORTS["normal"],
        register=RegisterSource(path="register.csv"),
    )


def _travel(a: Base | Site, b: Base | Site) -> tuple[float, float]:
    """Return seconds and metres by the detour model (small plane, fit for a sample)."""
    dy = (b.lat_deg - a.lat_deg) * 111_000
    dx = (b.lon_deg - a.lon_deg) * 111_000 * math.cos(math.radians(a.lat_deg))
    km = max(0.05, math.hypot(dx, dy) / 1000)
    return 60 * 2.9 * km**0.74, max(km, 1.5 * km**0.95) * 1000


def sites_around(base: Base, *, count: int, seed: int, prefix: str) -> list[Site]:
    """Return sites inland of a base, in a round order."""
    rng = random.Random(seed)  # noqa: S311  # a sample, no secret
    towards = math.radians(-75 + (seed % 7) * 37 + (seed // 100) * 19)
    far = 0.035 + 0.01 * (seed % 3)
    middle = (base.lat_deg + far * math.sin(towards), base.lon_deg + far * abs(math.cos(towards)))
    raw = [(middle[0] + rng.gauss(0, 0.014), middle[1] + rng.gauss(0, 0.013)) for _ in range(count)]
    raw.sort(key=lambda p: math.atan2(p[0] - middle[0], p[1] - middle[1]))
    return [
        Site(
            site_id=f"{prefix}-{k:02d}",
            lat_deg=lat,
            lon_deg=lon,
            name=f"{rng.choice(KINDS)} {rng.randint(100, 899)}",
            address=f"{rng.choice(STREETS)} {rng.randint(100, 2900)}, La Serena",
            contact=f"Concierge, ext. {rng.randint(10, 99)}" if k % 3 == 0 else "",
            notes="Gate at the side street; key 14 from the base" if k % 4 == 1 else "",
            row=k + 2,
            extra={"asset_no": f"A{rng.randint(1000, 9999)}"},
        )
        for k, (lat, lon) in enumerate(raw)
    ]


def _at(day: date, hour: float) -> datetime:
    midnight = datetime(day.year, day.month, day.day, tzinfo=ZONE)
    return midnight + timedelta(hours=hour)


def _visit(site: Site, task: str, k: int, day: date) -> Visit:
    """Return a visit of 10 to 30 minutes; every fifth opens late, every fourth is due soon."""
    windows = (OpenInterval(opens=_at(day, 9.5 + 0.25 * k), closes=_at(day, 11.5 + 0.4 * k)),)
    return Visit(
        visit_id=visit_id_of(site.site_id, task),
        site_id=site.site_id,
        task=task,
        work_s=600 + 300 * (k % 5),
        access_s=300 if k % 3 == 0 else 0,
        due=day + timedelta(days=12 - 2 * k) if k % 4 == 0 else None,
        open_intervals=windows if k % 5 == 2 else (),
    )


def timed_tour(
    setting: Programme, person: Inspector, day: date, sites: Sequence[Site], visits: Sequence[Visit]
) -> DayTour:
    """Time a tour through sites in the order given, leaving at the start of the shift."""
    base = next(b for b in setting.bases if b.base_id == person.start_base_id)
    depart = now = datetime.combine(day, person.shift_start, tzinfo=ZONE)
    places: list[Base | Site] = [base, *sites, base]
    legs, stops = [], []
    for k, there in enumerate(places[1:], start=1):
        drive_s, dist_m = _travel(places[k - 1], there)
        arrive = now + timedelta(seconds=drive_s)
        here = places[k - 1]
        legs.append(
            Leg(
                from_id=here.site_id if isinstance(here, Site) else here.base_id,
                to_id=there.site_id if isinstance(there, Site) else there.base_id,
                order=k,
                depart=now,
                arrive=arrive,
                drive_s=drive_s,
                dist_m=dist_m,
            )
        )
        now = arrive
        if isinstance(there, Site):
            visit = visits[k - 1]
            start = max([now, *(span.opens for span in visit.open_intervals)])
            now = start + timedelta(seconds=visit.work_s + visit.access_s)
            latest = max(
                [arrive + timedelta(minutes=50), *(s.closes for s in visit.open_intervals)]
            )
            stops.append(
                Stop(
                    visit_id=visit.visit_id,
                    site_id=there.site_id,
                    order=k,
                    arrive=arrive,
                    start=start,
                    leave=now,
                    latest_arrive=latest,
                )
            )
    work_s = sum(visit.work_s + visit.access_s for visit in visits)
    return _summed(setting, person, (depart, now), stops, legs, work_s=work_s)


def _summed(
    setting: Programme,
    person: Inspector,
    out_and_back: tuple[datetime, datetime],
    stops: list[Stop],
    legs: list[Leg],
    *,
    work_s: float,
) -> DayTour:
    depart, back = out_and_back
    drive_s = sum(leg.drive_s for leg in legs)
    dist_m = sum(leg.dist_m for leg in legs)
    finish = back + timedelta(seconds=person.write_up_s)
    length_s = (finish - depart).total_seconds()
    over_s = max(0.0, length_s - person.paid_s)
    money = setting.tariff
    cost = (length_s - over_s) / 3600 * money.hour + over_s / 3600 * money.overtime_hour
    return DayTour(
        tour_id=shift_id_of(person.inspector_id, depart.date()),
        inspector_id=person.inspector_id,
        day=depart.date(),
        start_base_id=person.start_base_id,
        end_base_id=person.end_base_id,
        depart=depart,
        back=back,
        finish=finish,
        stops=tuple(stops),
        legs=tuple(legs),
        work_s=work_s,
        drive_s=drive_s,
        wait_s=sum(stop.wait_s for stop in stops),
        write_up_s=person.write_up_s,
        overtime_s=over_s,
        dist_m=dist_m,
        load=0.0,
        cost=cost + dist_m / 1000 * money.km,
    )


def unplaced_visit(site: Site, task: str, code: ReasonCode, message: str) -> tuple[Visit, Unplaced]:
    """Return a visit and the entry that says why it is not in the plan."""
    visit = Visit(
        visit_id=visit_id_of(site.site_id, task), site_id=site.site_id, task=task, work_s=1800
    )
    left = Unplaced(visit_id=visit.visit_id, site_id=site.site_id, code=code, message=message)
    return visit, left


REASONS = (
    (ReasonCode.CLOSED, "open 20:00-21:00 only; the shift ends at 18:00"),
    (ReasonCode.TOO_FAR_FOR_SHIFT, "out and back 9 h 40 min + work 30 min > shift 9 h 30 min"),
)


@dataclass
class Parts:
    """What a sample is put together from."""

    sites: list[Site] = field(default_factory=list)
    visits: list[Visit] = field(default_factory=list)
    tours: list[DayTour] = field(default_factory=list)
    unplaced: list[Unplaced] = field(default_factory=list)


def _add_tours(parts: Parts, setting: Programme, *, days: int, stops: int) -> None:
    for d in range(days):
        for p, person in enumerate(setting.inspectors):
            day = FIRST_DAY + timedelta(days=d)
            base = next(b for b in setting.bases if b.base_id == person.start_base_id)
            here = sites_around(base, count=stops, seed=100 * d + p, prefix=f"S{d}{p}")
            todo = [_visit(site, "yearly check", k, day) for k, site in enumerate(here)]
            parts.sites += here
            parts.visits += todo
            parts.tours.append(timed_tour(setting, person, day, here, todo))


def _add_unplaced(parts: Parts, base: Base, *, count: int) -> None:
    for k in range(count):
        site = sites_around(base, count=1, seed=900 + k, prefix=f"U{k}")[0]
        code, message = REASONS[k % len(REASONS)]
        visit, entry = unplaced_visit(site, "yearly check", code, message)
        parts.sites.append(site)
        parts.visits.append(visit)
        parts.unplaced.append(entry)


def _capacity(visits: list[Visit], shifts: int) -> Capacity:
    return Capacity(
        visits=len(visits),
        shifts=shifts,
        work_h=sum(visit.work_s + visit.access_s for visit in visits) / 3600,
        least_travel_h=1.5 * shifts,
        shift_h=8.5 * shifts,
        overtime_h=1.0 * shifts,
    )


def _stages(parts: Parts) -> tuple[StageCost, ...]:
    cost, visits = sum(tour.cost for tour in parts.tours), len(parts.visits)
    return (
        StageCost(stage="split", cost=cost * 1.21, placed=visits),
        StageCost(stage="order", cost=cost * 1.06, placed=visits),
        StageCost(stage="days together", cost=cost, placed=visits - len(parts.unplaced)),
    )


def sample_plan(*, days: int = 1, people: int = 1, stops: int = 15, unplaced: int = 0) -> Plan:
    """Return a plan of ``days`` x ``people`` tours."""
    setting = programme(days=days, people=people)
    parts = Parts()
    _add_tours(parts, setting, days=days, stops=stops)
    _add_unplaced(parts, setting.bases[0], count=unplaced)
    return Plan(
        plan_id="5d0a1c3e-8f0b-4a52-9d5c-0d6f6c1f7a10",
        programme=setting,
        sites=tuple(parts.sites),
        visits=tuple(parts.visits),
        tours=tuple(parts.tours),
        unplaced=tuple(parts.unplaced),
        capacity=_capacity(parts.visits, days * people),
        travel=TravelNote(
            source="detour model from crow-fly distance",
            estimated=True,
            low_factor=0.73,
            high_factor=1.37,
        ),
        stages=_stages(parts),
        exchanges=(),
        provenance=Provenance(
            version="0.1.0",
            register_source="register.csv",
            register_sha256="0" * 64,
            programme_sha256="1" * 64,
            seed=1,
            effort="normal",
            seconds=None,
            stop_rule=StopRule.EFFORT_USED,
        ),
        extra_columns=("asset_no",),
    )


def with_late_stop(plan: Plan, *, order: int = 8, minutes: int = 22) -> Plan:
    """Return the plan with a stop of its first tour whose opening hours ended before it starts."""
    stop = plan.tours[0].stops[order - 1]
    closes = stop.start - timedelta(minutes=minutes)
    window = OpenInterval(opens=closes - timedelta(hours=2), closes=closes)
    visits = tuple(
        replace(visit, open_intervals=(window,)) if visit.visit_id == stop.visit_id else visit
        for visit in plan.visits
    )
    first = plan.tours[0]
    stops = [replace(s, latest_arrive=closes) if s is stop else s for s in first.stops]
    tours = (replace(first, stops=tuple(stops)), *plan.tours[1:])
    return replace(plan, visits=visits, tours=tours)


def hostile_plan() -> Plan:
    """Return a plan with hostile text in every field that a user fills."""
    plan = sample_plan(stops=len(HOSTILE), unplaced=1)
    evil = dict(zip([site.site_id for site in plan.sites], HOSTILE * 2, strict=False))
    sites = tuple(
        replace(
            site,
            name=evil[site.site_id],
            address=evil[site.site_id],
            contact=evil[site.site_id],
            notes=evil[site.site_id],
            extra={evil[site.site_id]: evil[site.site_id]},
        )
        for site in plan.sites
    )
    visits = tuple(replace(visit, task=evil[visit.site_id]) for visit in plan.visits)
    setting = plan.programme
    setting = replace(
        setting,
        register=replace(setting.register, credit=HOSTILE[0]),
        title=HOSTILE[1],
        bases=tuple(replace(base, name=HOSTILE[1]) for base in setting.bases),
        inspectors=tuple(replace(person, name=HOSTILE[3]) for person in setting.inspectors),
        tariff=replace(setting.tariff, currency="<b>"),
    )
    return replace(
        plan,
        programme=setting,
        sites=sites,
        visits=visits,
        unplaced=tuple(replace(left, message=HOSTILE[2]) for left in plan.unplaced),
        travel=replace(plan.travel, source=HOSTILE[0]),
        provenance=replace(plan.provenance, register_source=HOSTILE[4]),
    )
