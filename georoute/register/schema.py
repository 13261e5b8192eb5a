"""The schema of programme.toml: sections, keys, defaults and what each of them means.

Annotations are read at run time here, so this module does not postpone them.
"""

import re
from dataclasses import dataclass
from datetime import date, datetime, time
from typing import Annotated

from pydantic import BaseModel, BeforeValidator, ConfigDict, Field
from pydantic_core import PydanticCustomError

from georoute.domain.programme import DetourModel, TravelMethod
from georoute.domain.run import EFFORTS, Aim

__all__ = [
    "DEFAULT_DETOUR",
    "WEEKDAYS",
    "BaseSection",
    "CalendarKeys",
    "CalendarSection",
    "DetourSection",
    "ExtraHoliday",
    "HorizonKeys",
    "InspectorSection",
    "ProgrammeFile",
    "RegisterSection",
    "RoadsSection",
    "SearchSection",
    "Section",
    "ShiftKeys",
    "ShiftSection",
    "TariffSection",
    "TravelSection",
    "Words",
    "WorkSection",
]

WEEKDAYS = ("mon", "tue", "wed", "thu", "fri", "sat", "sun")

# Measured on the network of a real town (shortest road paths between random pairs of places):
#   road length / crow-fly length   1.88 below 1 km, 1.42 at 3-10 km, 1.29 at 10-30 km
#   crow-fly speed                  25 km/h on short pairs, 50 km/h on long ones, time ~ d^0.74
#   error of a time estimated so    -27 % to +37 %
# Length: least squares of ln(circuity) on ln(d) through the three bands, each at one distance:
# 2/3 km (mean distance of pairs spread evenly within 1 km), sqrt(3*10) = 5.48 km and
# sqrt(10*30) = 17.3 km. The line is circuity = 1.777 d^-0.118, hence length = 1.78 d^0.88; it
# gives 1.87, 1.45 and 1.26 at the three distances.
# Time: the exponent 0.74 makes crow-fly speed grow as d^0.26; 25 km/h at 1 km (2.4 min) then
# becomes 50 km/h at 2^(1/0.26) = 14.4 km, inside the longest band.
# Interval: estimate / true time - 1 lies between -0.27 and +0.37, so the true time lies between
# 1 / 1.37 = 0.73 and 1 / 0.73 = 1.37 times the estimate.
DEFAULT_DETOUR = DetourModel(
    length_at_1km=1.78,
    length_exponent=0.88,
    time_at_1km_min=2.4,
    time_exponent=0.74,
    low_factor=0.73,
    high_factor=1.37,
)

# The straight-line methods know one circuity and one speed: the mean circuity of the same study,
# and the road speed at which crow-fly speed is the middle of 25 and 50 km/h: 1.42 x 35.4 = 50.
_CIRCUITY = 1.42
_SPEED_KMH = 50.0

_CLOCK = re.compile(r"([01]\d|2[0-3]):[0-5]\d(:[0-5]\d)?", re.ASCII)
_ISO_DAY = re.compile(r"\d{4}-\d{2}-\d{2}", re.ASCII)
_LARGEST_SEED = 2**63 - 1


@dataclass(frozen=True, slots=True)
class Words:
    """How a kind of value is called in the table of keys and in messages."""

    name: str
    example: str


def _as_clock(value: object) -> object:
    """Accept a clock time as text: TOML's own needs seconds."""
    if isinstance(value, str) and _CLOCK.fullmatch(value.strip()):
        return time.fromisoformat(value.strip())
    return value


def _as_day(value: object) -> object:
    """Accept a date as text; refuse a moment, which is more than a date."""
    if isinstance(value, str) and _ISO_DAY.fullmatch(value.strip()):
        return date.fromisoformat(value.strip())
    if isinstance(value, datetime):
        code = "date_type"
        message = "a date without a time of day"
        raise PydanticCustomError(code, message)
    return value


def _as_weekday(value: object) -> object:
    """Accept a weekday by name or first three letters, or by ISO number (1 = Monday)."""
    if isinstance(value, str):
        names = [name for name in _LONG_WEEKDAYS if value.strip().casefold() in (name, name[:3])]
        if not names:
            code = "unknown_weekday"
            message = "a weekday"
            raise PydanticCustomError(code, message)
        return _LONG_WEEKDAYS.index(names[0]) + 1
    return value


_LONG_WEEKDAYS = ("monday", "tuesday", "wednesday", "thursday", "friday", "saturday", "sunday")

Text = Annotated[str, Words("text", '"North yard"')]
Id = Annotated[str, Field(min_length=1), Words("text", '"north"')]
Zone = Annotated[str, Field(min_length=1), Words("time zone", '"America/Santiago"')]
PathText = Annotated[str, Field(min_length=1), Words("path", '"register.csv"')]
Number = Annotated[float, Words("number", "42.5")]
Money = Annotated[float, Field(ge=0), Words("money", "42.5")]
Hours = Annotated[float, Field(ge=0, le=24), Words("hours", "7.5")]
Minutes = Annotated[float, Field(ge=0, le=1440), Words("minutes", "30")]
Whole = Annotated[int, Words("whole number", "1")]
Day = Annotated[date, BeforeValidator(_as_day), Words("date", "2027-03-01")]
Clock = Annotated[time, BeforeValidator(_as_clock), Words("clock time", '"08:00"')]
Weekday = Annotated[int, BeforeValidator(_as_weekday), Field(ge=1, le=7), Words("weekday", '"mon"')]


class Section(BaseModel):
    """A section of the programme file: nothing is converted silently, no key is ignored."""

    model_config = ConfigDict(strict=True, extra="forbid", frozen=True, allow_inf_nan=False)


class RegisterSection(Section):
    """The register and how to read it."""

    path: PathText = Field(description="The register's file, seen from the programme file.")
    sheet: Text | None = Field(default=None, description="Sheet of a workbook; empty: the first.")
    layer: Text | None = Field(
        default=None, description="Layer of a vector file; empty: the first with geometries."
    )
    crs: Text | None = Field(
        default=None,
        description="Coordinate system of a file that does not state its own, for instance "
        "`EPSG:32719`; empty: WGS 84 in degrees.",
    )
    credit: Text = Field(
        default="",
        description="Credit that the licence of your data asks for; it stands on every page.",
    )
    columns: dict[str, Text] = Field(
        default_factory=dict,
        description="Foreign headers: `column of georoute = header of the file`.",
    )


class BaseSection(Section):
    """A place that inspectors leave from and come back to."""

    base_id: Id = Field(description="Short id, unique among bases.")
    name: Text = Field(default="", description="Name on sheets and maps; empty: the id.")
    lat: Number = Field(description="Latitude in degrees, WGS 84, north positive.")
    lon: Number = Field(description="Longitude in degrees, WGS 84, east positive.")


class ExtraHoliday(Section):
    """A day without work that the holiday list does not know."""

    date: Day = Field(description="The date.")
    name: Text = Field(default="", description="Its name.")


class CalendarKeys(Section):
    """Which dates are worked."""

    weekdays: list[Weekday] | None = Field(
        default=None, description="Weekdays worked: `mon` to `sun`, or 1 (Monday) to 7."
    )
    days_off: list[Day] = Field(default_factory=list, description="Dates not worked.")
    holiday_country: Text | None = Field(
        default=None,
        description="Country whose public holidays are not worked (ISO 3166-1 code, `CL`); "
        "empty: none.",
    )
    holiday_subdivision: Text | None = Field(
        default=None,
        description="Its part with holidays of its own (ISO 3166-2 code without country).",
    )
    extra_holidays: list[ExtraHoliday] = Field(
        default_factory=list, description='Further holidays: `{ date = 2027-03-03, name = "…" }`.'
    )


class CalendarSection(CalendarKeys):
    """The calendar all inspectors share."""


class ShiftKeys(Section):
    """When and how long is worked on a working day."""

    shift_start: Clock | None = Field(default=None, description="Not out before this time.")
    shift_end: Clock | None = Field(
        default=None,
        description="Back, written up and done by this time; at or before the start: next day.",
    )
    paid_h: Hours | None = Field(
        default=None, description="Hours of ordinary work; empty: from shift start to shift end."
    )
    overtime_limit_h: Hours | None = Field(
        default=None, description="Hours that may be worked beyond the paid ones; empty: 0."
    )
    write_up_min: Minutes | None = Field(
        default=None, description="Minutes kept free after the return, for the write-up; empty: 0."
    )
    load_limit: Annotated[float, Field(ge=0), Words("number", "200")] | None = Field(
        default=None,
        description="The most load of one tour, in the register's unit; empty: no limit.",
    )


class ShiftSection(ShiftKeys):
    """The shift all inspectors share."""


class InspectorSection(CalendarKeys, ShiftKeys):
    """An inspector; what is not stated comes from [shift] and [calendar].

    ``days_off`` and ``extra_holidays`` add to the shared ones; every other key replaces them.
    """

    inspector_id: Id = Field(description="Short id, unique; the register's `inspector` names it.")
    name: Text = Field(default="", description="Name on sheets; empty: the id.")
    start_base: Id | None = Field(
        default=None, description="Base the tour leaves from; empty: the only base."
    )
    end_base: Id | None = Field(
        default=None, description="Base the tour comes back to; empty: the one it leaves from."
    )


class WorkSection(Section):
    """What a row of the register means that says nothing."""

    work_min: Minutes = Field(
        default=30.0, description="Minutes of work of a row that states none."
    )
    access_min: Minutes = Field(
        default=5.0, description="Minutes of access of a row that states none."
    )


class TariffSection(Section):
    """What a plan costs; it is the plan's only goal."""

    currency: Text = Field(default="EUR", description="Currency, for labels only (ISO 4217).")
    hour: Money = Field(description="Price of a paid hour.")
    km: Money = Field(description="Price of a kilometre.")
    overtime_hour: Money | None = Field(
        default=None, description="Whole price of an hour of overtime; empty: that of a paid hour."
    )
    day_opened: Money = Field(
        default=0.0, description="Price of each day an inspector goes out at all."
    )


def _coefficient(value: float, description: str, *, least: float | None = None) -> float:
    """Declare a coefficient above 0, or of at least ``least``."""
    bounds = {"gt": 0.0} if least is None else {"ge": least}
    field: float = Field(value, le=1000.0, description=description, **bounds)  # type: ignore[call-overload] # bounds are chosen at run time
    return field


class DetourSection(Section):
    """Coefficients of the detour model; d is the crow-fly distance in kilometres."""

    length_at_1km: Number = _coefficient(
        DEFAULT_DETOUR.length_at_1km, "Road length in km for d = 1; length = this x d^exponent."
    )
    length_exponent: Number = _coefficient(
        DEFAULT_DETOUR.length_exponent, "Exponent of length; below 1: circuity falls with d."
    )
    time_at_1km_min: Number = _coefficient(
        DEFAULT_DETOUR.time_at_1km_min, "Minutes for d = 1; time = this x d^exponent."
    )
    time_exponent: Number = _coefficient(
        DEFAULT_DETOUR.time_exponent, "Exponent of time; below 1: speed grows with d."
    )
    low_factor: Annotated[float, Field(gt=0, le=1), Words("number", "0.73")] = Field(
        default=DEFAULT_DETOUR.low_factor,
        description="Low end of the interval: true time as a multiple of the estimate.",
    )
    high_factor: Number = _coefficient(
        DEFAULT_DETOUR.high_factor, "High end of the interval, likewise.", least=1.0
    )


_Size = Annotated[float, Field(gt=0), Words("number", "3.2")]


class RoadsSection(Section):
    """Where the roads come from, and how fast they are driven."""

    path: PathText | None = Field(
        default=None,
        description="OpenStreetMap extract (`.osm.pbf`, `.osm`, `.osm.bz2`), saved network "
        "(`.graphml`) or table of edges, seen from the programme file.",
    )
    country: Text = Field(
        default="",
        description="Country whose speeds hold where the map has no limit (ISO 3166-1 code, `CL`).",
    )
    snap_limit_m: Number = Field(
        default=500.0, gt=0.0, description="A site farther than this from every road is a fault."
    )
    vehicle_height_m: _Size | None = Field(default=None, description="Height of the vehicle.")
    vehicle_width_m: _Size | None = Field(default=None, description="Width of the vehicle.")
    vehicle_weight_t: _Size | None = Field(default=None, description="Weight of the vehicle.")
    speeds: dict[str, Number] = Field(
        default_factory=dict, description="Speeds by class of road, km/h: `residential = 30`."
    )
    real_factors: dict[str, Number] = Field(
        default_factory=dict,
        description="Share of the limit that is really driven, by class: `residential = 0.6`.",
    )
    columns: dict[str, Text] = Field(
        default_factory=dict,
        description="Columns of a table of edges: `column of georoute = header of the file`.",
    )


class TravelSection(Section):
    """How travel between places is measured."""

    method: Text = Field(
        default=TravelMethod.DETOUR.value,
        description="One of " + ", ".join(f"`{method.value}`" for method in TravelMethod) + ".",
    )
    speed_kmh: Number = _coefficient(
        _SPEED_KMH, "Road speed for `geodesic` and `great_circle`, km/h."
    )
    circuity: Number = _coefficient(
        _CIRCUITY, "Road length / straight line, for the same two methods.", least=1.0
    )
    table: PathText | None = Field(
        default=None,
        description="Your own travel table, for `table`, seen from the programme file.",
    )
    detour: DetourSection = Field(default_factory=DetourSection, description="For `detour`.")
    roads: RoadsSection = Field(default_factory=RoadsSection, description="For `roads`.")


class SearchSection(Section):
    """What to search for, and how hard."""

    aim: Text = Field(
        default=Aim.LEAST_COST.value,
        description="What decides when the same visits are left out: `least_cost`, or "
        "`fewest_days` (inspector-days first, then cost).",
    )
    seed: Annotated[int, Field(ge=0, le=_LARGEST_SEED), Words("whole number", "1")] = Field(
        default=1, description="Same inputs, seed and effort give the same plan."
    )
    effort: Text = Field(
        default="normal", description="One of " + ", ".join(f"`{name}`" for name in EFFORTS) + "."
    )
    seconds: Annotated[float, Field(gt=0), Words("number", "60")] | None = Field(
        default=None, description="Limit in seconds of wall-clock time; empty: none."
    )


class HorizonKeys(Section):
    """What stands at the top of the file, before any section."""

    title: Text = Field(default="Inspection programme", description="Title on sheets and maps.")
    zone: Zone = Field(description="IANA time zone, for instance `America/Santiago`.")
    first_date: Day = Field(description="First date of the programme.")
    last_date: Day = Field(description="Last date; the programme has at most 366 days.")


class ProgrammeFile(HorizonKeys):
    """The whole programme file."""

    register_: RegisterSection = Field(alias="register", description="The register.")
    base: list[BaseSection] = Field(min_length=1, description="Bases, one [[base]] each.")
    shift: ShiftSection = Field(default_factory=ShiftSection, description="The shared shift.")
    calendar: CalendarSection = Field(
        default_factory=CalendarSection, description="The shared calendar."
    )
    inspector: list[InspectorSection] = Field(
        min_length=1, description="Inspectors, one [[inspector]] each."
    )
    work: WorkSection = Field(default_factory=WorkSection, description="Defaults of work.")
    tariff: TariffSection = Field(description="The tariff.")
    travel: TravelSection = Field(default_factory=TravelSection, description="Travel.")
    search: SearchSection = Field(default_factory=SearchSection, description="The search.")
