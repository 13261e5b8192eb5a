"""How fast an extract is read, beside osmnx on the same area in the same run.

osmnx reads no PBF and takes every way of an XML file for a road, so it is handed XML twice: with
all ways tagged as highways, those for people on foot too, as a filter of the extract gives them;
and with the ways for cars only, which suits it best. Both hold whole ways and their nodes. The
product reads the PBF with all that is in it. The area is the extract of the tests, laid side by
side with shifted ids.
"""

from __future__ import annotations

import gc
import json
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

import osmium
import osmnx as ox
from osmium.osm import mutable

from georoute.roads.extract import read_extract
from georoute.roads.speeds import ROAD_CLASSES, default_profile

__all__ = ["ReadingSpeed", "pbf_against_osmnx"]

EXTRACT = Path(__file__).parents[1] / "data" / "Helsinki.osm.pbf"
COPIES = 4
REPEATS = 3
ID_STEP = 7_000_000_000  # above all ids of the extract
LON_STEP = 0.1  # wider than the extract
_CHILD = """
import json, pathlib, sys
from georoute.roads.extract import read_extract
from georoute.roads.speeds import default_profile

def peak_mb():  # of this process since it began: ru_maxrss would count its parent's
    lines = pathlib.Path("/proc/self/status").read_text().splitlines()
    return next(int(line.split()[1]) / 1024 for line in lines if line.startswith("VmHWM"))

before = peak_mb()
read_extract(sys.argv[1], profile=default_profile("FI"))
print(json.dumps([before, peak_mb()]))
"""
"""Memory as Linux counts it."""


@dataclass(frozen=True)
class ReadingSpeed:
    """Median seconds of both, the size of the area, and the product's memory in MB."""

    nodes: int
    own_s: float
    osmnx_s: float
    own_cpu_s: float
    osmnx_cpu_s: float
    osmnx_cars_cpu_s: float
    loaded_mb: float
    peak_mb: float

    @property
    def times_faster(self) -> float:
        return self.osmnx_s / self.own_s

    @property
    def s_per_million(self) -> float:
        """Seconds per million nodes of the extract, whether of roads or not."""
        return self.own_s / self.nodes * 1e6

    @property
    def line(self) -> str:
        return (
            f"roads from PBF, {self.nodes} nodes: {self.own_s:.3f} s "
            f"({self.s_per_million:.2f} s per million nodes); osmnx on XML of its highways "
            f"{self.osmnx_s:.2f} s; {self.times_faster:.1f} times faster by the clock, "
            f"{self.osmnx_cpu_s / self.own_cpu_s:.1f} by processor time ({self.own_cpu_s:.3f} s "
            f"against {self.osmnx_cpu_s:.2f} s), {self.osmnx_cars_cpu_s / self.own_cpu_s:.1f} "
            f"where osmnx is given the ways for cars only; peak memory "
            f"{self.peak_mb:.0f} MB, of which {self.loaded_mb:.0f} MB for the libraries"
        )


def copies_of(number: int) -> Iterator[tuple[mutable.OSMObject, int, list[int]]]:
    """Yield all objects of the extract many times, each time with other ids and farther east.

    Beside each stand its id and, of a highway, the ids of its nodes.
    """
    for kind in (osmium.osm.NODE, osmium.osm.WAY, osmium.osm.RELATION):
        for copy in range(number):
            shift = copy * ID_STEP
            for item in osmium.FileProcessor(str(EXTRACT), kind):
                new = item.id + shift
                tags = {tag.k: tag.v for tag in item.tags}
                if isinstance(item, osmium.osm.Node):
                    place = (item.lon + copy * LON_STEP, item.lat)
                    yield mutable.Node(id=new, location=place, tags=tags), new, []
                elif isinstance(item, osmium.osm.Way):
                    refs = [node.ref + shift for node in item.nodes]
                    way = mutable.Way(id=new, nodes=refs, tags=tags)
                    yield way, new, refs if "highway" in tags else []
                elif isinstance(item, osmium.osm.Relation):
                    members = [(m.type, m.ref + shift, m.role) for m in item.members]
                    yield mutable.Relation(id=new, members=members, tags=tags), new, []


def write_area(pbf: Path, xml: Path, cars_xml: Path, *, copies: int) -> int:
    """Write the area as PBF, and its highways as XML, all and for cars; return the nodes.

    The PBF says that it is sorted, as published extracts do.
    """
    header = osmium.io.Header()
    header.set("sorting", "Type_then_ID")
    nodes: dict[int, mutable.Node] = {}
    ways: list[tuple[mutable.Way, list[int]]] = []
    with osmium.SimpleWriter(str(pbf), header=header) as writer:
        for item, number, refs in copies_of(copies):
            writer.add(item)
            if isinstance(item, mutable.Node):
                nodes[number] = item
            elif isinstance(item, mutable.Way) and refs:
                ways.append((item, refs))
    whole = [(way, refs) for way, refs in ways if all(ref in nodes for ref in refs)]
    cars = [(way, refs) for way, refs in whole if dict(way.tags or {})["highway"] in ROAD_CLASSES]
    for path, chosen in ((xml, whole), (cars_xml, cars)):
        with osmium.SimpleWriter(str(path)) as writer:
            for ref in sorted({ref for _, refs in chosen for ref in refs}):
                writer.add_node(nodes[ref])
            for way, _ in chosen:
                writer.add_way(way)
    return len(nodes)


def seconds(work: Callable[[], object]) -> tuple[float, float]:
    """Return the seconds of one call by the clock, and of all threads of the processor."""
    gc.collect()
    clock, processor = time.perf_counter(), time.process_time()
    work()
    return time.perf_counter() - clock, time.process_time() - processor


def pbf_against_osmnx(*, copies: int = COPIES, repeats: int = REPEATS) -> ReadingSpeed:
    """Time both on the same area, taking turns; print one line and return the figures."""
    profile = default_profile("FI")
    own: list[tuple[float, float]] = []
    reference: list[tuple[float, float]] = []
    cars: list[tuple[float, float]] = []
    with tempfile.TemporaryDirectory() as folder:
        pbf, xml = Path(folder) / "area.osm.pbf", Path(folder) / "highways.osm"
        cars_xml = Path(folder) / "cars.osm"
        nodes = write_area(pbf, xml, cars_xml, copies=copies)
        read_extract(EXTRACT, profile=profile)  # so that imports are not timed
        for _ in range(repeats):
            own.append(seconds(lambda: read_extract(pbf, profile=profile)))
            reference.append(seconds(lambda: ox.graph_from_xml(xml, retain_all=True)))
            cars.append(seconds(lambda: ox.graph_from_xml(cars_xml, retain_all=True)))
        done = subprocess.run(
            [sys.executable, "-c", _CHILD, str(pbf)], capture_output=True, text=True, check=True
        )
    loaded_mb, peak_mb = json.loads(done.stdout)
    speed = ReadingSpeed(
        nodes=nodes,
        own_s=statistics.median(clock for clock, _ in own),
        osmnx_s=statistics.median(clock for clock, _ in reference),
        own_cpu_s=statistics.median(cpu for _, cpu in own),
        osmnx_cpu_s=statistics.median(cpu for _, cpu in reference),
        osmnx_cars_cpu_s=statistics.median(cpu for _, cpu in cars),
        loaded_mb=loaded_mb,
        peak_mb=peak_mb,
    )
    print(speed.line)
    return speed


if __name__ == "__main__":
    pbf_against_osmnx()
