"""Places of the register and what has to be done there."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date, datetime
from types import MappingProxyType

__all__ = ["Base", "OpenInterval", "Register", "Site", "Visit", "visit_id_of"]


def visit_id_of(site_id: str, task: str, occurrence: int = 1) -> str:
    """Return the stable name of a visit: ``site|task|occurrence``."""
    return f"{site_id}|{task}|{occurrence}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Base:
    """A place that inspectors leave from and come back to."""

    base_id: str
    name: str
    lat_deg: float
    lon_deg: float


@dataclass(frozen=True, slots=True, kw_only=True)
class OpenInterval:
    """A stretch of time in which work at a site may start (aware datetimes)."""

    opens: datetime
    closes: datetime


@dataclass(frozen=True, slots=True, kw_only=True)
class Site:
    """A fixed place on the register; ``site_id`` is the user's text, unchanged.

    ``extra`` carries the columns georoute does not know, untouched, in file order.
    """

    site_id: str
    lat_deg: float
    lon_deg: float
    name: str = ""
    address: str = ""
    contact: str = ""
    notes: str = ""
    row: int | None = None
    extra: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))


@dataclass(frozen=True, slots=True, kw_only=True)
class Visit:
    """One occasion of a task at a site: what the plan has to place.

    ``work_s`` is the work itself, ``access_s`` the time to park, sign in and walk.
    ``earliest`` and ``latest`` bound the date of the visit; ``due`` is the date it is due.
    ``open_intervals`` empty means that work may start at any time. ``worth`` is the money it
    costs to leave the visit out; ``must`` visits are left out last of all.
    ``inspector_ids`` empty means that anybody may go.
    """

    visit_id: str
    site_id: str
    task: str
    work_s: float
    access_s: float = 0.0
    occurrence: int = 1
    load: float = 0.0
    earliest: date | None = None
    due: date | None = None
    latest: date | None = None
    open_intervals: tuple[OpenInterval, ...] = ()
    inspector_ids: frozenset[str] = frozenset()
    worth: float | None = None
    must: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Register:
    """A checked register: its sites, the visits they need, and where it came from.

    ``extra_columns`` names the extra columns in file order; ``sha256`` is the hash of the file.
    """

    sites: tuple[Site, ...]
    visits: tuple[Visit, ...]
    source: str
    sha256: str
    extra_columns: tuple[str, ...] = ()
