"""Read programme.toml: parse, check everything at once, and make the typed programme."""

from __future__ import annotations

import hashlib
import re
import tomllib
from dataclasses import replace
from pathlib import Path
from types import MappingProxyType
from typing import TYPE_CHECKING

from georoute.domain.costs import Tariff
from georoute.domain.people import Inspector
from georoute.domain.programme import (
    DetourModel,
    Programme,
    RegisterSource,
    RoadSettings,
    TravelMethod,
    TravelSettings,
)
from georoute.domain.run import EFFORTS, Aim
from georoute.domain.sites import Base
from georoute.errors import ProgrammeError
from georoute.register.calendars import calendar_of, merged
from georoute.register.codes import Code, new_finding
from georoute.register.people_checks import shift_of
from georoute.register.programme_checks import check_parts
from georoute.register.programme_parts import Notebook, Parts, parts_of
from georoute.register.schema_faults import schema_faults
from georoute.register.sources import bytes_of
from georoute.register.tables import UnreadableFileError
from georoute.register.toml_lines import KeyLines

if TYPE_CHECKING:
    from collections.abc import Sequence
    from datetime import date

    from georoute.domain.findings import Finding
    from georoute.register.schema import RegisterSection, TariffSection, TravelSection

__all__ = ["check_programme", "read_programme"]

_PLACE = re.compile(r"\(at line (\d+), column (\d+)\)")
_DEEPEST = "nested too deeply"


def read_programme(path: Path | str) -> Programme:
    """Read a programme file.

    Parameters
    ----------
    path
        The file; paths in it are seen from its folder.

    Returns
    -------
    Programme
        All settings; the paths of the register and of a travel table can be opened as they are.

    Raises
    ------
    ProgrammeError
        If there is any fault; its ``findings`` are all faults and warnings together.
    """
    programme, findings = _read(Path(path))
    if programme is None:
        faults = [finding for finding in findings if finding.is_fault]
        first = faults[0]
        where = f" (line {first.row})" if first.row is not None else ""
        what = f"{first.column}: {first.message}" if first.column else first.message
        count = f"{len(faults)} faults" if len(faults) > 1 else "1 fault"
        msg = f"{path}: {count}; the first{where}: {what}; {first.remedy}"
        raise ProgrammeError(msg, findings=findings)
    return programme


def check_programme(path: Path | str) -> tuple[Finding, ...]:
    """Check a programme file.

    Parameters
    ----------
    path
        The file.

    Returns
    -------
    tuple of Finding
        All faults and warnings by line; ``column`` is the key, counted from 1 where there are
        several of a kind (``inspector[2].shift_start``).
    """
    return _read(Path(path))[1]


def _read(path: Path) -> tuple[Programme | None, tuple[Finding, ...]]:
    try:
        data = bytes_of(path)
    except UnreadableFileError as fault:
        return None, _sorted(fault.findings, path)
    parsed = _parse(data)
    if not isinstance(parsed, tuple):
        return None, _sorted([parsed], path)
    raw, text = parsed
    notebook = Notebook(KeyLines(text))
    notebook.findings += schema_faults(raw, notebook.lines)
    parts = parts_of(raw)
    check_parts(parts, notebook)
    findings = _sorted(notebook.findings, path)
    if any(finding.is_fault for finding in findings):
        return None, findings
    return _programme(path, hashlib.sha256(data).hexdigest(), parts), findings


def _sorted(findings: Sequence[Finding], path: Path) -> tuple[Finding, ...]:
    named = (replace(finding, file=str(path)) for finding in findings)
    return tuple(sorted(named, key=lambda finding: finding.row or 0))


def _parse(data: bytes) -> tuple[dict[str, object], str] | Finding:
    """Parse TOML; what breaks its rules comes back as a fault with its line."""
    try:
        text = data.decode("utf-8-sig").replace("\r\n", "\n")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        return new_finding(
            Code.UNKNOWN_ENCODING,
            "the file is not UTF-8 text, which TOML asks for",
            "save it as UTF-8 in the text editor",
            row=line,
        )
    if not text.strip():
        return new_finding(
            Code.EMPTY_FILE, "the file is empty", "write the programme; README lists its keys"
        )
    try:
        return tomllib.loads(text), text
    except RecursionError:
        return _syntax(_DEEPEST, None)
    except ValueError as error:  # a number too long to read is one as well
        reason = str(error)
        place = _PLACE.search(reason)
        last = text.rstrip("\n").count("\n") + 1
        where = int(place[1]) if place else last if "end of document" in reason else None
        return _syntax(_PLACE.sub("", reason).strip(), where)


def _syntax(reason: str, line: int | None) -> Finding:
    return new_finding(
        Code.TOML_SYNTAX,
        f"this is not TOML: {reason}",
        "look at this line and the one before: text stands in quotation marks, a list in "
        "brackets, a date is YYYY-MM-DD, a section is [name]",
        row=line,
    )


def _beside(path: Path, written: str) -> str:
    """Return a path that can be opened, from one seen from the programme's folder."""
    return str(path.parent / written)


def _programme(path: Path, digest: str, parts: Parts) -> Programme | None:
    """Make the typed programme from sections without a fault."""
    register, tariff = parts.register, parts.tariff
    zone, first, last = parts.zone, parts.first_date, parts.last_date
    if zone is None or first is None or last is None or register is None or tariff is None:
        return None  # cannot be: an absent or faulty section is a fault of the schema
    return Programme(
        title=parts.title,
        zone=zone,
        first_date=first,
        last_date=last,
        bases=tuple(
            Base(
                base_id=base.base_id,
                name=base.name or base.base_id,
                lat_deg=base.lat,
                lon_deg=base.lon,
            )
            for _, base in parts.bases
        ),
        inspectors=_inspectors(parts, first, last),
        tariff=_tariff(tariff),
        travel=_travel(path, parts.travel),
        default_work_s=parts.work.work_min * 60.0,
        default_access_s=parts.work.access_min * 60.0,
        aim=Aim(parts.search.aim),
        seed=parts.search.seed,
        effort=replace(EFFORTS[parts.search.effort], seconds=parts.search.seconds),
        register=_register_source(path, register),
        source=str(path),
        sha256=digest,
    )


def _inspectors(parts: Parts, first: date, last: date) -> tuple[Inspector, ...]:
    inspectors = []
    for _, section in parts.inspectors:
        shift = shift_of(parts, section)
        if shift is None:
            continue  # cannot be: it was a fault
        start_base = section.start_base or parts.base_ids[0]
        inspectors.append(
            Inspector(
                inspector_id=section.inspector_id,
                name=section.name or section.inspector_id,
                start_base_id=start_base,
                end_base_id=section.end_base or start_base,
                shift_start=shift.start,
                shift_end=shift.end,
                paid_s=shift.paid_s,
                overtime_limit_s=shift.overtime_s,
                write_up_s=shift.write_up_s,
                load_limit=shift.load_limit,
                calendar=calendar_of(merged(parts.calendar, section), first=first, last=last),
            )
        )
    return tuple(inspectors)


def _tariff(section: TariffSection) -> Tariff:
    overtime = section.overtime_hour
    return Tariff(
        currency=section.currency,
        hour=section.hour,
        km=section.km,
        overtime_hour=section.hour if overtime is None else overtime,
        day_opened=section.day_opened,
    )


def _travel(path: Path, section: TravelSection) -> TravelSettings:
    return TravelSettings(
        method=TravelMethod(section.method),
        speed_kmh=section.speed_kmh,
        circuity=section.circuity,
        detour=DetourModel(**section.detour.model_dump()),
        table_path=None if section.table is None else _beside(path, section.table),
        roads=None if section.roads.path is None else _roads(path, section.roads.path, section),
    )


def _roads(folder: Path, path: str, section: TravelSection) -> RoadSettings:
    roads = section.roads
    return RoadSettings(
        path=_beside(folder, path),
        country=roads.country.upper(),
        speeds_kmh=MappingProxyType(dict(roads.speeds)),
        real_factors=MappingProxyType(dict(roads.real_factors)),
        snap_limit_m=roads.snap_limit_m,
        vehicle_height_m=roads.vehicle_height_m,
        vehicle_width_m=roads.vehicle_width_m,
        vehicle_weight_t=roads.vehicle_weight_t,
        columns=MappingProxyType(dict(roads.columns)),
    )


def _register_source(path: Path, section: RegisterSection) -> RegisterSource:
    return RegisterSource(
        path=_beside(path, section.path),
        columns=MappingProxyType(dict(section.columns)),
        sheet=section.sheet or None,
        layer=section.layer or None,
        crs=section.crs or None,
        credit=section.credit,
    )
