// The map sheet: grid of degrees, scale, own buttons; layers draw on it through `redraw`.
function surveyMap(id, options) {
  const map = L.map(id, {
    ...options,
    zoomControl: false,
    attributionControl: false,
    zoomAnimation: false,
    fadeAnimation: false,
    markerZoomAnimation: false,
    inertia: false,
    zoomSnap: 0.25,
    zoomDelta: 0.5,
    minZoom: 3,
    maxZoom: 18,
  });
  L.control.scale({ imperial: false, maxWidth: 130, position: "bottomleft" }).addTo(map);
  const box = map.getContainer();
  box.setAttribute("role", "region");
  box.setAttribute("aria-label", words[box.dataset.name]);
  return map;
}

const OVER_THE_MAP = ".map-tools, .north, .map-note, .map-fold, .leaflet-control-scale";

function gridStep(span) {
  const steps = [0.001, 0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10, 20];
  return steps.find((step) => span / step <= 5) || 45;
}

function degrees(value, step, eastward) {
  const [north, south, east, west] = words.map_letters.split(" ");
  const [positive, negative] = eastward ? [east, west] : [north, south];
  const digits = Math.max(0, Math.ceil(-Math.log10(step) - 1e-9));
  const wrapped = ((((value + 180) % 360) + 360) % 360) - 180;
  const shown = eastward ? wrapped : value;
  return `${Math.abs(shown).toFixed(digits)}° ${shown < 0 ? negative : positive}`;
}

function drawGrid(map, group) {
  group.replaceChildren();
  const bounds = map.getBounds();
  const wide = bounds.pad(1);
  const size = map.getSize();
  const corner = map.containerPointToLayerPoint([0, 0]);
  const step = gridStep(bounds.getEast() - bounds.getWest());
  const low = wide.getSouthWest();
  const high = wide.getNorthEast();
  for (let k = Math.ceil(low.lng / step); k * step <= high.lng; k += 1) {
    const a = map.latLngToLayerPoint([Math.max(low.lat, -85), k * step]);
    const b = map.latLngToLayerPoint([Math.min(high.lat, 85), k * step]);
    group.append(svg("line", { x1: a.x, y1: a.y, x2: b.x, y2: b.y }));
    const at = a.x - corner.x;
    if (at < (isPhone() ? 180 : 70) || at > size.x - 60) continue; // under the buttons
    group.append(svg("text", { x: a.x + 3, y: corner.y + 12 }, degrees(k * step, step, true)));
  }
  for (let k = Math.ceil(low.lat / step); k * step <= high.lat; k += 1) {
    const a = map.latLngToLayerPoint([k * step, low.lng]);
    const b = map.latLngToLayerPoint([k * step, high.lng]);
    group.append(svg("line", { x1: a.x, y1: a.y, x2: b.x, y2: b.y }));
    const at = a.y - corner.y;
    if (at < 70 || at > size.y - 40) continue; // under the arrow of north
    const place = { x: corner.x + size.x - 4, y: a.y - 3, "text-anchor": "end" };
    group.append(svg("text", place, degrees(k * step, step, false)));
  }
}

// What pages with legs along roads add; the other scripts ask for it before they draw.
const onRoads = {};

// A layer with one drawing (SVG) and one set of labels (HTML), drawn anew after each move.
const SurveySheet = L.Layer.extend({
  initialize(redraw) {
    this._redraw = redraw;
  },
  onAdd(map) {
    this._svg = svg("svg", { class: "sheet", width: 1, height: 1, "aria-hidden": "true" });
    this._grid = svg("g", { class: "grid" });
    this.drawing = svg("g", {});
    this._svg.append(this._grid, this.drawing);
    this.labels = html("div", "labels");
    map.getPane("overlayPane").append(this._svg);
    map.getPane("markerPane").append(this.labels);
    this._watch = new ResizeObserver(() => map.invalidateSize({ pan: false }));
    this._watch.observe(map.getContainer());
    map.on("moveend viewreset resize", this.refresh, this);
    this._anew = () => this.refresh();
    document.addEventListener("themechange", this._anew); // other letters, other sizes
  },
  onRemove(map) {
    this._watch.disconnect();
    map.off("moveend viewreset resize", this.refresh, this);
    document.removeEventListener("themechange", this._anew);
    this._svg.remove();
    this.labels.remove();
  },
  refresh() {
    drawGrid(this._map, this._grid);
    if (onRoads.drawGround) onRoads.drawGround(this._map, this._svg);
    this.drawing.replaceChildren();
    this._redraw(this);
  },
  // The visible part of the sheet and what lies over it, in the coordinates of the drawing.
  view() {
    const corner = this._map.containerPointToLayerPoint([0, 0]);
    const size = this._map.getSize();
    const frame = this._map.getContainer().getBoundingClientRect();
    const blocked = [];
    for (const over of document.querySelectorAll(OVER_THE_MAP)) {
      const box = over.getBoundingClientRect();
      if (box.width === 0) continue;
      blocked.push({
        x: corner.x + box.x - frame.x, y: corner.y + box.y - frame.y, w: box.width, h: box.height,
      });
    }
    return { view: { x: corner.x + 4, y: corner.y + 16, w: size.x - 8, h: size.y - 20 }, blocked };
  },
});

// A leg moved a little to the side that is driven on, so that out and back both show.
function aside(a, b, by) {
  const shift = by * data.side;
  const length = Math.hypot(b.x - a.x, b.y - a.y) || 1;
  const dx = (-(b.y - a.y) / length) * shift;
  const dy = ((b.x - a.x) / length) * shift;
  return [a.x + dx, a.y + dy, b.x + dx, b.y + dy];
}

function line(segment, classes, dash) {
  const [x1, y1, x2, y2] = segment.map((value) => Math.round(value * 10) / 10);
  const attributes = { x1, y1, x2, y2, class: classes };
  if (dash) attributes["stroke-dasharray"] = dash;
  return svg("line", attributes);
}

function barb([x1, y1, x2, y2], share, size) {
  const angle = Math.atan2(y2 - y1, x2 - x1);
  const at = (along, across) => {
    const x = x1 + (x2 - x1) * share + along * Math.cos(angle) - across * Math.sin(angle);
    const y = y1 + (y2 - y1) * share + along * Math.sin(angle) + across * Math.cos(angle);
    return `${x.toFixed(1)} ${y.toFixed(1)}`;
  };
  const path = `M${at(size, 0)}L${at(-size, size * 0.75)}L${at(-size * 0.45, 0)}`
    + `L${at(-size, -size * 0.75)}Z`;
  return svg("path", { d: path, class: "barb" });
}

// A square survey target in quadrants.
function target(x, y) {
  const group = svg("g", { class: "target" });
  group.append(svg("rect", { x: x - 11, y: y - 11, width: 22, height: 22, class: "target-halo" }));
  group.append(svg("rect", { x: x - 9, y: y - 9, width: 18, height: 18, class: "target-field" }));
  const quadrants = `M${x - 9} ${y - 9}h9v9h-9zM${x} ${y}h9v9h-9z`;
  group.append(svg("path", { d: quadrants, class: "target-quadrant" }));
  return group;
}

// A label is measured at each of its sizes, the largest first; its style knows the rest.
const SIZES = ["", "small", "least"];

function resize(element, level) {
  for (let k = 1; k < SIZES.length; k += 1) element.classList.toggle(SIZES[k], k <= level);
}

function measure(items) {
  const most = Math.max(0, ...items.map((item) => item.levels));
  for (const item of items) item.sizes = [];
  for (let level = 0; level < most; level += 1) {
    const now = items.filter((item) => level < item.levels);
    for (const { element } of now) resize(element, level);
    for (const { element, sizes } of now) sizes.push([element.offsetWidth, element.offsetHeight]);
  }
}

// Labels of dots in view find their places; those of dots out of view or without room step aside,
// and a note on the map says how many found no room. Returns the leaders.
function setLabels(sheet, items, given, news = "") {
  const note = document.getElementById("map-fold");
  note.textContent = news;
  let scene = { ...sheet.view(), ...given };
  const { x, y, w, h } = scene.view;
  for (const item of items) {
    item.anchors = item.anchors.filter(
      ([ax, ay]) => ax >= x && ax <= x + w && ay >= y - 12 && ay <= y + h,
    );
  }
  const near = items.filter((item) => item.anchors.length > 0);
  measure(near);
  placeLabels(near, scene);
  const without = () => near.filter((item) => !item.spot).length;
  if (without() && !news) {
    // the note takes room as well
    note.textContent = fill(words.map_no_room, { count: without() });
    scene = { ...sheet.view(), ...given };
    const hit = ({ spot }) => spot && scene.blocked.some((box) => overlap(spot, box, 0));
    if (near.some(hit)) placeLabels(near, scene);
    note.textContent = fill(words.map_no_room, { count: without() });
  }
  const leaders = svg("g", {});
  for (const { element, spot, level } of items) {
    element.classList.toggle("away", !spot);
    if (!spot) continue;
    resize(element, level);
    leaders.append(line(spot.leader, "leader-halo"), line(spot.leader, "leader"));
    L.DomUtil.setPosition(element, L.point(Math.round(spot.x), Math.round(spot.y)));
  }
  return leaders;
}

function mapButtons(actions) {
  for (const button of document.querySelectorAll("[data-map]")) {
    const action = actions[button.dataset.map];
    button.disabled = !action;
    if (action) button.addEventListener("click", action);
  }
}
