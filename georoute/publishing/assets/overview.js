// The overview: one strand per tour, a mark at each stop, a tag that names the tour.
const MOST_TAGS = 24;
const ROOM_OF_A_TAG = 11000; // square pixels of map

const MARKS = {
  circle: (x, y, r) => `M${x - r} ${y}a${r} ${r} 0 1 0 ${2 * r} 0a${r} ${r} 0 1 0 ${-2 * r} 0Z`,
  square: (x, y, r) => `M${x - r} ${y - r}h${2 * r}v${2 * r}h${-2 * r}Z`,
  triangle: (x, y, r) => `M${x} ${y - r * 1.2}l${r * 1.2} ${r * 2.1}h${-r * 2.4}Z`,
  diamond: (x, y, r) => `M${x} ${y - r * 1.3}l${r * 1.3} ${r * 1.3}l${-r * 1.3} ${r * 1.3}`
    + `l${-r * 1.3} ${-r * 1.3}Z`,
  hexagon: (x, y, r) => `M${x - r * 1.3} ${y}l${r * 0.65} ${-r * 1.1}h${r * 1.3}l${r * 0.65} `
    + `${r * 1.1}l${-r * 0.65} ${r * 1.1}h${-r * 1.3}Z`,
  cross: (x, y, r) => {
    const a = r * 0.5;
    return `M${x - a} ${y - r * 1.2}h${2 * a}v${r * 0.7}h${r * 0.7}v${2 * a}h${-r * 0.7}v${r * 0.7}`
      + `h${-2 * a}v${-r * 0.7}h${-r * 0.7}v${-2 * a}h${r * 0.7}Z`;
  },
  ring: (x, y, r) => `${MARKS.circle(x, y, r * 1.2)}${MARKS.circle(x, y, r * 0.5)}`,
};

function makeTag(tour) {
  const tag = html("button", `tag hue-${tour.hue}${tour.outlined ? " outlined" : ""}`);
  tag.type = "button";
  const glyph = svg("svg", { width: 14, height: 14, "aria-hidden": "true", class: "glyph" });
  glyph.append(svg("path", { d: MARKS[tour.mark](7, 7, 5), class: "mark" }));
  // where there is little room, the initials stand for the name: hue alone never does
  const who = data.people[tour.who];
  const count = tour.way.length - 2;
  const text = fill(count === 1 ? words.map_tag_one : words.map_tag, { date: tour.date, count });
  const initials = who.split(/[ .]+/).map((part) => part.charAt(0)).join("");
  tag.append(glyph, html("span", "tag-text", text), html("span", "tag-date", tour.date));
  tag.append(html("span", "tag-who", who), html("span", "tag-initials", initials));
  return tag;
}

function placesOf(differences) {
  return summed(differences, 2).map(([lat, lon]) => [lat / 1e5, lon / 1e5]);
}

// All places on the map, bases first; each tour gets its way as numbers of places.
function numberedPlaces({ tours, base_places: bases }) {
  const places = placesOf(bases);
  const known = new Map();
  for (const tour of tours) {
    const stops = placesOf(tour.stops).map((place) => {
      const key = place.join(" ");
      if (!known.has(key)) known.set(key, places.push(place) - 1);
      return known.get(key);
    });
    [tour.dash, tour.mark] = data.looks[tour.weekday];
    tour.way = [tour.bases[0], ...stops, tour.bases[1]];
    tour.tag_places = tour.tags.map((stop) => stops[stop]);
  }
  return places;
}

// Strands that join the same two places lie side by side.
function slots(tours) {
  const used = new Map();
  return tours.map((tour) => tour.way.slice(1).map((to, leg) => {
    const from = tour.way[leg];
    const key = from < to ? `${from} ${to}` : `${to} ${from}`;
    const taken = used.get(key) || 0;
    used.set(key, taken + 1);
    return 1.5 + taken * 3.5;
  }));
}

function drawOverview(map) {
  const { tours } = data;
  const places = numberedPlaces(data);
  const state = { chosen: -1, visible: tours.map(() => true) };
  const tags = tours.map(makeTag);
  const baseTags = data.bases.map((name) => {
    const plate = html("div", "base-plate");
    plate.append(html("span", "base-name", name));
    return plate;
  });
  const sheet = new SurveySheet((self) => paintOverview(self, map, places, { tags, baseTags, state }));
  const fit = () => {
    const padding = map.getSize().x < 640 ? [34, 44] : [80, 50];
    map.fitBounds(L.latLngBounds(places), { padding, maxZoom: 15, animate: false });
  };
  fit(); // a layer is set up only once the map has a view
  sheet.addTo(map);
  sheet.labels.append(...baseTags, ...tags);
  sheet.refresh();

  function choose(number, focusRow) {
    state.chosen = number;
    document.querySelectorAll(".tours tbody").forEach((row, k) => {
      row.classList.toggle("chosen", k === number);
    });
    sheet.refresh();
    const row = document.getElementById(`tour-${number + 1}`);
    if (focusRow) row.querySelector("a").focus();
  }
  document.addEventListener("keydown", (event) => {
    if (event.key !== "Escape" || state.chosen < 0) return;
    const tag = tags[state.chosen];
    choose(-1, false);
    // back to where it was opened, if that is still in view
    if (getComputedStyle(tag).visibility === "visible") tag.focus({ preventScroll: true });
  });
  tags.forEach((tag, k) => {
    L.DomEvent.disableClickPropagation(tag);
    tag.addEventListener("click", () => choose(k, true));
  });
  document.querySelectorAll(".tours tbody").forEach((row, k) => {
    const box = row.querySelector("input[type=checkbox]");
    box.checked = true;
    box.addEventListener("change", () => {
      state.visible[k] = box.checked;
      sheet.refresh();
    });
    row.addEventListener("click", (event) => {
      if (!event.target.closest("a, label, input")) choose(state.chosen === k ? -1 : k, false);
    });
  });
  mapButtons({ in: () => map.zoomIn(), out: () => map.zoomOut(), fit });
  // on a phone the hours stand at every bar
  for (const bar of document.querySelectorAll(".day-bar .bar")) {
    const hours = svg("svg", { class: "own-hours", "aria-hidden": "true" });
    hours.append(svg("use", { href: "#bar-hours" }));
    bar.after(hours);
  }
}

function paintOverview(sheet, map, places, { tags, baseTags, state }) {
  const { tours } = data;
  const points = places.map((place) => map.latLngToLayerPoint(place));
  const shown = tours.map((tour, k) => k).filter((k) => state.visible[k]);
  const shifts = slots(tours);
  const segments = [];
  const dots = [];
  const strands = svg("g", {});
  const marks = svg("g", {});
  shown.sort((a, b) => (a === state.chosen) - (b === state.chosen) || a - b);
  for (const k of shown) {
    const tour = tours[k];
    const faint = state.chosen >= 0 && state.chosen !== k ? " faint" : "";
    const group = svg("g", {
      class: `cords hue-${tour.hue}${tour.outlined ? " outlined" : ""}${faint}`,
    });
    tour.way.slice(1).forEach((to, leg) => {
      const last = leg === tour.way.length - 2;
      if (onRoads.drawRuns && onRoads.hasRuns(k, leg)) {
        const drawn = onRoads.drawRuns(map, k, leg, { group, dash: tour.dash, home: last });
        if (!faint) segments.push(...drawn);
        return;
      }
      const segment = aside(points[tour.way[leg]], points[to], shifts[k][leg]);
      if (!faint) segments.push(segment);
      const home = last ? "home" : "way";
      group.append(line(segment, `cord-edge ${home}`, tour.dash));
      group.append(line(segment, `cord ${home}`, tour.dash));
    });
    for (const stop of tour.way.slice(1, -1)) {
      const { x, y } = points[stop];
      if (!faint) dots.push([x, y]);
      const path = MARKS[tour.mark](Math.round(x), Math.round(y), 5);
      group.append(svg("path", { d: path, class: "mark" }));
    }
    strands.append(group);
  }
  const { x: wide, y: high } = map.getSize();
  const items = [];
  const label = (element, spots, levels, weight) => {
    const anchors = spots.map(({ x, y }) => [x, y]);
    items.push({ element, anchors, levels, first_level: 0, weight });
  };
  baseTags.forEach((plate, k) => {
    const at = points[k];
    dots.push([at.x, at.y]);
    marks.append(target(Math.round(at.x), Math.round(at.y)));
    label(plate, [at], 1, 1);
  });
  const most = Math.min(MOST_TAGS, Math.floor((wide * high) / ROOM_OF_A_TAG));
  const few = shown.length <= most;
  const news = few ? "" : fill(words.map_too_many, { count: most });
  tags.forEach((tag, k) => {
    tag.hidden = !state.visible[k] || !(state.chosen < 0 ? few : state.chosen === k);
    tag.classList.toggle("chosen", state.chosen === k);
    if (!tag.hidden) label(tag, tours[k].tag_places.map((place) => points[place]), 3, 0);
  });
  const scene = { dots, segments, dots_show: false, cord_cost: 0.2 };
  const leaders = setLabels(sheet, items, scene, news);
  sheet.drawing.append(strands, leaders, marks);
  if (onRoads.drawStreets) onRoads.drawStreets(sheet, map, items, scene, leaders);
}
