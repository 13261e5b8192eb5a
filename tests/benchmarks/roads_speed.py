"""Ratios of speed on road networks against scipy and networkx, measured in the same run.

``python -m tests.benchmarks.roads_speed [--small] [--places K]``. Both references grow one tree a
source; that takes minutes to an hour, so a few sources are measured and scaled to all of them,
and the rows say from how many. Their graphs are made before the clock starts. Nothing is asserted
but that the results are the same.
"""

from __future__ import annotations

import argparse
import statistics
import time
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeVar

import networkx as nx
import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array
from scipy.sparse.csgraph import dijkstra

from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.extract import read_extract
from georoute.roads.hierarchy import build_hierarchy, matrix, paths
from georoute.roads.model import Seeds
from georoute.roads.network import build_network
from georoute.roads.one_shot import build_streets, search_matrix
from georoute.roads.speeds import default_profile
from tests.hierarchy_helpers import Net, at_nodes, cheapest_arcs, grid_net

__all__ = ["RoadFigures", "RoadRatio", "main", "measure_roads", "road_ratios"]

EXTRACT = Path(__file__).resolve().parents[2] / "data" / "la_serena_coquimbo.osm.pbf"
GRID_SIDE = 700
SMALL_SIDE = 150
PLACES = 2000
LEGS = 1000
SCIPY_SOURCES = 20
NETWORKX_SOURCES = 2
WARM_RUNS = 5
FACTOR = 1 << 20
"""Times are weighed so in scipy, plus 1 an arc: it would drop arcs that take no time."""

Result = TypeVar("Result")


@dataclass(frozen=True)
class RoadRatio:
    """One comparison. ``scaled_from``: sources of the reference that were measured."""

    name: str
    reference: str
    places: int
    own_s: float
    reference_s: float
    scaled_from: int

    @property
    def times_faster(self) -> float:
        """How many times the reference's time is the product's own."""
        return self.reference_s / self.own_s

    def row(self) -> str:
        """Return the row that is printed."""
        return (
            f"{self.name} {self.places} x {self.places}: {self.own_s:.3f} s; {self.reference} "
            f"{self.reference_s:.1f} s (scaled from {self.scaled_from} sources); "
            f"{self.times_faster:.0f} times faster"
        )


@dataclass(frozen=True)
class RoadFigures:
    """All that was measured on one network; seconds, and MB above what was in use before."""

    name: str
    nodes: int
    arcs: int
    build_s: float
    matrix_s: float
    one_shot_s: float
    legs_s: float
    arcs_per_leg: float
    build_peak_mb: float
    matrix_peak_mb: float
    scipy_source_s: float
    networkx_source_s: float
    places: int

    @property
    def ratios(self) -> list[RoadRatio]:
        """Cold (hierarchy built first) and warm, against both references."""
        references = (
            ("scipy", self.scipy_source_s, SCIPY_SOURCES),
            ("networkx", self.networkx_source_s, NETWORKX_SOURCES),
        )
        own = (("cold", self.build_s + self.matrix_s), ("warm", self.matrix_s))
        return [
            RoadRatio(f"{self.name} {how}", reference, self.places, own_s, each * self.places, few)
            for how, own_s in own
            for reference, each, few in references
        ]

    def rows(self) -> list[str]:
        """Return the rows that are printed."""
        even = self.build_s / self.one_shot_s
        peaks = f"{self.build_peak_mb:.0f} MB more while building, {self.matrix_peak_mb:.0f} MB"
        shot_ms = self.one_shot_s * 1000
        figures = (
            f"{self.nodes} nodes, {self.arcs} arcs; hierarchy built in {self.build_s:.2f} s",
            f"one-shot search {shot_ms:.1f} ms: {even:.0f} of them take as long as building",
            f"{LEGS} legs down to the arcs {self.legs_s:.3f} s, {self.arcs_per_leg:.0f} arcs each",
            f"peak memory {peaks} more for matrix and legs",
        )
        return [*(f"{self.name}: {row}" for row in figures), *(r.row() for r in self.ratios)]


def town_net() -> Net:
    """Return the network of the extract that travels with the product, turn bans worked in."""
    network = build_network(read_extract(EXTRACT, profile=default_profile("CL")))
    return Net(
        tail=network.tail,
        head=network.head,
        ms=network.ms,
        mm=network.mm,
        nodes=network.nodes,
    )


def timed(work: Callable[[], Result]) -> tuple[Result, float]:
    """Return what ``work`` returns, and its seconds."""
    start = time.perf_counter()
    result = work()
    return result, time.perf_counter() - start


class Peak:
    """The most memory the process had since it was made, above what it had then, in MB."""

    def __init__(self) -> None:
        Path("/proc/self/clear_refs").write_text("5", encoding="ascii")
        self.before = self._status("VmRSS")

    @staticmethod
    def _status(field: str) -> float:
        lines = Path("/proc/self/status").read_text(encoding="ascii").splitlines()
        return next(int(line.split()[1]) / 1024 for line in lines if line.startswith(field))

    def __call__(self) -> float:
        """Return the megabytes."""
        return self._status("VmHWM") - self.before


def warm_up() -> None:
    """Compile everything before a clock starts."""
    net = grid_net(20, seed=1)
    places = at_nodes(np.arange(10))
    hierarchy = build_hierarchy(*net.arcs, nodes=net.nodes)
    matrix(hierarchy, places, places)
    paths(hierarchy, places, places, np.array([[0, 9]]))
    search_matrix(build_streets(*net.arcs, nodes=net.nodes), places, places)


def scipy_trees(net: Net, sources: NDArray[np.int64]) -> tuple[NDArray[np.int64], float]:
    """Return the times from some sources to all nodes by scipy, and seconds a source."""
    kept = cheapest_arcs(net)
    weights = net.ms[kept].astype(np.float64) * FACTOR + 1
    graph: Any = csr_array(
        (weights, (net.tail[kept], net.head[kept])), shape=(net.nodes, net.nodes)
    )
    found, seconds = timed(lambda: np.asarray(dijkstra(graph, indices=sources)))
    none = np.isinf(found)
    times = np.where(none, UNREACHABLE, np.where(none, 0, found) // FACTOR)
    return times.astype(np.int64), seconds / sources.size


def networkx_trees(net: Net, sources: Sequence[int]) -> tuple[list[dict[int, int]], float]:
    """Return the times from some sources by networkx, and seconds a source."""
    kept = cheapest_arcs(net)
    graph = nx.DiGraph()
    graph.add_nodes_from(range(net.nodes))
    columns = (net.tail[kept].tolist(), net.head[kept].tolist(), net.ms[kept].tolist())
    graph.add_weighted_edges_from(zip(*columns, strict=True))
    found, seconds = timed(
        lambda: [nx.single_source_dijkstra_path_length(graph, source) for source in sources]
    )
    return found, seconds / len(sources)


def check(net: Net, places: Seeds, ms: NDArray[np.int64]) -> tuple[float, float]:
    """Compare rows of a matrix with both references; return their seconds a source."""
    node = places.node
    trees, scipy_s = scipy_trees(net, node[:SCIPY_SOURCES])
    if not np.array_equal(trees[:, node], ms[:SCIPY_SOURCES]):
        raise AssertionError("times differ from those of scipy")
    found, networkx_s = networkx_trees(net, node[:NETWORKX_SOURCES].tolist())
    for i, tree in enumerate(found):
        if [tree.get(v, UNREACHABLE) for v in node.tolist()] != ms[i].tolist():
            raise AssertionError("times differ from those of networkx")
    return scipy_s, networkx_s


def measure_roads(name: str, net: Net, *, places: int) -> RoadFigures:
    """Measure everything on one network, ``places`` of its nodes drawn with a fixed seed."""
    rng = np.random.default_rng(20_240_601)
    seeds = at_nodes(rng.integers(0, net.nodes, places))
    peak = Peak()
    hierarchy, build_s = timed(lambda: build_hierarchy(*net.arcs, nodes=net.nodes))
    build_peak = peak()
    peak = Peak()
    (ms, _), first_s = timed(lambda: matrix(hierarchy, seeds, seeds))
    more_s = [timed(lambda: matrix(hierarchy, seeds, seeds))[1] for _ in range(WARM_RUNS - 1)]
    pairs = rng.integers(0, places, (LEGS, 2))
    legs, legs_s = timed(lambda: paths(hierarchy, seeds, seeds, pairs))
    matrix_peak = peak()
    if not np.array_equal(legs.ms, ms[pairs[:, 0], pairs[:, 1]]):
        raise AssertionError("times of legs differ from the matrix")
    streets = build_streets(*net.arcs, nodes=net.nodes)
    few = at_nodes(seeds.node[:SCIPY_SOURCES])
    (shot, _), one_shot_s = timed(lambda: search_matrix(streets, few, seeds))
    if not np.array_equal(shot, ms[:SCIPY_SOURCES]):
        raise AssertionError("times of one-shot searches differ from the matrix")
    scipy_s, networkx_s = check(net, seeds, ms)
    return RoadFigures(
        name=name,
        nodes=net.nodes,
        arcs=net.tail.size,
        build_s=build_s,
        matrix_s=statistics.median([first_s, *more_s]),
        one_shot_s=one_shot_s / few.node.size,
        legs_s=legs_s,
        arcs_per_leg=legs.arcs.size / LEGS,
        build_peak_mb=build_peak,
        matrix_peak_mb=matrix_peak,
        scipy_source_s=scipy_s,
        networkx_source_s=networkx_s,
        places=places,
    )


def road_ratios(*, small: bool = False, places: int = PLACES) -> Iterator[RoadFigures]:
    """Yield the figures of the town, then those of a generated network of 490,000 nodes."""
    warm_up()
    yield measure_roads("town", town_net(), places=places)
    side = SMALL_SIDE if small else GRID_SIDE
    yield measure_roads("grid", grid_net(side, seed=1), places=places)


def main(arguments: Sequence[str] | None = None) -> int:
    """Print the rows of both networks; return the exit code."""
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks.roads_speed")
    parser.add_argument("--small", action="store_true", help="a grid of 22,500 nodes, not 490,000")
    parser.add_argument("--places", type=int, default=PLACES, help="sources and targets")
    chosen = parser.parse_args(arguments)
    for figures in road_ratios(small=chosen.small, places=chosen.places):
        print(*figures.rows(), sep="\n", flush=True)
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
