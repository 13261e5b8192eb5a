// The day page: plates, cord and the run list that follow each other.
function makePlate(stop) {
  const plate = html("button", `plate plate-${stop.state || "plain"}`);
  plate.type = "button";
  plate.append(html("span", "plate-number", String(stop.number)));
  plate.append(html("span", "plate-time", stop.arrive));
  if (stop.note) plate.append(html("span", "plate-note", stop.note));
  plate.append(html("span", "unseen", ` ${stop.name}`));
  return plate;
}

function makeBasePlate(base) {
  const plate = html("div", "base-plate");
  plate.append(html("span", "base-name", base.name), html("span", "base-times", base.times));
  return plate;
}

// Legs run from the first base through the stops to the last base.
function numbered(tour) {
  const bases = tour.bases.length;
  const leave = summed(tour.leave_s, 1);
  tour.stops = summed(tour.places, 2).map(([lat, lon], k) => {
    const row = document.getElementById(`stop-${k + 1}`);
    return {
      number: k + 1,
      lat: lat / 1e6,
      lon: lon / 1e6,
      name: row.querySelector(".row-name").textContent,
      state: ["late", "wait"].find((state) => row.classList.contains(state)),
      arrive: tour.arrive[k],
      note: tour.notes[k + 1],
      leave_ms: leave[k][0] * 1000,
    };
  });
  const count = tour.stops.length;
  const way = [0, ...tour.stops.map((stop, k) => bases + k), bases - 1];
  tour.legs = way.slice(1).map((to, k) => ({ from: way[k], to, home: k === count, way: [] }));
  if (onRoads.readLegs) onRoads.readLegs(tour.legs);
  return tour;
}

function drawDay(map) {
  const tour = numbered(data.tour);
  const state = { current: 0 };
  const places = tour.bases.concat(tour.stops);
  const labels = tour.bases.map(makeBasePlate).concat(tour.stops.map(makePlate));
  const sheet = new SurveySheet((self) => paintDay(self, map, places, labels, state));
  const whole = L.latLngBounds(places.map((place) => [place.lat, place.lon]));
  for (const leg of tour.legs) leg.way.forEach((at) => whole.extend(at));
  const padding = () => (map.getSize().x < 560 ? [34, 40] : [96, 60]);
  const fit = () => map.fitBounds(whole, { padding: padding(), maxZoom: 15, animate: false });
  const fitLeg = (number) => {
    const leg = tour.legs[number - 1];
    const ends = [[places[leg.from].lat, places[leg.from].lon],
      [places[leg.to].lat, places[leg.to].lon], ...leg.way];
    const room = Math.min(54, map.getSize().y / 5);
    map.fitBounds(L.latLngBounds(ends), { padding: [room, room], maxZoom: 15, animate: false });
  };

  fit(); // a layer is set up only once the map has a view
  sheet.addTo(map);
  sheet.labels.append(...labels);
  sheet.refresh();

  function show(number, given = {}) {
    const { focusPlate = false, focusRow = false, scroll = focusRow, zoom = isPhone() } = given;
    state.current = number;
    for (const row of document.querySelectorAll("[data-stop]")) {
      const here = Number(row.dataset.stop) === number;
      if (here) row.setAttribute("aria-current", "true");
      else row.removeAttribute("aria-current");
    }
    const stop = tour.stops[number - 1];
    if (zoom) fitLeg(number);
    else map.panInside([stop.lat, stop.lon], { padding: [70, 60], animate: false });
    sheet.refresh();
    document.getElementById("map-news").textContent = fill(words.map_shown, stop);
    const row = document.getElementById(`stop-${number}`);
    if (focusPlate) labels[tour.bases.length + number - 1].focus({ preventScroll: true });
    if (focusRow) row.querySelector("button").focus({ preventScroll: true });
    if (scroll || isPhone()) {
      // on a phone the drive to the stop comes first
      if (isPhone()) row.previousElementSibling.scrollIntoView({ block: "start" });
      else row.scrollIntoView({ block: "nearest" });
    }
  }

  tour.stops.forEach((stop, k) => {
    const plate = labels[tour.bases.length + k];
    L.DomEvent.disableClickPropagation(plate);
    plate.addEventListener("click", () => show(stop.number, { focusRow: true }));
    plate.addEventListener("focus", () => {
      if (plate.matches(":focus-visible")) {
        map.panInside([stop.lat, stop.lon], { padding: [70, 60], animate: false });
      }
    });
    const row = document.getElementById(`stop-${stop.number}`);
    row.dataset.stop = stop.number;
    row.querySelector("button").setAttribute("aria-describedby", "go");
    row.addEventListener("click", (event) => {
      if (event.target.closest("a") || !window.getSelection().isCollapsed) return;
      const byKey = event.target.closest("button") && event.detail === 0;
      show(stop.number, { focusPlate: byKey });
    });
  });
  function close() {
    const open = state.current;
    if (!open) return;
    state.current = 0;
    const row = document.getElementById(`stop-${open}`);
    row.removeAttribute("aria-current");
    fit();
    sheet.refresh();
    row.querySelector("button").focus({ preventScroll: true });
    row.scrollIntoView({ block: "nearest" });
  }
  document.addEventListener("keydown", (event) => {
    if (event.key === "Escape") close();
  });
  const step = (by) => () => {
    const last = tour.stops.length;
    show(Math.min(last, Math.max(1, (state.current || (by > 0 ? 0 : last + 1)) + by)));
  };
  mapButtons({
    in: () => map.zoomIn(), out: () => map.zoomOut(), fit, previous: step(-1), next: step(1),
  });
  openOnNextStop(tour, show);
}

// Planned times are instants, so the device's own zone does not matter.
function openOnNextStop(tour, show) {
  const next = tour.stops.find((stop) => stop.leave_ms > Date.now());
  if (!next) return;
  const row = document.getElementById(`stop-${next.number}`);
  row.classList.add("next-stop");
  row.querySelector(".row-head").after(html("p", "next-mark", words.map_next_stop));
  if (isPhone() || next.number > 1) show(next.number, { scroll: true });
}

function paintDay(sheet, map, places, labels, state) {
  const { tour } = data;
  const points = places.map((place) => map.latLngToLayerPoint([place.lat, place.lon]));
  const cords = svg("g", { class: `cords hue-${tour.hue}${tour.outlined ? " outlined" : ""}` });
  const barbs = svg("g", {});
  const segments = [];
  for (const leg of tour.legs) {
    if (leg.way.length > 0) {
      segments.push(...onRoads.drawLeg(map, leg, { cords, barbs, dash: tour.dash }));
      continue;
    }
    const segment = aside(points[leg.from], points[leg.to], 2.6);
    segments.push(segment);
    const kind = leg.home ? "home" : "way";
    cords.append(line(segment, `cord-edge ${kind}`, tour.dash));
    cords.append(line(segment, `cord ${kind}`, tour.dash));
    const long = Math.hypot(segment[2] - segment[0], segment[3] - segment[1]);
    const shares = long > 260 ? [0.25, 0.75] : [0.5];
    if (long > 30) for (const share of shares) barbs.append(barb(segment, share, 6));
  }
  const marks = svg("g", {});
  const compact = map.getSize().x < 560 || map.getSize().y < 300;
  const items = points.map((point, k) => {
    const number = k < tour.bases.length ? 0 : places[k].number;
    const now = number !== 0 && number === state.current;
    const element = labels[k];
    element.classList.toggle("current", now);
    if (number === 0) marks.append(target(Math.round(point.x), Math.round(point.y)));
    else {
      if (now) marks.append(svg("circle", { cx: point.x, cy: point.y, r: 10, class: "dot-ring" }));
      marks.append(svg("circle", { cx: point.x, cy: point.y, r: 4.5, class: "dot" }));
    }
    return {
      element,
      anchors: [[point.x, point.y]],
      levels: now ? 1 : 2,
      first_level: compact && !now ? 1 : 0,
      // bases, the stop in hand and late stops step aside last
      weight: now || number === 0 ? 2 : Number(places[k].state === "late"),
    };
  });
  const dots = points.map((point) => [point.x, point.y]);
  const scene = { dots, segments, dots_show: true, cord_cost: 0.55 };
  if (onRoads.drawLastMetres) onRoads.drawLastMetres(map, points, cords);
  const leaders = setLabels(sheet, items, scene);
  sheet.drawing.append(cords, barbs, leaders, marks);
  if (onRoads.drawStreets) onRoads.drawStreets(sheet, map, items, scene, leaders);
}
