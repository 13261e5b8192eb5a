// Where plates and tags go: near their dot, clear of each other, of dots, cords and the edge.
const LABEL_RADII = [13, 26, 44, 68, 98, 136];
const LABEL_ANGLES = Array.from({ length: 16 }, (_, k) => (k * Math.PI) / 8);

// An item may hang at any of its anchors; a plate has one, the tag of a tour several.
function labelSpots({ anchors, w, h }) {
  const spots = [];
  for (const [ax, ay] of anchors) {
    for (const radius of LABEL_RADII) {
      for (const angle of LABEL_ANGLES) {
        const x = ax + Math.cos(angle) * (radius + w / 2) - w / 2;
        const y = ay + Math.sin(angle) * (radius + h / 2) - h / 2;
        spots.push({ ax, ay, x, y, w, h, radius });
      }
    }
  }
  return spots;
}

function overlap(a, b, gap) {
  const w = Math.min(a.x + a.w, b.x + b.w) - Math.max(a.x, b.x) + gap;
  const h = Math.min(a.y + a.h, b.y + b.h) - Math.max(a.y, b.y) + gap;
  return w > 0 && h > 0 ? w * h : 0;
}

// Length of a segment inside a box (Liang and Barsky, 1984).
function inside(box, [x1, y1, x2, y2]) {
  const dx = x2 - x1;
  const dy = y2 - y1;
  let from = 0;
  let to = 1;
  for (const [p, q] of [
    [-dx, x1 - box.x], [dx, box.x + box.w - x1], [-dy, y1 - box.y], [dy, box.y + box.h - y1],
  ]) {
    if (p === 0) {
      if (q < 0) return 0;
    } else if (p < 0) from = Math.max(from, q / p);
    else to = Math.min(to, q / p);
  }
  return to > from ? (to - from) * Math.hypot(dx, dy) : 0;
}

// A leader runs from the anchor to the nearest point of the box.
function leaderOf({ ax, ay, x, y, w, h }) {
  return [ax, ay, Math.min(Math.max(ax, x), x + w), Math.min(Math.max(ay, y), y + h)];
}

function spotCost(spot, others, scene) {
  let cost = spot.radius * 0.9;
  const { view } = scene;
  const out = Math.max(0, view.x - spot.x) + Math.max(0, spot.x + spot.w - view.x - view.w)
    + Math.max(0, view.y - spot.y) + Math.max(0, spot.y + spot.h - view.y - view.h);
  if (out > 0) cost += 400 + 40 * out;
  for (const box of scene.blocked) if (overlap(spot, box, 4)) cost += 300;
  for (const dot of scene.dots) {
    if (overlap(spot, { x: dot[0] - 6, y: dot[1] - 6, w: 12, h: 12 }, 2)) cost += scene.weights.dot;
  }
  const leader = leaderOf(spot);
  for (const other of others) {
    if (!other.spot) continue;
    const shared = overlap(spot, other.spot, 5);
    if (shared) cost += 500 + shared;
    if (inside(other.spot, leader)) cost += 140;
    if (inside(spot, leaderOf(other.spot))) cost += 140;
  }
  for (const segment of scene.segments) cost += scene.weights.cord * inside(spot, segment);
  return cost;
}

// Gives every item a `spot`; three rounds are enough for the plates of a day to settle.
function placeLabels(items, scene) {
  for (let round = 0; round < 3; round += 1) {
    for (const item of items) {
      const others = items.filter((other) => other !== item);
      let best = Infinity;
      for (const spot of labelSpots(item)) {
        const cost = spotCost(spot, others, scene);
        if (cost < best) {
          best = cost;
          item.spot = spot;
        }
      }
    }
  }
}
