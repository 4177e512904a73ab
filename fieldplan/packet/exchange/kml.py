"""KML 2.2 for phones: a folder per class of locations, outlines below them, no remote icons."""

from html import escape
from pathlib import Path
from xml.etree import ElementTree as ET

import numpy as np
import shapely

from fieldplan.packet.exchange.outlines import Outline, outlines, within_180
from fieldplan.packet.exchange.plain_text import plain
from fieldplan.packet.exchange.read_points import ReadPoint
from fieldplan.packet.exchange.rows import CREW_COLUMNS, PointRow, columns_of, point_rows, text_of
from fieldplan.packet.maps.palette import BOUNDARY_LINE, EXCLUDED_LINE, MARKS, stratum_fill
from fieldplan.plan.model import Plan

NAMESPACE = "http://www.opengis.net/kml/2.2"
FOLDERS = {
    "random": "Random locations",
    "alternate": "Alternates",
    "targeted": "Targeted places, not in the mean",
}
OUTLINE_FOLDERS = {"boundary": "Boundary", "stratum": "Strata", "excluded": "Excluded areas"}


def write_kml(plan: Plan) -> bytes:
    """Write locations and outlines with their styles.

    Viewers take descriptions and extended data for HTML, so texts there are escaped once more
    than XML alone would need.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    bytes
    """
    root = ET.Element("kml", xmlns=NAMESPACE)
    document = ET.SubElement(root, "Document")
    _text(document, "name", f"{plan.revision_name} {plan.status}")
    _text(document, "description", escape(plain(plan.campaign.plan.title)))
    shapes = outlines(plan)
    _add_styles(document, shapes)
    rows = point_rows(plan)
    for location_class, title in FOLDERS.items():
        chosen = [row for row in rows if row.location.location_class == location_class]
        if chosen:
            folder = _folder(document, title)
            for row in chosen:
                _add_location(folder, row, columns_of(plan, CREW_COLUMNS))
    for kind, title in OUTLINE_FOLDERS.items():
        numbered = [(n, shape) for n, shape in enumerate(shapes) if shape.kind == kind]
        if numbered:
            folder = _folder(document, title)
            for number, shape in numbered:
                _add_outline(folder, shape, number)
    ET.indent(root)
    written = ET.tostring(root, encoding="unicode")
    return f'<?xml version="1.0" encoding="UTF-8"?>\n{written}\n'.encode()


def read_kml(path: Path) -> list[ReadPoint]:
    """Read the locations of every folder with GDAL.

    Parameters
    ----------
    path : Path

    Returns
    -------
    list of ReadPoint
    """
    from pyogrio import list_layers, read_dataframe

    present = {str(name) for name, _ in list_layers(path)}
    found = []
    for title in FOLDERS.values():
        if title not in present:
            continue
        table = read_dataframe(path, layer=title)
        columns = (table["Name"] if "Name" in table else table["name"], table["location_id"])
        for name, location, point in zip(*columns, table.geometry, strict=True):
            found.append(ReadPoint(name, location, point.y, point.x))
    return found


def _text(parent: ET.Element, tag: str, text: str) -> ET.Element:
    child = ET.SubElement(parent, tag)
    child.text = plain(text)
    return child


def _folder(document: ET.Element, title: str) -> ET.Element:
    folder = ET.SubElement(document, "Folder")
    _text(folder, "name", title)
    return folder


def _add_styles(document: ET.Element, shapes: tuple[Outline, ...]) -> None:
    for location_class, mark in MARKS.items():
        style = ET.SubElement(document, "Style", id=location_class)
        icon = ET.SubElement(style, "IconStyle")
        _text(icon, "color", _colour(mark.fill, "ff"))
    for number, shape in enumerate(shapes):
        style = ET.SubElement(document, "Style", id=f"outline-{number}")
        line, ground = _outline_colours(shape, number)
        drawn = ET.SubElement(style, "LineStyle")
        _text(drawn, "color", _colour(line, "ff"))
        _text(drawn, "width", _line_width(shape))
        filled = ET.SubElement(style, "PolyStyle")
        _text(filled, "color", _colour(ground, "00" if shape.kind == "boundary" else "66"))


def _line_width(shape: Outline) -> str:
    """Draw outlines thin and lines that are the population broad."""
    if shape.length_m:
        return {"boundary": "1", "stratum": "5"}.get(shape.kind, "3")
    return "3" if shape.kind == "boundary" else "2"


def _outline_colours(shape: Outline, number: int) -> tuple[str, str]:
    if shape.kind == "boundary":
        return BOUNDARY_LINE, "#ffffff"
    if shape.kind == "excluded":
        return EXCLUDED_LINE, EXCLUDED_LINE
    fill = stratum_fill(number - 1)
    return fill.line, fill.ground


def _colour(web: str, opacity: str) -> str:
    """Turn ``#rrggbb`` into KML's ``aabbggrr``."""
    red, green, blue = web[1:3], web[3:5], web[5:7]
    return f"{opacity}{blue}{green}{red}"


def _add_location(folder: ET.Element, row: PointRow, columns: tuple[str, ...]) -> None:
    cells = row.cells()
    placemark = ET.SubElement(folder, "Placemark")
    _text(placemark, "name", str(cells["short_name"]))
    told = [(name, text_of(name, cells[name])) for name in columns]
    lines = [f"{name}: {escape(text)}" for name, text in told if text]
    _text(placemark, "description", "<br>".join(lines))
    _text(placemark, "styleUrl", f"#{row.location.location_class}")
    extended = ET.SubElement(placemark, "ExtendedData")
    for name, text in told:
        _text(ET.SubElement(extended, "Data", name=name), "value", escape(text))
    point = ET.SubElement(placemark, "Point")
    _text(point, "coordinates", f"{row.location.longitude:.7f},{row.location.latitude:.7f}")


def _add_outline(folder: ET.Element, shape: Outline, number: int) -> None:
    placemark = ET.SubElement(folder, "Placemark")
    _text(placemark, "name", shape.title)
    _text(placemark, "styleUrl", f"#outline-{number}")
    together = ET.SubElement(placemark, "MultiGeometry")
    for part in shapely.get_parts(within_180(shape.geometry)):
        if isinstance(part, shapely.LineString):
            corners = " ".join(f"{x:.7f},{y:.7f}" for x, y in shapely.get_coordinates(part))
            _text(ET.SubElement(together, "LineString"), "coordinates", corners)
            continue
        polygon = ET.SubElement(together, "Polygon")
        shell, *holes = (shapely.get_coordinates(ring) for ring in shapely.get_rings(part))
        _add_ring(polygon, "outerBoundaryIs", shell)
        for hole in holes:
            _add_ring(polygon, "innerBoundaryIs", hole)


def _add_ring(polygon: ET.Element, tag: str, ring: np.ndarray) -> None:
    linear = ET.SubElement(ET.SubElement(polygon, tag), "LinearRing")
    _text(linear, "coordinates", " ".join(f"{x:.7f},{y:.7f}" for x, y in ring))
