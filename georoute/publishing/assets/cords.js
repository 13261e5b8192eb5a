// Cords along roads: a line of points moved aside as one, with joins that never spike.
const GENTLE = 1; // 1 + the cosine of a turn of 90 degrees

// Points [x, y] without those that lie within a distance of what is left (Douglas and Peucker).
function thinLine(points, by) {
  const kept = new Uint8Array(points.length);
  kept[0] = kept[points.length - 1] = 1;
  const open = [[0, points.length - 1]];
  while (open.length > 0) {
    const [first, last] = open.pop();
    const [ax, ay] = points[first];
    const dx = points[last][0] - ax;
    const dy = points[last][1] - ay;
    const square = dx * dx + dy * dy;
    let most = by;
    let at = -1;
    for (let k = first + 1; k < last; k += 1) {
      const px = points[k][0] - ax;
      const py = points[k][1] - ay;
      const share = square ? Math.min(1, Math.max(0, (px * dx + py * dy) / square)) : 0;
      const off = Math.hypot(px - share * dx, py - share * dy);
      if (off > most) {
        most = off;
        at = k;
      }
    }
    if (at > 0) {
      kept[at] = 1;
      open.push([first, at], [at, last]);
    }
  }
  return points.filter((point, k) => kept[k]);
}

function roundCorner([x, y], [ax, ay], [bx, by], shift) {
  const start = Math.atan2(ay * shift, ax * shift);
  let sweep = Math.atan2(by * shift, bx * shift) - start;
  sweep -= 2 * Math.PI * Math.round(sweep / (2 * Math.PI));
  const count = Math.max(1, Math.ceil(Math.abs(sweep) / (Math.PI / 6)));
  const radius = Math.abs(shift);
  return Array.from({ length: count + 1 }, (_, k) => {
    const angle = start + (sweep * k) / count;
    return [x + radius * Math.cos(angle), y + radius * Math.sin(angle)];
  });
}

// Gentle corners are mitred, outer sharp ones rounded; at inner sharp ones the line touches its
// corner, so that no point strays, however sharp the turn.
function offsetLine(given, shift) {
  const points = given.filter(([x, y], k) => k === 0
    || Math.hypot(x - given[k - 1][0], y - given[k - 1][1]) > 1e-6);
  if (points.length < 2) return points;
  const lengths = [];
  const normals = points.slice(1).map(([x, y], k) => {
    const dx = x - points[k][0];
    const dy = y - points[k][1];
    lengths.push(Math.hypot(dx, dy));
    return [-dy / lengths[k], dx / lengths[k]];
  });
  const at = ([x, y], [nx, ny], by) => [x + nx * by, y + ny * by];
  const moved = [at(points[0], normals[0], shift)];
  for (let k = 1; k < points.length - 1; k += 1) {
    const [ax, ay] = normals[k - 1];
    const [bx, by] = normals[k];
    const open = 1 + ax * bx + ay * by;
    const turn = ax * by - ay * bx;
    const inner = turn * shift > 0;
    const fits = !inner || Math.abs(shift * turn) / Math.max(open, 1e-9)
      <= Math.min(lengths[k - 1], lengths[k]);
    if (open >= GENTLE && fits) {
      moved.push(at(points[k], [ax + bx, ay + by], shift / open));
    } else if (inner) {
      moved.push(at(points[k], [ax, ay], shift), points[k], at(points[k], [bx, by], shift));
    } else moved.push(...roundCorner(points[k], [ax, ay], [bx, by], shift));
  }
  moved.push(at(points[points.length - 1], normals[normals.length - 1], shift));
  return moved;
}

function lengthOf(points) {
  return points.slice(1).reduce(
    (sum, [x, y], k) => sum + Math.hypot(x - points[k][0], y - points[k][1]), 0,
  );
}

// The point at a length along a line; ends hold beyond them.
function pointAlong(points, length) {
  let left = Math.max(0, length);
  for (let k = 1; k < points.length; k += 1) {
    const [ax, ay] = points[k - 1];
    const [bx, by] = points[k];
    const step = Math.hypot(bx - ax, by - ay);
    if (left <= step && step > 0) {
      return [ax + ((bx - ax) * left) / step, ay + ((by - ay) * left) / step];
    }
    left -= step;
  }
  return points[points.length - 1];
}

function segmentsOf(points) {
  return points.slice(1).map((point, k) => [...points[k], ...point]);
}

function polyline(points, classes, dash) {
  const text = points.map(([x, y]) => `${x.toFixed(1)},${y.toFixed(1)}`).join(" ");
  const attributes = { points: text, class: classes };
  if (dash) attributes["stroke-dasharray"] = dash;
  return svg("polyline", attributes);
}

function onSheet(map, way) {
  return way.map((at) => {
    const { x, y } = map.latLngToLayerPoint(at);
    return [x, y];
  });
}

function degreesOf(flat) {
  return summed(flat, 2).map(([lat, lon]) => [lat / 1e5, lon / 1e5]);
}

const CORD_ASIDE = 3;
const FERRY = "M-8 -1h16l-3.5 5h-9zM-2 -5h4v4h-4z";

// Each leg gets its pieces (by road or by ship) and, for its extent, all of its way.
onRoads.readLegs = (legs) => {
  data.roads.ways.forEach((pieces, k) => {
    legs[k].pieces = pieces.map(([ferry, ...flat]) => ({ ferry, way: degreesOf(flat) }));
    legs[k].way = legs[k].pieces.flatMap((piece) => piece.way);
  });
};

// Along roads the edge is a full line; the dash of the weekday lies on the bare cord.
function ropeOf(points, home, dash) {
  if (home) return [polyline(points, "cord-edge home"), polyline(points, "cord home")];
  return [polyline(points, "cord-edge way"), polyline(points, "cord-bare"),
    polyline(points, "cord way", dash)];
}

function barbsAlong(points, barbs) {
  const long = lengthOf(points);
  if (long < 34) return;
  const count = Math.min(8, Math.max(1, Math.floor(long / 170)));
  for (let k = 0; k < count; k += 1) {
    const middle = (long * (k + 0.5)) / count;
    const ends = [...pointAlong(points, middle - 5), ...pointAlong(points, middle + 5)];
    barbs.append(barb(ends, 0.5, 6));
  }
}

// Draws a leg and returns the segments that labels keep clear of.
onRoads.drawLeg = (map, leg, { cords, barbs, dash }) => {
  const segments = [];
  for (const { ferry, way } of leg.pieces) {
    const points = thinLine(onSheet(map, way), 0.7);
    const moved = offsetLine(points, CORD_ASIDE * data.side);
    if (moved.length < 2) continue;
    segments.push(...segmentsOf(thinLine(moved, 1.5)));
    if (ferry) {
      cords.append(polyline(moved, "ferry-leg"));
      const [x, y] = pointAlong(moved, lengthOf(moved) / 2);
      const mark = svg("g", { transform: `translate(${x.toFixed(1)} ${y.toFixed(1)})` });
      mark.append(svg("path", { d: FERRY, class: "ferry-mark" }));
      mark.append(svg("text", { x: 11, y: 4, class: "street" }, data.roads.ferry_sign));
      barbs.append(mark);
      onRoads.signs.push({ x: x - 10, y: y - 8, w: 24 + 7 * data.roads.ferry_sign.length, h: 18 });
      continue;
    }
    cords.append(...ropeOf(moved, leg.home, dash));
    barbsAlong(moved, barbs);
  }
  return segments;
};

// Thin and broken: from a place to where driving ends.
onRoads.drawLastMetres = (map, points, group) => {
  const { apart } = data.roads;
  for (let k = 0; k < apart.length; k += 3) {
    const end = map.latLngToLayerPoint([apart[k + 1] / 1e5, apart[k + 2] / 1e5]);
    const { x, y } = points[apart[k]];
    group.append(line([x, y, end.x, end.y], "off-line"));
  }
};

onRoads.hasRuns = (tour, leg) => data.roads.runs[tour][leg].length > 0;

// A strand along roads; where tours share a road each has its own slot beside it.
onRoads.drawRuns = (map, tour, leg, { group, dash, home }) => {
  const moved = data.roads.runs[tour][leg].flatMap(([slot, ...flat]) => {
    const points = thinLine(onSheet(map, degreesOf(flat)), 0.7);
    return offsetLine(points, (1.8 + slot * 3.6) * data.side);
  });
  group.append(...ropeOf(moved, home, dash));
  return segmentsOf(thinLine(moved, 3));
};
