"""Tell a plan file from a register in a GeoPackage."""

from __future__ import annotations

import sqlite3
from contextlib import closing
from typing import TYPE_CHECKING

from georoute.store.schema import PLAN

if TYPE_CHECKING:
    from pathlib import Path

__all__ = ["is_plan_file"]

SQLITE_HEADER = b"SQLite format 3\x00"


def is_plan_file(path: Path) -> bool:
    """Tell whether ``path`` looks like a plan file: an SQLite file with the table of a plan.

    A file that cannot be read is none; reading it as what it claims to be tells why.
    """
    try:
        with path.open("rb") as file:
            if file.read(len(SQLITE_HEADER)) != SQLITE_HEADER:
                return False
        uri = f"{path.resolve().as_uri()}?mode=ro&immutable=1"
        with closing(sqlite3.connect(uri, uri=True)) as connection:
            query = "SELECT count(*) FROM sqlite_master WHERE type = 'table' AND name = ?"
            return bool(connection.execute(query, (PLAN,)).fetchone()[0])
    except (OSError, sqlite3.Error):
        return False
