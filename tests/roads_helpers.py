"""Small tables of roads for tests, drawn by hand or at random."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
from pyproj import Geod

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.model import Access, RoadTable

GEOD = Geod(ellps="WGS84")
LAT0, LON0 = -29.95, -71.3


@dataclass
class RoadDraft:
    """Draw roads between numbered junctions; ``table()`` makes the table of them.

    Junctions are (lat_deg, lon_deg). ``road`` returns the number of the stretch; arc
    ``2 * number`` drives it as drawn, the next one backwards.
    """

    junctions: Sequence[tuple[float, float]]
    roads: list[dict[str, object]] = field(default_factory=list)
    bans: list[Sequence[int]] = field(default_factory=list)

    def road(
        self,
        start: int,
        end: int,
        *,
        seconds: float | None = None,
        one_way: bool = False,
        access: Access = Access.THROUGH,
        name: str = "",
        road_class: str = "residential",
        via: Sequence[tuple[float, float]] = (),
    ) -> int:
        points = [self.junctions[start], *via, self.junctions[end]]
        lat, lon = np.array(points, np.float64).T
        length = GEOD.line_length(lon, lat)
        ms = round(1000 * (length / 10 if seconds is None else seconds))
        self.roads.append(
            {
                "ends": (start, end),
                "lat": lat,
                "lon": lon,
                "mm": round(1000 * length),
                "ms": (ms, UNREACHABLE if one_way else ms),
                "access": access,
                "name": name,
                "class": road_class,
            }
        )
        return len(self.roads) - 1

    def ban(self, *arcs: int) -> None:
        self.bans.append(arcs)

    def table(self) -> RoadTable:
        names = ["", *dict.fromkeys(str(r["name"]) for r in self.roads if r["name"])]
        classes = list(dict.fromkeys(str(r["class"]) for r in self.roads))
        lat, lon = np.array(self.junctions, np.float64).reshape(-1, 2).T
        shapes = [np.asarray(r["lat"]) for r in self.roads]
        ends = np.array([r["ends"] for r in self.roads], np.int64).reshape(-1, 2)
        times = np.array([r["ms"] for r in self.roads], np.int64).reshape(-1, 2)
        return RoadTable(
            node_lat=lat,
            node_lon=lon,
            start=ends[:, 0],
            end=ends[:, 1],
            way=np.arange(len(self.roads), dtype=np.int64),
            point_ptr=np.cumsum([0, *(s.size for s in shapes)]),
            point_lat=np.concatenate([np.zeros(0), *shapes]),
            point_lon=np.concatenate([np.zeros(0), *(np.asarray(r["lon"]) for r in self.roads)]),
            length_mm=np.array([r["mm"] for r in self.roads], np.int64),
            forward_ms=times[:, 0],
            backward_ms=times[:, 1],
            road_class=np.array([classes.index(str(r["class"])) for r in self.roads], np.int16),
            name=np.array([names.index(str(r["name"])) for r in self.roads], np.int32),
            access=np.array([r["access"] for r in self.roads], np.uint8),
            ban_ptr=np.cumsum([0, *(len(b) for b in self.bans)]),
            ban_arc=np.array([a for b in self.bans for a in b], np.int64),
            classes=tuple(classes),
            names=tuple(names),
            source="drawn by hand",
        )


def town(rows: int, columns: int, *, step_deg: float = 0.001) -> list[tuple[float, float]]:
    """Return the junctions of a grid, row by row from the south-west."""
    return [
        (LAT0 + step_deg * row, LON0 + step_deg * column)
        for row in range(rows)
        for column in range(columns)
    ]


def random_roads(seed: int) -> RoadTable:
    """Return a small tangle: one-ways, parallel roads, loops, local zones, overlapping bans."""
    draw = np.random.default_rng(seed)
    junctions = town(3, int(draw.integers(2, 4)))
    draft = RoadDraft(
        [(a + draw.uniform(-2e-4, 2e-4), b + draw.uniform(-2e-4, 2e-4)) for a, b in junctions]
    )
    count = int(draw.integers(len(junctions), 3 * len(junctions)))
    for _ in range(count):
        start, end = (int(i) for i in draw.integers(0, len(junctions), 2))
        bends = int(draw.integers(2 if start == end else 0, 4))
        draft.road(
            start,
            end,
            # Few different times, so that ties are frequent.
            seconds=float(draw.integers(1, 6)),
            one_way=bool(draw.random() < 0.4),
            access=Access.LOCAL if draw.random() < 0.3 else Access.THROUGH,
            name=str(draw.choice(["", "Calle Uno", "Avenida Dos"])),
            via=[
                (LAT0 + float(draw.uniform(0, 2e-3)), LON0 + float(draw.uniform(0, 2e-3)))
                for _ in range(bends)
            ],
        )
    _random_bans(draft, draw)
    return draft.table()


def _random_bans(draft: RoadDraft, draw: np.random.Generator) -> None:
    """Ban walks of two to four arcs; some share beginnings, ends or middles."""
    ends = np.array([r["ends"] for r in draft.roads], np.int64)
    tails, heads = ends.reshape(-1).tolist(), ends[:, ::-1].reshape(-1).tolist()

    def onward(walk: list[int], steps: int) -> list[int]:
        for _ in range(steps):
            follow = [arc for arc in range(len(tails)) if tails[arc] == heads[walk[-1]]]
            walk = [*walk, int(draw.choice(follow))]
        return walk

    for _ in range(int(draw.integers(0, 9))):
        walk = onward([int(draw.integers(0, len(tails)))], int(draw.integers(1, 4)))
        draft.ban(*walk)
        kind = draw.random()
        if kind < 0.2 and len(walk) > 2:
            draft.ban(*walk[1:-1], *onward([walk[-1]], 1))
        elif kind < 0.5 and len(walk) > 2:
            # One that begins within the first and ends elsewhere, sooner or later.
            draft.ban(*onward(walk[1:-1], int(draw.integers(1 + (len(walk) == 3), 3))))
        elif kind < 0.9 and len(walk) > 3:
            draft.ban(*walk[1:-1])
        elif kind < 0.8:
            draft.ban(*walk[:-1], walk[-1] ^ 1)  # mostly one that makes no sense
