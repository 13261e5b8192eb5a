"""Roads of an area fetched from OpenStreetMap by osmnx: only when asked, and once."""

from __future__ import annotations

import contextlib
import hashlib
from typing import TYPE_CHECKING

from georoute.domain.run import no_progress
from georoute.errors import RoadError
from georoute.files import atomic_path, cache_folder
from georoute.roads.graphml_source import read_graphml
from georoute.roads.tags import RELEVANT_KEYS

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

    from georoute.domain.run import Progress
    from georoute.roads.box import Box
    from georoute.roads.model import RoadTable
    from georoute.roads.speeds import SpeedProfile

__all__ = ["download_roads", "downloaded_file"]

FORMAT = 1
"""Raised when the downloaded file holds something else than before."""

TIMEOUT_S = 60


def downloaded_file(within: Box, *, folder: Path | None = None) -> Path:
    """Return where the roads of a box are kept once they were downloaded."""
    sides = (within.south_deg, within.west_deg, within.north_deg, within.east_deg)
    key = f"{FORMAT}:" + ",".join(f"{side:.5f}" for side in sides)
    place = folder if folder is not None else cache_folder() / "downloads"
    return place / f"roads-{hashlib.sha256(key.encode()).hexdigest()[:16]}.graphml"


@contextlib.contextmanager
def _settings() -> Iterator[None]:
    """Keep osmnx from writing a cache where the user stands; put its settings back after."""
    import osmnx as ox  # noqa: PLC0415 - heavy, and needed for a download only

    wanted = {
        "use_cache": False,
        "log_console": False,
        "requests_timeout": TIMEOUT_S,
        "useful_tags_way": sorted(
            {*ox.settings.useful_tags_way, *RELEVANT_KEYS, "name", "ref"} - {"barrier", "route"}
        ),
    }
    before = {name: getattr(ox.settings, name) for name in wanted}
    try:
        for name, value in wanted.items():
            setattr(ox.settings, name, value)
        yield
    finally:
        for name, value in before.items():
            setattr(ox.settings, name, value)


def _fetch(within: Box, target: Path) -> None:
    import osmnx as ox  # noqa: PLC0415 - as above

    sides = (within.west_deg, within.south_deg, within.east_deg, within.north_deg)
    try:
        with _settings():
            graph = ox.graph_from_bbox(
                sides, network_type="drive_service", retain_all=True, truncate_by_edge=True
            )
    # What requests raises is an OSError; what osmnx raises for an answer it cannot use, a
    # ValueError or a RuntimeError.
    except (OSError, ValueError, RuntimeError) as error:
        found = str(error).strip().splitlines()[0] if str(error).strip() else type(error).__name__
        msg = (
            f"the roads of {within.described()} could not be downloaded ({found[:200]}); check the "
            f"network, or give an extract of the area as a file (*.osm.pbf)"
        )
        raise RoadError(msg) from error
    with atomic_path(target) as part:
        ox.save_graphml(graph, part)


def download_roads(
    within: Box,
    *,
    profile: SpeedProfile,
    folder: Path | None = None,
    progress: Progress = no_progress,
) -> RoadTable:
    """Return the roads of a box, downloaded from OpenStreetMap unless they are kept already.

    The box leaves the machine (to the Overpass service osmnx asks), nothing else does. The
    answer is kept in ``folder`` (default: the cache folder) and used again; delete the file to
    fetch anew. A download holds no turn restrictions and no barriers: an extract is better.

    Raises
    ------
    RoadError
        If there is no network, the service gives no usable answer, or the area has no road.
    """
    if within.west_deg > within.east_deg:
        msg = "an area across the 180th meridian cannot be downloaded; give an extract as a file"
        raise RoadError(msg)
    kept = downloaded_file(within, folder=folder)
    if not kept.exists():
        progress("download", fraction=0.0)
        kept.parent.mkdir(parents=True, exist_ok=True)
        _fetch(within, kept)
        progress("download", fraction=1.0)
    return read_graphml(kept, profile=profile, progress=progress)
