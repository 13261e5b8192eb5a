"""The plan file: a GeoPackage that opens in any GIS."""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING

from georoute.store.derived import check_derived
from georoute.store.plan_file import read_plan, write_plan
from georoute.store.recognise import is_plan_file

if TYPE_CHECKING:
    from georoute.store.frames import to_geodataframes

__all__ = ["check_derived", "is_plan_file", "read_plan", "to_geodataframes", "write_plan"]


def __getattr__(name: str) -> object:
    """Load the data frames, and geopandas with them, only where they are asked for."""
    if name == "to_geodataframes":
        return importlib.import_module("georoute.store.frames").to_geodataframes
    msg = f"module {__name__!r} has no attribute {name!r}"
    raise AttributeError(msg)
