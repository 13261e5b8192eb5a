"""What the tags of a way or a barrier mean for a car, by the conventions of OpenStreetMap.

Each rule names the page of the OpenStreetMap wiki it follows; the pages were followed from
memory. Where a tag cannot be understood it is counted, never guessed.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from enum import Enum
from typing import TYPE_CHECKING

from georoute.roads.model import Access
from georoute.roads.speeds import FERRY_KMH, ROAD_CLASSES, read_maxspeed
from georoute.roads.vehicle import vehicle_obstacle

if TYPE_CHECKING:
    from collections.abc import Mapping

    from georoute.roads.speeds import SpeedProfile

__all__ = [
    "ACCESS_KEYS",
    "LOCAL_VALUES",
    "OPEN_VALUES",
    "RELEVANT_KEYS",
    "SHUT_VALUES",
    "Barrier",
    "Entry",
    "WayRule",
    "judge_barrier",
    "judge_way",
    "read_duration",
    "read_entry",
]

ACCESS_KEYS = ("motorcar", "motor_vehicle", "vehicle", "access")
"""Most specific first (wiki: Key:access, "Transport mode restrictions")."""

OPEN_VALUES = frozenset({"yes", "permissive", "designated", "official", "public", "allowed"})
LOCAL_VALUES = frozenset(
    {
        "no", "private", "destination", "customers", "delivery", "residents", "resident",
        "permit", "agricultural", "forestry", "agricultural;forestry", "employees", "staff",
        "discouraged", "emergency", "restricted", "use_sidepath", "psv", "bus",
    }
)  # fmt: skip
"""``no`` and ``private`` count among them: a first or last leg may need them."""

SHUT_VALUES = frozenset({"no", "private", "discouraged"})
"""Values that open no way that is for people on foot."""

_SHUT_WITHOUT_LEAVE = frozenset(
    {"pedestrian", "busway", "footway", "path", "bridleway", "cycleway"}
)
"""Classes that cars may use only where a tag for cars says so (wiki: Key:highway)."""

_DRIVEN = frozenset(ROAD_CLASSES) - {"ferry"}
_DIRECTIONS = ("forward", "backward")
_LIMIT_KEYS = (
    "maxheight",
    "maxheight:physical",
    "maxweight",
    "maxweight:physical",
    "maxweightrating",
    "maxwidth",
    "maxwidth:physical",
)
_CONDITIONAL = {
    **{f"{key}:conditional": "access_conditional" for key in ACCESS_KEYS},
    "oneway:conditional": "oneway_conditional",
    "maxspeed:conditional": "speed_conditional",
    "maxspeed:variable": "speed_conditional",
}
_ONEWAY_KEYS = ("oneway:motorcar", "oneway:motor_vehicle", "oneway:vehicle", "oneway")
_ZONE_KEYS = ("maxspeed:type", "source:maxspeed", "zone:maxspeed", "zone:traffic")

RELEVANT_KEYS = frozenset(
    {
        "highway", "route", "junction", "service", "area", "ferry", "duration", "maxspeed",
        "maxspeed:forward", "maxspeed:backward", "barrier",
        *ACCESS_KEYS, *_LIMIT_KEYS, *_CONDITIONAL, *_ONEWAY_KEYS, *_ZONE_KEYS,
        *(f"{key}:{way}" for key in ACCESS_KEYS for way in _DIRECTIONS),
    }
)  # fmt: skip
"""Keys a rule may look at; ways with equal values of these are judged once."""


class Entry(Enum):
    """May a car go in: by right, by its own business there, or does no tag tell."""

    OPEN = "open"
    LOCAL = "local"
    UNSAID = "unsaid"
    UNKNOWN = "unknown"


@dataclass(frozen=True, slots=True, kw_only=True)
class WayRule:
    """What a way is to a car. Speeds are real ones, km/h; 0: closed in that direction.

    ``duration_s``: crossing time of the whole way, of a ferry that tells it. ``left_out``: the
    code of the remark why the way is no road for cars; ``remarks``: codes with examples.
    """

    road_class: str = ""
    access: Access = Access.THROUGH
    forward_kmh: float = 0.0
    backward_kmh: float = 0.0
    duration_s: float | None = None
    left_out: str = ""
    remarks: tuple[tuple[str, str], ...] = ()


class Barrier(Enum):
    """What a barrier on a node does to a road."""

    OPEN = "open"
    LOCAL = "local"
    CLOSED = "closed"
    UNKNOWN = "unknown"


def _entry_of_value(value: str) -> Entry:
    """Read one value; of a list the most open one counts."""
    parts = {part.strip().lower() for part in value.split(";")}
    if parts & OPEN_VALUES:
        return Entry.OPEN
    if parts & LOCAL_VALUES:
        return Entry.LOCAL
    return Entry.UNKNOWN


def read_entry(tags: Mapping[str, str], *, suffix: str = "") -> tuple[Entry, str]:
    """Return what the most specific access tag says, and the key it came from.

    The hierarchy is motorcar, motor_vehicle, vehicle, access (wiki: Key:access). A value that is
    not understood gives way to the next key, and ``UNKNOWN`` is told if no key is understood.
    """
    unknown = ""
    for key in ACCESS_KEYS:
        value = tags.get(key + suffix)
        if value is None:
            continue
        entry = _entry_of_value(value)
        if entry is not Entry.UNKNOWN:
            return entry, key
        unknown = unknown or key
    return (Entry.UNKNOWN, unknown) if unknown else (Entry.UNSAID, "")


def _directions(tags: Mapping[str, str]) -> tuple[bool, bool, str]:
    """Return whether a car may drive along and against the way, and a remark's code.

    Wiki: Key:oneway (values; implied by motorway, motorway_link), Tag:junction=roundabout and
    Tag:junction=circular (implied), Key:oneway:motor_vehicle.
    """
    implied = tags.get("junction") in {"roundabout", "circular"} or tags.get("highway") in {
        "motorway",
        "motorway_link",
    }
    remark = ""
    for key in _ONEWAY_KEYS:
        value = tags.get(key, "").strip().lower()
        if value in {"yes", "true", "1"}:
            return True, False, remark
        if value in {"-1", "reverse"}:
            return False, True, remark
        if value in {"no", "false", "0", "alternating"}:
            return True, True, remark
        if value == "reversible":
            return False, False, "way_reversible"
        if value:
            remark = "oneway_unknown"
    return True, not implied, remark


def _closed_directions(tags: Mapping[str, str]) -> tuple[bool, bool]:
    """Tell whether ``motor_vehicle:forward=no`` and the like shut a direction."""
    shut = [
        any(
            tags.get(f"{key}:{direction}") in {"no", "private"}
            for key in ACCESS_KEYS
        )
        and read_entry(tags, suffix=f":{direction}")[0] is Entry.LOCAL
        for direction in _DIRECTIONS
    ]  # fmt: skip
    return shut[0], shut[1]


def _speeds(
    tags: Mapping[str, str], road_class: str, profile: SpeedProfile
) -> tuple[list[float], list[tuple[str, str]]]:
    """Return the real speed along and against a way, and remarks.

    Wiki: Key:maxspeed (units, ``none``, ``walk``, zones, ``:forward``, ``:backward``).
    """
    speeds, remarks = [], {}
    for direction in _DIRECTIONS:
        limit = None
        for key in (f"maxspeed:{direction}", "maxspeed", *_ZONE_KEYS):
            text = tags.get(key)
            if text is None:
                continue
            read = read_maxspeed(text, profile=profile, road_class=road_class)
            # Zone keys also hold sources like "sign": only what can be read counts there.
            if read.remark and (key not in _ZONE_KEYS or read.kmh is not None):
                remarks[read.remark] = f"{key}={text}"
            limit = read.kmh
            if limit is not None or key not in _ZONE_KEYS:
                break
        kmh = profile.class_kmh(road_class) if limit is None else limit
        speeds.append(kmh * profile.factor(road_class))
    return speeds, list(remarks.items())


def _ferry(tags: Mapping[str, str], profile: SpeedProfile) -> WayRule:
    """Judge a ferry (wiki: Tag:route=ferry, Key:duration): cars go only where a tag says so."""
    entry, _ = read_entry({key: tags[key] for key in ACCESS_KEYS[:3] if key in tags})
    if entry is Entry.UNSAID and tags.get("ferry") in _DRIVEN:
        entry = Entry.OPEN
    if entry is not Entry.OPEN:
        said = entry is not Entry.UNSAID
        return WayRule(left_out="way_not_for_cars" if said else "ferry_cars_unsaid")
    remarks = [("ferry", "")]
    duration = read_duration(tags["duration"]) if "duration" in tags else None
    if duration is None:
        text = tags.get("duration")
        code = "ferry_speed_assumed" if text is None else "ferry_duration_unread"
        remarks.append((code, f"duration={text}" if text else ""))
    along, against, remark = _directions({k: v for k, v in tags.items() if k in _ONEWAY_KEYS})
    if remark:
        remarks.append((remark, ""))
    kmh = profile.class_speeds_kmh.get("ferry", FERRY_KMH) * profile.factor("ferry")
    return WayRule(
        road_class="ferry",
        access=Access.FERRY,
        forward_kmh=kmh * along,
        backward_kmh=kmh * against,
        duration_s=duration,
        remarks=tuple(remarks),
    )


def _left_out(tags: Mapping[str, str], entry: Entry, key: str) -> str:
    """Return the remark's code if the way is no road for cars, else nothing."""
    highway = tags.get("highway", "")
    if tags.get("area") == "yes":
        return "way_area"
    if highway in _SHUT_WITHOUT_LEAVE:
        # "access=yes" on a footway speaks of people on foot; only tags for cars open it.
        value = tags.get(key, "")
        opened = key in ACCESS_KEYS[:2] and value not in SHUT_VALUES
        return "" if opened and entry in {Entry.OPEN, Entry.LOCAL} else "way_not_for_cars"
    return "" if highway in _DRIVEN else "way_not_for_cars"


def judge_way(tags: Mapping[str, str], *, profile: SpeedProfile) -> WayRule:
    """Return what a way is to the car of a profile."""
    if tags.get("route") == "ferry" and "highway" not in tags:
        return _ferry(tags, profile)
    entry, key = read_entry(tags)
    left_out = _left_out(tags, entry, key)
    if left_out:
        return WayRule(left_out=left_out)
    along, against, remark = _directions(tags)
    if remark == "way_reversible":
        return WayRule(left_out=remark)
    shut_along, shut_against = _closed_directions(tags)
    along, against = along and not shut_along, against and not shut_against
    if not (along or against):
        return WayRule(left_out="way_shut")
    highway = tags["highway"]
    road_class = highway if highway in _DRIVEN else "pedestrian"
    speeds, remarks = _speeds(tags, road_class, profile)
    remarks += [(code, f"{k}={tags[k]}") for k, code in _CONDITIONAL.items() if k in tags]
    if remark:
        remarks.append((remark, ""))
    if entry is Entry.UNKNOWN:
        remarks.append(("access_unknown", f"{key}={tags[key]}"))
    obstacle, example = vehicle_obstacle(tags, profile=profile)
    if obstacle and obstacle != "vehicle_limit_unread":
        return WayRule(left_out=obstacle, remarks=((obstacle, example),))
    if obstacle:
        remarks.append((obstacle, example))
    local = entry is Entry.LOCAL or tags.get("service") == "emergency_access"
    if local:
        remarks.append(("way_local", ""))
    return WayRule(
        road_class=road_class,
        access=Access.LOCAL if local else Access.THROUGH,
        forward_kmh=speeds[0] * along,
        backward_kmh=speeds[1] * against,
        remarks=tuple(remarks),
    )


_CLOCK = re.compile(r"(\d+)(?::(\d{1,2}))?(?::(\d{1,2}))?")
_ISO = re.compile(
    r"P(?:(\d+)D)?(?:T(?:(\d+(?:\.\d+)?)H)?(?:(\d+(?:\.\d+)?)M)?(?:(\d+(?:\.\d+)?)S)?)?",
    re.IGNORECASE,
)


def read_duration(text: str) -> float | None:
    """Return a duration in seconds: ``HH:MM``, ``HH:MM:SS``, minutes, or ISO 8601 (``PT1H30M``).

    Wiki: Key:duration. Nothing is returned for what cannot be read or is not above 0.
    """
    text = text.strip()
    iso = _ISO.fullmatch(text)
    clock = _CLOCK.fullmatch(text)
    if iso:
        days, hours, minutes, seconds = (float(part or 0) for part in iso.groups())
    elif clock:
        first, second, third = clock.groups()
        days, seconds = 0.0, float(third or 0)
        hours, minutes = (float(first), float(second)) if second else (0.0, float(first))
    else:
        return None
    total = ((days * 24 + hours) * 60 + minutes) * 60 + seconds
    return total if total > 0 else None


_CLOSING = frozenset(
    {
        "bollard", "block", "jersey_barrier", "log", "debris", "planter", "stile", "turnstile",
        "full-height_turnstile", "kissing_gate", "cycle_barrier", "motorcycle_barrier",
        "horse_stile", "bus_trap", "tank_trap", "wicket_gate", "fence", "wall", "hedge", "ditch",
        "barrier_board", "bar",
    }
)  # fmt: skip
_PASSABLE = frozenset(
    {
        "gate", "lift_gate", "swing_gate", "sliding_gate", "sliding_beam", "toll_booth", "kerb",
        "cattle_grid", "border_control", "entrance", "height_restrictor", "sally_port", "chain",
        "rope", "hampshire_gate", "checkpoint", "coupure", "spikes", "sump_buster", "yes", "no",
        "bump_gate", "width_restrictor", "guard_rail", "handrail", "retaining_wall",
    }
)  # fmt: skip


def judge_barrier(tags: Mapping[str, str], *, profile: SpeedProfile) -> Barrier:
    """Return what a barrier on a node of a road does (wiki: Key:barrier, Tag:barrier=bollard).

    An access tag decides. Without one, bollards, blocks and what only people on foot pass are
    closed; gates and the like are open.
    """
    kind = tags.get("barrier", "")
    obstacle, _ = vehicle_obstacle(tags, profile=profile)
    if obstacle and obstacle != "vehicle_limit_unread":
        return Barrier.CLOSED
    entry, _ = read_entry(tags)
    if entry is Entry.OPEN:
        return Barrier.OPEN
    if kind in _CLOSING:
        return Barrier.CLOSED
    if entry is Entry.LOCAL:
        return Barrier.LOCAL
    return Barrier.OPEN if kind in _PASSABLE else Barrier.UNKNOWN
