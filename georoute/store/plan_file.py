"""Write a plan to its file and read it back, without loss either way."""

from __future__ import annotations

import sqlite3
from collections import defaultdict
from pathlib import Path
from types import MappingProxyType
from typing import TYPE_CHECKING
from zoneinfo import ZoneInfo

from georoute.domain.plan import Capacity, Plan, Provenance, TravelNote
from georoute.domain.programme import Programme
from georoute.errors import OutputError, PlanFileError
from georoute.files import atomic_path
from georoute.store.geopackage import logs_beside, read_tables, write_sheets
from georoute.store.migrations import migrated
from georoute.store.rows import build
from georoute.store.schema import BACKDROP, EXTRA_COLUMNS, PLAN, ROAD_POINTS, TABLES
from georoute.store.settings import read_settings
from georoute.store.sheets import sheets_of

if TYPE_CHECKING:
    from collections.abc import Mapping

    from georoute.domain.plan import DayTour
    from georoute.domain.sites import Site
    from georoute.store.geopackage import Tables

__all__ = ["read_plan", "write_plan"]


def _texts(tables: Tables) -> dict[str, str]:
    return {str(row["key"]): str(row["value"]) for row in tables[PLAN]}


def _objects(tables: Tables, name: str, zone: ZoneInfo) -> tuple[object, ...]:
    return tuple(build(TABLES[name], row, zone) for row in tables[name])


def _sites(tables: Tables, zone: ZoneInfo) -> tuple[Site, ...]:
    names = {str(row["site_column"]): str(row["header"]) for row in tables[EXTRA_COLUMNS]}
    sites = []
    for row in tables["sites"]:
        extra = {header: row[column] for column, header in names.items()}
        kept = MappingProxyType({header: v for header, v in extra.items() if v is not None})
        sites.append(build(TABLES["sites"], row, zone, extra=kept))
    return tuple(sites)


def _by_tour(tables: Tables, name: str, zone: ZoneInfo) -> Mapping[object, list[object]]:
    found: dict[object, list[object]] = defaultdict(list)
    for row in tables[name]:
        found[row["tour_no"]].append(build(TABLES[name], row, zone))
    return found


def _tours(tables: Tables, zone: ZoneInfo) -> tuple[DayTour, ...]:
    stops, legs = _by_tour(tables, "stops", zone), _by_tour(tables, "legs", zone)
    return tuple(
        build(TABLES["days"], row, zone, stops=tuple(stops[number]), legs=tuple(legs[number]))
        for number, row in enumerate(tables["days"], 1)
    )


def _programme(tables: Tables, texts: Mapping[str, str], zone: ZoneInfo) -> Programme:
    programme: Programme = read_settings(
        Programme,
        texts,
        prefix="programme",
        bases=_objects(tables, "bases", zone),
        inspectors=_objects(tables, "inspectors", zone),
    )
    return programme


def _plan(tables: Tables) -> Plan:
    texts = _texts(tables)
    zone = ZoneInfo(texts["programme.zone"])
    values: dict[str, object] = {
        name: _objects(tables, name, zone) for name in ("visits", "unplaced", "stages", "exchanges")
    }
    # Files of the first versions have no tables of roads.
    for name in (ROAD_POINTS, BACKDROP):
        values[name] = _objects(tables, name, zone) if name in tables else ()
    fields: dict[str, object] = {
        "plan_id": texts["plan_id"],
        "programme": _programme(tables, texts, zone),
        "sites": _sites(tables, zone),
        "tours": _tours(tables, zone),
        "capacity": read_settings(Capacity, texts, prefix="capacity"),
        "travel": read_settings(TravelNote, texts, prefix="travel"),
        "provenance": read_settings(Provenance, texts, prefix="provenance"),
        "extra_columns": tuple(
            str(row["header"]) for row in tables[EXTRA_COLUMNS] if row["in_register"]
        ),
    }
    return Plan(**values, **fields)  # type: ignore[arg-type]  # types follow the model's hints


def read_plan(path: Path | str) -> Plan:
    """Return the plan that a plan file holds.

    Parameters
    ----------
    path
        A ``*.gpkg`` file written by ``write_plan``, of this schema or an older one.

    Raises
    ------
    PlanFileError
        The file is missing, damaged, no plan file, or of a newer schema.
    """
    place = Path(path)
    tables = migrated(dict(read_tables(place)), path=place)
    try:
        return _plan(tables)
    except (KeyError, TypeError, ValueError, AttributeError) as error:
        msg = f"{place}: is damaged ({error!r}); restore a copy or run `plan` again"
        raise PlanFileError(msg) from error


def _refuse_open_elsewhere(path: Path) -> None:
    """Refuse to write under a log of another program, which would be played into the new file."""
    for log in logs_beside(path):
        msg = (
            f"{path}: is open in another program ({log.name} lies beside it); close it there; "
            f"if no program has it open, remove {log.name} and try again"
        )
        raise OutputError(msg)


def _verify(plan: Plan, temporary: Path, target: Path) -> None:
    if read_plan(temporary) != plan:
        msg = (
            f"{target}: the plan does not come back from the file as it was; nothing was "
            "replaced; a figure may be no number, or a time of another zone than the programme's"
        )
        raise OutputError(msg)


def write_plan(plan: Plan, path: Path | str) -> None:
    """Write a plan to its file, wholly or not at all.

    The file is written beside its place, read back and compared with ``plan``, then renamed: at
    every moment ``path`` is the whole previous file or the whole new one. Equal plans give equal
    bytes under the same version of SQLite.

    Parameters
    ----------
    plan
        The plan to keep.
    path
        Where; by custom ``*.gpkg``. Missing folders are made.

    Raises
    ------
    OutputError
        The file could not be written, or is open in another program; the previous one is
        untouched.
    """
    target = Path(path)
    _refuse_open_elsewhere(target)
    try:
        with atomic_path(target, verify=lambda made: _verify(plan, made, target)) as temporary:
            write_sheets(temporary, sheets_of(plan))
    except (sqlite3.Error, UnicodeEncodeError, OverflowError, PlanFileError) as error:
        msg = f"{target}: could not be written: {error}; the previous file is untouched"
        raise OutputError(msg) from error
