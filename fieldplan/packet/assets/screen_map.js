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
  button.addEventListener("click", () => fold(!container.classList.contains("folded")));
  container.prepend(button);
  fold(window.innerWidth < 700);
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

/* The whole site, clear of the buttons and of an open panel where the window is wide. */
function fieldplanFit(map, bounds, panel) {
  const container = panel.getContainer();
  const open = container.offsetHeight > 100;
  map.fitBounds(bounds, {animate: false, paddingTopLeft: [window.innerWidth < 700 ? 24 : 80, 24],
    paddingBottomRight: [open ? container.offsetWidth + 30 : 24, 44]});
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
  fieldplanFit(map, bounds, parts.panel);
  drawGrid();
  arrange();
  window.fieldplanShown = {map, grid, facts, parts, leg: fieldplanLeg, area: fieldplanArea};
}
