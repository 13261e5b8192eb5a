"""The tables of a plan file, schema 1, and the class of the model that each holds.

Columns follow from the fields of the classes, so a new field with a default needs no new schema:
a file without its column reads as the default.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import date
from types import MappingProxyType
from typing import TYPE_CHECKING

from georoute.domain.people import Inspector
from georoute.domain.plan import (
    DayTour,
    Exchange,
    Leg,
    StageCost,
    Stop,
    Unplaced,
)
from georoute.domain.roads import BackdropLine, RoadPoint
from georoute.domain.sites import Base, Site, Visit

if TYPE_CHECKING:
    from collections.abc import Mapping

__all__ = ["BACKDROP", "EXTRA_COLUMNS", "PLAN", "ROAD_POINTS", "SCHEMA", "TABLES", "Table"]

SCHEMA = 1
"""Schema number of the plan files this version writes."""

PLAN = "plan"
"""The table of settings and provenance: ``key``, ``value``."""

EXTRA_COLUMNS = "extra_columns"
"""The table that names the register's own columns as they are in layer ``sites``."""


ROAD_POINTS = "road_points"
"""The layer of the points where places meet the road."""


BACKDROP = "backdrop"
"""The layer of what is drawn under the tours."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A layer (``geometry`` set) or a table of a plan file.

    ``keys`` come before the fields and say where a row belongs; ``added`` come after the fields
    and only repeat, for the reader's convenience, what other tables hold. Both map a column to
    its type.
    """

    name: str
    kind: type
    description: str
    geometry: str = ""
    rename: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))
    omit: frozenset[str] = frozenset()
    keys: Mapping[str, type] = field(default_factory=lambda: MappingProxyType({}))
    added: Mapping[str, type] = field(default_factory=lambda: MappingProxyType({}))


TABLES: Mapping[str, Table] = MappingProxyType(
    {
        table.name: table
        for table in (
            Table(
                name="sites",
                kind=Site,
                description="Sites of the register, with the register's own columns",
                geometry="POINT",
                rename={"row": "register_row"},
                omit=frozenset({"extra"}),
                added={"status": str},
            ),
            Table(
                name="stops",
                kind=Stop,
                description="Visits placed in tours, in order, with clock times",
                geometry="POINT",
                rename={"order": "stop_order"},
                keys={"tour_no": int, "tour_id": str, "inspector_id": str, "day": date},
                added={
                    "name": str,
                    "task": str,
                    "status": str,
                    "work_min": float,
                    "access_min": float,
                    "wait_min": float,
                },
            ),
            Table(
                name="legs",
                kind=Leg,
                description="Travel from place to place: along roads, or straight lines",
                geometry="MULTILINESTRING",
                rename={"order": "leg_order"},
                keys={"tour_no": int, "tour_id": str, "inspector_id": str, "day": date},
            ),
            Table(
                name="days",
                kind=DayTour,
                description="Tours: one inspector on one date",
                geometry="MULTILINESTRING",
                omit=frozenset({"stops", "legs"}),
                added={"inspector": str, "stops": int, "duration_s": float, "dist_km": float},
            ),
            Table(
                name="bases",
                kind=Base,
                description="Places that inspectors leave from and come back to",
                geometry="POINT",
            ),
            Table(
                name=ROAD_POINTS,
                kind=RoadPoint,
                description="Where places meet the road; empty without roads",
                geometry="POINT",
            ),
            Table(
                name=BACKDROP,
                kind=BackdropLine,
                description="Roads, coast and water around the tours, for drawing only",
                geometry="MULTILINESTRING",
            ),
            Table(
                name="visits",
                kind=Visit,
                description="What the plan has to place",
                added={"status": str},
            ),
            Table(
                name="unplaced",
                kind=Unplaced,
                description="Visits left out, with the reason and the figures behind it",
                rename={"code": "reason"},
                added={"name": str},
            ),
            Table(
                name="inspectors",
                kind=Inspector,
                description="Inspectors, their shifts and working calendars",
            ),
            Table(
                name="exchanges",
                kind=Exchange,
                description="Accepted changes of order: legs that went, legs that came, cost",
            ),
            Table(
                name="stages",
                kind=StageCost,
                description="Cost after each stage of planning",
            ),
        )
    }
)
