"""Any table of edges that geopandas reads, brought into the table of roads by named columns."""

from __future__ import annotations

import math
from dataclasses import dataclass, fields
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
import shapely

from georoute.domain.run import no_progress
from georoute.errors import RoadError
from georoute.roads.line_table import Line, table_of_lines
from georoute.roads.remarks import Tally

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    import geopandas as gpd

    from georoute.domain.run import Progress
    from georoute.roads.box import Box
    from georoute.roads.model import RoadTable
    from georoute.roads.speeds import SpeedProfile

__all__ = ["EdgeColumns", "read_edge_table"]

_ALONG = frozenset({"yes", "true", "1", "1.0", "f", "ft", "forward"})
_AGAINST = frozenset({"-1", "-1.0", "reverse", "t", "tf", "backward"})
_DIGITS = 7  # OpenStreetMap and most tables: 1e-7 degree is a centimetre


@dataclass(frozen=True, slots=True, kw_only=True)
class EdgeColumns:
    """Names of a table's columns; ``None``: the table has none.

    ``from_node``, ``to_node``: ids of the ends; without them, lines whose ends have the same
    coordinates meet. ``length_m``: else measured along the line. ``speed_kmh``: a limit, to which
    the real factor is applied; ``time_s``: real time, used as it is; without both, the speed of
    the class. ``oneway``: yes/true/1/F/FT along the line, -1/reverse/T/TF against it, all else
    both ways.
    """

    from_node: str | None = None
    to_node: str | None = None
    length_m: str | None = None
    speed_kmh: str | None = None
    time_s: str | None = None
    oneway: str | None = None
    name: str | None = None
    road_class: str | None = None


def _read(path: Path, layer: str | None) -> gpd.GeoDataFrame:
    import geopandas as gpd  # noqa: PLC0415 - heavy, and needed for this source only
    from pyogrio.errors import DataLayerError, DataSourceError  # noqa: PLC0415 - as geopandas

    try:
        if path.suffix.lower() in {".parquet", ".geoparquet"}:
            return gpd.read_parquet(path)
        return gpd.read_file(path, layer=layer) if layer else gpd.read_file(path)
    except (DataLayerError, DataSourceError, OSError, ValueError) as error:
        msg = (
            f"{path}: cannot be read as a table of edges ({error}); "
            f"give a file that geopandas reads, with lines"
        )
        raise RoadError(msg) from error


def _checked(frame: Any, path: Path, columns: EdgeColumns) -> gpd.GeoDataFrame:  # noqa: ANN401 - any table may come back
    """Return the table in WGS 84 with all named columns there."""
    if not hasattr(frame, "to_crs"):  # geopandas gives a plain table where there is no geometry
        msg = f"{path}: has no lines; a table of edges needs a geometry column"
        raise RoadError(msg)
    named = {f.name: getattr(columns, f.name) for f in fields(columns)}
    missing = [f"{name} = {column!r}" for name, column in named.items() if column is not None
               and column not in frame.columns]  # fmt: skip
    if missing:
        have = ", ".join(str(column) for column in frame.columns)
        msg = f"{path}: lacks the columns {', '.join(missing)}; it has: {have}"
        raise RoadError(msg)
    if (columns.from_node is None) != (columns.to_node is None):
        msg = f"{path}: name both columns, from_node and to_node, or none of them"
        raise RoadError(msg)
    if frame.crs is None:
        msg = f"{path}: does not tell its coordinate reference system; set one (e.g. EPSG:4326)"
        raise RoadError(msg)
    return frame.to_crs(4326)


def _number(value: object) -> float | None:
    """Return a finite number above 0, or nothing."""
    try:
        number = float(value)  # type: ignore[arg-type] # whatever a table holds; errors are caught
    except (TypeError, ValueError):
        return None
    return number if math.isfinite(number) and number > 0 else None


def _text(value: object) -> str:
    """Return a text; nothing for missing values (NaN is the one float unequal to itself)."""
    if value is None or (isinstance(value, float) and math.isnan(value)):
        return ""
    return str(value).strip()


def _directions(value: object) -> tuple[bool, bool]:
    text = _text(value).lower()
    if text in _ALONG:
        return True, False
    return (False, True) if text in _AGAINST else (True, True)


def _line(
    row: Mapping[str, object], shape: Any, number: int, profile: SpeedProfile, tally: Tally  # noqa: ANN401 - a shapely line
) -> Line:  # fmt: skip
    points = shapely.get_coordinates(shape)
    ends = [tuple(np.round(point, _DIGITS).tolist()) for point in (points[0], points[-1])]
    keys = [_text(row.get(key)) for key in ("from_node", "to_node")]
    road_class = _text(row.get("road_class")) or "road"
    time_s = _number(row.get("time_s"))
    limit = _number(row.get("speed_kmh"))
    if limit is None and time_s is None and ("speed_kmh" in row or "time_s" in row):
        tally.add("row_speed_missing", f"row {number}")
    kmh = (limit or profile.class_kmh(road_class)) * profile.factor(road_class)
    along, against = _directions(row.get("oneway"))
    return Line(
        from_node=keys[0] if "from_node" in row else ends[0],
        to_node=keys[1] if "from_node" in row else ends[1],
        lat=points[:, 1].copy(),
        lon=points[:, 0].copy(),
        forward_kmh=kmh * along,
        backward_kmh=kmh * against,
        way=number,
        road_class=road_class,
        name=_text(row.get("name")),
        length_m=_number(row.get("length_m")),
        time_s=time_s,
    )


def _single_lines(shape: Any) -> Iterator[Any]:  # noqa: ANN401 - shapely has no types for parts
    """Yield the lines of a shape; parts that join are one line."""
    if shape is None or shape.is_empty:
        return
    if shape.geom_type == "MultiLineString":
        shape = shapely.line_merge(shape)
    for part in shapely.get_parts(shape):
        if part.geom_type == "LineString" and np.isfinite(shapely.get_coordinates(part)).all():
            yield part


def _lines(
    frame: gpd.GeoDataFrame, columns: EdgeColumns, profile: SpeedProfile, tally: Tally
) -> list[Line]:
    named = {
        f.name: frame[getattr(columns, f.name)].tolist()
        for f in fields(columns)
        if getattr(columns, f.name) is not None
    }
    lines: list[Line] = []
    for index, shape in enumerate(frame.geometry.array):
        number = index + 2  # the header is row 1
        row = {name: values[index] for name, values in named.items()}
        parts = list(_single_lines(shape))
        ends_named = all(_text(row[key]) for key in ("from_node", "to_node") if key in row)
        several = "from_node" in row and len(parts) > 1
        if not parts or not ends_named or several:
            tally.add("row_incomplete", f"row {number}")
            continue
        lines.extend(_line(row, part, number, profile, tally) for part in parts)
    return lines


def read_edge_table(
    path: Path | str,
    *,
    columns: EdgeColumns,
    profile: SpeedProfile,
    layer: str | None = None,
    within: Box | None = None,
    progress: Progress = no_progress,
) -> RoadTable:
    """Read roads from a table of lines, in any format and reference system geopandas reads.

    Rows that cannot be used are counted in the remarks with an example. Such tables hold no turn
    restrictions; a remark says so.

    Raises
    ------
    RoadError
        If the file cannot be read, lacks a named column, lines or a reference system, or has no
        road in the box.
    """
    path = Path(path)
    if not path.exists():
        msg = f"{path}: does not exist; give a file with lines that geopandas reads"
        raise RoadError(msg)
    progress("roads", fraction=0.0)
    tally = Tally()
    tally.add("source_without_turns", path.name)
    frame = _checked(_read(path, layer), path, columns)
    progress("roads", fraction=0.5)
    lines = _lines(frame, columns, profile, tally)
    table = table_of_lines(lines, within=within, tally=tally, source=path.name, credit="")
    progress("roads", fraction=1.0)
    return table
