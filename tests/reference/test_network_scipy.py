"""Times on real roads against scipy's Dijkstra on a graph whose nodes are arcs.

The graph is made from the table alone: a node for each arc and each part of a trip (first local
leg, roads open to all, last local leg), an arc wherever one may turn from one into the other. It
knows nothing of doubled junctions, cut stretches or hierarchies.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.sparse import csr_array
from scipy.sparse.csgraph import dijkstra

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.cache import build_roads
from georoute.roads.extract import read_extract
from georoute.roads.model import Access, RoadTable
from georoute.roads.snapping import Snapped, snap
from georoute.roads.speeds import default_profile
from georoute.roads.travel import RoadTravel
from tests.roads_helpers import GEOD

ROOT = Path(__file__).resolve().parents[2]
EXTRACTS = {
    "Helsinki": (ROOT / "tests/data/Helsinki.osm.pbf", "FI"),
    "demo": (ROOT / "data/la_serena_coquimbo.osm.pbf", "CL"),
}
PLACES = 120
FIRST, OPEN, LAST = 0, 1, 2

pytestmark = [
    pytest.mark.slow,
    pytest.mark.source(
        "scipy.sparse.csgraph.dijkstra on the arc-to-arc graph of the table; lengths pyproj.Geod"
    ),
]


def turn_graph(table: RoadTable) -> csr_array:
    """Return the times from arc to arc, arc ``a`` in part ``p`` of a trip being ``3 * a + p``."""
    tail = np.stack((table.start, table.end), 1).ravel().tolist()
    head = np.stack((table.end, table.start), 1).ravel().tolist()
    ms = np.stack((table.forward_ms, table.backward_ms), 1).ravel()
    local = np.repeat((table.access & Access.LOCAL) > 0, 2)
    assert np.all(np.diff(table.ban_ptr) == 2)  # both maps know bans by way of a junction only
    banned = set(zip(table.ban_arc[::2].tolist(), table.ban_arc[1::2].tolist(), strict=True))
    leaving: dict[int, list[int]] = {}
    for arc in np.flatnonzero(ms < UNREACHABLE).tolist():
        leaving.setdefault(tail[arc], []).append(arc)
    rows = []
    for arc in np.flatnonzero(ms < UNREACHABLE).tolist():
        for then in leaving.get(head[arc], []):
            if (arc, then) in banned:
                continue
            if local[then]:
                rows += [(3 * arc + p, 3 * then + q) for p, q in ((0, 0), (1, 2), (2, 2))]
            else:
                rows += [(3 * arc + p, 3 * then + OPEN) for p in (FIRST, OPEN)]
    begin, end = np.array(rows).T
    # A time of nothing would be taken for no arc at all.
    weight = np.maximum(ms[end // 3].astype(np.float64), 1e-9)
    return csr_array((weight, (begin, end)), shape=(3 * ms.size, 3 * ms.size))


def expected_ms(table: RoadTable, snapped: Snapped) -> NDArray[np.float64]:
    """Return the times between places: whole arcs by the graph, pieces by their share."""
    ms = np.stack((table.forward_ms, table.backward_ms), 1).ravel()
    graph = turn_graph(table)
    into = graph.tocsc()
    local = (table.access & Access.LOCAL) > 0
    share = snapped.offset_mm / np.maximum(table.length_mm[snapped.stretch], 1)
    best = np.full((snapped.places, snapped.places), np.inf)
    for i, stretch in enumerate(snapped.stretch.tolist()):
        for arc in (2 * stretch, 2 * stretch + 1):
            if ms[arc] >= UNREACHABLE:
                continue
            part = share if arc % 2 == 0 else 1 - share
            start = 3 * arc + (FIRST if local[stretch] else OPEN)
            # From the beginning of the first arc: its driven part only is counted.
            reached = dijkstra(graph, indices=start)
            # Back on the first arc itself: once round, over the last turn into it.
            turn = slice(into.indptr[start], into.indptr[start + 1])
            round_once = reached[into.indices[turn]] + into.data[turn]
            reached[start] = round_once.min(initial=np.inf)
            reached += ms[arc] * (1 - part[i])
            for j, goal in enumerate(snapped.stretch.tolist()):
                for last in (2 * goal, 2 * goal + 1):
                    if ms[last] < UNREACHABLE:
                        to = share[j] if last % 2 == 0 else 1 - share[j]
                        whole = reached[3 * last : 3 * last + 3].min()
                        best[i, j] = min(best[i, j], whole - ms[last] * (1 - to))
                if goal == stretch and part[j] >= part[i]:
                    best[i, j] = min(best[i, j], ms[arc] * (part[j] - part[i]))
    return best


@pytest.mark.parametrize("name", EXTRACTS)
def test_times_equal_a_search_over_turns(name: str) -> None:
    path, country = EXTRACTS[name]
    table = read_extract(path, profile=default_profile(country))
    built = build_roads(table)
    draw = np.random.default_rng(11)
    near = draw.integers(0, table.point_lat.size, PLACES)
    lat = table.point_lat[near] + draw.uniform(-3e-4, 3e-4, PLACES)
    lon = table.point_lon[near] + draw.uniform(-3e-4, 3e-4, PLACES)
    snapped = snap(built.network, lat, lon)
    assert not snapped.is_far.any()
    travel = RoadTravel(built.network, snapped, built.search)
    ms, mm = travel.matrix()
    # The product rounds each of the two pieces to a millisecond; the arcs are whole already.
    assert np.abs(ms - expected_ms(table, snapped)).max() <= 2
    legs = travel.legs([(i, (7 * i + 3) % PLACES) for i in range(PLACES)])
    for i, leg in enumerate(legs):
        assert leg is not None
        assert 1000 * leg.time_s == pytest.approx(ms[i, (7 * i + 3) % PLACES])
        assert 1000 * leg.length_m == pytest.approx(mm[i, (7 * i + 3) % PLACES])
        measured = GEOD.line_length(leg.lon_deg, leg.lat_deg)
        rounding = 0.0005 * (leg.arcs.size + 4)
        assert leg.length_m == pytest.approx(measured, rel=1e-6, abs=rounding)
