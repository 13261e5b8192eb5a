"""What a day page and a run sheet say about one tour, in words and figures ready to show."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from georoute.domain.instants import elapsed_s
from georoute.publishing.leg_paths import road_points_of
from georoute.publishing.road_words import WayWords, last_metres, way_words
from georoute.publishing.time_rule import TimeRule, time_rule

if TYPE_CHECKING:
    from collections.abc import Mapping
    from datetime import date, datetime

    from georoute.domain.people import Inspector, Shift
    from georoute.domain.plan import DayTour, Leg, Plan, Stop
    from georoute.domain.roads import RoadPoint
    from georoute.domain.sites import Base, Site, Visit
    from georoute.publishing.figures import Figures
    from georoute.publishing.looks import TourLook
    from georoute.publishing.words import Words

__all__ = ["DayView", "PlanIndex", "StopView", "day_view", "lateness_s", "window_text"]


@dataclass(frozen=True, slots=True, kw_only=True)
class PlanIndex:
    """The things of a plan by their ids."""

    sites: Mapping[str, Site]
    visits: Mapping[str, Visit]
    bases: Mapping[str, Base]
    inspectors: Mapping[str, Inspector]
    shifts: Mapping[str, Shift]
    road_points: Mapping[str, RoadPoint]

    @classmethod
    def of(cls, plan: Plan) -> PlanIndex:
        """Index ``plan``."""
        programme = plan.programme
        return cls(
            sites={site.site_id: site for site in plan.sites},
            visits={visit.visit_id: visit for visit in plan.visits},
            bases={base.base_id: base for base in programme.bases},
            inspectors={person.inspector_id: person for person in programme.inspectors},
            shifts={shift.shift_id: shift for shift in programme.shifts()},
            road_points=road_points_of(plan),
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class StopView:
    """One stop, ready to show. ``state`` is ``plain``, ``wait`` or ``late``."""

    number: int
    name: str
    site_id: str
    task: str
    state: str
    note: str
    state_text: str
    arrive: str
    latest: str
    start: str
    leave: str
    work: str
    window: str
    due: str
    overdue: str
    address: str
    contact: str
    notes: str
    extra: tuple[tuple[str, str], ...]
    coordinates: str
    lat_deg: float
    lon_deg: float
    leg_drive: str
    leg_length: str
    leave_ms: int
    way: WayWords
    off_road: str


@dataclass(frozen=True, slots=True, kw_only=True)
class DayView:
    """One tour, ready to show."""

    tour: DayTour
    look: TourLook
    date_long: str
    inspector: str
    from_base: str
    start_base: Base
    end_base: Base
    totals: tuple[tuple[str, str], ...]
    out: str
    back: str
    finish: str
    shift_end: str
    stops: tuple[StopView, ...]
    home_drive: str
    home_length: str
    home_way: WayWords
    has_ferry: bool
    proof: str
    rule: TimeRule


def lateness_s(visit: Visit, stop: Stop) -> float:
    """Return by how many seconds work starts after the last opening before it has closed."""
    intervals = visit.open_intervals
    if not intervals or any(span.opens <= stop.start <= span.closes for span in intervals):
        return 0.0
    closed = [span.closes for span in intervals if span.closes < stop.start]
    return elapsed_s(max(closed), stop.start) if closed else 0.0


def window_text(visit: Visit, tour: DayTour, figures: Figures) -> str:
    """Return the opening hours on the day of the tour, or that any time will do."""
    today = [
        span
        for span in visit.open_intervals
        if span.opens.astimezone(figures.zone).date()
        <= tour.day
        <= span.closes.astimezone(figures.zone).date()
    ]
    if not today:
        return figures.words("any_time")
    return ", ".join(
        f"{figures.clock(span.opens, tour.day, round_up=True)}\u2013"
        f"{figures.clock(span.closes, tour.day, round_up=False)}"
        for span in today
    )


def _state(visit: Visit, stop: Stop, figures: Figures, day: date) -> tuple[str, str, str]:
    """Return the state of a stop, the note of its plate, and the sentence of its row."""
    words = figures.words
    late = figures.minutes(lateness_s(visit, stop))
    if late:
        return "late", words("late_minutes", minutes=late), words("late_text", minutes=late)
    wait = figures.minutes(stop.wait_s)
    if wait:
        start = figures.clock(stop.start, day)
        text = words("early_text", minutes=wait, start=start)
        return "wait", words("wait_minutes", minutes=wait), text
    return "plain", "", ""


def _work_text(visit: Visit, figures: Figures) -> str:
    work = figures.duration(visit.work_s)
    if visit.access_s <= 0:
        return work
    return figures.words("access_minutes", work=work, access=figures.duration(visit.access_s))


def _milliseconds(moment: datetime) -> int:
    return round(moment.timestamp() * 1000)


def _stop_view(index: PlanIndex, tour: DayTour, stop: Stop, leg: Leg, figures: Figures) -> StopView:
    visit = index.visits[stop.visit_id]
    site = index.sites[stop.site_id]
    state, note, sentence = _state(visit, stop, figures, tour.day)
    overdue = visit.due is not None and visit.due < tour.day
    due = figures.date_short(visit.due) if visit.due else ""
    return StopView(
        number=stop.order,
        name=site.name or site.site_id,
        site_id=site.site_id,
        task=visit.task,
        state=state,
        note=note,
        state_text=sentence,
        arrive=figures.clock(stop.arrive, tour.day),
        latest=figures.clock(stop.latest_arrive, tour.day, round_up=False),
        start=figures.clock(stop.start, tour.day),
        leave=figures.clock(stop.leave, tour.day),
        work=_work_text(visit, figures),
        window=window_text(visit, tour, figures),
        due=due,
        overdue=figures.words("overdue", date=due) if overdue else "",
        address=site.address,
        contact=site.contact,
        notes=site.notes,
        extra=tuple((key, value) for key, value in site.extra.items() if value.strip()),
        coordinates=figures.coordinates(site.lat_deg, site.lon_deg),
        lat_deg=site.lat_deg,
        lon_deg=site.lon_deg,
        leg_drive=figures.drive(leg.drive_s),
        leg_length=figures.length(leg.dist_m),
        leave_ms=_milliseconds(stop.leave),
        way=way_words(leg, figures),
        off_road=last_metres(index.road_points.get(site.site_id), figures) if leg.path else "",
    )


def _totals(tour: DayTour, figures: Figures) -> tuple[tuple[str, str], ...]:
    """Return the totals of a tour as pairs of a word and a figure."""
    words, marked = figures.words, figures.marked
    rows = [
        ("stops", str(len(tour.stops))),
        ("out", figures.clock(tour.depart, tour.day)),
        ("back", marked(figures.clock(tour.back, tour.day))),
        ("finish", marked(figures.clock(tour.finish, tour.day))),
        ("drive", figures.drive(tour.drive_s)),
        ("distance", figures.length(tour.dist_m)),
        ("work", figures.duration(tour.work_s)),
        ("wait", marked(figures.duration(tour.wait_s))),
        ("write_up", figures.duration(tour.write_up_s)),
        ("overtime", marked(figures.duration(tour.overtime_s))),
        ("cost", figures.money(tour.cost)),
    ]
    if tour.load:
        rows.insert(-1, ("load", figures.number(tour.load, 1)))
    return tuple((words(key), text) for key, text in rows)


def _proof(tour: DayTour, figures: Figures) -> str:
    """Return what is proven about the order of a tour, and no more."""
    words, bound = figures.words, tour.bound
    if bound is None:
        return words("no_bound")
    if bound.exact:
        return words("bound_exact", method=bound.method)
    return words("bound_lower", value=figures.money(bound.value), method=bound.method)


def _from_base(start: Base, end: Base, words: Words) -> str:
    if start.base_id == end.base_id:
        return words("from_base", base=start.name)
    return words("from_to_base", base=start.name, end=end.name)


def day_view(index: PlanIndex, tour: DayTour, look: TourLook, figures: Figures) -> DayView:
    """Return what the pages of ``tour`` say."""
    start = index.bases[tour.start_base_id]
    end = index.bases[tour.end_base_id]
    shift = index.shifts.get(tour.tour_id)
    stops = tuple(
        _stop_view(index, tour, stop, leg, figures)
        for stop, leg in zip(tour.stops, tour.legs[:-1], strict=True)
    )
    shift_end = shift.latest_end if shift else tour.finish
    return DayView(
        tour=tour,
        look=look,
        date_long=figures.date_long(tour.day),
        inspector=index.inspectors[tour.inspector_id].name,
        from_base=_from_base(start, end, figures.words),
        start_base=start,
        end_base=end,
        totals=_totals(tour, figures),
        out=figures.clock(tour.depart, tour.day),
        back=figures.marked(figures.clock(tour.back, tour.day)),
        finish=figures.marked(figures.clock(tour.finish, tour.day)),
        shift_end=figures.clock(shift_end, tour.day, round_up=False),
        stops=stops,
        home_drive=figures.drive(tour.legs[-1].drive_s),
        home_length=figures.length(tour.legs[-1].dist_m),
        home_way=way_words(tour.legs[-1], figures),
        has_ferry=any(leg.ferry for leg in tour.legs),
        proof=_proof(tour, figures),
        rule=time_rule(tour, shift, index.visits, [stop.state for stop in stops], figures),
    )
