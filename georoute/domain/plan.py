"""A finished plan: tours of stops and legs, what is not placed and why, and how it came about."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date, datetime
from enum import StrEnum
from types import MappingProxyType

from georoute.domain.instants import elapsed_s
from georoute.domain.programme import Programme
from georoute.domain.roads import BackdropLine, RoadPoint
from georoute.domain.sites import Site, Visit

__all__ = [
    "Bound",
    "Capacity",
    "DayTour",
    "Exchange",
    "Leg",
    "Plan",
    "Provenance",
    "ReasonCode",
    "StageCost",
    "Stop",
    "StopRule",
    "TravelNote",
    "Unplaced",
]


class ReasonCode(StrEnum):
    """Why a visit is not in the plan."""

    CLOSED = "closed"
    TOO_FAR_FOR_SHIFT = "too_far_for_shift"
    NO_CERTIFICATE = "no_certificate"
    NO_EQUIPMENT = "no_equipment"
    CREW_TOO_SMALL = "crew_too_small"
    AFTER_LATEST = "after_latest"
    BEFORE_EARLIEST = "before_earliest"
    UNREACHABLE = "unreachable"
    HOLD_EXCEEDED = "hold_exceeded"
    LODGING_NEEDED = "lodging_needed"
    NO_WORKING_TIME_LEFT = "no_working_time_left"
    LOAD_LIMIT = "load_limit"
    NOT_FOUND_BY_SEARCH = "not_found_by_search"


class StopRule(StrEnum):
    """What ended the search."""

    EFFORT_USED = "effort used"
    SECONDS_USED = "seconds used"
    INTERRUPTED = "interrupted"


@dataclass(frozen=True, slots=True, kw_only=True)
class Stop:
    """A visit placed in a tour; ``order`` counts from 1.

    Work starts at ``start`` = ``arrive`` + wait and ends at ``leave``. ``latest_arrive`` is the
    latest arrival that still keeps everything after it in time.
    """

    visit_id: str
    site_id: str
    order: int
    arrive: datetime
    start: datetime
    leave: datetime
    latest_arrive: datetime

    @property
    def wait_s(self) -> float:
        """Seconds between arrival and the start of work."""
        return elapsed_s(self.arrive, self.start)


@dataclass(frozen=True, slots=True, kw_only=True)
class Leg:
    """Travel from one place to the next; ``order`` counts from 1 (leg k ends at stop k).

    Ids are those of bases and sites. ``path`` holds the (latitude, longitude) of a leg along
    roads, both ends included, and ``roads`` the name and the metres of each road in the order
    driven; without them a leg is a straight line. ``ferry``: part of it is by ship.
    """

    from_id: str
    to_id: str
    order: int
    depart: datetime
    arrive: datetime
    drive_s: float
    dist_m: float
    path: tuple[tuple[float, float], ...] = ()
    roads: tuple[tuple[str, float], ...] = ()
    ferry: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Bound:
    """A proven lower bound on the travel cost of a tour, and how it was proven."""

    value: float
    method: str
    exact: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class DayTour:
    """One inspector's tour on one date; money is in units of the tariff's currency."""

    tour_id: str
    inspector_id: str
    day: date
    start_base_id: str
    end_base_id: str
    depart: datetime
    back: datetime
    finish: datetime
    stops: tuple[Stop, ...]
    legs: tuple[Leg, ...]
    work_s: float
    drive_s: float
    wait_s: float
    write_up_s: float
    overtime_s: float
    dist_m: float
    load: float
    cost: float
    bound: Bound | None = None

    @property
    def duration_s(self) -> float:
        """Seconds from leaving the base to the end of the write-up."""
        return elapsed_s(self.depart, self.finish)


@dataclass(frozen=True, slots=True, kw_only=True)
class Unplaced:
    """A visit left out, the reason, and the arithmetic behind it in words and figures."""

    visit_id: str
    site_id: str
    code: ReasonCode
    message: str
    figures: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))


@dataclass(frozen=True, slots=True, kw_only=True)
class Exchange:
    """One accepted change of a tour's order: which legs went, which came, and the cost.

    ``kind`` is ``start``, ``two_opt``, ``or_opt``, ``or_3opt``, ``kick`` or ``relocate``. Legs
    are pairs of place ids. Costs are the tour's travel cost in money before and after.
    """

    tour_id: str
    step: int
    kind: str
    legs_out: tuple[tuple[str, str], ...]
    legs_in: tuple[tuple[str, str], ...]
    cost_before: float
    cost_after: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Capacity:
    """The sum that comes first: hours of work and least travel against hours of shifts."""

    visits: int
    shifts: int
    work_h: float
    least_travel_h: float
    shift_h: float
    overtime_h: float

    @property
    def short_h(self) -> float:
        """Hours missing even with all overtime; 0 where the sum does not rule the work out."""
        return max(0.0, self.work_h + self.least_travel_h - self.shift_h - self.overtime_h)


@dataclass(frozen=True, slots=True, kw_only=True)
class StageCost:
    """Cost of the plan after a stage, with the number of visits placed then."""

    stage: str
    cost: float
    placed: int


@dataclass(frozen=True, slots=True, kw_only=True)
class TravelNote:
    """What the travel figures are: their source in words, whether estimated, and the interval.

    ``network`` names the file of the road network in the cache, and ``credit`` whom the licence
    of its data asks to be named.
    """

    source: str
    estimated: bool
    low_factor: float = 1.0
    high_factor: float = 1.0
    network: str = ""
    credit: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Provenance:
    """Where a plan came from. ``issued`` is handed in at the edge, outside the plan's identity."""

    version: str
    register_source: str
    register_sha256: str
    programme_sha256: str
    seed: int
    effort: str
    seconds: float | None
    stop_rule: StopRule
    issued: datetime | None = None
    revision: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """Everything a plan says, together with the inputs it was made from.

    ``plan_id`` is a UUID fixed at the first planning. Tours come by date, then in the order of
    the programme's inspectors; shifts without a stop have no tour.
    """

    plan_id: str
    programme: Programme
    sites: tuple[Site, ...]
    visits: tuple[Visit, ...]
    tours: tuple[DayTour, ...]
    unplaced: tuple[Unplaced, ...]
    capacity: Capacity
    travel: TravelNote
    stages: tuple[StageCost, ...]
    exchanges: tuple[Exchange, ...]
    provenance: Provenance
    extra_columns: tuple[str, ...] = ()
    road_points: tuple[RoadPoint, ...] = ()
    backdrop: tuple[BackdropLine, ...] = ()

    @property
    def cost(self) -> float:
        """Money for all tours."""
        return sum(tour.cost for tour in self.tours)
