"""Read and check a register: one way in for every format."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from pathlib import Path
from types import MappingProxyType
from typing import TYPE_CHECKING

from georoute.domain.sites import Register, Site, Visit, visit_id_of
from georoute.errors import RegisterError
from georoute.register.codes import Code, new_finding
from georoute.register.headers import lay_out
from georoute.register.ids import compare_ids
from georoute.register.loading import load_table
from georoute.register.rows import parse_rows
from georoute.register.tables import UnreadableFileError

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from georoute.domain.findings import Finding
    from georoute.domain.programme import Programme
    from georoute.register.headers import Layout
    from georoute.register.places import Located
    from georoute.register.rows import ParsedRow
    from georoute.register.tables import RawTable

__all__ = ["DEFAULT_ACCESS_S", "DEFAULT_WORK_S", "check_register", "read_register"]

DEFAULT_WORK_S = 30 * 60.0
"""Seconds of work where neither the row nor a programme says; a choice of ours, to be edited."""

DEFAULT_ACCESS_S = 5 * 60.0
"""Seconds of access where neither the row nor a programme says; a choice of ours, to be edited."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Settings:
    """How to read: the caller's word, else the programme's, else the default."""

    programme: Programme | None
    columns: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))
    sheet: str | None = None
    layer: str | None = None
    crs: str | None = None
    work_s: float = DEFAULT_WORK_S
    access_s: float = DEFAULT_ACCESS_S


def _settings(
    programme: Programme | None,
    columns: Mapping[str, str] | None,
    choice: tuple[str | None, str | None, str | None],
    defaults: tuple[float | None, float | None],
) -> _Settings:
    sheet, layer, crs = choice
    work_s, access_s = defaults
    source = None if programme is None else programme.register
    if programme is not None:
        work_s = programme.default_work_s if work_s is None else work_s
        access_s = programme.default_access_s if access_s is None else access_s
    if source is not None:
        columns = source.columns if columns is None else columns
        sheet, layer, crs = sheet or source.sheet, layer or source.layer, crs or source.crs
    return _Settings(
        programme=programme,
        columns=columns or {},
        sheet=sheet or None,
        layer=layer or None,
        crs=crs or None,
        work_s=DEFAULT_WORK_S if work_s is None else work_s,
        access_s=DEFAULT_ACCESS_S if access_s is None else access_s,
    )


def read_register(  # noqa: PLR0913 - every setting of reading has a name of its own
    path: Path | str,
    *,
    programme: Programme | None = None,
    columns: Mapping[str, str] | None = None,
    sheet: str | None = None,
    layer: str | None = None,
    crs: str | None = None,
    default_work_s: float | None = None,
    default_access_s: float | None = None,
) -> tuple[Register, tuple[Finding, ...]]:
    """Read a register and check it.

    Parameters
    ----------
    path
        The file: .csv, .tsv, .txt, .xlsx, .xlsm, or a vector file of points.
    programme
        The programme it is for; gives defaults for all that follows, and more to check.
    columns
        Headers of the file by canonical column name, for foreign headers.
    sheet
        Sheet of a workbook.
    layer
        Layer of a vector file.
    crs
        Coordinate system of a file that does not state its own.
    default_work_s
        Seconds of work of a row that states none.
    default_access_s
        Seconds of access of a row that states none.

    Returns
    -------
    register : Register
        Sites and visits, in file order.
    findings : tuple of Finding
        Warnings and notes.

    Raises
    ------
    RegisterError
        If there is any fault; its ``findings`` are all faults, warnings and notes together.
    """
    settings = _settings(
        programme, columns, (sheet, layer, crs), (default_work_s, default_access_s)
    )
    register, findings = _read(Path(path), settings)
    if register is None:
        faults = [finding for finding in findings if finding.is_fault]
        first = faults[0]
        where = f" (row {first.row})" if first.row is not None else ""
        count = f"{len(faults)} faults" if len(faults) > 1 else "1 fault"
        msg = f"{path}: {count}; the first{where}: {first.message}; {first.remedy}"
        raise RegisterError(msg, findings=findings)
    return register, findings


def check_register(  # noqa: PLR0913 - as read_register
    path: Path | str,
    *,
    programme: Programme | None = None,
    columns: Mapping[str, str] | None = None,
    sheet: str | None = None,
    layer: str | None = None,
    crs: str | None = None,
    default_work_s: float | None = None,
    default_access_s: float | None = None,
) -> tuple[Finding, ...]:
    """Check a register; the arguments are those of `read_register`.

    Returns
    -------
    tuple of Finding
        All faults, warnings and notes: first those of the file, then by row.
    """
    settings = _settings(
        programme, columns, (sheet, layer, crs), (default_work_s, default_access_s)
    )
    return _read(Path(path), settings)[1]


def _read(path: Path, settings: _Settings) -> tuple[Register | None, tuple[Finding, ...]]:
    try:
        table, digest = load_table(
            path, mapping=settings.columns, sheet=settings.sheet, layer=settings.layer
        )
    except UnreadableFileError as fault:
        return None, _sorted(fault.findings, path)
    layout = lay_out(table, mapping=settings.columns)
    rows, row_findings = parse_rows(table, layout, programme=settings.programme)
    located, place_findings = _locate(table, layout, rows, settings)
    bases = () if settings.programme is None else settings.programme.bases
    findings = [
        *table.findings,
        *layout.findings,
        *row_findings,
        *compare_ids(
            rows,
            column=layout.written.get("site_id", "site_id"),
            base_ids=frozenset(base.base_id for base in bases),
        ),
        *place_findings,
    ]
    if not table.rows and not any(finding.is_fault for finding in table.findings):
        findings.append(
            new_finding(
                Code.NO_ROWS,
                "the file has no row below its headers",
                "write one row per site",
            )
        )
    ordered = _sorted(findings, path)
    if any(finding.is_fault for finding in findings):
        return None, ordered
    return _register(path, digest, layout, rows, located, settings), ordered


def _sorted(findings: Sequence[Finding], path: Path) -> tuple[Finding, ...]:
    """Order findings by row, those of the file as a whole first, and name the file."""
    named = (replace(finding, file=str(path)) for finding in findings)
    return tuple(sorted(named, key=lambda finding: finding.row or 0))


def _locate(
    table: RawTable, layout: Layout, rows: Sequence[ParsedRow], settings: _Settings
) -> tuple[Located | None, list[Finding]]:
    from georoute.register.crs import find_crs  # noqa: PLC0415 - slow to import
    from georoute.register.places import locate  # noqa: PLC0415 - slow to import

    crs = find_crs(stated=table.crs, wanted=settings.crs, needed=table.has_geometry)
    findings = list(crs.findings)
    has_places = table.has_geometry or {"lat", "lon"} <= set(layout.known)
    if any(finding.is_fault for finding in findings) or not has_places:
        return None, findings
    columns = (layout.written.get("lat", "lat"), layout.written.get("lon", "lon"))
    if table.has_geometry:
        columns = ("geometry", "geometry")
    bases = () if settings.programme is None else settings.programme.bases
    located = locate(rows, crs=crs, columns=columns, bases=bases)
    return located, [*findings, *located.findings]


def _register(
    path: Path,
    digest: str,
    layout: Layout,
    rows: Sequence[ParsedRow],
    located: Located | None,
    settings: _Settings,
) -> Register | None:
    if located is None:
        return None
    places = zip(rows, located.lat_deg.tolist(), located.lon_deg.tolist(), strict=True)
    return Register(
        sites=tuple(_site(row, lat, lon) for row, lat, lon in places),
        visits=tuple(_visit(row, settings) for row in rows),
        source=str(path),
        sha256=digest,
        extra_columns=tuple(header for header, _ in layout.extra),
    )


def _site(row: ParsedRow, lat_deg: float, lon_deg: float) -> Site:
    return Site(
        site_id=row.site_id,
        lat_deg=lat_deg,
        lon_deg=lon_deg,
        name=row.texts["name"],
        address=row.texts["address"],
        contact=row.texts["contact"],
        notes=row.texts["notes"],
        row=row.number,
        extra=MappingProxyType(row.extra),
    )


def _visit(row: ParsedRow, settings: _Settings) -> Visit:
    work_min, access_min = row.minutes.get("work_min"), row.minutes.get("access_min")
    return Visit(
        visit_id=visit_id_of(row.site_id, row.task),
        site_id=row.site_id,
        task=row.task,
        work_s=settings.work_s if work_min is None else work_min * 60.0,
        access_s=settings.access_s if access_min is None else access_min * 60.0,
        load=row.numbers.get("load", 0.0),
        earliest=row.dates.get("earliest_date"),
        due=row.dates.get("due_date"),
        latest=row.dates.get("latest_date"),
        inspector_ids=row.inspectors,
        worth=row.numbers.get("worth"),
        must=row.must,
    )
