"""One door to all files that hold roads."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from georoute.domain.run import no_progress
from georoute.errors import RoadError
from georoute.roads.extract import read_extract
from georoute.roads.graphml_source import read_graphml
from georoute.roads.table_source import read_edge_table

if TYPE_CHECKING:
    from georoute.domain.run import Progress
    from georoute.roads.box import Box
    from georoute.roads.model import RoadTable
    from georoute.roads.speeds import SpeedProfile
    from georoute.roads.table_source import EdgeColumns

__all__ = ["read_road_source"]

_EXTRACTS = (".pbf", ".osm", ".osm.bz2", ".osm.gz", ".osm.xml")


def read_road_source(
    path: Path | str,
    *,
    profile: SpeedProfile,
    columns: EdgeColumns | None = None,
    within: Box | None = None,
    progress: Progress = no_progress,
) -> RoadTable:
    """Read roads from a file, by its name: an extract, GraphML, or a table of edges.

    ``columns`` says that the file is a table of edges, and how its columns are named.

    Raises
    ------
    RoadError
        If the file cannot be used, or its name does not tell what it is and no columns are named.
    """
    path = Path(path)
    name = path.name.lower()
    if columns is not None:
        return read_edge_table(
            path, columns=columns, profile=profile, within=within, progress=progress
        )
    if name.endswith((".graphml", ".xml")) and not name.endswith(".osm.xml"):
        return read_graphml(path, profile=profile, within=within, progress=progress)
    if name.endswith(_EXTRACTS):
        return read_extract(path, profile=profile, within=within, progress=progress)
    msg = (
        f"{path}: its name does not tell what it is; give an extract (*.osm.pbf, *.osm, "
        f"*.osm.bz2), a *.graphml that osmnx saved, or name the columns of a table of edges"
    )
    raise RoadError(msg)
