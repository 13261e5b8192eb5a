"""A network in figures: what roads it has, what hangs together, what was noticed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.network import Standing

if TYPE_CHECKING:
    from georoute.roads.model import RoadRemark
    from georoute.roads.network import RoadNetwork

__all__ = ["ClassFigures", "Description", "describe"]

_KM, _HOUR = 1e6, 3.6e6
"""Millimetres of a kilometre, milliseconds of an hour."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ClassFigures:
    """All roads of one class: kilometres, those open one way only, and the mean speed driven."""

    road_class: str
    stretches: int
    km: float
    one_way_km: float
    mean_kmh: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Description:
    """What a network is made of.

    ``cut_off_km``: roads from or to which no way leads to the main part, by the words for why.
    ``parts``: how many parts of it do not hang together with any other.
    """

    source: str
    credit: str
    junctions: int
    stretches: int
    km: float
    classes: tuple[ClassFigures, ...]
    banned_turns: int
    parts: int
    cut_off_km: tuple[tuple[str, float], ...]
    remarks: tuple[RoadRemark, ...]


def _classes(network: RoadNetwork) -> tuple[ClassFigures, ...]:
    table = network.table
    open_ways = np.stack((table.forward_ms, table.backward_ms)) < UNREACHABLE
    ms = np.where(open_ways, np.stack((table.forward_ms, table.backward_ms)), 0)
    found = []
    for number, name in enumerate(table.classes):
        mine = table.road_class == number
        if not mine.any():
            continue
        mm = table.length_mm[mine]
        driven_mm = float((open_ways[:, mine] * mm).sum())
        driven_ms = float(ms[:, mine].sum())
        found.append(
            ClassFigures(
                road_class=name,
                stretches=int(mine.sum()),
                km=float(mm.sum()) / _KM,
                one_way_km=float(mm[open_ways[:, mine].sum(axis=0) == 1].sum()) / _KM,
                mean_kmh=driven_mm / _KM / (driven_ms / _HOUR) if driven_ms else 0.0,
            )
        )
    return tuple(sorted(found, key=lambda figures: -figures.km))


def describe(network: RoadNetwork) -> Description:
    """Return a network in figures."""
    table = network.table
    of_standing = np.bincount(
        network.standing, weights=table.length_mm.astype(np.float64), minlength=len(Standing)
    )
    cut_off = (Standing.ISLAND, Standing.NO_WAY_IN, Standing.NO_WAY_OUT)
    return Description(
        source=table.source,
        credit=table.credit,
        junctions=int(table.node_lat.shape[0]),
        stretches=int(table.start.shape[0]),
        km=float(table.length_mm.sum()) / _KM,
        classes=_classes(network),
        banned_turns=int(table.ban_ptr.shape[0]) - 1,
        parts=int(network.component_nodes.shape[0]),
        cut_off_km=tuple(
            (standing.name.lower().replace("_", " "), float(of_standing[standing]) / _KM)
            for standing in cut_off
            if of_standing[standing] > 0
        ),
        remarks=network.remarks,
    )
