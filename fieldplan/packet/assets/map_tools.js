"use strict";
/* What a person does with the map: read a coordinate, measure, and read labels that stay apart. */

function fieldplanElement(tag, className, text) {
  const element = document.createElement(tag);
  if (className) { element.className = className; }
  if (text !== undefined) { element.textContent = text; }
  return element;
}

function fieldplanDegrees(latitude, longitude) {
  const east = (longitude + 540) % 360 - 180;
  return `${Math.abs(latitude).toFixed(5)}\u00b0 ${latitude < 0 ? "S" : "N"}, `
    + `${Math.abs(east).toFixed(5)}\u00b0 ${east < 0 ? "W" : "E"}`;
}

function fieldplanGridText(grid, facts, spot) {
  if (!grid.isUtm) { return ""; }
  const [easting, northing] = grid.forward(spot.lat, spot.lng);
  return `${facts.zoneName} ${easting.toFixed(0)} E ${northing.toFixed(0)} N`;
}

function fieldplanReadout(map, grid, facts) {
  const output = document.getElementById("readout");
  const tell = (event) => {
    const text = fieldplanGridText(grid, facts, event.latlng);
    output.textContent = fieldplanDegrees(event.latlng.lat, event.latlng.lng)
      + (text ? ` \u00b7 ${text}` : "");
  };
  map.on("mousemove click", tell);
}

/* Metres on the ellipsoid from its two radii of curvature at the middle latitude: better than
   one part in 100 000 over the few kilometres of a site. */
function fieldplanPlane(origin) {
  const a = 6378137, e2 = 0.00669437999014, degree = Math.PI / 180;
  const w = Math.sqrt(1 - e2 * Math.sin(origin.lat * degree) ** 2);
  const north = a * (1 - e2) / w ** 3 * degree;
  const east = a / w * Math.cos(origin.lat * degree) * degree;
  return (spot) => [(spot.lng - origin.lng) * east, (spot.lat - origin.lat) * north];
}

function fieldplanLeg(from, to) {
  const middle = L.latLng((from.lat + to.lat) / 2, from.lng);
  const plane = fieldplanPlane(middle);
  const start = plane(from), end = plane(to);
  const bearing = Math.atan2(end[0] - start[0], end[1] - start[1]) * 180 / Math.PI;
  return {metres: Math.hypot(end[0] - start[0], end[1] - start[1]),
    bearing: (bearing + 360) % 360};
}

function fieldplanArea(spots) {
  const plane = fieldplanPlane(spots[0]);
  const xy = spots.map(plane);
  const twice = xy.reduce((sum, [x, y], index) => {
    const [nextX, nextY] = xy[(index + 1) % xy.length];
    return sum + x * nextY - nextX * y;
  }, 0);
  return Math.abs(twice) / 2;
}

function fieldplanMetres(metres) {
  return metres < 1000 ? `${metres.toFixed(1)} m` : `${(metres / 1000).toFixed(3)} km`;
}

function fieldplanMeasured(spots) {
  if (spots.length < 2) { return spots.length ? "Press the next point." : "Press the first point."; }
  const legs = spots.slice(1).map((spot, index) => fieldplanLeg(spots[index], spot));
  const last = legs[legs.length - 1];
  const total = legs.reduce((sum, leg) => sum + leg.metres, 0);
  const words = [`Last leg ${fieldplanMetres(last.metres)} towards ${last.bearing.toFixed(0)}\u00b0`];
  if (legs.length > 1) { words.push(`all ${fieldplanMetres(total)}`); }
  if (spots.length > 2) {
    const area = fieldplanArea(spots);
    words.push(`inside ${area < 1e4 ? area.toFixed(0) + " m\u00b2" : (area / 1e4).toFixed(2) + " ha"}`);
  }
  return `${words.join(", ")}.`;
}

function fieldplanMeasure(map) {
  const spots = [], drawn = L.layerGroup();
  const bar = document.getElementById("measure");
  const output = bar.querySelector("output");
  const button = fieldplanElement("a", "measure-button");
  let active = false;

  function show() {
    drawn.clearLayers();
    L.polyline(spots, {color: "#000", weight: 3, dashArray: "6 4", interactive: false}).addTo(drawn);
    spots.forEach((spot) => L.circleMarker(spot, {radius: 5, color: "#000", weight: 2,
      fillColor: "#fff", fillOpacity: 1, interactive: false}).addTo(drawn));
    output.textContent = fieldplanMeasured(spots);
  }
  function add(event) { spots.push(event.latlng); show(); }
  function set(on) {
    active = on;
    bar.hidden = !on;
    map.getContainer().classList.toggle("measuring", on);
    button.classList.toggle("pressed", on);
    button.setAttribute("aria-pressed", String(on));
    map.doubleClickZoom[on ? "disable" : "enable"]();
    map[on ? "on" : "off"]("click", add);
    if (on) { drawn.addTo(map.closePopup()); } else { drawn.remove(); }
    map.invalidateSize();
    show();
  }
  const Control = L.Control.extend({onAdd() {
    const holder = fieldplanElement("div", "leaflet-bar");
    button.href = "#";
    button.append(document.getElementById("ruler").content.cloneNode(true));
    button.title = "Measure distance and area";
    button.setAttribute("role", "button");
    button.setAttribute("aria-label", button.title);
    L.DomEvent.on(button, "click", (event) => { L.DomEvent.stop(event); set(!active); });
    holder.append(button);
    return holder;
  }});
  new Control({position: "topleft"}).addTo(map);
  bar.querySelector("[name=undo]").addEventListener("click", () => { spots.pop(); show(); });
  bar.querySelector("[name=clear]").addEventListener("click", () => { spots.length = 0; show(); });
  bar.querySelector("[name=end]").addEventListener("click", () => set(false));
  set(false);
}

/* Labels: each tries eight places round its mark; one that would cover a mark or another label,
   or leave the window, or lie under a button, waits for a closer zoom. Marks always stay. */
function fieldplanLabels(map, layers, areaLabels) {
  const cell = 40;
  function occupied() {
    const cells = new Map();
    const keys = (box) => {
      const found = [];
      for (let x = Math.floor(box[0] / cell); x <= Math.floor(box[2] / cell); x += 1) {
        for (let y = Math.floor(box[1] / cell); y <= Math.floor(box[3] / cell); y += 1) {
          found.push(`${x},${y}`);
        }
      }
      return found;
    };
    const apart = (a, b) => a[2] <= b[0] || b[2] <= a[0] || a[3] <= b[1] || b[3] <= a[1];
    return {
      add(box) {
        keys(box).forEach((key) => {
          if (!cells.has(key)) { cells.set(key, []); }
          cells.get(key).push(box);
        });
      },
      free(box) {
        return keys(box).every((key) => (cells.get(key) || []).every((other) => apart(box, other)));
      },
    };
  }
  function boxes(spot, width, height) {
    const gap = 9, half = height / 2, near = 5;
    return {
      right: [spot.x + gap, spot.y - half, spot.x + gap + width, spot.y + half],
      left: [spot.x - gap - width, spot.y - half, spot.x - gap, spot.y + half],
      above: [spot.x - width / 2, spot.y - gap - height, spot.x + width / 2, spot.y - gap],
      below: [spot.x - width / 2, spot.y + gap, spot.x + width / 2, spot.y + gap + height],
      "upper-right": [spot.x + near, spot.y - near - height, spot.x + near + width, spot.y - near],
      "lower-right": [spot.x + near, spot.y + near, spot.x + near + width, spot.y + near + height],
      "upper-left": [spot.x - near - width, spot.y - near - height, spot.x - near, spot.y - near],
      "lower-left": [spot.x - near - width, spot.y + near, spot.x - near, spot.y + near + height],
    };
  }
  function place(marker, taken, size) {
    const label = marker.getElement().querySelector(".label");
    const spot = map.latLngToContainerPoint(marker.getLatLng());
    const inside = (box) => box[0] >= 0 && box[1] >= 0 && box[2] <= size.x && box[3] <= size.y;
    const side = Object.entries(boxes(spot, marker.labelWidth, 15))
      .find(([, box]) => inside(box) && taken.free(box));
    label.className = side ? `label ${side[0]}` : "label waiting";
    if (side) { taken.add(side[1]); }
  }
  /* Small marks where there is little room: by the pixels that each one has in the window. */
  function sizeMarks(markers, bounds) {
    const size = map.getSize();
    const inside = markers.filter((marker) => bounds.contains(marker.getLatLng())).length;
    const room = size.x * size.y / Math.max(1, inside);
    map.getContainer().classList.toggle("dense", room < 2500);
    map.getContainer().classList.toggle("crowded", room < 800);
  }
  function boxOf(element) {
    const frame = map.getContainer().getBoundingClientRect();
    const box = element.getBoundingClientRect();
    return [box.left - frame.left, box.top - frame.top, box.right - frame.left,
      box.bottom - frame.top];
  }
  /* Words that give way to the labels of places: names of areas, and numbers of the grid. */
  function giveWay(text, taken) {
    const box = boxOf(text), free = taken.free(box);
    text.classList.toggle("waiting", !free);
    if (free) { taken.add(box); }
  }
  function arrange() {
    const taken = occupied(), size = map.getSize();
    const shown = layers.filter((layer) => map.hasLayer(layer)).flatMap((l) => l.getLayers());
    sizeMarks(shown, map.getBounds());
    shown.forEach((marker) => {
      const spot = map.latLngToContainerPoint(marker.getLatLng());
      taken.add([spot.x - 7, spot.y - 7, spot.x + 7, spot.y + 7]);
    });
    const frame = map.getContainer();
    frame.querySelectorAll(".leaflet-control").forEach((control) => taken.add(boxOf(control)));
    shown.forEach((marker) => place(marker, taken, size));
    areaLabels.eachLayer((marker) => {
      const text = marker.getElement() && marker.getElement().firstElementChild;
      if (text) { giveWay(text, taken); }
    });
    frame.querySelectorAll(".grid-label span").forEach((text) => giveWay(text, taken));
  }
  map.on("moveend zoomend overlayadd overlayremove resize", arrange);
  return arrange;
}
