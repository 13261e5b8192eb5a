// The ground under the tours: water, shore and roads by grade, on a canvas below the sheet.
const GROUND_PAD = 0.4; // of the view on each side, for moving the map
const MOST_PIXELS = 9e6;
const ROAD_KINDS = ["local", "minor", "main"];

// Lines came as one flat list of differences; each gets its points and its name.
function readGround() {
  const lines = {};
  for (const kind of ["water", "coast", "ferry", ...ROAD_KINDS]) {
    const told = data.ground[kind];
    lines[kind] = [];
    if (!told) continue;
    const places = summed(told.flat, 2);
    let from = 0;
    told.sizes.forEach((size, k) => {
      const points = places.slice(from, from + size).map(([lat, lon]) => [lat / 1e5, lon / 1e5]);
      lines[kind].push({ kind, points, name: data.ground.streets[told.names[k]] || "" });
      from += size;
    });
  }
  return lines;
}

const ground = readGround();

// Colours and widths stand in the style sheet: a hidden line of each kind tells them.
function inkOf(group, kind) {
  const { stroke, strokeWidth, fill: colour } = getComputedStyle(group.querySelector(`.ink-${kind}`));
  return { stroke, width: parseFloat(strokeWidth), colour };
}

function canvasUnder(sheet) {
  const before = sheet.previousElementSibling;
  if (before && before.classList.contains("ground")) return before;
  const canvas = html("canvas", "ground");
  canvas.setAttribute("aria-hidden", "true");
  sheet.before(canvas);
  const inks = svg("g", { class: "ground-inks" });
  for (const kind of Object.keys(ground)) inks.append(svg("path", { class: `ink-${kind}` }));
  sheet.prepend(inks);
  return canvas;
}

// All lines of a kind as one path, in pixels from the corner of the canvas.
function traced(map, lines, corner, closed) {
  const path = new Path2D();
  for (const { points } of lines) {
    points.forEach((at, k) => {
      const { x, y } = map.latLngToLayerPoint(at);
      if (k === 0) path.moveTo(x - corner.x, y - corner.y);
      else path.lineTo(x - corner.x, y - corner.y);
    });
    if (closed) path.closePath();
  }
  return path;
}

onRoads.drawGround = (map, sheet) => {
  const canvas = canvasUnder(sheet);
  onRoads.signs = []; // boxes of signs on cords, which street names keep clear of
  const size = map.getSize();
  const corner = map.containerPointToLayerPoint(size.multiplyBy(-GROUND_PAD)).round();
  const wide = Math.round(size.x * (1 + 2 * GROUND_PAD));
  const high = Math.round(size.y * (1 + 2 * GROUND_PAD));
  const sharp = Math.min(window.devicePixelRatio || 1, Math.sqrt(MOST_PIXELS / (wide * high || 1)));
  canvas.width = Math.round(wide * sharp);
  canvas.height = Math.round(high * sharp);
  canvas.style.width = `${wide}px`;
  canvas.style.height = `${high}px`;
  L.DomUtil.setPosition(canvas, corner);
  const brush = canvas.getContext("2d");
  brush.scale(sharp, sharp);
  brush.lineCap = brush.lineJoin = "round";
  const water = inkOf(sheet, "water");
  const surface = traced(map, ground.water, corner, true);
  brush.fillStyle = water.colour;
  brush.fill(surface, "evenodd");
  const near = Math.min(2.4, Math.max(0.6, 2 ** ((map.getZoom() - 14) / 2)));
  for (const kind of [...ROAD_KINDS, "coast", "ferry"]) {
    const ink = inkOf(sheet, kind);
    brush.strokeStyle = ink.stroke;
    brush.lineWidth = ink.width * (ROAD_KINDS.includes(kind) ? near : 1);
    brush.setLineDash(kind === "ferry" ? [2, 5] : []);
    brush.stroke(traced(map, ground[kind], corner, false));
  }
};
