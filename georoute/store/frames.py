"""A plan as data frames, one for each layer and table of its file."""

from __future__ import annotations

from datetime import date, datetime
from typing import TYPE_CHECKING, Any

import geopandas as gpd
import pandas as pd
import shapely

from georoute.store.sheets import sheets_of

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from georoute.domain.plan import Plan
    from georoute.store.cells import Codec
    from georoute.store.sheets import Shape, Sheet

__all__ = ["to_geodataframes"]

WGS84 = "EPSG:4326"


def _series(codec: Codec, values: Sequence[Any], zone: str) -> pd.Series[Any]:
    """Return one column: times in the programme's zone, dates as days, the rest as in the file."""
    if codec.kind is datetime:
        return pd.Series(pd.to_datetime(list(values), utc=True).tz_convert(zone))
    if codec.kind is date:
        return pd.Series(pd.to_datetime(list(values)))
    cells = [codec.to_cell(value) for value in values]
    if codec.kind is bool:
        return pd.Series(cells, dtype="boolean" if None in cells else "bool")
    if codec.kind is int:
        return pd.Series(cells, dtype="Int64" if None in cells else "int64")
    if codec.kind is float:
        return pd.Series(cells, dtype="float64")
    return pd.Series(cells, dtype="str")


def _shape_of(geometry: str) -> Callable[[Shape | None], shapely.Geometry | None]:
    def make(shape: Shape | None) -> shapely.Geometry | None:
        if shape is None:
            return None
        return shapely.Point(shape[0][0]) if geometry == "POINT" else shapely.MultiLineString(shape)

    return make


def _frame(sheet: Sheet, zone: str) -> pd.DataFrame:
    columns = {
        name: _series(codec, [row[k] for row in sheet.rows], zone)
        for k, (name, codec) in enumerate(sheet.columns)
    }
    frame = pd.DataFrame(columns)
    if not sheet.geometry:
        return frame
    shapes = list(map(_shape_of(sheet.geometry), sheet.shapes))
    layer: pd.DataFrame = gpd.GeoDataFrame(frame, geometry=gpd.GeoSeries(shapes, crs=WGS84))
    return layer


def to_geodataframes(plan: Plan) -> dict[str, gpd.GeoDataFrame | pd.DataFrame]:
    """Return the layers and tables of a plan as data frames by name.

    ``sites``, ``stops``, ``legs``, ``days`` and ``bases`` are ``GeoDataFrame`` in WGS 84 degrees;
    the others are ``DataFrame``. Columns are named as in the plan file, times are in the
    programme's zone.
    """
    zone = plan.programme.zone
    return {sheet.name: _frame(sheet, zone) for sheet in sheets_of(plan)}
