// Where plates and tags go: near their dot, clear of each other, of dots, cords and the edge.
// A label that finds no clear spot is made smaller; where that does not help it steps aside, its
// dot stays. The order of trying is fixed, so the same view always gives the same picture.
const LABEL_RADII = [13, 22, 32, 44, 60, 80, 104];
const LABEL_ANGLES = Array.from({ length: 16 }, (_, k) => (k * Math.PI) / 8);
const FAULT = 1000; // more than all softer wishes together
const CROSSING = 200;
const MOST_CROSSINGS = 1; // leaders that cross more than one other are a thicket

function overlap(a, b, gap) {
  const w = Math.min(a.x + a.w, b.x + b.w) - Math.max(a.x, b.x) + gap;
  const h = Math.min(a.y + a.h, b.y + b.h) - Math.max(a.y, b.y) + gap;
  return w > 0 && h > 0 ? w * h : 0;
}

// Length of a segment inside a box, clipped to its sides (Liang and Barsky, 1984).
function inside({ x, y, w, h }, [x1, y1, x2, y2]) {
  if (Math.max(x1, x2) < x || Math.min(x1, x2) > x + w) return 0;
  if (Math.max(y1, y2) < y || Math.min(y1, y2) > y + h) return 0;
  const dx = x2 - x1;
  const dy = y2 - y1;
  let from = 0;
  let to = 1;
  if (dx !== 0) {
    const a = (x - x1) / dx;
    const b = (x + w - x1) / dx;
    from = Math.max(from, Math.min(a, b));
    to = Math.min(to, Math.max(a, b));
  }
  if (dy !== 0) {
    const a = (y - y1) / dy;
    const b = (y + h - y1) / dy;
    from = Math.max(from, Math.min(a, b));
    to = Math.min(to, Math.max(a, b));
  }
  return to > from ? (to - from) * Math.hypot(dx, dy) : 0;
}

function crossing([ax, ay, bx, by], [cx, cy, dx, dy]) {
  const turn = (px, py, qx, qy, x, y) => (qx - px) * (y - py) - (qy - py) * (x - px);
  return turn(ax, ay, bx, by, cx, cy) * turn(ax, ay, bx, by, dx, dy) < 0
    && turn(cx, cy, dx, dy, ax, ay) * turn(cx, cy, dx, dy, bx, by) < 0;
}

// A leader runs from the anchor to the nearest point of the box; `reach` holds both.
function spotAt(ax, ay, x, y, w, h) {
  const ex = Math.min(Math.max(ax, x), x + w);
  const ey = Math.min(Math.max(ay, y), y + h);
  const left = Math.min(ax, x);
  const top = Math.min(ay, y);
  const reach = {
    x: left, y: top, w: Math.max(ax, x + w) - left, h: Math.max(ay, y + h) - top,
  };
  return { x, y, w, h, leader: [ax, ay, ex, ey], reach, cost: 0, faults: 0 };
}

// What a spot costs by itself; its faults are counted apart.
function judgeSpot(spot, scene) {
  const { view } = scene;
  const out = Math.max(0, view.x - spot.x) + Math.max(0, spot.x + spot.w - view.x - view.w)
    + Math.max(0, view.y - spot.y) + Math.max(0, spot.y + spot.h - view.y - view.h);
  if (out > 0) {
    spot.faults += 1;
    spot.cost += 40 * out;
  }
  for (const box of scene.blocked) if (overlap(spot, box, 3)) spot.faults += 1;
  const { reach } = spot;
  for (const [x, y] of scene.dots) {
    if (x < reach.x - 8 || x > reach.x + reach.w + 8) continue;
    if (y < reach.y - 8 || y > reach.y + reach.h + 8) continue;
    const near = { x: x - 6, y: y - 6, w: 12, h: 12 };
    const own = x === spot.leader[0] && y === spot.leader[1];
    if (overlap(spot, near, 1)) {
      if (scene.dots_show) spot.faults += 1;
      else spot.cost += 30;
    } else if (!own && inside(near, spot.leader)) spot.cost += 60;
  }
  for (const segment of scene.segments) spot.cost += scene.cord_cost * inside(spot, segment);
  spot.cost += FAULT * spot.faults;
}

// An item may hang at any of its anchors; a plate has one, the tag of a tour several.
function spotsOf(item, scene) {
  const [w, h] = item.sizes[item.level];
  const spots = [];
  for (const [ax, ay] of item.anchors) {
    for (const radius of LABEL_RADII) {
      for (const angle of LABEL_ANGLES) {
        const x = ax + Math.cos(angle) * (radius + w / 2) - w / 2;
        const y = ay + Math.sin(angle) * (radius + h / 2) - h / 2;
        const spot = spotAt(ax, ay, x, y, w, h);
        spot.cost = radius * 0.9;
        judgeSpot(spot, scene);
        spots.push(spot);
      }
    }
  }
  return spots.sort((a, b) => a.cost - b.cost);
}

// How much two labels are in each other's way. Plate on plate and leader on plate are faults; a
// leader across a leader can still be read.
function quarrel(a, b) {
  if (!overlap(a.reach, b.reach, 8)) return 0;
  const faults = (overlap(a, b, 4) ? 2 : 0) + (inside(b, a.leader) ? 1 : 0)
    + (inside(a, b.leader) ? 1 : 0);
  return FAULT * faults + (crossing(a.leader, b.leader) ? CROSSING : 0);
}

function settle(items, scene) {
  for (const item of items) item.spots ||= spotsOf(item, scene);
  for (let round = 0, moved = true; moved && round < 6; round += 1) {
    moved = false;
    for (const item of items) {
      let best = Infinity;
      let chosen = item.spot;
      for (const spot of item.spots) {
        if (spot.cost >= best) break; // sorted: no later spot is better
        let cost = spot.cost;
        for (const other of items) {
          if (other !== item && other.spot) cost += quarrel(spot, other.spot);
          if (cost >= best) break;
        }
        if (cost < best) {
          best = cost;
          chosen = spot;
        }
      }
      moved ||= chosen !== item.spot;
      item.spot = chosen;
    }
  }
}

// The faults of a spot among the others; a leader through a thicket is one as well.
function faultsOf(spot, item, items) {
  let { faults } = spot;
  let crossings = 0;
  for (const other of items) {
    if (other === item || !other.spot) continue;
    const cost = quarrel(spot, other.spot);
    faults += Math.floor(cost / FAULT);
    crossings += (cost % FAULT) / CROSSING;
  }
  return faults + Math.max(0, crossings - MOST_CROSSINGS);
}

// Gives every item a `spot`, or none where there is no room for it.
function placeLabels(items, scene) {
  for (const item of items) {
    item.level = item.first_level;
    item.spot = item.spots = null;
  }
  settle(items, scene);
  for (;;) {
    const placed = items.filter((item) => item.spot);
    const bad = placed.filter((item) => faultsOf(item.spot, item, items) > 0);
    if (bad.length === 0) break;
    const large = bad.filter((item) => item.level < item.sizes.length - 1);
    for (const item of large) {
      item.level += 1;
      item.spot = item.spots = null;
    }
    if (large.length > 0) settle(items, scene);
    else {
      // the one most in the way steps aside; of equals the last, and the weighty stay longest
      const last = bad.reduce((a, b) => {
        const by = a.weight - b.weight
          || faultsOf(b.spot, b, items) - faultsOf(a.spot, a, items);
        return by < 0 ? a : b;
      });
      last.spot = null;
    }
  }
  // those that stepped aside come back where a clear spot is left
  for (const item of items) {
    if (item.spot) continue;
    item.spot = item.spots.find((spot) => spot.faults === 0 && items.every(
      (other) => !other.spot || quarrel(spot, other.spot) === 0,
    )) || null;
  }
}
