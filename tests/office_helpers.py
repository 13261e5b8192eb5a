"""A small plan whose measures can be worked out by hand; all names are invented."""

from __future__ import annotations

from dataclasses import replace
from datetime import date, datetime, timedelta

from pyproj import Geod

from georoute.domain.plan import DayTour, Exchange, Leg, Plan, ReasonCode, Stop, Unplaced
from georoute.domain.sites import OpenInterval, Site, Visit, visit_id_of
from tests.publish_helpers import BASES, ZONE, programme, sample_plan

THURSDAY, FRIDAY, MONDAY = date(2026, 3, 5), date(2026, 3, 6), date(2026, 3, 9)
HOUR_S = 3600.0
GEOD = Geod(ellps="WGS84")

# site: metres north and east of the base, work and access in hours, due, latest
SITES = {
    "v1": (3000.0, 0.0, 1.0, 0.5, date(2026, 2, 20), None),
    "v2": (0.0, 9000.0, 2.0, 0.0, FRIDAY, None),
    "v3": (3000.0, -400.0, 1.5, 0.0, date(2026, 3, 8), None),  # a Sunday, still of week 10
    "v4": (3000.0, -150.0, 3.0, 0.5, None, MONDAY),
    "v5": (3000.0, 4000.0, 2.0, 0.0, date(2026, 3, 20), None),
    "v6": (0.0, 9500.0, 0.5, 0.0, None, None),
}


def at(day: date, hour: float) -> datetime:
    """Return a local moment."""
    return datetime(day.year, day.month, day.day, tzinfo=ZONE) + timedelta(hours=hour)


def _site(key: str) -> Site:
    north_m, east_m = SITES[key][:2]
    lon, lat, _ = GEOD.fwd(BASES[0].lon_deg, BASES[0].lat_deg, 0.0, north_m)
    lon, lat, _ = GEOD.fwd(lon, lat, 90.0, east_m)
    return Site(site_id=key, name=f"Culvert {key}", lat_deg=lat, lon_deg=lon)


def _visit(key: str) -> Visit:
    _, _, work_h, access_h, due, latest = SITES[key]
    closes = (OpenInterval(opens=at(THURSDAY, 8), closes=at(THURSDAY, 11)),) if key == "v5" else ()
    return Visit(
        visit_id=visit_id_of(key, "check"),
        site_id=key,
        task="check",
        work_s=work_h * HOUR_S,
        access_s=access_h * HOUR_S,
        due=due,
        latest=latest,
        open_intervals=closes,
    )


def _tour(person: str, day: date, stops: dict[str, float], hours: dict[str, float]) -> DayTour:
    """Return a tour with the hours given; ``stops`` are sites with the hour of arrival."""
    length_h = sum(hours[part] for part in ("drive", "work", "wait", "write_up"))
    legs = [
        Leg(
            from_id=BASES[0].base_id,
            to_id=BASES[0].base_id,
            order=k + 1,
            depart=at(day, 8),
            arrive=at(day, 8),
            drive_s=hours["drive"] * HOUR_S / (len(stops) + 1),
            dist_m=hours["km"] * 1000 / (len(stops) + 1),
        )
        for k in range(len(stops) + 1)
    ]
    return DayTour(
        tour_id=f"{day.isoformat()}|{person}",
        inspector_id=person,
        day=day,
        start_base_id=BASES[0].base_id,
        end_base_id=BASES[0].base_id,
        depart=at(day, 8),
        back=at(day, 8 + length_h - hours["write_up"]),
        finish=at(day, 8 + length_h),
        stops=tuple(
            Stop(
                visit_id=visit_id_of(key, "check"),
                site_id=key,
                order=k,
                arrive=at(day, hour),
                start=at(day, hour),
                leave=at(day, hour + SITES[key][2]),
                latest_arrive=at(day, hour + 0.5),
            )
            for k, (key, hour) in enumerate(stops.items(), start=1)
        ),
        legs=tuple(legs),
        work_s=hours["work"] * HOUR_S,
        drive_s=hours["drive"] * HOUR_S,
        wait_s=hours["wait"] * HOUR_S,
        write_up_s=hours["write_up"] * HOUR_S,
        overtime_s=max(0.0, length_h - 8.5) * HOUR_S,
        dist_m=hours["km"] * 1000,
        load=0.0,
        cost=0.0,
    )


def _exchange(tour: DayTour, step: int, kind: str, cost: tuple[float, float]) -> Exchange:
    before, after = cost
    return Exchange(
        tour_id=tour.tour_id,
        step=step,
        kind=kind,
        legs_out=(),
        legs_in=(),
        cost_before=before,
        cost_after=after,
    )


def hand_plan() -> Plan:
    """Return three tours of two inspectors over a Thursday, a Friday and the next Monday.

    Shifts are 08:00 to 18:00, 8.5 h paid, 1 h overtime, 0.5 h write-up; an hour costs 9000, an
    hour of overtime 13500, a kilometre 250, a day opened 1000.
    """
    setting = programme(days=1, people=2)
    people = tuple(
        replace(person, start_base_id="LS", end_base_id="LS") for person in setting.inspectors
    )
    setting = replace(
        setting,
        first_date=THURSDAY,
        last_date=MONDAY,
        inspectors=people,
        tariff=replace(setting.tariff, day_opened=1000),
    )
    long = {"drive": 1.0, "work": 7.0, "wait": 0.5, "write_up": 0.5, "km": 40.0}
    short = {"drive": 0.5, "work": 5.0, "wait": 0.0, "write_up": 0.5, "km": 20.0}
    late = {"drive": 1.0, "work": 2.5, "wait": 0.0, "write_up": 0.5, "km": 60.0}
    tours = (
        _tour("insp-1", THURSDAY, {"v1": 9.0, "v5": 11 + 1 / 3}, long),
        _tour("insp-1", FRIDAY, {"v4": 9.0}, short),
        _tour("insp-2", MONDAY, {"v3": 9.0}, late),
    )
    left = tuple(
        Unplaced(visit_id=visit_id_of(key, "check"), site_id=key, code=code, message="by hand")
        for key, code in (("v2", ReasonCode.CLOSED), ("v6", ReasonCode.NO_WORKING_TIME_LEFT))
    )
    return replace(
        sample_plan(stops=1),
        programme=setting,
        sites=tuple(_site(key) for key in SITES),
        visits=tuple(_visit(key) for key in SITES),
        tours=tours,
        unplaced=left,
        exchanges=(
            _exchange(tours[0], 1, "two_opt", (900.0, 700.0)),
            _exchange(tours[0], 2, "relocate", (700.0, 1000.0)),
            _exchange(tours[0], 3, "or_opt", (1000.0, 950.0)),
            _exchange(tours[2], 1, "relocate", (400.0, 300.0)),
        ),
    )
