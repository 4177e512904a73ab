"""The map for a screen: one file, every tool inside, works with the network off."""

from typing import Any

import folium
import shapely
from folium.utilities import JsCode

from fieldplan.design.model import LocationClass
from fieldplan.frame.projection import site_zone, to_degrees, utm
from fieldplan.packet.exchange.outlines import Outline, outlines
from fieldplan.packet.exchange.plain_text import plain
from fieldplan.packet.exchange.rows import PointRow, along_words, point_rows
from fieldplan.packet.maps.cells import cell_layer
from fieldplan.packet.maps.content import label_of
from fieldplan.packet.maps.distance_marks import middle_of_longest, screen_marks
from fieldplan.packet.maps.offline import (
    TILES,
    Call,
    OfflineMap,
    Raw,
    add_head,
    figure_of,
    inert,
    polar_crs,
    render_offline,
)
from fieldplan.packet.maps.palette import (
    BOUNDARY_LINE,
    EXCLUDED_LINE,
    GRID_LINE,
    LINE_DASHES,
    MARKS,
    stratum_fill,
)
from fieldplan.packet.maps.screen_page import (
    drawings,
    foot,
    layer_titles,
    measured,
    pattern_definitions,
    title_block,
)
from fieldplan.packet.sheets.take import analysed_words
from fieldplan.plan.model import Plan

WEB_PROJECTION_ENDS = 84.0


def screen_map(plan: Plan) -> str:
    """Draw the offline map of a plan.

    Boundary, strata, exclusions with their reasons, locations by class with popups, a coordinate
    grid, coordinates under the pointer, a measuring tool. Alternates and the online base map are
    layers that start switched off; without a press on the latter nothing is requested.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    str
        One HTML page; the same plan gives the same text.
    """
    rows, shapes = point_rows(plan), outlines(plan)
    page = _empty_map(plan)
    titles = inert(layer_titles(plan, shapes))
    shown = [shape for shape in shapes if shape.kind != "boundary"]
    layers = [
        _location_layer(plan, rows, name, titles[name]).add_to(page)
        for name in MARKS
        if name in titles
    ]
    above = ("stratum", "cell", "excluded")
    along_lines = plan.frame.kind == "line"
    for kind in ("boundary", *above) if along_lines else (*above, "boundary"):
        if kind == "cell" and kind in titles:
            cell_layer(plan, titles[kind]).add_to(page)
        elif kind in titles:
            _outline_layer(plan, shapes, kind, titles[kind]).add_to(page)
    grid = folium.FeatureGroup(name=titles["grid"]).add_to(page)
    parts: dict[str, Any] = {"grid": grid, "locations": layers}
    if page.crs == "EPSG3857":
        parts["online"] = _online_layer(titles["online"]).add_to(page)
    parts["panel"] = folium.LayerControl(collapsed=False).add_to(page)
    Call("fieldplanMap", _facts(plan, rows, shapes, shown), parts).add_to(page)
    return render_offline(page)


def _empty_map(plan: Plan) -> OfflineMap:
    centre = plan.frame.projection
    name, script = "EPSG3857", ""
    if abs(centre.latitude) > WEB_PROJECTION_ENDS:
        name, script = polar_crs(centre.latitude)
    page = OfflineMap(
        location=[centre.latitude, centre.longitude],
        tiles=None,
        crs=name,
        zoom_start=15,
        zoom_snap=0.25,
        zoom_delta=0.5,
        wheel_px_per_zoom_level=90,
    )
    add_head(page, title=f"{plan.revision_name} map, {plan.status}", scripts=script)
    body = figure_of(page).html
    body.add_child(Raw(title_block(plan)), name="title_block", index=0)
    body.add_child(Raw(pattern_definitions() + drawings()), name="patterns", index=1)
    # folium puts the map after this when it renders; the styles set both in their places.
    body.add_child(Raw(foot(plan)), name="foot")
    return page


def _outline_layer(
    plan: Plan, shapes: tuple[Outline, ...], kind: str, title: str
) -> folium.GeoJson:
    features = []
    chosen = [shape for shape in shapes if shape.kind == kind]
    for number, shape in enumerate(chosen):
        features.append(
            {
                "type": "Feature",
                "id": f"{kind}-{number}",
                "geometry": shapely.geometry.mapping(shape.geometry),
                "properties": _outline_told(shape) | {"style": _outline_style(plan, shape, number)},
            }
        )
    collection = {"type": "FeatureCollection", "features": inert(features)}
    told = JsCode("fieldplanPopup") if kind == "excluded" else None
    return folium.GeoJson(collection, name=title, smooth_factor=0.3, on_each_feature=told)


def _outline_told(shape: Outline) -> dict[str, Any]:
    return {"title": shape.title, "lead": [measured(shape)], "rows": []}


def _line_style(shape: Outline, number: int) -> dict[str, Any]:
    """Draw the lines of a stratum broad, what was left out dashed, and all of them thin below."""
    style = {"fill": False, "interactive": shape.kind == "excluded",
             "lineCap": "butt"}  # fmt: skip
    if shape.kind == "boundary":
        return style | {"color": BOUNDARY_LINE, "weight": 1.5, "className": "boundary-line"}
    if shape.kind == "excluded":
        return style | {"color": EXCLUDED_LINE, "weight": 4, "dashArray": "3 4",
                        "className": "excluded-line"}  # fmt: skip
    return style | {"color": stratum_fill(number).line, "weight": 6,
                    "dashArray": LINE_DASHES[number % len(LINE_DASHES)],
                    "className": "stratum-line"}  # fmt: skip


def _outline_style(plan: Plan, shape: Outline, number: int) -> dict[str, Any]:
    if shape.length_m:
        return _line_style(shape, number)
    if shape.kind == "boundary":
        dashes = "9 6" if plan.frame.boundary_assumed or plan.frame.kind == "list" else None
        return {"color": BOUNDARY_LINE, "weight": 3, "fill": False, "dashArray": dashes,
                "interactive": False, "className": "boundary-line"}  # fmt: skip
    if shape.kind == "excluded":
        return {"color": EXCLUDED_LINE, "weight": 1.5, "fillColor": "url(#hatch)",
                "fillOpacity": 1, "className": "excluded-area"}  # fmt: skip
    fill = stratum_fill(number)
    return {"color": fill.line, "weight": 2, "fillColor": f"url(#{fill.pattern}-{number % 8})",
            "fillOpacity": 0.9, "interactive": False, "className": "stratum-area"}  # fmt: skip


def _location_layer(
    plan: Plan, rows: tuple[PointRow, ...], name: LocationClass, title: str
) -> folium.GeoJson:
    centre = plan.frame.projection.longitude
    features = [
        {
            "type": "Feature",
            "id": row.location.short_name,
            "geometry": {
                "type": "Point",
                "coordinates": [_near(row.location.longitude, centre), row.location.latitude],
            },
            "properties": _told(plan, row),
        }
        for row in rows
        if row.location.location_class == name
    ]
    return folium.GeoJson(
        {"type": "FeatureCollection", "features": inert(features)},
        name=title,
        show=name != "alternate",
        on_each_feature=JsCode("fieldplanPopup"),
        point_to_layer=JsCode("fieldplanPoint"),
    )


def _near(longitude: float, centre: float) -> float:
    """Let longitudes run on past 180° with the site."""
    return round(centre + (longitude - centre + 180) % 360 - 180, 7)


def _told(plan: Plan, row: PointRow) -> dict[str, Any]:
    """Everything a popup says of a location, as plain text."""
    cells, place = row.cells(), row.location
    mark = MARKS[place.location_class]
    lead = {
        "random": f"Random location {place.list_order} of stratum {cells['stratum']}.",
        "alternate": f"Alternate {place.list_order}, for {cells['alternate_for']}. Visit it only "
        "instead of a location that cannot be sampled, lowest number first, and write down why.",
        "targeted": "Targeted place: chosen by judgement, not in the mean.",
    }
    table = [
        ("Location id", str(cells["location_id"])),
        ("Stratum", str(cells["stratum"])),
        ("Along the line", along_words(place)),
        ("Latitude", f"{place.latitude:.7f}°"),
        ("Longitude", f"{place.longitude:.7f}°"),
        (f"Grid {row.utm_zone}", f"{row.easting:.1f} E {row.northing:.1f} N"),
        ("Samples", str(cells["sample_ids"])),
        ("Take", plan.campaign.frame[0].unit_is),
        ("Depth", _depth(row)),
        ("Grain size", plan.campaign.frame[0].size_fraction),
        ("Analysed for", analysed_words(plan)),
        ("Reason", str(cells["reason"])),
        ("If blocked", _offset_rule(plan) if place.location_class == "random" else ""),
    ]
    return {
        "short_name": str(cells["short_name"]),
        "label": label_of(plan, place),
        "class": place.location_class,
        "mark": {"shape": mark.shape, "fill": mark.fill, "edge": mark.edge},
        "title": label_of(plan, place),
        "lead": [lead[place.location_class]],
        "rows": [[name, value] for name, value in table if value],
    }


def _depth(row: PointRow) -> str:
    if row.depth_top_m is None or row.depth_bottom_m is None:
        return ""
    return f"{row.depth_top_m:g} to {row.depth_bottom_m:g} m"


def _offset_rule(plan: Plan) -> str:
    field = plan.campaign.field
    within = f"move up to {field.offset_within_m:g} m" if field.offset_within_m else ""
    rule = ". ".join(part for part in (within, field.offset_rule) if part)
    return rule or "do not move it; take the next alternate of its stratum"


def _online_layer(title: str) -> folium.TileLayer:
    credit = (
        '&copy; <a href="https://www.openstreetmap.org/copyright">OpenStreetMap</a> contributors'
    )
    return folium.TileLayer(
        tiles=f"{TILES}/{{z}}/{{x}}/{{y}}.png",
        attr=credit,
        name=title,
        overlay=True,
        show=False,
        max_zoom=23,
        max_native_zoom=19,
    )


def _facts(
    plan: Plan, rows: tuple[PointRow, ...], shapes: tuple[Outline, ...], shown: list[Outline]
) -> dict[str, Any]:
    centre = plan.frame.projection
    zone = site_zone(centre)
    west, south, east, north = shapely.total_bounds([shape.geometry for shape in shapes])
    longitudes = [_near(row.location.longitude, centre.longitude) for row in rows]
    latitudes = [row.location.latitude for row in rows]
    corners = [
        [min([south, *latitudes]), min([west, *longitudes])],
        [max([north, *latitudes]), max([east, *longitudes])],
    ]
    return {
        "bounds": [[float(value) for value in corner] for corner in corners],
        "zone": zone,
        "zoneName": utm(centre.latitude, centre.longitude, zone=zone).zone_name,
        "south": centre.latitude < 0,
        "longitude": centre.longitude,
        "gridColour": GRID_LINE,
        "areaLabels": [_area_label(shape) for shape in shown] + _distance_labels(plan),
    }


def _distance_labels(plan: Plan) -> list[dict[str, Any]]:
    """Name round distances along branches."""
    labels = []
    for mark in screen_marks(plan.frame):
        latitude, longitude = to_degrees(plan.frame.projection, mark.easting, mark.northing)
        labels.append(
            {
                "kind": "distance",
                "text": plain(mark.words),
                "latitude": round(float(latitude), 7),
                "longitude": _near(float(longitude), plan.frame.projection.longitude),
            }
        )
    return labels


def _area_label(shape: Outline) -> dict[str, Any]:
    """Put the name of an area where most room is: the centre of its largest inner circle."""
    if shape.length_m:
        longitude, latitude = middle_of_longest(shape.geometry)
    else:
        widest = max(shapely.get_parts(shape.geometry), key=shapely.area)
        longitude, latitude = shapely.get_coordinates(shapely.maximum_inscribed_circle(widest))[0]
    return {
        "kind": shape.kind,
        "text": shape.name,
        "latitude": round(float(latitude), 7),
        "longitude": round(float(longitude), 7),
    }
