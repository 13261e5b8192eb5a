"""GeoPackage files: layers and tables in one SQLite file, as OGC 12-128r18 (version 1.3) has it.

Equal sheets give equal bytes: nothing of the time of writing goes into the file.
"""

from __future__ import annotations

import contextlib
import sqlite3
import struct
from typing import TYPE_CHECKING
from urllib.parse import quote

from georoute.errors import PlanFileError

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping
    from pathlib import Path

    from georoute.store.cells import Cell
    from georoute.store.lines import Point
    from georoute.store.sheets import Shape, Sheet

__all__ = ["APPLICATION_ID", "Tables", "logs_beside", "read_tables", "write_sheets"]

Tables = dict[str, list[dict[str, object]]]
"""Rows by column name, by table."""

APPLICATION_ID = 0x47504B47
"""``GPKG`` in ASCII (requirement 2)."""

USER_VERSION = 10_300
"""Version 1.3 of the standard."""

LAST_CHANGE = "1970-01-01T00:00:00.000Z"
"""The same for every file, so that equal plans give equal files; ``plan`` tells the issue time."""

WGS84 = 4326
WKB_POINT, WKB_LINE, WKB_LINES = 1, 2, 5

# Table 3 and requirement 11 of the standard.
_WGS84_WKT = (
    'GEOGCS["WGS 84",DATUM["WGS_1984",SPHEROID["WGS 84",6378137,298.257223563,'
    'AUTHORITY["EPSG","7030"]],AUTHORITY["EPSG","6326"]],PRIMEM["Greenwich",0,'
    'AUTHORITY["EPSG","8901"]],UNIT["degree",0.0174532925199433,AUTHORITY["EPSG","9122"]],'
    'AXIS["Latitude",NORTH],AXIS["Longitude",EAST],AUTHORITY["EPSG","4326"]]'
)
_REFERENCE_SYSTEMS = (
    ("Undefined Cartesian SRS", -1, "NONE", -1, "undefined", "undefined Cartesian system"),
    ("Undefined geographic SRS", 0, "NONE", 0, "undefined", "undefined geographic system"),
    ("WGS 84 geodetic", WGS84, "EPSG", 4326, _WGS84_WKT, "longitude and latitude in degrees"),
)

# Annex C of the standard.
_META_TABLES = (
    """CREATE TABLE gpkg_spatial_ref_sys (
    srs_name TEXT NOT NULL, srs_id INTEGER PRIMARY KEY, organization TEXT NOT NULL,
    organization_coordsys_id INTEGER NOT NULL, definition TEXT NOT NULL, description TEXT)""",
    """CREATE TABLE gpkg_contents (
    table_name TEXT NOT NULL PRIMARY KEY, data_type TEXT NOT NULL, identifier TEXT UNIQUE,
    description TEXT DEFAULT '',
    last_change DATETIME NOT NULL DEFAULT (strftime('%Y-%m-%dT%H:%M:%fZ','now')),
    min_x DOUBLE, min_y DOUBLE, max_x DOUBLE, max_y DOUBLE, srs_id INTEGER,
    CONSTRAINT fk_gc_r_srs_id FOREIGN KEY (srs_id) REFERENCES gpkg_spatial_ref_sys(srs_id))""",
    """CREATE TABLE gpkg_geometry_columns (
    table_name TEXT NOT NULL, column_name TEXT NOT NULL, geometry_type_name TEXT NOT NULL,
    srs_id INTEGER NOT NULL, z TINYINT NOT NULL, m TINYINT NOT NULL,
    CONSTRAINT pk_geom_cols PRIMARY KEY (table_name, column_name),
    CONSTRAINT uk_gc_table_name UNIQUE (table_name),
    CONSTRAINT fk_gc_tn FOREIGN KEY (table_name) REFERENCES gpkg_contents(table_name),
    CONSTRAINT fk_gc_srs FOREIGN KEY (srs_id) REFERENCES gpkg_spatial_ref_sys (srs_id))""",
)


def _quoted(name: str) -> str:
    return '"' + name.replace('"', '""') + '"'


def _corners(shape: Shape) -> list[Point]:
    return [corner for line in shape for corner in line]


def _bounds(corners: list[Point]) -> tuple[float, float, float, float]:
    """Return smallest and largest x, then smallest and largest y."""
    xs, ys = [x for x, _ in corners], [y for _, y in corners]
    return min(xs), max(xs), min(ys), max(ys)


def _blob(geometry: str, shape: Shape) -> bytes:
    """Return the binary form of section 2.1.3: header, bounds of lines, then ISO WKB; x is lon."""
    if geometry == "POINT":
        flags = 0b0000_0001  # little-endian, no bounds
        header = struct.pack("<2sBBi", b"GP", 0, flags, WGS84)
        return header + struct.pack("<BIdd", 1, WKB_POINT, *shape[0][0])
    flags = 0b0000_0011  # little-endian, bounds in x and y
    header = struct.pack("<2sBBi4d", b"GP", 0, flags, WGS84, *_bounds(_corners(shape)))
    body = struct.pack("<BII", 1, WKB_LINES, len(shape))
    for line in shape:
        body += struct.pack("<BII", 1, WKB_LINE, len(line))
        body += b"".join(struct.pack("<dd", *corner) for corner in line)
    return header + body


def _create(connection: sqlite3.Connection, sheet: Sheet) -> None:
    columns = ["fid INTEGER PRIMARY KEY AUTOINCREMENT NOT NULL"]
    if sheet.geometry:
        columns.append(f"geom {sheet.geometry}")
    columns += [f"{_quoted(name)} {codec.sql}" for name, codec in sheet.columns]
    connection.execute(f"CREATE TABLE {_quoted(sheet.name)} ({', '.join(columns)})")


def _fill(connection: sqlite3.Connection, sheet: Sheet) -> None:
    names = ["fid", *(["geom"] if sheet.geometry else []), *(name for name, _ in sheet.columns)]
    marks = ", ".join("?" * len(names))
    target = f"{_quoted(sheet.name)} ({', '.join(map(_quoted, names))})"
    rows: list[tuple[Cell | bytes, ...]] = []
    for number, row in enumerate(sheet.rows, 1):
        cells = (c.to_cell(v) for (_, c), v in zip(sheet.columns, row, strict=True))
        if sheet.geometry:
            shape = sheet.shapes[number - 1]
            blob = None if shape is None else _blob(sheet.geometry, shape)
            rows.append((number, blob, *cells))
        else:
            rows.append((number, *cells))
    # Names are quoted, values are bound.
    connection.executemany(f"INSERT INTO {target} VALUES ({marks})", rows)  # noqa: S608 - see above


def _register(connection: sqlite3.Connection, sheet: Sheet) -> None:
    kind = "features" if sheet.geometry else "attributes"
    corners = [corner for shape in sheet.shapes if shape is not None for corner in _corners(shape)]
    min_x, max_x, min_y, max_y = _bounds(corners) if corners else (None,) * 4
    connection.execute(
        "INSERT INTO gpkg_contents VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?)",
        (
            *(sheet.name, kind, sheet.name, sheet.description, LAST_CHANGE),
            *(min_x, min_y, max_x, max_y, WGS84 if sheet.geometry else None),
        ),
    )
    if sheet.geometry:
        connection.execute(
            "INSERT INTO gpkg_geometry_columns VALUES (?, 'geom', ?, ?, 0, 0)",
            (sheet.name, sheet.geometry, WGS84),
        )


def write_sheets(path: Path, sheets: tuple[Sheet, ...]) -> None:
    """Write sheets into a new file, which a caller then puts into its place.

    Raises
    ------
    sqlite3.Error
        The file cannot be written.
    """
    with contextlib.closing(sqlite3.connect(path, isolation_level=None)) as connection:
        # The file is new and comes into its place by renaming: no journal, no flush in between.
        connection.execute("PRAGMA journal_mode = OFF")
        connection.execute("PRAGMA synchronous = OFF")
        connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
        connection.execute(f"PRAGMA user_version = {USER_VERSION}")
        connection.execute("BEGIN")
        for statement in _META_TABLES:
            connection.execute(statement)
        connection.executemany(
            "INSERT INTO gpkg_spatial_ref_sys VALUES (?, ?, ?, ?, ?, ?)", _REFERENCE_SYSTEMS
        )
        for sheet in sheets:
            _create(connection, sheet)
            _fill(connection, sheet)
            _register(connection, sheet)
        connection.execute("COMMIT")


def logs_beside(path: Path) -> tuple[Path, ...]:
    """Return the logs of SQLite beside a file: another program has it open, or died with it.

    An empty log holds nothing and counts as none.
    """
    real = path.resolve()
    logs = (real.with_name(real.name + suffix) for suffix in ("-wal", "-journal"))
    return tuple(log for log in logs if log.exists() and log.stat().st_size > 0)


@contextlib.contextmanager
def _reading(path: Path) -> Iterator[sqlite3.Connection]:
    """Open a file for reading only, and leave nothing beside it.

    Without a log the file is whole in itself and is read as one that does not change: plain
    reading of a file that a GIS once opened with a write-ahead log would leave a log behind.
    """
    whole = "" if logs_beside(path) else "&immutable=1"
    uri = f"file:{quote(str(path.absolute()))}?mode=ro{whole}"
    with contextlib.closing(sqlite3.connect(uri, uri=True)) as connection:
        yield connection


def _rows(connection: sqlite3.Connection, name: str) -> list[dict[str, object]]:
    cursor = connection.execute(f"SELECT * FROM {_quoted(name)} ORDER BY fid")  # noqa: S608 - quoted
    columns = [entry[0] for entry in cursor.description]
    return [dict(zip(columns, row, strict=True)) for row in cursor]


def read_tables(path: Path) -> Mapping[str, list[dict[str, object]]]:
    """Return the rows of every registered layer and table, by column name, in order.

    Raises
    ------
    PlanFileError
        There is no such file, or it is damaged or no GeoPackage.
    """
    if not path.is_file():
        msg = f"{path}: there is no such plan file; check the path, or make it with `plan`"
        raise PlanFileError(msg)
    try:
        with _reading(path) as connection:
            (found,) = connection.execute("PRAGMA application_id").fetchone()
            if found != APPLICATION_ID:
                msg = f"{path}: is not a plan file (no GeoPackage); name a file made with `plan`"
                raise PlanFileError(msg)
            names = connection.execute("SELECT table_name FROM gpkg_contents").fetchall()
            return {name: _rows(connection, name) for (name,) in names}
    except (sqlite3.Error, OverflowError, UnicodeDecodeError) as error:
        msg = f"{path}: is damaged or no plan file ({error}); restore a copy or run `plan` again"
        raise PlanFileError(msg) from error
