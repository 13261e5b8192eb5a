"""An OpenStreetMap extract read into the table of roads."""

from __future__ import annotations

import math
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from georoute.domain.run import no_progress
from georoute.errors import RoadError
from georoute.roads.model import RoadTable
from georoute.roads.osm_passes import STAGE, RawRoads, read_passes
from georoute.roads.remarks import Tally
from georoute.roads.restrictions import bans_of
from georoute.roads.speeds import ROAD_CLASSES
from georoute.roads.stretches import Stretches, cut_stretches

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from georoute.domain.run import Progress
    from georoute.roads.box import Box
    from georoute.roads.speeds import SpeedProfile

__all__ = ["OSM_CREDIT", "read_extract"]

OSM_CREDIT = "© OpenStreetMap contributors, Open Database License 1.0"


def read_extract(
    path: Path | str,
    *,
    profile: SpeedProfile,
    within: Box | None = None,
    progress: Progress = no_progress,
) -> RoadTable:
    """Read the roads for cars of an extract (``.osm.pbf``, ``.osm``, ``.osm.bz2``).

    ``within``: pieces of road that do not touch this box are left out while reading. Ways whose
    nodes the file lacks are cut there. What was left out, assumed or not understood is told in
    the table's ``remarks``.

    Raises
    ------
    RoadError
        If the file is missing, damaged or no OpenStreetMap file; if it has no road for cars; or
        if none of its roads touches the box.
    """
    path = Path(path)
    tally = Tally()
    raw = read_passes(path, profile=profile, within=within, tally=tally, progress=progress)
    if not raw.way.size or not np.isfinite(raw.lat).any():
        raise _no_roads(path, raw, within, tally)
    stretches = cut_stretches(raw, within=within, tally=tally)
    if not stretches.start.size:
        raise _no_roads(path, raw, within, tally)
    progress(STAGE, fraction=0.9)
    ban_ptr, ban_arc = bans_of(raw.restrictions, stretches=stretches, way_ids=raw.way, tally=tally)
    _count_rules(raw, stretches, tally)
    names, name = _names_in_use(raw, stretches)
    of_rule = np.array([_class_number(rule.road_class) for rule in raw.rules], np.int16)
    table = RoadTable(
        node_lat=stretches.node_lat,
        node_lon=stretches.node_lon,
        start=stretches.start,
        end=stretches.end,
        way=raw.way[stretches.of_way],
        point_ptr=stretches.point_ptr,
        point_lat=stretches.point_lat,
        point_lon=stretches.point_lon,
        length_mm=stretches.length_mm,
        forward_ms=stretches.forward_ms,
        backward_ms=stretches.backward_ms,
        road_class=of_rule[raw.rule[stretches.of_way]],
        name=name,
        access=stretches.access,
        ban_ptr=ban_ptr,
        ban_arc=ban_arc,
        classes=ROAD_CLASSES,
        names=names,
        source=path.name,
        credit=OSM_CREDIT,
        remarks=tally.remarks(),
    )
    progress(STAGE, fraction=1.0)
    return table


def _class_number(road_class: str) -> int:
    """Return the place of a class among all; rules of ways left out have none and are not used."""
    return ROAD_CLASSES.index(road_class) if road_class else -1


def _no_roads(path: Path, raw: RawRoads, within: Box | None, tally: Tally) -> RoadError:
    """Tell a box that is elsewhere from a file without roads."""
    south, west, north, east = raw.extent
    if within is not None and math.isfinite(south):
        msg = (
            f"{path}: none of its roads touches the wanted area ({within.described()}); the roads "
            f"for cars in this file lie within latitude {south:.4f} to {north:.4f}, longitude "
            f"{west:.4f} to {east:.4f}; give an extract of the area, and check that latitude and "
            f"longitude of the sites are not exchanged"
        )
        return RoadError(msg)
    left = ", ".join(f"{remark.count} {remark.text}" for remark in tally.remarks())
    if raw.way.size:
        found = f"{raw.way.size} ways for cars, and no two neighbouring nodes of any of them"
        remedy = (
            "give an extract that holds the nodes of its ways, with the positive ids of published "
            "data (an editor's draft has negative ones)"
        )
    else:
        found = left or "no way that its tags make a road for cars"
        remedy = "give an extract with roads"
    msg = f"{path}: holds no road for cars; found: {found}; {remedy}"
    return RoadError(msg)


def _count_rules(raw: RawRoads, stretches: Stretches, tally: Tally) -> None:
    """Count the remarks of the rules of all ways that stayed, with the id of the first."""
    ways = np.unique(stretches.of_way)
    rules, first, times = np.unique(raw.rule[ways], return_index=True, return_counts=True)
    for rule, at, count in zip(rules.tolist(), first.tolist(), times.tolist(), strict=True):
        way = raw.way[ways[at]]
        for code, example in raw.rules[rule].remarks:
            tally.add(code, f"way {way} {example}".rstrip(), count=count)


def _names_in_use(raw: RawRoads, stretches: Stretches) -> tuple[tuple[str, ...], NDArray[np.int32]]:
    """Return the names of the stretches that stayed, no name first, and the number of each."""
    of_stretch = raw.name[stretches.of_way]
    used = np.unique(np.append(of_stretch, 0))
    names = tuple(raw.names[number] for number in used.tolist())
    return names, np.searchsorted(used, of_stretch).astype(np.int32)
