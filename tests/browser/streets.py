"""Where street names, labels and cords lie, read from the page; shapely judges what meets what.

The measuring shares no code with the placing of names. Lengths are in CSS pixels.
"""

from __future__ import annotations

from itertools import combinations
from typing import TypedDict

import shapely
from playwright.sync_api import Page

_READ = """() => {
  const corners = text => {
    const b = text.getBBox();
    const m = text.getScreenCTM();
    const [right, low] = [b.x + b.width, b.y + b.height];
    return [[b.x, b.y], [right, b.y], [right, low], [b.x, low]]
      .map(([x, y]) => [m.a * x + m.c * y + m.e, m.b * x + m.d * y + m.f]);
  };
  const box = e => {
    const b = e.getBoundingClientRect();
    return [b.left, b.top, b.right, b.bottom];
  };
  const seen = e => e.offsetWidth > 0 && getComputedStyle(e).visibility === "visible";
  const over = ".map-tools, .north, .map-note, .map-fold, .leaflet-control-scale";
  const kinds = ".sheet polyline.cord-edge, .sheet polyline.ferry-leg";
  const lines = [...document.querySelectorAll(kinds)];
  const where = document.querySelector(".sheet").getScreenCTM();
  return {
    frame: box(document.querySelector(".map-frame")),
    names: [...document.querySelectorAll(".streets text")]
      .map(text => [text.textContent, corners(text)]),
    sizes: [...document.querySelectorAll(".streets text")]
      .map(text => parseFloat(getComputedStyle(text).fontSize)),
    labels: [...document.querySelectorAll(".labels > *")].filter(seen).map(box),
    controls: [...document.querySelectorAll(over)].filter(seen).map(box),
    dots: [...document.querySelectorAll(".sheet circle.dot, .sheet .target-field")].map(box),
    cords: lines.map(line => line.getAttribute("points").split(" ").map(p => {
      const [x, y] = p.split(",").map(Number);
      return [x + where.e, y + where.f];
    })),
  };
}"""


Box = tuple[float, float, float, float]
"""Left, top, right, bottom."""


class Streets(TypedDict):
    """What the page shows."""

    frame: Box
    names: list[tuple[str, list[list[float]]]]
    sizes: list[float]
    labels: list[Box]
    controls: list[Box]
    dots: list[Box]
    cords: list[list[list[float]]]


def read_streets(page: Page) -> Streets:
    """Read names, labels and cords of a page."""
    shown: Streets = page.evaluate(_READ)
    return shown


def clashes(shown: Streets) -> dict[str, int]:
    """Count names that share more than a hair with something else or leave the frame.

    A box of letters has empty rims above and below: a tenth of its height is taken off each.
    """
    names = [_ink(corners) for _, corners in shown["names"]]
    frame = shapely.box(*shown["frame"])
    labels = [shapely.box(*box) for box in shown["labels"]]
    controls = [shapely.box(*box) for box in shown["controls"]]
    dots = [shapely.box(*box) for box in shown["dots"]]
    cords = [shapely.LineString(points) for points in shown["cords"] if len(points) > 1]
    counts = {
        "name on name": sum(a.intersects(b) for a, b in combinations(names, 2)),
        "cut": sum(not frame.contains(name) for name in names),
    }
    for key, others in (
        ("label", labels),
        ("control", controls),
        ("dot", dots),
        ("cord", cords),
    ):
        counts[f"name on {key}"] = sum(a.intersects(b) for a in names for b in others)
    return {key: count for key, count in counts.items() if count}


def _ink(corners: list[list[float]]) -> shapely.Polygon:
    a, b, c, d = (shapely.Point(corner) for corner in corners)

    def between(first: shapely.Point, last: shapely.Point, share: float) -> tuple[float, float]:
        return (
            first.x + (last.x - first.x) * share,
            first.y + (last.y - first.y) * share,
        )

    return shapely.Polygon(
        [between(a, d, 0.1), between(b, c, 0.1), between(b, c, 0.9), between(a, d, 0.9)]
    )
