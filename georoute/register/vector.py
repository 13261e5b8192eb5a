"""Read a register from GeoJSON, GeoPackage and every other vector file that GDAL knows."""

from __future__ import annotations

import math
import warnings
from typing import TYPE_CHECKING, Any

import numpy as np
import pyogrio
import pyogrio.raw
import shapely
from pyogrio.errors import DataLayerError, DataSourceError

from georoute.register.codes import Code, nearest_words, new_finding
from georoute.register.tables import Cell, RawRow, RawTable, UnreadableFileError, drop_empty_rows

if TYPE_CHECKING:
    from pathlib import Path

    from georoute.domain.findings import Finding

__all__ = ["VECTOR_SUFFIXES", "read_vector"]

VECTOR_SUFFIXES = (".geojson", ".json", ".gpkg", ".shp", ".fgb", ".gml", ".kml", ".gpx", ".gdb")
"""Suffixes named in messages; other files are tried as well."""

_GDAL_ERRORS = (
    # What pyogrio and the numpy conversions in it were seen to let through for broken files.
    DataSourceError,
    DataLayerError,
    RuntimeError,
    ValueError,
    OverflowError,
    TypeError,
    LookupError,
    OSError,
    shapely.errors.ShapelyError,
)

_GEOJSON = (".geojson", ".json", ".geojsonl", ".geojsons")


def read_vector(path: Path, *, layer: str | None) -> RawTable:
    """Read one layer of a vector file.

    Parameters
    ----------
    path
        The file.
    layer
        Name of the layer; ``None`` takes the first with geometries, and says so where there
        are several.

    Returns
    -------
    RawTable
        Attributes as cells and points in the layer's own coordinate system. Features are
        numbered from 1 in the order of the file: they have no row of headers.

    Raises
    ------
    UnreadableFileError
        If the file or the layer cannot be read.
    """
    if path.is_file() and path.stat().st_size == 0:
        raise UnreadableFileError([_empty("the file is empty")])
    with warnings.catch_warnings(record=True) as remarks:
        warnings.simplefilter("always")
        try:
            name, notes = _choose_layer(path, layer)
            options = {"DATE_AS_STRING": "YES"} if path.suffix.casefold() in _GEOJSON else {}
            meta, _, geometries, columns = pyogrio.raw.read(
                path, layer=name, datetime_as_string=True, force_2d=True, **options
            )
            shapes = _shapes(geometries)
        except UnreadableFileError:
            raise
        except _GDAL_ERRORS as error:
            raise UnreadableFileError([_unreadable(path, str(error))]) from error
    notes += _remarks([str(remark.message) for remark in remarks])
    headers = tuple(str(field) for field in meta["fields"])
    cells = _cell_columns(columns, meta)
    count = max((len(column) for column in cells), default=0 if shapes is None else len(shapes))
    rows = [
        RawRow(number=k + 1, cells=tuple(column[k] for column in cells), **_place(shapes, k))
        for k in range(count)
    ]
    return RawTable(
        headers=headers,
        rows=drop_empty_rows(rows),
        findings=tuple(notes),
        header_row=None,
        has_geometry=shapes is not None,
        crs=str(meta["crs"] or ""),
    )


def _empty(message: str) -> Finding:
    return new_finding(Code.EMPTY_FILE, message, "export the sites anew as points")


def _unreadable(path: Path, reason: str) -> Finding:
    listed = ", ".join(VECTOR_SUFFIXES)
    if "not recognized" in reason and path.suffix.casefold() not in VECTOR_SUFFIXES:
        return new_finding(
            Code.UNKNOWN_FORMAT,
            f"`{path.suffix or path.name}` is no format that can be read",
            f"save the register as .csv, .xlsx or one of {listed}",
        )
    first_line = (reason.splitlines() or [""])[0].split(";")[0]
    return new_finding(
        Code.DAMAGED_FILE,
        f"the file cannot be read as a vector file: {first_line}",
        "open it in a GIS and export it anew, for instance as GeoPackage",
    )


def _remarks(messages: list[str]) -> list[Finding]:
    return [
        new_finding(Code.READER_REMARK, message, "see whether the values concerned matter")
        for message in dict.fromkeys(messages)
        if not message.startswith("More than one layer")
    ]


def _choose_layer(path: Path, wanted: str | None) -> tuple[str, list[Finding]]:
    found = [(str(name), kind) for name, kind in pyogrio.list_layers(path)]
    names = [name for name, _ in found]
    listed = ", ".join(f"`{name}`" for name in names)
    if not names:
        raise UnreadableFileError([_empty("the file has no layer")])
    if wanted is not None:
        if wanted in names:
            return wanted, []
        fault = new_finding(
            Code.WRONG_LAYER,
            f"the file has no layer `{wanted}`; its layers are {listed}",
            f"name one of its layers: {nearest_words(wanted, names)}",
            column="layer",
            value=wanted,
        )
        raise UnreadableFileError([fault])
    chosen = next((name for name, kind in found if kind is not None), names[0])
    if len(names) == 1:
        return chosen, []
    note = new_finding(
        Code.LAYER_ASSUMED,
        f"the file has {len(names)} layers ({listed}); `{chosen}` was read",
        "name the layer in the programme ([register] layer) if that is not right",
        value=chosen,
    )
    return chosen, [note]


def _shapes(geometries: Any) -> Any:  # noqa: ANN401 - object arrays of pyogrio and shapely
    """Return geometries, ``None`` where the layer has none at all."""
    if geometries is None:
        return None
    return shapely.force_2d(shapely.from_wkb(geometries, on_invalid="ignore"))


def _place(shapes: Any, k: int) -> dict[str, Any]:  # noqa: ANN401 - as _shapes
    """Return the point of feature ``k``, or the name of the shape that is no point."""
    shape = None if shapes is None else shapes[k]
    if shape is None or shape.is_empty:
        return {}
    if shape.geom_type == "MultiPoint" and len(shape.geoms) == 1:
        shape = shape.geoms[0]  # many programs write every point as a collection of one
    if shape.geom_type != "Point":
        return {"shape": shape.geom_type}
    return {"point": (float(shape.x), float(shape.y))}


def _cell_columns(columns: Any, meta: dict[str, Any]) -> list[list[Cell]]:  # noqa: ANN401 - as _shapes
    boolean = [subtype == "OFSTBoolean" for subtype in meta["ogr_subtypes"]]
    return [
        [_cell(value, boolean=is_boolean) for value in column.tolist()]
        if column.dtype.kind != "M"
        else [None if text == "NaT" else text for text in np.datetime_as_string(column)]
        for column, is_boolean in zip(columns, boolean, strict=True)
    ]


def _cell(value: object, *, boolean: bool) -> Cell:
    if value is None or (isinstance(value, float) and math.isnan(value)):
        return None  # a missing number and one that was never a number look alike here
    if isinstance(value, (bool, float, int)) and boolean:
        return bool(value)
    if isinstance(value, (str, int, float)):
        return value
    return str(value)
