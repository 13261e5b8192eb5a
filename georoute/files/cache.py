"""Where georoute keeps what it can always make again."""

from __future__ import annotations

import os
from pathlib import Path

import platformdirs

from georoute.errors import OutputError

__all__ = ["CACHE_VARIABLE", "cache_folder"]

CACHE_VARIABLE = "GEOROUTE_CACHE"
"""Environment variable that moves the cache folder."""


def cache_folder() -> Path:
    """Return the user's cache folder for georoute; it is made if it is missing.

    Raises
    ------
    OutputError
        The folder cannot be made.
    """
    chosen = os.environ.get(CACHE_VARIABLE)
    folder = Path(chosen) if chosen else platformdirs.user_cache_path("georoute", appauthor=False)
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        msg = (
            f"{folder}: the cache folder cannot be made: {error.strerror or error}; "
            f"set {CACHE_VARIABLE} to a folder you may write to"
        )
        raise OutputError(msg) from error
    return folder
