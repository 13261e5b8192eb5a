"""How fast one drives: limits on signs, speeds per class and country, and real driving.

The speed of a stretch is its limit (a sign, a zone of the country's law, or else the speed of its
class) times the real factor of its class: junctions, bends, lights and other people make real
driving slower than the limit. Every table here can be replaced in the programme.

Where the tables come from: the limits are those of national law as collected on the wiki of
OpenStreetMap (pages "Default speed limits" and "Key:maxspeed"), written down from memory; the
class speeds are derived from them by the rule in `class_speeds`; the real factors are an
assumption and not measured. All three are a beginning; what people measure on their own roads is
better.
"""

from __future__ import annotations

import json
import math
import re
from collections.abc import Mapping
from dataclasses import asdict, dataclass, field, replace
from typing import NamedTuple

from georoute.errors import RoadError

__all__ = [
    "FERRY_KMH",
    "REAL_FACTORS",
    "ROAD_CLASSES",
    "Law",
    "Limit",
    "SpeedProfile",
    "class_speeds",
    "default_profile",
    "law_of",
    "read_maxspeed",
]

KMH_PER_MPH = 1.609344
KMH_PER_KNOT = 1.852
FERRY_KMH = 20.0
"""Speed of a ship whose crossing time the map does not tell."""

WALK_KMH = 6.0
NO_LIMIT_KMH = 130.0
"""For ``none``: the advisory speed where motorways have no limit."""

SLOWEST_KMH = 3.0
FASTEST_KMH = 200.0
"""Limits outside this range are taken for slips of the map, and counted."""


class Law(NamedTuple):
    """Limits of a country for cars, km/h: in towns, outside, on expressways, on motorways."""

    urban: float
    rural: float
    expressway: float
    motorway: float
    living_street: float = 20.0


_MPH = KMH_PER_MPH
GENERIC_LAW = Law(50, 90, 100, 120)
LAWS: Mapping[str, Law] = {
    "AT": Law(50, 100, 100, 130, 6),
    "BE": Law(50, 90, 120, 120),
    "BG": Law(50, 90, 120, 140),
    "CH": Law(50, 80, 100, 120),
    "CL": Law(50, 100, 100, 120),
    "CZ": Law(50, 90, 110, 130),
    "DE": Law(50, 100, 100, 130, 6),
    "DK": Law(50, 80, 80, 130, 15),
    "EE": Law(50, 90, 90, 110),
    "ES": Law(50, 90, 90, 120),
    "FI": Law(50, 80, 100, 120),
    "FR": Law(50, 80, 110, 130),
    "GB": Law(30 * _MPH, 60 * _MPH, 70 * _MPH, 70 * _MPH),
    "GR": Law(50, 90, 110, 130),
    "HR": Law(50, 90, 110, 130, 10),
    "HU": Law(50, 90, 110, 130),
    "IE": Law(50, 80, 100, 120),
    "IT": Law(50, 90, 110, 130),
    "LT": Law(50, 90, 120, 130),
    "LU": Law(50, 90, 90, 130),
    "LV": Law(50, 90, 100, 100),
    "MD": Law(50, 90, 90, 110),
    "NL": Law(50, 80, 100, 130, 15),
    "NO": Law(50, 80, 90, 110, 15),
    "PL": Law(50, 90, 100, 140),
    "PT": Law(50, 90, 100, 120),
    "RO": Law(50, 90, 100, 130),
    "RS": Law(50, 80, 100, 130, 10),
    "SE": Law(50, 70, 90, 110, 7),
    "SI": Law(50, 90, 110, 130, 10),
    "SK": Law(50, 90, 90, 130),
    "UA": Law(50, 90, 110, 130),
    "US": Law(25 * _MPH, 55 * _MPH, 65 * _MPH, 65 * _MPH),
}

REAL_FACTORS: Mapping[str, float] = {
    "motorway": 0.92,
    "motorway_link": 0.8,
    "trunk": 0.85,
    "trunk_link": 0.75,
    "primary": 0.75,
    "primary_link": 0.7,
    "secondary": 0.7,
    "secondary_link": 0.65,
    "tertiary": 0.7,
    "tertiary_link": 0.65,
    "unclassified": 0.65,
    "residential": 0.6,
    "living_street": 0.8,
    "service": 0.6,
    "road": 0.6,
    "track": 0.6,
    "busway": 0.7,
    "pedestrian": 0.8,
    "ferry": 1.0,
}
"""Share of the limit that is really driven, by class: an assumption, for the user to mend."""

ROAD_CLASSES: tuple[str, ...] = tuple(REAL_FACTORS)


def law_of(country: str) -> Law:
    """Return the limits of a country by its two-letter code, or generic ones."""
    return LAWS.get(country.strip().upper()[:2], GENERIC_LAW)


def class_speeds(law: Law) -> dict[str, float]:
    """Derive the speed (km/h) of each class, for roads whose limit the map does not tell.

    Main roads run inside and outside of towns: primary and secondary get the middle of both
    limits, tertiary a quarter of the way up; smaller ones are taken for roads in town.
    """
    middle = (law.urban + law.rural) / 2
    quarter = (3 * law.urban + law.rural) / 4
    slow = min(law.urban, 20.0)
    speeds = {
        "motorway": law.motorway,
        "motorway_link": min(law.motorway, 60.0),
        "trunk": law.expressway,
        "trunk_link": min(law.expressway, 50.0),
        "primary": middle,
        "primary_link": law.urban,
        "secondary": middle,
        "secondary_link": law.urban,
        "tertiary": quarter,
        "tertiary_link": law.urban,
        "unclassified": law.urban,
        "residential": law.urban,
        "living_street": law.living_street,
        "service": slow,
        "road": min(law.urban, 30.0),
        "track": slow,
        "busway": law.urban,
        "pedestrian": min(law.living_street, 10.0),
        "ferry": FERRY_KMH,
    }
    return {name: round(speed, 1) for name, speed in speeds.items()}


@dataclass(frozen=True, slots=True, kw_only=True)
class SpeedProfile:
    """What a vehicle and a country make of roads.

    ``country``: two-letter code. ``class_speeds_kmh``: the limit assumed where the map tells
    none. ``real_factor``: real driving as a share of the limit, one number or one per class.
    ``height_m``, ``weight_t``, ``width_m``: of the vehicle; roads too low, weak or narrow for it
    are closed where the map tells their limit; ``None`` is not checked.
    """

    country: str
    class_speeds_kmh: Mapping[str, float]
    real_factor: Mapping[str, float] | float = field(default_factory=lambda: dict(REAL_FACTORS))
    height_m: float | None = None
    weight_t: float | None = None
    width_m: float | None = None

    @property
    def law(self) -> Law:
        """The limits of the country."""
        return law_of(self.country)

    def class_kmh(self, road_class: str) -> float:
        """Return the limit assumed for a class, km/h."""
        known = self.class_speeds_kmh.get(road_class)
        return known if known is not None else class_speeds(self.law).get(road_class, 30.0)

    def factor(self, road_class: str) -> float:
        """Return the share of the limit that is really driven on a class."""
        if isinstance(self.real_factor, Mapping):
            return self.real_factor.get(road_class, REAL_FACTORS.get(road_class, 1.0))
        return 1.0 if road_class == "ferry" else self.real_factor

    def fingerprint(self) -> str:
        """Return a text that is equal for equal profiles: the profile's part of a cache's key."""
        return json.dumps(asdict(self), sort_keys=True)


def _check_table(table: Mapping[str, float], *, what: str) -> None:
    unknown = sorted(set(table) - set(ROAD_CLASSES))
    if unknown:
        msg = f"{what}: unknown road class {unknown[0]!r}; known are {', '.join(ROAD_CLASSES)}"
        raise RoadError(msg)
    for name, value in table.items():
        _check_number(value, what=f"{what} of {name}")


def _check_number(value: float | None, *, what: str) -> None:
    if value is not None and not (math.isfinite(value) and value > 0):
        msg = f"{what}: {value} was given, a number above 0 is needed"
        raise RoadError(msg)


def default_profile(
    country: str = "",
    *,
    class_speeds_kmh: Mapping[str, float] | None = None,
    real_factor: Mapping[str, float] | float | None = None,
) -> SpeedProfile:
    """Return the profile of a car in a country; own tables replace the default class by class.

    ``country`` unknown or empty: generic limits. The vehicle's height, weight and width are set
    by ``dataclasses.replace``.

    Raises
    ------
    RoadError
        If a class is unknown, or a speed or a factor is not above 0.
    """
    own = dict(class_speeds_kmh or {})
    _check_table(own, what="class speed (km/h)")
    profile = SpeedProfile(
        country=country.strip().upper(),
        class_speeds_kmh={**class_speeds(law_of(country)), **own},
    )
    if real_factor is None:
        return profile
    if not isinstance(real_factor, Mapping):
        _check_number(real_factor, what="real factor")
        return replace(profile, real_factor=float(real_factor))
    _check_table(real_factor, what="real factor")
    return replace(profile, real_factor={**REAL_FACTORS, **real_factor})


class Limit(NamedTuple):
    """A limit as read: km/h or ``None`` (take the speed of the class), and a remark's code."""

    kmh: float | None
    remark: str = ""


_NUMBER = re.compile(r"(\d+(?:[.,]\d+)?)\s*(km/?h|kph|mph|knots?|kn)?", re.IGNORECASE)
_ZONE = re.compile(r"(?:([A-Za-z]{2})(?:-\w+)?:)?([A-Za-z_]*?)[:_]?(\d+)?", re.ASCII)
_ZONE_FIELDS: Mapping[str, str] = {
    "urban": "urban",
    "rural": "rural",
    "nsl_single": "rural",
    "trunk": "expressway",
    "expressway": "expressway",
    "nsl_dual": "expressway",
    "motorway": "motorway",
    "living_street": "living_street",
}
_AS_CLASS = frozenset({"signals", "variable", "default", "implicit"})
_FAST_CLASSES = frozenset({"motorway", "trunk"})


def read_maxspeed(text: str, *, profile: SpeedProfile, road_class: str) -> Limit:
    """Read a value of ``maxspeed`` in any form in use.

    A number is km/h; ``mph`` and ``knots`` are converted; ``RO:urban`` is the country's law;
    ``walk`` is walking pace; ``none`` is the advisory speed on fast roads; ``50;30`` is the
    lowest; ``signals`` and what cannot be read leave the speed to the class.
    """
    parts = [part.strip() for part in re.split(r"[;|]", text) if part.strip()]
    if not parts:
        return Limit(None, "speed_unread")
    limits = [_read_one(part, profile=profile, road_class=road_class) for part in parts]
    if len(limits) == 1:
        return limits[0]
    speeds = [limit.kmh for limit in limits if limit.kmh is not None]
    return Limit(min(speeds), "speed_several") if speeds else Limit(None, limits[0].remark)


def _read_one(text: str, *, profile: SpeedProfile, road_class: str) -> Limit:
    number = _NUMBER.fullmatch(text)
    if number:
        unit = (number[2] or "").lower()
        scale = KMH_PER_MPH if unit == "mph" else KMH_PER_KNOT if unit.startswith("kn") else 1.0
        kmh = float(number[1].replace(",", ".")) * scale
        plausible = SLOWEST_KMH <= kmh <= FASTEST_KMH
        return Limit(kmh) if plausible else Limit(None, "speed_implausible")
    word = text.lower()
    if word in _AS_CLASS:
        return Limit(None, "speed_signals")
    if word == "none":
        return Limit(NO_LIMIT_KMH if road_class in _FAST_CLASSES else None)
    if word == "walk":
        return Limit(WALK_KMH)
    return _read_zone(text, profile=profile)


def _read_zone(text: str, *, profile: SpeedProfile) -> Limit:
    """Read ``RO:urban``, ``DE:zone30``, ``AT:walk``, or the same without a country."""
    zone = _ZONE.fullmatch(text)
    if not zone:
        return Limit(None, "speed_unread")
    country, word = (zone[1] or profile.country).upper(), zone[2].lower()
    if zone[3]:
        known = word in {"", "zone", "zona"} and SLOWEST_KMH <= float(zone[3]) <= FASTEST_KMH
        return Limit(float(zone[3])) if known else Limit(None, "speed_unread")
    if word == "walk":
        return Limit(WALK_KMH)
    if word == "bicycle_road":
        return Limit(30.0)
    if word not in _ZONE_FIELDS:
        return Limit(None, "speed_unread")
    kmh = float(getattr(law_of(country), _ZONE_FIELDS[word]))
    return Limit(kmh, "" if country in LAWS else "speed_country_unknown")
