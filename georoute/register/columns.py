"""The one table of the register's columns: names, accepted aliases, kinds and meanings."""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass
from enum import StrEnum

__all__ = [
    "COLUMNS",
    "DEFAULT_TASK",
    "WITHOUT_EFFECT",
    "Column",
    "ColumnKind",
    "column_named",
    "folded",
]

DEFAULT_TASK = "inspection"
"""The task of a row that names none."""


class ColumnKind(StrEnum):
    """What the cells of a column hold."""

    ID = "id"
    TEXT = "text"
    COORDINATE = "coordinate"
    MINUTES = "minutes"
    DATE = "date"
    NUMBER = "number"
    YES_NO = "yes or no"
    IDS = "ids"


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """A column georoute knows.

    ``aliases`` are other headers taken for it where the canonical one is absent.
    """

    name: str
    kind: ColumnKind
    meaning: str
    aliases: tuple[str, ...] = ()
    required: bool = False


_K = ColumnKind

COLUMNS: tuple[Column, ...] = (
    Column(
        name="site_id",
        kind=_K.ID,
        required=True,
        meaning="The site's own id, kept as the text that is written; one row per id.",
        aliases=("site",),
    ),
    Column(name="name", kind=_K.TEXT, meaning="Name of the site.", aliases=("site_name",)),
    Column(name="address", kind=_K.TEXT, meaning="Postal address, for the run sheet."),
    Column(
        name="lat",
        kind=_K.COORDINATE,
        required=True,
        meaning="Latitude in decimal degrees (WGS 84), north positive; or y of the stated crs.",
        aliases=("latitude", "y", "northing"),
    ),
    Column(
        name="lon",
        kind=_K.COORDINATE,
        required=True,
        meaning="Longitude in decimal degrees (WGS 84), east positive; or x of the stated crs.",
        aliases=("longitude", "lng", "long", "x", "easting"),
    ),
    Column(
        name="task",
        kind=_K.TEXT,
        meaning=f"What is done there; empty means `{DEFAULT_TASK}`.",
    ),
    Column(
        name="work_min",
        kind=_K.MINUTES,
        meaning="Minutes of work at the site; empty means the programme's default.",
        aliases=("work", "work_minutes", "service_min"),
    ),
    Column(
        name="access_min",
        kind=_K.MINUTES,
        meaning="Minutes to park, sign in and walk; empty means the programme's default.",
        aliases=("access", "access_minutes"),
    ),
    Column(
        name="earliest_date",
        kind=_K.DATE,
        meaning="Not before this date (YYYY-MM-DD).",
        aliases=("earliest",),
    ),
    Column(name="due_date", kind=_K.DATE, meaning="The date it is due.", aliases=("due",)),
    Column(
        name="latest_date",
        kind=_K.DATE,
        meaning="Not after this date (YYYY-MM-DD).",
        aliases=("latest",),
    ),
    Column(
        name="load",
        kind=_K.NUMBER,
        meaning="What the visit takes of the inspector's load limit, in your own unit.",
    ),
    Column(
        name="worth",
        kind=_K.NUMBER,
        meaning="Money it costs to leave the visit out, in the tariff's currency.",
    ),
    Column(
        name="must",
        kind=_K.YES_NO,
        meaning="`yes` where the visit is to be left out last of all.",
    ),
    Column(
        name="inspector",
        kind=_K.IDS,
        meaning="Who may go: one inspector_id, or several with `;` between; empty means anybody.",
        aliases=("inspector_id", "inspectors"),
    ),
    Column(name="contact", kind=_K.TEXT, meaning="Whom to call; personal data."),
    Column(
        name="notes", kind=_K.TEXT, meaning="Access note and what else to know.", aliases=("note",)
    ),
)

WITHOUT_EFFECT: frozenset[str] = frozenset(
    {
        "access_lat",
        "access_lon",
        "appointment_end",
        "appointment_start",
        "certificate",
        "crew_size",
        "daylight_only",
        "equipment",
        "excluded_inspector",
        "interval",
        "last_done",
        "max_hold_min",
        "opening_hours",
        "preferred_inspector",
        "priority",
        "risk_band",
        "season",
        "side_of_road",
        "tide_min_m",
        "vehicle_class",
    }
)
"""Columns of the trade that are carried through and do not shape the plan; the check says so."""


def folded(header: str) -> str:
    """Return a header as it is compared: case, blanks at the ends, `-` and blanks do not matter."""
    words = unicodedata.normalize("NFC", header).strip().casefold()
    return "_".join(words.replace("-", " ").replace("_", " ").split())


_BY_NAME = {column.name: column for column in COLUMNS}


def column_named(name: str) -> Column:
    """Return the column of a canonical name."""
    return _BY_NAME[name]
