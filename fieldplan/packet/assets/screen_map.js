"use strict";
/* Starts the map: marks and popups made as elements, never as markup, so that typed text is inert. */

const FIELDPLAN_SHAPES = {
  circle: ["circle", {cx: 8, cy: 8, r: 5.5}],
  square: ["rect", {x: 3, y: 3, width: 10, height: 10}],
  diamond: ["path", {d: "M8 0.8 L15.2 8 L8 15.2 L0.8 8 Z"}],
};

function fieldplanSymbol(mark) {
  const space = "http://www.w3.org/2000/svg";
  const picture = document.createElementNS(space, "svg");
  picture.setAttribute("viewBox", "0 0 16 16");
  picture.setAttribute("class", "symbol");
  const [tag, size] = FIELDPLAN_SHAPES[mark.shape];
  const shape = document.createElementNS(space, tag);
  Object.entries({...size, fill: mark.fill, stroke: mark.edge, "stroke-width": 1.6})
    .forEach(([name, value]) => shape.setAttribute(name, value));
  picture.append(shape);
  return picture;
}

function fieldplanPoint(feature, latlng) {
  const said = feature.properties;
  const holder = fieldplanElement("div", "location");
  holder.append(fieldplanSymbol(said.mark), fieldplanElement("span", "label", said.label));
  const icon = L.divIcon({className: `mark ${said.class}`, html: holder, iconSize: [30, 30]});
  const marker = L.marker(latlng, {icon, alt: said.short_name, riseOnHover: true,
    zIndexOffset: said.class === "alternate" ? 0 : 1000});
  marker.labelWidth = 7.5 * said.label.length + 6;
  return marker;
}

function fieldplanPopup(feature, layer) {
  layer.bindPopup(() => {
    const said = feature.properties;
    const box = fieldplanElement("div", "told");
    box.append(fieldplanElement("h2", "", said.title));
    said.lead.forEach((sentence) => box.append(fieldplanElement("p", "", sentence)));
    const table = fieldplanElement("table");
    said.rows.forEach(([name, value]) => {
      const row = table.insertRow();
      row.append(fieldplanElement("th", "", name), fieldplanElement("td", "", value));
    });
    box.append(table);
    return box;
  }, {maxWidth: 280, minWidth: 180, autoPanPaddingTopLeft: [62, 62],
    autoPanPaddingBottomRight: [12, 12]});
}

function fieldplanAreaLabels(map, labels) {
  const group = L.layerGroup().addTo(map);
  map.createPane("areaLabels").style.zIndex = 550;
  map.getPane("areaLabels").style.pointerEvents = "none";
  labels.forEach((label) => {
    const text = fieldplanElement("span", "", label.text);
    const icon = L.divIcon({className: `area-label ${label.kind}`, html: text, iconSize: null});
    L.marker([label.latitude, label.longitude], {icon, pane: "areaLabels", interactive: false,
      keyboard: false}).addTo(group);
  });
  return group;
}

function fieldplanPanel(map, control) {
  const container = control.getContainer();
  const button = fieldplanElement("button", "panel-button", "Layers and key");
  button.type = "button";
  const fold = (folded) => {
    container.classList.toggle("folded", folded);
    button.setAttribute("aria-expanded", String(!folded));
  };
  let chosen = false;
  const suit = () => {
    if (!chosen) { fold(window.innerWidth < 700 || window.innerHeight < 500); }
  };
  button.addEventListener("click", () => {
    chosen = true;
    fold(!container.classList.contains("folded"));
  });
  window.addEventListener("resize", suit);
  container.prepend(button);
  suit();
}

function fieldplanNorth(map) {
  const Control = L.Control.extend({onAdd() {
    const holder = fieldplanElement("div", "north");
    holder.title = "Up is true north";
    holder.append(document.getElementById("north-arrow").content.cloneNode(true));
    return holder;
  }});
  new Control({position: "topleft"}).addTo(map);
}

/* Paper has a size of its own: the page takes it before the browser lays the print out. */
function fieldplanPrint(map, bounds, panel) {
  let before = null;
  window.addEventListener("beforeprint", () => {
    before = {centre: map.getCenter(), zoom: map.getZoom()};
    document.body.classList.add("printing");
    document.querySelectorAll("details").forEach((part) => { part.open = true; });
    map.invalidateSize({animate: false});
    fieldplanFit(map, bounds, panel);
  });
  window.addEventListener("afterprint", () => {
    document.body.classList.remove("printing");
    map.invalidateSize({animate: false});
    if (before) { map.setView(before.centre, before.zoom, {animate: false}); }
  });
}

/* The whole site, clear of the buttons: they stand in a row on a phone, else in a column. An open
   panel is left free at the right, or above where that shows the site clearly larger. */
function fieldplanFit(map, bounds, panel) {
  const container = panel.getContainer();
  const open = container.offsetHeight > 100;
  const narrow = window.innerWidth < 700;
  const trials = [[narrow ? 24 : 80, narrow ? 76 : 24, open ? container.offsetWidth + 30 : 24, 44]];
  if (open) { trials.push([narrow ? 24 : 80, container.offsetHeight + 24, 24, 44]); }
  const zoom = ([left, top, right, bottom]) => {
    const room = map.getSize().subtract([left + right, top + bottom]);
    if (Math.min(room.x, room.y) < 40) { return -Infinity; }
    return map.getBoundsZoom(bounds, false, L.point(left + right, top + bottom));
  };
  const [left, top, right, bottom] = trials.reduce((a, b) => (zoom(b) > zoom(a) + 0.3 ? b : a));
  map.fitBounds(bounds, {animate: false, paddingTopLeft: [left, top],
    paddingBottomRight: [right, bottom]});
}

/* A window that changes its size (a phone turned, bars that come and go) shows the whole site
   again, until somebody has moved the map. */
function fieldplanKeepFitted(map, bounds, panel) {
  let fitting = false, moved = false;
  const fit = () => {
    fitting = true;
    fieldplanFit(map, bounds, panel);
    fitting = false;
  };
  map.on("dragstart zoomstart", () => { moved = moved || !fitting; });
  map.on("resize", () => { if (!moved) { fit(); } });
  new ResizeObserver(() => map.invalidateSize({animate: false})).observe(map.getContainer());
  fit();
}

function fieldplanMap(map, facts, parts) {
  map.setMaxZoom(23).attributionControl.setPrefix("Leaflet 1.9.4");
  const bounds = L.latLngBounds(facts.bounds);
  const grid = fieldplanGrid(map, facts);
  const drawGrid = fieldplanGridLayer(map, grid, parts.grid, facts.gridColour);
  L.control.scale({imperial: false, maxWidth: 120}).addTo(map);
  fieldplanNorth(map);
  fieldplanMeasure(map);
  fieldplanReadout(map, grid, facts);
  fieldplanPanel(map, parts.panel);
  if (parts.online) {
    parts.online.on("add remove", () => map.getContainer().classList.toggle(
      "with-base", map.hasLayer(parts.online)));
  }
  const areaLabels = fieldplanAreaLabels(map, facts.areaLabels);
  const arrange = fieldplanLabels(map, parts.locations, areaLabels);
  fieldplanPrint(map, bounds, parts.panel);
  fieldplanKeepFitted(map, bounds, parts.panel);
  drawGrid();
  arrange();
  window.fieldplanShown = {map, grid, facts, parts, leg: fieldplanLeg, area: fieldplanArea};
}
