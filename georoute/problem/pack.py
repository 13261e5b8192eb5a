"""Typed values to arrays: the one place where seconds, metres and money are rounded."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC
from typing import TYPE_CHECKING

import numpy as np

from georoute.kernels.arrays import MUST, UNREACHABLE, Shifts, Travel, Visits
from georoute.problem.arrays import MICRO, Problem
from georoute.problem.eligibility import WhyNot, why_not
from georoute.projection import local_plane

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence
    from datetime import datetime

    from numpy.typing import NDArray

    from georoute.domain.costs import CostMatrix, Places, Tariff
    from georoute.domain.people import Shift
    from georoute.domain.programme import Programme
    from georoute.domain.roads import Ways
    from georoute.domain.sites import Visit

__all__ = ["Packed", "pack", "to_ticks"]

MS_PER_S = 1_000
MM_PER_M = 1_000
MS_PER_HOUR = 3_600_000
MM_PER_KM = 1_000_000
LOAD_TICKS = 1_000
"""Loads are kept in thousandths of the user's unit."""
NO_LIMIT = 1 << 60
LONG_WAY_KM = 1_000.0
"""A visit without a worth of its own is worth a full day with this long a drive."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Packed:
    """The array problem together with what its indices stand for.

    ``why_not`` (int8, (V, S)) holds a ``WhyNot`` code for each visit and shift. ``ways`` knows how
    legs between places are driven, where they were measured along roads.
    """

    problem: Problem
    programme: Programme
    visits: tuple[Visit, ...]
    shifts: tuple[Shift, ...]
    place_ids: tuple[str, ...]
    why_not: NDArray[np.int8]
    ways: Ways | None = None


def to_ticks(values: NDArray[np.float64] | float, per_unit: int) -> NDArray[np.int64]:
    """Round to whole ticks, half up; infinity becomes ``UNREACHABLE``."""
    scaled = np.floor(np.asarray(values, np.float64) * per_unit + 0.5)
    return np.where(np.isfinite(scaled), scaled, UNREACHABLE).astype(np.int64)


def _ints(values: Iterable[float]) -> NDArray[np.int64]:
    return np.array(list(values), np.int64)


def _instant(moment: datetime, epoch: datetime) -> int:
    """Milliseconds from the epoch, counted in UTC so that a change of clocks does no harm."""
    return round((moment.astimezone(UTC) - epoch.astimezone(UTC)).total_seconds() * MS_PER_S)


def _pack_travel(costs: CostMatrix) -> Travel:
    return Travel(
        dense=1,
        time_ms=to_ticks(costs.travel_s, MS_PER_S),
        length_mm=to_ticks(costs.length_m, MM_PER_M),
        x=np.zeros(0),
        y=np.zeros(0),
        time_scale=1.0,
        length_scale=1.0,
        step=1,
    )


def _worth(visit: Visit, default: int) -> int:
    if visit.must:
        return MUST
    return default if visit.worth is None else round(visit.worth * MICRO)


def _default_worth(shifts: Sequence[Shift], tariff: Tariff) -> int:
    longest_h = max((s.paid_s + s.overtime_limit_s for s in shifts), default=0.0) / 3600.0
    dearest_hour = max(tariff.hour, tariff.overtime_hour)
    money = longest_h * dearest_hour + LONG_WAY_KM * tariff.km + tariff.day_opened
    return round(money * MICRO)


def _pack_visits(
    visits: Sequence[Visit],
    place_of: dict[str, int],
    eligible: NDArray[np.bool_],
    epoch: datetime,
    default_worth: int,
) -> Visits:
    windows = [
        (_instant(interval.opens, epoch), _instant(interval.closes, epoch))
        for visit in visits
        for interval in visit.open_intervals
    ]
    counts = [len(visit.open_intervals) for visit in visits]
    return Visits(
        place=_ints(place_of[visit.site_id] for visit in visits),
        work_ms=_ints(round((v.work_s + v.access_s) * MS_PER_S) for v in visits),
        load=_ints(round(v.load * LOAD_TICKS) for v in visits),
        window_ptr=np.concatenate([np.zeros(1, np.int64), np.cumsum(_ints(counts))]),
        window_open_ms=_ints(opens for opens, _ in windows),
        window_close_ms=_ints(closes for _, closes in windows),
        worth=_ints(_worth(visit, default_worth) for visit in visits),
        level=_ints(0 if visit.must else 1 for visit in visits),
        eligible=eligible,
    )


def _load_limit(shift: Shift) -> int:
    return NO_LIMIT if shift.load_limit is None else round(shift.load_limit * LOAD_TICKS)


def _pack_shifts(
    shifts: Sequence[Shift], place_of: dict[str, int], epoch: datetime, tariff: Tariff
) -> Shifts:
    count = len(shifts)
    people = sorted({shift.inspector_id for shift in shifts})
    first_day = epoch.date()
    return Shifts(
        start_place=_ints(place_of[s.start_base_id] for s in shifts),
        end_place=_ints(place_of[s.end_base_id] for s in shifts),
        open_ms=_ints(_instant(s.earliest_start, epoch) for s in shifts),
        close_ms=_ints(_instant(s.latest_end, epoch) for s in shifts),
        paid_ms=_ints(round(s.paid_s * MS_PER_S) for s in shifts),
        limit_ms=_ints(round((s.paid_s + s.overtime_limit_s) * MS_PER_S) for s in shifts),
        write_up_ms=_ints(round(s.write_up_s * MS_PER_S) for s in shifts),
        load_limit=_ints(_load_limit(s) for s in shifts),
        hour_rate=np.full(count, tariff.hour * MICRO / MS_PER_HOUR),
        overtime_rate=np.full(count, tariff.overtime_hour * MICRO / MS_PER_HOUR),
        length_rate=np.full(count, tariff.km * MICRO / MM_PER_KM),
        day_cost=np.full(count, round(tariff.day_opened * MICRO), np.int64),
        day=_ints((s.day - first_day).days for s in shifts),
        inspector=_ints(people.index(s.inspector_id) for s in shifts),
    )


def pack(
    programme: Programme, visits: Sequence[Visit], places: Places, costs: CostMatrix
) -> Packed:
    """Pack a programme, its visits and the cost matrix of its places into the array problem.

    ``places`` holds every base and every site that is visited, in the order of ``costs``.
    """
    shifts = programme.shifts()
    epoch = programme.epoch
    place_of = {place_id: k for k, place_id in enumerate(costs.place_ids)}
    codes = why_not(visits, shifts)
    plane_x_m, plane_y_m = local_plane(places.lon_deg, places.lat_deg).forward(
        places.lon_deg, places.lat_deg
    )
    problem = Problem(
        travel=_pack_travel(costs),
        visits=_pack_visits(
            visits,
            place_of,
            codes == WhyNot.ELIGIBLE,
            epoch,
            _default_worth(shifts, programme.tariff),
        ),
        shifts=_pack_shifts(shifts, place_of, epoch, programme.tariff),
        plane_x_m=plane_x_m,
        plane_y_m=plane_y_m,
    )
    return Packed(
        problem=problem,
        programme=programme,
        visits=tuple(visits),
        shifts=shifts,
        place_ids=costs.place_ids,
        why_not=codes,
        ways=costs.ways,
    )
