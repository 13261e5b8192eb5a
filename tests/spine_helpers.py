"""Small problems and programmes made by hand, for the tests of the rooms in the middle."""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import date, time

import numpy as np
from numpy.typing import NDArray

from georoute.domain.costs import Tariff
from georoute.domain.people import Inspector, WorkingCalendar
from georoute.domain.programme import (
    DetourModel,
    Programme,
    RegisterSource,
    TravelMethod,
    TravelSettings,
)
from georoute.domain.run import EFFORTS
from georoute.domain.sites import Base, Register, Site, Visit, visit_id_of
from georoute.kernels.arrays import Shifts, Travel, Visits
from georoute.problem import Problem

NO_LIMIT = 1 << 60


def ints(*values: int) -> NDArray[np.int64]:
    return np.array(values, np.int64)


@dataclass
class Day:
    """One shift with its visits, in plain minutes; the base is place 0, visit v is place v + 1."""

    drive: list[list[int]]
    work: list[int]
    windows: dict[int, list[tuple[int, int]]] = field(default_factory=dict)
    load: list[int] = field(default_factory=list)
    opens: int = 0
    closes: int = 24 * 60
    paid: int = 8 * 60
    limit: int = 24 * 60
    write_up: int = 0
    load_limit: int = NO_LIMIT

    def problem(self) -> Problem:
        minute = 60_000
        n = len(self.work)
        drive = np.array(self.drive, np.int64) * minute
        per_visit = [self.windows.get(v, []) for v in range(n)]
        flat = [window for windows in per_visit for window in windows]
        travel = Travel(1, drive, drive.copy(), np.zeros(0), np.zeros(0), 1.0, 1.0, 1)
        visits = Visits(
            place=np.arange(1, n + 1),
            work_ms=np.array(self.work, np.int64) * minute,
            load=np.array(self.load or [0] * n, np.int64),
            window_ptr=np.concatenate([ints(0), np.cumsum([len(w) for w in per_visit])]).astype(
                np.int64
            ),
            window_open_ms=np.array([w[0] * minute for w in flat], np.int64),
            window_close_ms=np.array([w[1] * minute for w in flat], np.int64),
            worth=np.full(n, 10**9, np.int64),
            level=np.ones(n, np.int64),
            eligible=np.ones((n, 1), np.bool_),
        )
        shifts = Shifts(
            start_place=ints(0),
            end_place=ints(0),
            open_ms=ints(self.opens * minute),
            close_ms=ints(self.closes * minute),
            paid_ms=ints(self.paid * minute),
            limit_ms=ints(self.limit * minute),
            write_up_ms=ints(self.write_up * minute),
            load_limit=ints(self.load_limit),
            hour_rate=np.array([1.0]),
            overtime_rate=np.array([2.0]),
            length_rate=np.array([0.5]),
            day_cost=ints(7),
            day=ints(0),
            inspector=ints(0),
        )
        places = np.arange(n + 1, dtype=np.float64)
        return Problem(
            travel=travel, visits=visits, shifts=shifts, plane_x_m=places, plane_y_m=places
        )


def small_programme(**changes: object) -> Programme:
    """Two inspectors at one base over two days near Coquimbo; override any field by name."""
    calendar = WorkingCalendar()
    people = tuple(
        Inspector(
            inspector_id=f"i{k}",
            name=f"Inspector {k}",
            start_base_id="base",
            end_base_id="base",
            shift_start=time(8),
            shift_end=time(17),
            paid_s=8 * 3600.0,
            overtime_limit_s=3600.0,
            calendar=calendar,
        )
        for k in (1, 2)
    )
    settings: dict[str, object] = {
        "title": "Small programme",
        "zone": "America/Santiago",
        "first_date": date(2027, 3, 1),
        "last_date": date(2027, 3, 2),
        "bases": (Base(base_id="base", name="Base", lat_deg=-29.96, lon_deg=-71.33),),
        "inspectors": people,
        "tariff": Tariff(currency="EUR", hour=30.0, km=0.5, overtime_hour=45.0, day_opened=10.0),
        "travel": TravelSettings(
            method=TravelMethod.GEODESIC,
            speed_kmh=36.0,
            circuity=1.0,
            detour=DetourModel(
                length_at_1km=1.5,
                length_exponent=0.95,
                time_at_1km_min=2.5,
                time_exponent=0.75,
                low_factor=0.7,
                high_factor=1.4,
            ),
        ),
        "default_work_s": 1200.0,
        "default_access_s": 0.0,
        "seed": 1,
        "effort": EFFORTS["quick"],
        "register": RegisterSource(path="register.csv"),
        "sha256": "0" * 64,
    }
    return Programme(**(settings | changes))  # type: ignore[arg-type]  # overrides by name


def small_register(spots: list[tuple[float, float]], **visit_changes: object) -> Register:
    """One site with one visit for each (lat, lon)."""
    sites = tuple(
        Site(site_id=f"s{k}", lat_deg=lat, lon_deg=lon, name=f"Site {k}", row=k + 2)
        for k, (lat, lon) in enumerate(spots)
    )
    fields: dict[str, object] = {"work_s": 1200.0, "task": "look"} | visit_changes
    visits = tuple(
        Visit(
            visit_id=visit_id_of(site.site_id, "look"),
            site_id=site.site_id,
            **fields,  # type: ignore[arg-type]  # overrides by name
        )
        for site in sites
    )
    return Register(sites=sites, visits=visits, source="register.csv", sha256="1" * 64)
