// Street names along their lines, clear of plates, leaders, dots, cords and of each other.
const MOST_STREETS = 90;
const ROOM_OF_A_STREET = 7500; // square pixels of map
const SAME_STREET_APART = 260;
const MOST_OF_ONE_STREET = 3;
const MOST_TRIES = 9;
const STRAIGHT_ENOUGH = 2.6; // pixels that a line may stray from under its name

function streetRank(line) {
  if (data.roads.driven.includes(line.name)) return 0;
  return { main: 1, minor: 2, local: 3, water: 1, ferry: 2 }[line.kind];
}

// Every named line in view as pixels, what is driven first, then by grade and length.
function streetsInView(map, view) {
  const found = [];
  const bounds = map.getBounds().pad(0.1);
  for (const kind of ["ferry", ...ROAD_KINDS]) {
    for (const street of ground[kind]) {
      if (!street.name || !street.points.some((at) => bounds.contains(at))) continue;
      const points = thinLine(onSheet(map, street.points), 0.8);
      const long = lengthOf(points);
      if (long > 24) found.push({ points, long, name: street.name, kind, rank: streetRank(street) });
    }
  }
  return found.sort((a, b) => a.rank - b.rank || b.long - a.long || (a.name < b.name ? -1 : 1));
}

// A name has a box turned with its line: middle, half its width and height, cosine, sine.
function turnedInto(box, x, y) {
  const dx = x - box.x;
  const dy = y - box.y;
  return [dx * box.cos + dy * box.sin, dy * box.cos - dx * box.sin];
}

function cornersOf({ x, y, hw, hh, cos, sin }) {
  return [[-hw, -hh], [hw, -hh], [hw, hh], [-hw, hh]]
    .map(([a, b]) => [x + a * cos - b * sin, y + a * sin + b * cos]);
}

function cutBy(box, [x1, y1, x2, y2], margin) {
  const reach = box.hw + box.hh + margin;
  if (Math.min(x1, x2) > box.x + reach || Math.max(x1, x2) < box.x - reach) return false;
  if (Math.min(y1, y2) > box.y + reach || Math.max(y1, y2) < box.y - reach) return false;
  const frame = {
    x: -box.hw - margin, y: -box.hh - margin, w: 2 * (box.hw + margin), h: 2 * (box.hh + margin),
  };
  return inside(frame, [...turnedInto(box, x1, y1), ...turnedInto(box, x2, y2)]) > 0;
}

// Two turned boxes are apart where an axis of one of them parts their corners.
function boxesMeet(a, b, gap) {
  const far = a.hw + a.hh + b.hw + b.hh + gap;
  if (Math.abs(a.x - b.x) > far || Math.abs(a.y - b.y) > far) return false;
  const parted = (one, other) => {
    const local = cornersOf(other).map(([x, y]) => turnedInto(one, x, y));
    return [0, 1].some((axis) => {
      const half = (axis === 0 ? one.hw : one.hh) + gap;
      const values = local.map((corner) => corner[axis]);
      return Math.min(...values) > half || Math.max(...values) < -half;
    });
  };
  return !parted(a, b) && !parted(b, a);
}

function upright({ x, y, w, h }) {
  return { x: x + w / 2, y: y + h / 2, hw: w / 2, hh: h / 2, cos: 1, sin: 0 };
}

// The box of a name whose middle lies at a length along its line; null where the line bends.
function boxAlong(points, middle, half) {
  const [ax, ay] = pointAlong(points, middle - half.hw);
  const [bx, by] = pointAlong(points, middle + half.hw);
  const chord = Math.hypot(bx - ax, by - ay);
  if (chord < half.hw * 1.9) return null;
  for (const share of [-0.66, -0.33, 0, 0.33, 0.66]) {
    const [x, y] = pointAlong(points, middle + share * half.hw);
    const off = Math.abs((bx - ax) * (y - ay) - (by - ay) * (x - ax)) / chord;
    if (off > STRAIGHT_ENOUGH) return null;
  }
  // read from the left; what goes straight up reads upwards
  const flip = bx < ax - 0.01 || (Math.abs(bx - ax) <= 0.01 && by > ay) ? -1 : 1;
  const [cos, sin] = [(flip * (bx - ax)) / chord, (flip * (by - ay)) / chord];
  return { x: (ax + bx) / 2, y: (ay + by) / 2, ...half, cos, sin };
}

function isClear(box, scene, placed) {
  const { view } = scene;
  const seen = cornersOf(box).every(([x, y]) => x > view.x && x < view.x + view.w
    && y > view.y && y < view.y + view.h);
  if (!seen) return false;
  if (scene.boxes.some((other) => boxesMeet(box, other, 3))) return false;
  if (placed.some((other) => boxesMeet(box, other.box, 3))) return false;
  if (scene.dots.some(([x, y]) => cutBy(box, [x - 0.1, y, x + 0.1, y], 8))) return false;
  if (scene.leaders.some((leader) => cutBy(box, leader, 2))) return false;
  return !scene.segments.some((segment) => cutBy(box, segment, 2));
}

// What is driven carries a cord, so its name stands beside it; other names lie on their line.
function tryStreet(street, half, scene, placed) {
  const same = placed.filter((other) => other.name === street.name);
  if (same.length >= MOST_OF_ONE_STREET) return null;
  const free = street.long - 2 * half.hw;
  if (free < 0) return null;
  const step = Math.max(18, free / MOST_TRIES);
  const beside = half.hh + 8;
  const asides = street.rank === 0 ? [0, -beside, beside, -beside - 6, beside + 6] : [0];
  for (let k = 0; k * step <= free; k += 1) {
    const from = k % 2 ? -1 : 1; // from the middle outwards
    const box = boxAlong(street.points, street.long / 2 + (from * Math.ceil(k / 2) * step), half);
    if (!box) continue;
    for (const off of asides) {
      const moved = { ...box, x: box.x - box.sin * off, y: box.y + box.cos * off };
      const apart = same.every(
        ({ box: there }) => Math.hypot(there.x - moved.x, there.y - moved.y) > SAME_STREET_APART,
      );
      if (apart && isClear(moved, scene, placed)) return moved;
    }
  }
  return null;
}

// Letters are measured in the face and size that the style sheet gives a name.
function streetMeasure(group) {
  const brush = document.createElement("canvas").getContext("2d");
  const faces = new Map();
  return (classes, name) => {
    if (!faces.has(classes)) {
      const probe = svg("text", { class: classes }, "x");
      group.append(probe);
      const { fontWeight, fontSize, fontFamily } = getComputedStyle(probe);
      faces.set(classes, { font: `${fontWeight} ${fontSize} ${fontFamily}`, size: parseFloat(fontSize) });
      probe.remove();
    }
    const { font, size } = faces.get(classes);
    brush.font = font;
    return { hw: brush.measureText(name).width / 2 + 2, hh: size * 0.62, size };
  };
}

function streetText({ box, name, classes, size }) {
  const turn = (Math.atan2(box.sin, box.cos) * 180) / Math.PI;
  const place = `translate(${box.x.toFixed(1)} ${box.y.toFixed(1)}) rotate(${turn.toFixed(1)})`;
  return svg("text", {
    class: classes, transform: place, y: (size * 0.35).toFixed(1), "text-anchor": "middle",
  }, name);
}

// The degrees at the rim of the map.
function degreeBoxes() {
  return [...document.querySelectorAll(".grid text")].map((text) => {
    const { x, y, width: w, height: h } = text.getBBox();
    return { x, y, w, h };
  });
}

onRoads.drawStreets = (sheet, map, items, given, leaders) => {
  const group = svg("g", { class: "streets" });
  sheet.drawing.append(group);
  const seen = sheet.view();
  const labels = items.filter((item) => item.spot);
  const scene = {
    view: seen.view,
    dots: given.dots,
    boxes: [...labels.map((item) => upright(item.spot)), ...seen.blocked.map(upright),
      ...onRoads.signs.map(upright), ...degreeBoxes().map(upright)],
    leaders: labels.map((item) => item.spot.leader),
    segments: given.segments,
  };
  const most = Math.min(MOST_STREETS, Math.floor((seen.view.w * seen.view.h) / ROOM_OF_A_STREET));
  const measure = streetMeasure(group);
  const placed = [];
  for (const street of streetsInView(map, seen.view)) {
    if (placed.length >= most) break;
    const driven = street.rank === 0 ? " street-driven" : "";
    const classes = `street street-${street.kind}${driven}`;
    const { hw, hh, size } = measure(classes, street.name);
    const box = tryStreet(street, { hw, hh }, scene, placed);
    if (box) placed.push({ box, name: street.name, classes, size });
  }
  group.append(...placed.map(streetText));
};
