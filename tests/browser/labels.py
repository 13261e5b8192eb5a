"""What lies on what on a map: plates and tags, dots, leaders, measured in the browser.

The measuring shares no code with the placing of labels. Lengths are in CSS pixels.
"""

from __future__ import annotations

from playwright.sync_api import Page

_MEASURE = """() => {
  const box = e => {
    const b = e.getBoundingClientRect();
    return { l: b.left, t: b.top, r: b.right, b: b.bottom };
  };
  const frame = box(document.querySelector(".map-frame"));
  const all = [...document.querySelectorAll(".labels > *")].filter(e => e.offsetWidth > 0);
  const labels = all.filter(e => getComputedStyle(e).visibility === "visible").map(box);
  const dots = [...document.querySelectorAll(".sheet circle.dot, .sheet .target-field")]
    .map(box).map(d => [(d.l + d.r) / 2, (d.t + d.b) / 2]);
  const leaders = [...document.querySelectorAll(".sheet .leader")].map(line => {
    const m = line.getScreenCTM();
    const at = n => +line.getAttribute(n);
    return [at("x1") + m.e, at("y1") + m.f, at("x2") + m.e, at("y2") + m.f];
  });
  const over = [...document.querySelectorAll(
    ".map-tools, .north, .map-note, .map-fold, .leaflet-control-scale",
  )].map(box).filter(o => o.r > o.l);
  const shared = (a, b) => Math.min(a.r, b.r) - Math.max(a.l, b.l) > 0.6
    && Math.min(a.b, b.b) - Math.max(a.t, b.t) > 0.6;
  // a leader goes into a label where one of its points, a quarter pixel apart, is well inside
  const into = ([x1, y1, x2, y2], b) => {
    const steps = Math.ceil(Math.hypot(x2 - x1, y2 - y1) * 4) + 1;
    for (let k = 0; k <= steps; k += 1) {
      const x = x1 + (x2 - x1) * k / steps;
      const y = y1 + (y2 - y1) * k / steps;
      if (x > b.l + 1.5 && x < b.r - 1.5 && y > b.t + 1.5 && y < b.b - 1.5) return true;
    }
    return false;
  };
  const side = (a, x, y) => Math.sign((a[2] - a[0]) * (y - a[1]) - (a[3] - a[1]) * (x - a[0]));
  const cross = (a, b) => side(a, b[0], b[1]) * side(a, b[2], b[3]) < 0
    && side(b, a[0], a[1]) * side(b, a[2], a[3]) < 0;
  const pairs = (list, test) => list.reduce(
    (sum, a, k) => sum + list.slice(0, k).filter(b => test(a, b)).length, 0,
  );
  return {
    labels: labels.length,
    all: all.length,
    label_on_label: pairs(labels, shared),
    label_on_dot: labels.reduce((sum, b) => sum + dots.filter(
      ([x, y]) => x > b.l - 3 && x < b.r + 3 && y > b.t - 3 && y < b.b + 3,
    ).length, 0),
    leader_on_label: leaders.reduce((sum, a) => sum + labels.filter(b => into(a, b)).length, 0),
    leader_on_leader: pairs(leaders, cross),
    outside: labels.filter(
      b => b.l < frame.l || b.r > frame.r || b.t < frame.t || b.b > frame.b,
    ).length,
    on_controls: labels.reduce((sum, b) => sum + over.filter(o => shared(b, o)).length, 0),
  };
}"""


def measure_labels(page: Page) -> dict[str, int]:
    """Return counts of what lies on what."""
    counts: dict[str, int] = page.evaluate(_MEASURE)
    return counts
