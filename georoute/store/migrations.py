"""Older plan files: each step turns the tables of schema n into those of schema n + 1.

To change the schema: raise ``SCHEMA``, add the step here, and keep a golden file of the old
schema among the test data, with the test that it still opens.
"""

from __future__ import annotations

from types import MappingProxyType
from typing import TYPE_CHECKING

from georoute.errors import PlanFileError
from georoute.store.schema import PLAN, SCHEMA

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping
    from pathlib import Path

    from georoute.store.geopackage import Tables

__all__ = ["MIGRATIONS", "migrated", "schema_of"]

MIGRATIONS: Mapping[int, Callable[[Tables], Tables]] = MappingProxyType({})
"""By n, the step from schema n to n + 1. Schema 1 is the first, so there is none yet."""


def schema_of(tables: Mapping[str, list[dict[str, object]]], *, path: Path) -> int:
    """Return the schema number of a plan file's tables.

    Raises
    ------
    PlanFileError
        The tables are not those of a plan.
    """
    texts = {row.get("key"): row.get("value") for row in tables.get(PLAN, [])}
    number = texts.get("schema")
    if not isinstance(number, str) or not number.isdecimal():
        msg = f"{path}: is a GeoPackage but not a plan file; name a file made with `plan`"
        raise PlanFileError(msg)
    return int(number)


def migrated(
    tables: Tables,
    *,
    path: Path,
    steps: Mapping[int, Callable[[Tables], Tables]] = MIGRATIONS,
    wanted: int = SCHEMA,
) -> Tables:
    """Return the tables as schema ``wanted`` has them.

    Raises
    ------
    PlanFileError
        The file is of a newer schema, or of one that no step leads on from.
    """
    found = schema_of(tables, path=path)
    if found > wanted:
        msg = (
            f"{path}: has schema {found}; this version reads schemas up to {wanted}; "
            "install a newer version of georoute"
        )
        raise PlanFileError(msg)
    for number in range(found, wanted):
        if number not in steps:
            msg = (
                f"{path}: has schema {found}, which this version cannot read; "
                "open it with the version that made it, or run `plan` again"
            )
            raise PlanFileError(msg)
        tables = steps[number](tables)
    return tables
