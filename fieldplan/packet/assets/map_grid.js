"use strict";
/* The coordinate grid: UTM by Kruger's series to the third power of the third flattening
   (Karney 2011, J. Geodesy 85:475, equations 7 to 17), good to a millimetre within a zone. */

function fieldplanUtm(zone, south) {
  const a = 6378137, f = 1 / 298.257223563, k0 = 0.9996;
  const n = f / (2 - f), e = Math.sqrt(f * (2 - f));
  const radius = a / (1 + n) * (1 + n * n / 4);
  const alpha = [n / 2 - 2 * n * n / 3 + 5 * n ** 3 / 16, 13 * n * n / 48 - 3 * n ** 3 / 5,
    61 * n ** 3 / 240];
  const beta = [n / 2 - 2 * n * n / 3 + 37 * n ** 3 / 96, n * n / 48 + n ** 3 / 15,
    17 * n ** 3 / 480];
  const central = zone * 6 - 183, shift = south ? 1e7 : 0, degree = Math.PI / 180;

  function conformal(tau) {
    const sigma = Math.sinh(e * Math.atanh(e * tau / Math.hypot(1, tau)));
    return tau * Math.hypot(1, sigma) - sigma * Math.hypot(1, tau);
  }

  function forward(latitude, longitude) {
    let away = (longitude - central + 540) % 360 - 180;
    if (away < -180) { away += 360; }
    const lambda = away * degree, tau = conformal(Math.tan(latitude * degree));
    const xi0 = Math.atan2(tau, Math.cos(lambda));
    const eta0 = Math.asinh(Math.sin(lambda) / Math.hypot(tau, Math.cos(lambda)));
    let xi = xi0, eta = eta0;
    alpha.forEach((term, index) => {
      const j = 2 * (index + 1);
      xi += term * Math.sin(j * xi0) * Math.cosh(j * eta0);
      eta += term * Math.cos(j * xi0) * Math.sinh(j * eta0);
    });
    return [500000 + k0 * radius * eta, shift + k0 * radius * xi];
  }

  function inverse(easting, northing) {
    const xi1 = (northing - shift) / (k0 * radius), eta1 = (easting - 500000) / (k0 * radius);
    let xi = xi1, eta = eta1;
    beta.forEach((term, index) => {
      const j = 2 * (index + 1);
      xi -= term * Math.sin(j * xi1) * Math.cosh(j * eta1);
      eta -= term * Math.cos(j * xi1) * Math.sinh(j * eta1);
    });
    const wanted = Math.sin(xi) / Math.hypot(Math.sinh(eta), Math.cos(xi));
    let tau = wanted;
    for (let turn = 0; turn < 5; turn += 1) {  // Newton, as in Karney's equation 19
      const reached = conformal(tau);
      tau += (wanted - reached) / Math.hypot(1, reached) * (1 + (1 - e * e) * tau * tau)
        / ((1 - e * e) * Math.hypot(1, tau));
    }
    const longitude = central + Math.atan2(Math.sinh(eta), Math.cos(xi)) / degree;
    return [Math.atan(tau) / degree, longitude];
  }
  return {forward, inverse};
}

/* Near the poles UTM ends; there the grid is one of degrees. */
function fieldplanDegreeGrid() {
  return {
    forward: (latitude, longitude) => [longitude, latitude],
    inverse: (easting, northing) => [northing, easting],
  };
}

function fieldplanGrid(map, facts) {
  const grid = facts.zone ? fieldplanUtm(facts.zone, facts.south) : fieldplanDegreeGrid();
  // Longitudes of a site across 180 degrees run on; the grid answers near the site.
  const near = (longitude) => longitude + 360 * Math.round((facts.longitude - longitude) / 360);
  const place = (easting, northing) => {
    const [latitude, longitude] = grid.inverse(easting, northing);
    return L.latLng(latitude, near(longitude));
  };
  return {forward: grid.forward, place, isUtm: Boolean(facts.zone)};
}

/* Steps of 1, 2 or 5 times a power of ten, so that lines stand at least 90 pixels apart. */
function fieldplanStep(span, pixels) {
  const least = span / Math.max(1, Math.floor(pixels / 90));
  const power = 10 ** Math.floor(Math.log10(least));
  return [1, 2, 5, 10].map((m) => m * power).find((step) => step >= least * 0.999);
}

function fieldplanGridLabel(grid, value, axis, step) {
  if (!grid.isUtm) {
    const digits = Math.max(0, -Math.floor(Math.log10(step)));
    const letter = axis ? (value < 0 ? "S" : "N") : (value < 0 ? "W" : "E");
    return `${Math.abs(value).toFixed(digits)}\u00b0 ${letter}`;
  }
  const digits = Math.max(0, -Math.floor(Math.log10(step)));
  const [whole, part] = value.toFixed(digits).split(".");
  const spaced = whole.replace(/\B(?=(\d{3})+$)/g, "\u202f");
  return `${spaced}${part ? "." + part : ""} ${axis ? "N" : "E"}`;
}

function fieldplanGridLayer(map, grid, layer, colour) {
  map.createPane("grid").style.zIndex = 450;
  map.createPane("gridLabels").style.zIndex = 640;
  ["grid", "gridLabels"].forEach((name) => { map.getPane(name).style.pointerEvents = "none"; });
  const renderer = L.svg({pane: "grid", padding: 0.3});

  function line(start, end) {
    const points = [];
    for (let part = 0; part <= 8; part += 1) {
      const share = part / 8;
      points.push(grid.place(start[0] + share * (end[0] - start[0]),
        start[1] + share * (end[1] - start[1])));
    }
    L.polyline(points, {pane: "grid", renderer, interactive: false, color: colour, weight: 1,
      opacity: 0.75, dashArray: "1 3", className: "grid-line"}).addTo(layer);
    return points.map((point) => map.latLngToContainerPoint(point));
  }

  /* Where a line crosses the left edge (axis 1) or the bottom edge (axis 0) of the window. */
  function crossing(points, axis, edge) {
    const along = axis ? "x" : "y", across = axis ? "y" : "x";
    for (let index = 1; index < points.length; index += 1) {
      const a = points[index - 1], b = points[index];
      if ((a[along] - edge) * (b[along] - edge) <= 0 && a[along] !== b[along]) {
        return a[across] + (edge - a[along]) / (b[along] - a[along]) * (b[across] - a[across]);
      }
    }
    return null;
  }

  /* Clear of the buttons on the left and of the scale and the credits at the bottom. */
  function free(axis, at, size) {
    const corner = (name) => map.getContainer().querySelector(name);
    if (axis) {
      return at > corner(".leaflet-top.leaflet-left").offsetHeight + 16 && at < size.y - 60;
    }
    return at > corner(".leaflet-bottom.leaflet-left").offsetWidth + 45
      && at < size.x - corner(".leaflet-bottom.leaflet-right").offsetWidth - 40;
  }

  function label(text, axis, at, size) {
    if (at === null || !free(axis, at, size)) { return; }
    const spot = axis ? L.point(3, at) : L.point(at, size.y - 4);
    const element = document.createElement("span");
    element.textContent = text;
    const icon = L.divIcon({className: axis ? "grid-label northing" : "grid-label easting",
      html: element, iconSize: null});
    L.marker(map.containerPointToLatLng(spot), {icon, pane: "gridLabels", interactive: false,
      keyboard: false}).addTo(layer);
  }

  function draw() {
    layer.clearLayers();
    if (!map.hasLayer(layer)) { return; }
    const size = map.getSize();
    const corners = [[0, 0], [size.x, 0], [0, size.y], [size.x, size.y]].map((corner) => {
      const spot = map.containerPointToLatLng(corner);
      return grid.forward(spot.lat, spot.lng);
    });
    const low = [0, 1].map((axis) => Math.min(...corners.map((c) => c[axis])));
    const high = [0, 1].map((axis) => Math.max(...corners.map((c) => c[axis])));
    let steps = [0, 1].map((axis) =>
      fieldplanStep(high[axis] - low[axis], axis ? size.y : size.x));
    if (grid.isUtm) { steps = [Math.max(...steps), Math.max(...steps)]; }
    [0, 1].forEach((axis) => {
      const step = steps[axis], other = 1 - axis;
      for (let at = Math.ceil(low[axis] / step) * step; at <= high[axis]; at += step) {
        const ends = [low[other], high[other]].map((end) => (axis ? [end, at] : [at, end]));
        const edge = axis ? 3 : size.y - 4;
        label(fieldplanGridLabel(grid, at, axis, step), axis,
          crossing(line(...ends), axis, edge), size);
      }
    });
  }
  map.on("moveend zoomend resize", draw);
  map.on("overlayadd", (event) => { if (event.layer === layer) { draw(); } });
  return draw;
}
