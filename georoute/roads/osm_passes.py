"""One pass over an OpenStreetMap file: barriers, ways for cars, turn restrictions.

Files are read by pyosmium. What is wanted passes from it as lines of text, in the format OPL
(https://osmcode.org/opl-file-format/): the tags of a way as objects of Python take about 50
microseconds, as text about 3. Node locations lie in a sorted array of 16 bytes a node; a filter of
wanted ids was measured to take gigabytes, as the ids of real nodes are scattered.

Nodes come before ways in files that say they are sorted. Where a file does not say so and ways
lack nodes, its ways are read once more, when the locations of all nodes are known.
"""

from __future__ import annotations

import re
import tempfile
from array import array
from itertools import islice
from pathlib import Path
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np
import osmium

from georoute.errors import RoadError
from georoute.roads.speeds import ROAD_CLASSES
from georoute.roads.tags import (
    LOCAL_VALUES,
    OPEN_VALUES,
    RELEVANT_KEYS,
    SHUT_VALUES,
    Barrier,
    WayRule,
    judge_barrier,
    judge_way,
)

if TYPE_CHECKING:
    from collections.abc import Iterator

    from numpy.typing import NDArray

    from georoute.domain.run import Progress
    from georoute.roads.box import Box
    from georoute.roads.remarks import Tally
    from georoute.roads.speeds import SpeedProfile

__all__ = ["RawRestriction", "RawRoads", "read_passes"]

STAGE = "roads"
LINES_AT_ONCE = 20_000
LOCATIONS_IN_MEMORY_UP_TO = 1_500_000_000
"""Bytes of a file whose node locations are kept in memory; those of larger ones go to the disk."""

_ENDS_EARLY = ("truncated", "eof", "end of", "unclosed token", "no element found")
_NOWHERE = 999.0
_TEXT_FORMAT = "opl,add_metadata=false,locations_on_ways=true"
_TO_NUMBERS = str.maketrans("nxy,", "    ")
_ESCAPE = re.compile("%([0-9a-f]+)%")
_LACKS_NODE = re.compile(r"[Nn,]n\d+xy")
_FOR_CARS = sorted((OPEN_VALUES | LOCAL_VALUES) - SHUT_VALUES)
_WAYS = (
    *(("highway", value) for value in (*ROAD_CLASSES, "construction")),
    *((key, value) for key in ("motorcar", "motor_vehicle") for value in _FOR_CARS),
    ("route", "ferry"),
)
"""Tags of ways worth a look; most ways of a town are for people on foot and have none of them."""


class RawRestriction(NamedTuple):
    """A relation of the type restriction: its id, tags, and members (type, id, role)."""

    number: int
    tags: dict[str, str]
    members: list[tuple[str, int, str]]


class RawRoads(NamedTuple):
    """W ways of P points before they are cut into stretches.

    ``way``: int64 (W,), ids. ``rule``: int64 (W,), index into ``rules``. ``name``: int32 (W,),
    index into ``names``. ``ptr``: int64 (W + 1,), the points of each way. ``ref``: int64 (P,),
    ids of nodes. ``lat``, ``lon``: float64 (P,), degrees, NaN where the file lacks the node.
    ``barriers``: what stands on nodes, open ones left out. ``extent``: south, west, north, east
    of all roads for cars in the file, degrees; NaN if there are none.
    """

    way: NDArray[np.int64]
    rule: NDArray[np.int64]
    name: NDArray[np.int32]
    ptr: NDArray[np.int64]
    ref: NDArray[np.int64]
    lat: NDArray[np.float64]
    lon: NDArray[np.float64]
    rules: list[WayRule]
    names: list[str]
    barriers: dict[int, Barrier]
    restrictions: list[RawRestriction]
    extent: tuple[float, float, float, float]


class _Judge:
    """Judges ways; those with equal tags once. Names are numbered, 0 is no name."""

    def __init__(self, profile: SpeedProfile, tally: Tally) -> None:
        self.profile = profile
        self.tally = tally
        self.rules: list[WayRule] = []
        self.names = {"": 0}
        self._known: dict[str, int] = {}

    def rule(self, tag_text: str) -> int:
        """Return the number of the rule for a way's tags, as OPL writes them."""
        telling = [part for part in tag_text.split(",") if part[: part.find("=")] in RELEVANT_KEYS]
        text = ",".join(telling)
        number = self._known.get(text)
        if number is None:
            number = self._known[text] = len(self.rules)
            self.rules.append(judge_way(_tags_of(text), profile=self.profile))
        return number

    def name(self, tag_text: str) -> int:
        """Return the number of a way's name, or of its reference where it has none."""
        text = f",{tag_text},"
        for key in (",name=", ",ref="):
            at = text.find(key)
            if at >= 0:
                found = text[at + len(key) : text.index(",", at + 1)]
                return self.names.setdefault(_plain(found), len(self.names))
        return 0


def _plain(text: str) -> str:
    """Undo the escapes of OPL."""
    if "%" not in text:
        return text
    return _ESCAPE.sub(lambda match: chr(int(match[1], 16)), text)


class _Points:
    """Collects the points of ways, chunk by chunk, and drops ways that miss the box."""

    def __init__(self, within: Box | None) -> None:
        self.within = within
        self.extent = np.array([np.nan, np.nan, np.nan, np.nan])
        self.ids: list[NDArray[np.int64]] = []
        self.counts: list[NDArray[np.int64]] = []
        self.rows: list[NDArray[np.float64]] = []

    def add(self, heads: NDArray[np.int64], texts: list[str]) -> None:
        """Take ways: (id, rule, name) each, and the nodes of each as OPL writes them."""
        count = np.fromiter((text.count("n") for text in texts), np.int64, len(texts))
        heads = heads[count > 0]
        numbers = ",".join(text for text in texts if text)
        # A node without a location reads "n1xy". Ids up to 2 ** 53 are exact as float64.
        numbers = numbers.replace("xy", f"x{_NOWHERE}y{_NOWHERE}").translate(_TO_NUMBERS)
        rows = np.fromstring(numbers, np.float64, sep=" ").reshape(-1, 3)
        rows[rows[:, 1] == _NOWHERE, 1:] = np.nan
        count = count[count > 0]
        if not count.size:
            return
        begin = np.concatenate([[0], np.cumsum(count)[:-1]])
        low = np.fmin.reduceat(rows[:, 1:], begin)
        high = np.fmax.reduceat(rows[:, 1:], begin)
        west, south = np.fmin.reduce(low)
        east, north = np.fmax.reduce(high)
        self.extent[:2] = np.fmin(self.extent[:2], (south, west))
        self.extent[2:] = np.fmax(self.extent[2:], (north, east))
        if self.within is not None:
            keep = self.within.overlaps(low[:, 1], high[:, 1], low[:, 0], high[:, 0])
            heads, rows, count = heads[keep], rows[np.repeat(keep, count)], count[keep]
        self.ids.append(heads)
        self.counts.append(count)
        self.rows.append(rows)


def _filters(*, ways_only: bool = False) -> list[Any]:
    """Return filters that let barriers, ways that may be for cars, and restrictions through."""
    ways = osmium.filter.TagFilter(*_WAYS)
    ways.enable_for(osmium.osm.WAY)
    if ways_only:
        return [ways]
    barriers = osmium.filter.KeyFilter("barrier")
    barriers.enable_for(osmium.osm.NODE)
    turns = osmium.filter.TagFilter(("type", "restriction"))
    turns.enable_for(osmium.osm.RELATION)
    return [barriers, ways, turns]


def _write_text(path: Path, text: Path, locations: Any, *, ways_only: bool = False) -> bool:  # noqa: ANN401 - pyosmium's handlers have no common type
    """Write what is wanted of a file as lines of OPL; tell whether the file says it is sorted."""
    filters = _filters(ways_only=ways_only)
    kinds = osmium.osm.WAY if ways_only else osmium.osm.ALL
    writer = osmium.SimpleWriter(osmium.io.File(str(text), _TEXT_FORMAT))
    try:
        with osmium.io.Reader(str(path), kinds) as reader:
            is_sorted = reader.header().get("sorting") == "Type_then_ID"
            osmium.apply(reader, locations, *filters, writer)
    finally:
        writer.close()
    return bool(is_sorted)


def _texts(path: Path, folder: Path) -> Iterator[str]:
    """Yield the lines of OPL of a file, made in a folder."""
    kind = "mem" if path.stat().st_size <= LOCATIONS_IN_MEMORY_UP_TO else "file"
    table = osmium.index.create_map(f"sparse_{kind}_array")
    locations = osmium.NodeLocationsForWays(table)
    locations.ignore_errors()
    first, again = folder / "all.opl", folder / "ways.opl"
    is_sorted = _write_text(path, first, locations)
    once_more = False
    if not is_sorted:
        with first.open(encoding="utf-8") as lines:
            once_more = any(line[0] == "w" and _LACKS_NODE.search(line) for line in lines)
    if once_more:
        _write_text(path, again, locations, ways_only=True)
    del locations, table  # the text is all that is needed from here on
    with first.open(encoding="utf-8") as lines:
        yield from (line for line in lines if not once_more or line[0] != "w")
    if once_more:
        with again.open(encoding="utf-8") as lines:
            yield from lines


def _fields(line: str) -> tuple[int, str, str]:
    """Return the id, the tags as ``key=value,key=value``, and the rest of a line of OPL."""
    head, _, rest = line.rstrip("\n").partition(" T")
    tag_text, _, after = rest.partition(" ")
    return int(head[1:]), tag_text, after


def _tags_of(tag_text: str) -> dict[str, str]:
    pairs = (part.partition("=") for part in tag_text.split(","))
    return {_plain(key): _plain(value) for key, _, value in pairs}


def _restriction(line: str) -> RawRestriction:
    number, tag_text, after = _fields(line)
    members = []
    for member in after[1:].split(",") if len(after) > 1 else ():
        ref, _, role = member.partition("@")
        members.append((ref[0], int(ref[1:]), _plain(role)))
    return RawRestriction(number, _tags_of(tag_text), members)


class _Nodes:
    """Barriers that are not open, and the kinds of those that are unknown, by node."""

    def __init__(self, profile: SpeedProfile) -> None:
        self.profile = profile
        self.barriers: dict[int, Barrier] = {}
        self.unknown: dict[int, str] = {}

    def take(self, line: str) -> None:
        """Judge the barrier of a line of OPL."""
        number, tag_text, _ = _fields(line)
        tags = _tags_of(tag_text)
        barrier = judge_barrier(tags, profile=self.profile)
        if barrier is Barrier.UNKNOWN:
            self.unknown[number] = tags["barrier"]
        elif barrier is not Barrier.OPEN:
            self.barriers[number] = barrier


def _judge_ways(lines: list[str], judge: _Judge, points: _Points) -> None:
    """Judge ways, a line of OPL each, and take the points of those for cars."""
    heads, texts = array("q"), []
    for line in lines:
        number, tag_text, nodes = _fields(line)
        rule = judge.rule(tag_text)
        left_out = judge.rules[rule].left_out
        if left_out:
            judge.tally.add(left_out, f"way {number}")
            continue
        heads.extend((number, rule, judge.name(tag_text)))
        texts.append(nodes[1:])
    points.add(np.frombuffer(heads, np.int64).reshape(-1, 3), texts)


def _judge_lines(
    lines: Iterator[str], judge: _Judge, points: _Points, nodes: _Nodes
) -> list[RawRestriction]:
    """Read lines of OPL, ways a chunk at a time; return the restrictions."""
    restrictions = []
    while chunk := list(islice(lines, LINES_AT_ONCE)):
        for line in chunk:
            if line[0] == "n":
                nodes.take(line)
            elif line[0] == "r":
                restrictions.append(_restriction(line))
        _judge_ways([line for line in chunk if line[0] == "w"], judge, points)
    return restrictions


def _explain(path: Path, error: Exception) -> RoadError:
    """Return the error a person can act on."""
    found = str(error).strip() or type(error).__name__
    lowered = found.lower()
    if not path.stat().st_size:
        what, remedy = "the file is empty", "fetch it again"
    elif any(word in lowered for word in _ENDS_EARLY):
        what, remedy = "the file ends too early", "fetch it again, whole"
    elif "detect file format" in lowered or "not supported" in lowered:
        what = "its name does not tell the format"
        remedy = "give an extract named *.osm.pbf, *.osm or *.osm.bz2"
    else:
        what = "it is damaged or no OpenStreetMap file"
        remedy = "give an extract named *.osm.pbf, *.osm or *.osm.bz2, fetched whole"
    msg = f"{path}: cannot be read as an OpenStreetMap extract: {what} ({found}); {remedy}"
    return RoadError(msg)


def read_passes(
    path: Path,
    *,
    profile: SpeedProfile,
    within: Box | None,
    tally: Tally,
    progress: Progress,
) -> RawRoads:
    """Read ways for cars with their points, barriers and turn restrictions of a file.

    Raises
    ------
    RoadError
        If the file is missing, damaged, or not of OpenStreetMap.
    """
    if not path.is_file():
        what = "is a folder" if path.is_dir() else "does not exist"
        msg = f"{path}: {what}; give an extract named *.osm.pbf, *.osm or *.osm.bz2"
        raise RoadError(msg)
    judge, points, nodes = _Judge(profile, tally), _Points(within), _Nodes(profile)
    progress(STAGE, fraction=0.0)
    try:
        with tempfile.TemporaryDirectory(prefix="georoute-") as folder:
            restrictions = _judge_lines(_texts(path, Path(folder)), judge, points, nodes)
    except (RuntimeError, OSError, ValueError) as error:
        raise _explain(path, error) from error
    progress(STAGE, fraction=0.7)
    raw = _joined(judge, points, nodes.barriers, restrictions)
    on_roads = np.unique(raw.ref[np.isin(raw.ref, np.array(list(nodes.unknown), np.int64))])
    for node in on_roads.tolist():
        tally.add("barrier_unknown", f"node {node} barrier={nodes.unknown[node]}")
    return raw


def _joined(
    judge: _Judge,
    points: _Points,
    barriers: dict[int, Barrier],
    restrictions: list[RawRestriction],
) -> RawRoads:
    heads = np.concatenate([np.empty((0, 3), np.int64), *points.ids])
    rows = np.concatenate([np.empty((0, 3)), *points.rows])
    count = np.concatenate([np.empty(0, np.int64), *points.counts])
    south, west, north, east = points.extent.tolist()
    return RawRoads(
        way=heads[:, 0].copy(),
        rule=heads[:, 1].copy(),
        name=heads[:, 2].astype(np.int32),
        ptr=np.concatenate([[0], np.cumsum(count)]).astype(np.int64),
        ref=rows[:, 0].astype(np.int64),
        lat=rows[:, 2].copy(),
        lon=rows[:, 1].copy(),
        rules=judge.rules,
        names=list(judge.names),
        barriers=barriers,
        restrictions=restrictions,
        extent=(south, west, north, east),
    )
