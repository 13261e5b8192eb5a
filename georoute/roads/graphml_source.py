"""GraphML as osmnx saves it, read into the table of roads; osmnx itself is not needed for that."""

from __future__ import annotations

import ast
from pathlib import Path
from typing import TYPE_CHECKING
from xml.etree import ElementTree as ET

import numpy as np
import shapely

from georoute.domain.run import no_progress
from georoute.errors import RoadError
from georoute.roads.extract import OSM_CREDIT
from georoute.roads.line_table import Line, table_of_lines
from georoute.roads.remarks import Tally
from georoute.roads.tags import RELEVANT_KEYS, WayRule, judge_way

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from georoute.domain.run import Progress
    from georoute.roads.box import Box
    from georoute.roads.model import RoadTable
    from georoute.roads.speeds import SpeedProfile

__all__ = ["read_graphml"]

_SPACE = "{http://graphml.graphdrawing.org/xmlns}"
_WGS_84 = frozenset({"", "epsg:4326", "ogc:crs84", "wgs84"})
_TWO_POINTS = 2

Edge = tuple[str, str, dict[str, str]]


class _Graph:
    """Nodes by id with (lat, lon) and edges with their attributes, as in the file."""

    def __init__(self) -> None:
        self.keys: dict[str, str] = {}
        self.nodes: dict[str, tuple[float, float]] = {}
        self.edges: list[Edge] = []
        self.about: dict[str, str] = {}
        self.directed = True

    def take(self, element: ET.Element) -> None:
        """Take one element whose content has been read."""
        if element.tag == f"{_SPACE}key":
            self.keys[element.attrib["id"]] = element.attrib.get("attr.name", "")
        elif element.tag == f"{_SPACE}node":
            data = self._data(element)
            self.nodes[element.attrib["id"]] = float(data["y"]), float(data["x"])
            element.clear()
        elif element.tag == f"{_SPACE}edge":
            ends = element.attrib["source"], element.attrib["target"]
            self.edges.append((*ends, self._data(element)))
            element.clear()
        elif element.tag == f"{_SPACE}graph":
            self.about = self._data(element)

    def _data(self, element: ET.Element) -> dict[str, str]:
        found = element.findall(f"{_SPACE}data")
        return {self.keys.get(item.attrib["key"], ""): item.text or "" for item in found}


def _parse(path: Path) -> _Graph:
    graph = _Graph()
    try:
        # The file is the user's own; entities that grow without end are refused by expat itself.
        for event, element in ET.iterparse(path, events=("start", "end")):  # noqa: S314 - as said
            if event == "end":
                graph.take(element)
            elif element.tag == f"{_SPACE}graph":
                graph.directed = element.attrib.get("edgedefault") != "undirected"
    except OSError as error:
        msg = f"{path}: cannot be opened ({error.strerror or error}); give a GraphML file"
        raise RoadError(msg) from error
    except ET.ParseError as error:
        msg = f"{path}: is no whole GraphML file ({error}); save the graph again with osmnx"
        raise RoadError(msg) from error
    except (KeyError, ValueError) as error:
        msg = (
            f"{path}: a node or an edge lacks what osmnx saves ({error}); nodes need x and y, "
            f"edges source and target; save the graph again with osmnx"
        )
        raise RoadError(msg) from error
    if not graph.edges:
        msg = f"{path}: holds no edge of a road graph; give a GraphML file saved by osmnx"
        raise RoadError(msg)
    return graph


def _plain(text: str) -> str:
    """Return a value as a tag has it; osmnx writes several values as a list of Python."""
    if not text.startswith("["):
        return text
    try:
        values = ast.literal_eval(text)
    except (ValueError, SyntaxError):
        return text
    return ";".join(str(value) for value in values)


def _tags(attributes: Mapping[str, str]) -> dict[str, str]:
    """Return the tags of an edge; its direction is that of the edge, so none tells one-ways."""
    tags = {key: _plain(value) for key, value in attributes.items() if key in RELEVANT_KEYS}
    tags["highway"] = tags.get("highway", "road").split(";")[0]
    return {**tags, "oneway": "no"}


def _shape(graph: _Graph, edge: Edge) -> NDArray[np.float64]:
    """Return the points (lon, lat) of an edge, float64 (P, 2)."""
    begin, end, attributes = edge
    if attributes.get("geometry"):
        return np.asarray(shapely.get_coordinates(shapely.from_wkt(attributes["geometry"])))
    return np.array([graph.nodes[begin][::-1], graph.nodes[end][::-1]])


def _line(edge: Edge, points: NDArray[np.float64], rule: WayRule, *, both: bool) -> Line:
    begin, end, attributes = edge
    number = _plain(attributes.get("osmid", "0")).split(";")[0]
    name = _plain(attributes.get("name") or attributes.get("ref") or "")
    return Line(
        from_node=begin,
        to_node=end,
        lat=points[:, 1].copy(),
        lon=points[:, 0].copy(),
        forward_kmh=rule.forward_kmh,
        backward_kmh=rule.forward_kmh if both else 0.0,
        way=int(number) if number.lstrip("-").isdigit() else 0,
        road_class=rule.road_class,
        name=name.split(";")[0],
        access=rule.access,
    )


def _lines(graph: _Graph, profile: SpeedProfile, tally: Tally) -> list[Line]:
    """Join each edge with the edge of its way back, where there is one."""
    lines: list[Line] = []
    waiting: dict[tuple[str, str, bytes], list[int]] = {}
    edges: list[tuple[Edge, NDArray[np.float64], WayRule]] = []
    both: list[bool] = []
    for edge in graph.edges:
        begin, end, attributes = edge
        rule = judge_way(_tags(attributes), profile=profile)
        if rule.left_out:
            tally.add(rule.left_out, f"edge {begin}-{end}")
            continue
        points = _shape(graph, edge)
        if points.shape[0] < _TWO_POINTS or not np.isfinite(points).all():
            tally.add("row_incomplete", f"edge {begin}-{end}")
            continue
        way_back = (end, begin, np.ascontiguousarray(points[::-1]).tobytes())
        partners = waiting.get(way_back)
        if partners:
            both[partners.pop()] = True
            continue
        for code, example in rule.remarks:
            tally.add(code, f"edge {begin}-{end} {example}".rstrip())
        waiting.setdefault((begin, end, points.tobytes()), []).append(len(edges))
        edges.append((edge, points, rule))
        both.append(not graph.directed)
    lines.extend(
        _line(edge, points, rule, both=two_way)
        for (edge, points, rule), two_way in zip(edges, both, strict=True)
    )
    return lines


def read_graphml(
    path: Path | str,
    *,
    profile: SpeedProfile,
    within: Box | None = None,
    progress: Progress = no_progress,
) -> RoadTable:
    """Read the roads of a GraphML file that osmnx saved.

    Speeds come from the tags by the profile; an edge and the edge of its way back become one
    stretch. Such files hold no turn restrictions and no barriers; a remark says so.

    Raises
    ------
    RoadError
        If the file is missing or no such GraphML, is projected, or has no road in the box.
    """
    path = Path(path)
    progress("roads", fraction=0.0)
    graph = _parse(path)
    system = graph.about.get("crs", "").lower()
    if system not in _WGS_84:
        msg = f"{path}: its graph is in {system}; save it unprojected (epsg:4326)"
        raise RoadError(msg)
    tally = Tally()
    tally.add("source_without_turns", path.name)
    try:
        lines = _lines(graph, profile, tally)
    except KeyError as error:
        msg = f"{path}: an edge names the node {error}, which is not in the file; save it again"
        raise RoadError(msg) from error
    except shapely.errors.ShapelyError as error:
        msg = f"{path}: the shape of an edge cannot be read ({error}); save the graph again"
        raise RoadError(msg) from error
    progress("roads", fraction=0.8)
    table = table_of_lines(lines, within=within, tally=tally, source=path.name, credit=OSM_CREDIT)
    progress("roads", fraction=1.0)
    return table
