"""Draw small random programmes as the files a user would write: TOML, CSV, travel table.

What a file cannot say (opening times, a second task at a site, a register without rows) is put
into the typed register after reading.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import UTC, date, datetime, time, timedelta
from pathlib import Path
from typing import TypeVar
from zoneinfo import ZoneInfo

import numpy as np

from georoute.domain.programme import Programme
from georoute.domain.sites import OpenInterval, Register, Visit, visit_id_of

__all__ = ["MOST_SHIFTS", "MOST_VISITS", "REGIONS", "Dice", "Drawn", "draw_files", "enriched"]

MOST_VISITS = 8
MOST_SHIFTS = 3

T = TypeVar("T")

REGIONS: tuple[tuple[float, float, str, tuple[str, ...]], ...] = (
    # Latitude, longitude, zone; dates at and around a change of clocks or of the date line.
    (45.03, 5.02, "Europe/Paris", ("2026-10-23", "2026-03-27", "2026-07-14")),
    (-29.95, -71.30, "America/Santiago", ("2026-09-04", "2026-04-03", "2026-09-18")),
    (-23.55, -46.63, "America/Sao_Paulo", ("2018-11-02", "2019-02-15")),
    (78.22, 15.64, "Arctic/Longyearbyen", ("2026-03-28", "2026-12-01")),
    (-89.97, 30.0, "Antarctica/McMurdo", ("2026-09-25", "2026-01-05")),
    (89.5, -120.0, "UTC", ("2028-02-28",)),
    (-16.85, 179.98, "Pacific/Fiji", ("2020-12-18", "2026-06-01")),
    (66.1, -179.95, "Asia/Anadyr", ("2010-03-26", "2026-05-01")),
    (-13.75, -171.95, "Pacific/Apia", ("2011-12-28", "2021-04-02")),
    (-31.53, 159.07, "Australia/Lord_Howe", ("2026-10-02", "2026-04-03")),
    (0.01, 36.8, "Africa/Nairobi", ("1999-12-30",)),
    (27.7, 85.3, "Asia/Kathmandu", ("2026-11-10",)),
)
STARTS = ("06:00", "07:30", "08:00", "08:00", "09:15", "00:00", "02:30", "16:00", "22:00", "23:30")
TARIFFS = (0.0, 0.01, 1.0, 38.0, 41.55, 14_500.0)
SPREADS_KM = (0.0, 0.2, 3.0, 15.0, 60.0, 400.0)
METHODS = ("detour", "detour", "geodesic", "great_circle", "table", "table")


class Dice:
    """A seeded stream of plain Python values."""

    def __init__(self, seed: int) -> None:
        self.rng = np.random.default_rng(np.random.SeedSequence((seed, 3)))

    def chance(self, share: float) -> bool:
        return bool(self.rng.random() < share)

    def pick(self, items: Sequence[T]) -> T:
        return items[int(self.rng.integers(len(items)))]

    def whole(self, low: int, high: int) -> int:
        return int(self.rng.integers(low, high + 1))

    def real(self, low: float, high: float, digits: int = 3) -> float:
        return round(float(low + (high - low) * self.rng.random()), digits)

    def some(self, items: Sequence[T], share: float) -> list[T]:
        return [item for item in items if self.chance(share)]


@dataclass(frozen=True, slots=True, kw_only=True)
class Drawn:
    """Where the files of one seed are, and what is asked for that no file can say."""

    programme: Path
    dice: Dice
    windows: float
    second_task: bool
    no_visits: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class _Frame:
    """What is drawn first: where, when, and who works on which of the dates."""

    lat: float
    lon: float
    spread_km: float
    zone: str
    dates: tuple[date, ...]
    bases: tuple[tuple[str, float, float], ...]
    people: tuple[tuple[str, tuple[date, ...]], ...]


def _spot(dice: Dice, lat: float, lon: float, radius_km: float) -> tuple[float, float]:
    """Return a place within a radius, also over a pole or the date line."""
    angle, far = 2 * math.pi * dice.rng.random(), radius_km * math.sqrt(dice.rng.random())
    new_lat = lat + far * math.cos(angle) / 111.2
    if abs(new_lat) > 90:
        new_lat, lon = math.copysign(180 - abs(new_lat), new_lat), lon + 180
    new_lon = lon + far * math.sin(angle) / 111.2 / max(0.002, math.cos(math.radians(new_lat)))
    return round(new_lat, 6), round((new_lon + 180) % 360 - 180, 6)


def _frame(dice: Dice) -> _Frame:
    lat, lon, zone, days = dice.pick(REGIONS)
    first = date.fromisoformat(dice.pick(days))
    dates = tuple(first + timedelta(days=k) for k in range(dice.whole(1, 5)))
    spread_km = dice.pick(SPREADS_KM)
    more = ("base b", "base c")[: dice.whole(0, 2)]
    bases = (("base a", lat, lon), *((name, *_spot(dice, lat, lon, spread_km)) for name in more))
    names = ("ann", "bo", "cy")[: dice.whole(1, 3)]
    pairs = [(name, day) for name in names for day in dates]
    order = dice.rng.permutation(len(pairs))[: dice.whole(1, MOST_SHIFTS)]
    worked = {pairs[k] for k in order}
    people = tuple((name, tuple(d for d in dates if (name, d) in worked)) for name in names)
    return _Frame(
        lat=lat,
        lon=lon,
        spread_km=spread_km,
        zone=zone,
        dates=dates,
        bases=bases,
        people=people,
    )


def _hours(dice: Dice) -> list[str]:
    """Return the lines of one shift, whose write-up leaves some time for the tour."""
    start = dice.pick(STARTS)
    length_min = dice.pick((30, 60, 150, 240, 480, 480, 570, 720, 1435))
    hour, minute = (int(part) for part in start.split(":"))
    end = (hour * 60 + minute + length_min) % 1440
    lines = [f'shift_start = "{start}"', f'shift_end = "{end // 60:02}:{end % 60:02}"']
    longest_min = float(length_min)
    if dice.chance(0.6):
        paid_h = dice.pick((0.25, 1.0, 3.0, 6.5, 8.0, 12.0))
        overtime_h = dice.pick((0.0, 0.5, 1.0, 4.0))
        lines += [f"paid_h = {paid_h}", f"overtime_limit_h = {overtime_h}"]
        longest_min = min(longest_min, 60 * (paid_h + overtime_h))
    if dice.chance(0.5):
        lines.append(f"write_up_min = {dice.real(0.0, min(45.0, longest_min - 1.0))}")
    if dice.chance(0.3):
        lines.append(f"load_limit = {dice.pick((0.0, 2.5, 5.0, 10.25, 100.0))}")
    return lines


def _calendar(dice: Dice, frame: _Frame, worked: Sequence[date]) -> list[str]:
    """Return the lines that make ``worked`` the only dates of an inspector."""
    idle = [day for day in frame.dates if day not in worked]
    if dice.chance(0.5) or not worked:
        days = sorted({day.isoweekday() for day in worked})
        return [f"weekdays = [{', '.join(map(str, days))}]"]
    off = [day for day in idle if dice.chance(0.5)]
    feasts = [f'{{ date = {day}, name = "Feast | <b>" }}' for day in idle if day not in off]
    return [
        'weekdays = ["mon", 2, "wed", "thu", 5, "Saturday", "sun"]',
        f"days_off = [{', '.join(map(str, off))}]",
        f"extra_holidays = [{', '.join(feasts)}]",
    ]


def _inspectors(dice: Dice, frame: _Frame) -> list[str]:
    lines = []
    for name, worked in frame.people:
        lines += ["", "[[inspector]]", f'inspector_id = "{name}"', *_hours(dice)]
        lines.append(f'start_base = "{dice.pick(frame.bases)[0]}"')
        if dice.chance(0.4):
            lines.append(f'end_base = "{dice.pick(frame.bases)[0]}"')
        lines += _calendar(dice, frame, worked)
    return lines


def _tariff(dice: Dice) -> list[str]:
    lines = ["", "[tariff]", f"hour = {dice.pick(TARIFFS)}", f"km = {dice.pick(TARIFFS[:4])}"]
    if dice.chance(0.6):
        lines.append(f"overtime_hour = {dice.pick(TARIFFS)}")
    if dice.chance(0.5):
        lines.append(f"day_opened = {dice.pick((0.0, 12.5, 500.0, 1e6))}")
    return lines


def _travel(dice: Dice, method: str) -> list[str]:
    lines = ["", "[travel]", f'method = "{method}"']
    if method == "table":
        lines.append(f'table = "{dice.pick(("travel.csv", "square"))}"')
    elif method != "detour":
        lines += [f"speed_kmh = {dice.pick((4.5, 30.0, 50.0, 900.0))}"]
        lines += [f"circuity = {dice.pick((1.0, 1.42, 2.0))}"]
    elif dice.chance(0.3):
        lines += ["[travel.detour]", f"length_exponent = {dice.real(0.5, 1.1)}"]
        lines += [f"time_at_1km_min = {dice.real(0.5, 6.0)}"]
        lines += [f"time_exponent = {dice.real(0.3, 1.1)}"]
    return lines


def _dates_of(dice: Dice, frame: _Frame) -> tuple[str, str, str]:
    """Return earliest, due and latest date as cells; now and then outside the horizon."""
    around = [frame.dates[0] + timedelta(days=k) for k in range(-2, len(frame.dates) + 2)]
    low, high = sorted((dice.pick(around), dice.pick(around)))
    earliest = str(low) if dice.chance(0.2) else ""
    latest = str(high) if dice.chance(0.2) else ""
    return earliest, str(dice.pick(around)) if dice.chance(0.3) else "", latest


def _site_spots(dice: Dice, frame: _Frame, count: int) -> list[tuple[float, float]]:
    spots: list[tuple[float, float]] = []
    for _ in range(count):
        if spots and dice.chance(0.15):
            spots.append(dice.pick(spots))
        elif dice.chance(0.12):
            spots.append(dice.pick(frame.bases)[1:])
        else:
            far = frame.spread_km * (30.0 if dice.chance(0.04) else 1.0)
            spots.append(_spot(dice, frame.lat, frame.lon, min(far, 2_500.0)))
    return spots


def _rows(dice: Dice, frame: _Frame, count: int) -> list[str]:
    work = dice.pick(((0, 0), (1, 20), (10, 60), (30, 240)))
    names = [name for name, _ in frame.people]
    demanding, valued, tied = (dice.chance(0.4), dice.chance(0.4), dice.pick((0.0, 0.2, 0.8)))
    lines = ["site_id,lat,lon,work_min,access_min,earliest,due,latest,load,worth,must,inspector,x1"]
    for k, (lat, lon) in enumerate(_site_spots(dice, frame, count)):
        cells = [
            str(dice.whole(*work)) if dice.chance(0.9) else "",
            dice.pick(("", "0", "2.5")),
            *_dates_of(dice, frame),
            str(dice.real(0.0, 6.0)) if demanding and dice.chance(0.7) else "",
            str(dice.pick((0.0, 1.0, 25.5, 1e6))) if valued and dice.chance(0.7) else "",
            "yes" if dice.chance(0.1) else "",
            ";".join(dice.some(names, 0.6)) if dice.chance(tied) else "",
            "=1+1",
        ]
        lines.append(f"site {k},{lat},{lon},{','.join(cells)}")
    return lines


def _write_table(dice: Dice, folder: Path, ids: Sequence[str]) -> None:
    """Write an asymmetric table twice, in long and in square form; some ways are missing."""
    n, cut = len(ids), dice.pick((0.0, 0.0, 0.1, 0.3))
    longest = dice.pick((60, 900, 7_200))
    whole = dice.chance(0.5)
    seconds = [[str(dice.whole(0, longest)) for _ in ids] for _ in ids]
    if not whole:
        seconds = [[str(dice.real(0, longest)) for _ in ids] for _ in ids]
    metres = [[str(dice.whole(0, 20 * longest)) for _ in ids] for _ in ids]
    seconds[0][-1] = metres[0][-1] = "61"
    for i in range(n):
        for j in range(n):
            if i == j:
                seconds[i][j] = metres[i][j] = "0"
            elif (i, j) != (0, n - 1) and dice.chance(cut):
                seconds[i][j] = metres[i][j] = dice.pick(("", "inf"))
    rows = [
        f"{ids[i]},{ids[j]},{seconds[i][j]},{metres[i][j]}"
        for i in range(n)
        for j in range(n)
        if i != j
    ]
    (folder / "travel.csv").write_text("\n".join(["from_id,to_id,drive_s,dist_m", *rows, ""]))
    (folder / "square").mkdir(exist_ok=True)
    for name, table in (("drive_s", seconds), ("dist_m", metres)):
        square = [",".join(["", *ids]), *(f"{ids[i]},{','.join(table[i])}" for i in range(n)), ""]
        (folder / "square" / f"{name}.csv").write_text("\n".join(square))


def draw_files(seed: int, folder: Path, *, effort: str) -> Drawn:
    """Write the programme, the register and the travel table of this seed into a folder."""
    dice = Dice(seed)
    frame = _frame(dice)
    count = dice.pick((1, 2, 3, 4, 5, 6, 7, 8, 8))
    method = dice.pick(METHODS)
    lines = [f'zone = "{frame.zone}"', f"first_date = {frame.dates[0]}"]
    lines += [f"last_date = {frame.dates[-1]}", "", "[register]", 'path = "register.csv"']
    for name, lat, lon in frame.bases:
        lines += ["", "[[base]]", f'base_id = "{name}"', f"lat = {lat}", f"lon = {lon}"]
    lines += [*_inspectors(dice, frame), *_tariff(dice), *_travel(dice, method)]
    lines += ["", "[work]", f"work_min = {dice.pick((0.0, 12.5, 30.0))}"]
    lines += ["", "[search]", f"seed = {dice.whole(0, 2**40)}", f'effort = "{effort}"']
    lines += ['aim = "fewest_days"'] if dice.chance(0.25) else []
    lines += [""]
    folder.mkdir(parents=True, exist_ok=True)
    programme = folder / "programme.toml"
    programme.write_text("\n".join(lines), encoding="utf-8")
    rows = _rows(dice, frame, count)
    (folder / "register.csv").write_text("\n".join([*rows, ""]), encoding="utf-8")
    if method == "table":
        ids = [*(base[0] for base in frame.bases), *(f"site {k}" for k in range(count))]
        _write_table(dice, folder, ids)
    return Drawn(
        programme=programme,
        dice=dice,
        windows=dice.pick((0.0, 0.0, 0.3, 0.9)),
        second_task=count < MOST_VISITS and dice.chance(0.15),
        no_visits=dice.chance(0.01),
    )


def _instant(day: date, minute: int, zone: ZoneInfo) -> datetime:
    """Return a time of day that exists: in the hour that clocks skip, an hour later."""
    wall = datetime.combine(day, time(minute // 60, minute % 60), zone)
    return wall.astimezone(UTC).astimezone(zone)


def _intervals(dice: Dice, programme: Programme) -> tuple[OpenInterval, ...]:
    """Return opening times on some dates, apart and in order."""
    zone = ZoneInfo(programme.zone)
    spans: list[OpenInterval] = []
    for day in dice.some(programme.days, 0.8):
        clock = dice.whole(0, 12 * 60)
        for _ in range(dice.whole(1, 2)):
            opens, clock = clock, clock + dice.whole(0, 5 * 60)
            first, last = (_instant(day, at, zone) for at in (opens, clock))
            apart = not spans or spans[-1].closes.timestamp() < first.timestamp()
            if first.timestamp() <= last.timestamp() and apart:
                spans.append(OpenInterval(opens=first, closes=last))
            clock += dice.whole(1, 60)
    return tuple(spans)


def enriched(drawn: Drawn, programme: Programme, register: Register) -> Register:
    """Add what the files could not say: opening times, a second task, or no visit at all."""
    dice = drawn.dice
    if drawn.no_visits:
        sites = dice.pick(((), register.sites))
        return replace(register, sites=sites, visits=())
    visits: list[Visit] = []
    for visit in register.visits:
        opening = _intervals(dice, programme) if dice.chance(drawn.windows) else ()
        visits.append(replace(visit, open_intervals=opening))
    if drawn.second_task:
        again = dice.pick(register.visits)
        name = visit_id_of(again.site_id, "second look")
        visits.append(replace(again, visit_id=name, task="second look", must=dice.chance(0.3)))
    return replace(register, visits=tuple(visits))
