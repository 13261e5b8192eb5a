"""The programme: every setting of a run, immutable, passed in; there are no globals."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date, datetime, timedelta
from enum import StrEnum
from types import MappingProxyType
from zoneinfo import ZoneInfo

from georoute.domain.costs import Tariff
from georoute.domain.people import Inspector, Shift, shift_id_of
from georoute.domain.run import Aim, Effort
from georoute.domain.sites import Base

__all__ = [
    "DetourModel",
    "Programme",
    "RegisterSource",
    "RoadSettings",
    "TravelMethod",
    "TravelSettings",
]


class TravelMethod(StrEnum):
    """How travel between places is measured."""

    GEODESIC = "geodesic"
    GREAT_CIRCLE = "great_circle"
    DETOUR = "detour"
    TABLE = "table"
    ROADS = "roads"


@dataclass(frozen=True, slots=True, kw_only=True)
class DetourModel:
    """Log-log model of road travel from crow-fly distance ``d`` in kilometres.

    ``length_km = length_at_1km * d ** length_exponent`` (never below ``d``) and
    ``time_min = time_at_1km_min * d ** time_exponent``. ``low_factor`` and ``high_factor`` bound
    the true time of a leg as a multiple of the estimate.
    """

    length_at_1km: float
    length_exponent: float
    time_at_1km_min: float
    time_exponent: float
    low_factor: float
    high_factor: float


@dataclass(frozen=True, slots=True, kw_only=True)
class RoadSettings:
    """Where the roads come from, and how fast they are driven.

    ``path``: an OpenStreetMap extract or a table of edges. ``country`` (ISO 3166-1) chooses the
    speeds of roads without a limit; ``speeds_kmh`` replaces them by class of road.
    ``real_factors`` replaces, by class, the share of the limit that is really driven.
    ``snap_limit_m``: a place farther than this from every road is a fault. The size of the
    vehicle, where it is given, closes roads whose limits it breaks. ``columns`` maps the columns
    of a table of edges.
    """

    path: str
    country: str = ""
    speeds_kmh: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    real_factors: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    snap_limit_m: float = 500.0
    vehicle_height_m: float | None = None
    vehicle_width_m: float | None = None
    vehicle_weight_t: float | None = None
    columns: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))


@dataclass(frozen=True, slots=True, kw_only=True)
class TravelSettings:
    """The travel method and its coefficients.

    ``speed_kmh`` and ``circuity`` serve the straight-line methods (length = circuity x straight
    line). ``table_path`` is the user's own table; ``roads`` are those of the method ``roads``.
    """

    method: TravelMethod
    speed_kmh: float
    circuity: float
    detour: DetourModel
    table_path: str | None = None
    roads: RoadSettings | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class RegisterSource:
    """Where the register is and how to read it.

    ``columns`` maps georoute's column names to the headers of the file. ``crs`` is used where
    the file does not say (coordinates in other columns than degrees). ``credit`` names the
    makers of its data where their licence asks for it; it stands on every page.
    """

    path: str
    columns: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))
    sheet: str | None = None
    layer: str | None = None
    crs: str | None = None
    credit: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Programme:
    """All settings of a run."""

    title: str
    zone: str
    first_date: date
    last_date: date
    bases: tuple[Base, ...]
    inspectors: tuple[Inspector, ...]
    tariff: Tariff
    travel: TravelSettings
    default_work_s: float
    default_access_s: float
    seed: int
    effort: Effort
    register: RegisterSource
    aim: Aim = Aim.LEAST_COST
    source: str = ""
    sha256: str = ""

    @property
    def epoch(self) -> datetime:
        """Local midnight of the first date: the zero of all kernel times."""
        return datetime(
            self.first_date.year,
            self.first_date.month,
            self.first_date.day,
            tzinfo=ZoneInfo(self.zone),
        )

    @property
    def days(self) -> tuple[date, ...]:
        """Every date of the horizon, worked or not."""
        count = (self.last_date - self.first_date).days + 1
        return tuple(self.first_date + timedelta(days=k) for k in range(count))

    def shifts(self) -> tuple[Shift, ...]:
        """Return every shift of the horizon, by date, then in the order of the inspectors.

        A shift whose end is not after its start on the clock ends on the next date.
        """
        zone = ZoneInfo(self.zone)
        shifts = []
        for day in self.days:
            for inspector in self.inspectors:
                if not inspector.calendar.works_on(day):
                    continue
                start = datetime.combine(day, inspector.shift_start, tzinfo=zone)
                overnight = inspector.shift_end <= inspector.shift_start
                end_day = day + timedelta(days=1) if overnight else day
                shifts.append(
                    Shift(
                        shift_id=shift_id_of(inspector.inspector_id, day),
                        inspector_id=inspector.inspector_id,
                        day=day,
                        start_base_id=inspector.start_base_id,
                        end_base_id=inspector.end_base_id,
                        earliest_start=start,
                        latest_end=datetime.combine(end_day, inspector.shift_end, tzinfo=zone),
                        paid_s=inspector.paid_s,
                        overtime_limit_s=inspector.overtime_limit_s,
                        write_up_s=inspector.write_up_s,
                        load_limit=inspector.load_limit,
                    )
                )
        return tuple(shifts)
