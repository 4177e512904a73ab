"""How a desktop GIS shall draw the layers: style documents for the table ``layer_styles``."""

from collections.abc import Sequence
from datetime import date
from xml.etree import ElementTree as ET

from fieldplan.packet.exchange.outlines import Outline
from fieldplan.packet.maps.palette import BOUNDARY_LINE, EXCLUDED_LINE, MARKS, stratum_fill

Style = dict[str, object]
_PATTERNS = {
    "plain": "solid", "dots": "dense6", "rising": "b_diagonal", "level": "horizontal",
    "upright": "vertical", "falling": "f_diagonal", "crosses": "cross", "rings": "dense7",
}  # fmt: skip


def style_rows(shapes: tuple[Outline, ...], made_on: date) -> list[Style]:
    """Make one row of ``layer_styles`` per layer.

    Parameters
    ----------
    shapes : tuple of Outline
    made_on : date

    Returns
    -------
    list of dict
    """
    along_lines = any(shape.length_m for shape in shapes)
    documents = {
        "locations": _locations_document(),
        "boundary": _single_document(_fill_symbol("0", BOUNDARY_LINE, "#ffffff", "no", "0.6")),
        "strata": _strata_document(shapes),
        "exclusions": _single_document(
            _fill_symbol("0", EXCLUDED_LINE, EXCLUDED_LINE, "f_diagonal", "0.3")
        ),
    }
    if along_lines:
        documents |= {
            "boundary": _single_document(_line_symbol("0", BOUNDARY_LINE, "dot", "0.3")),
            "strata": _line_strata_document(shapes),
            "exclusions": _single_document(_line_symbol("0", EXCLUDED_LINE, "dash", "0.8")),
        }
    return [
        {
            "f_table_catalog": "",
            "f_table_schema": "",
            "f_table_name": layer,
            "f_geometry_column": "geom",
            "styleName": layer,
            "styleQML": ET.tostring(document, encoding="unicode"),
            "styleSLD": "",
            "useAsDefault": True,
            "description": f"{layer} as in the packet",
            "owner": "",
            "ui": "",
            "update_time": f"{made_on.isoformat()}T00:00:00Z",
        }
        for layer, document in documents.items()
    ]


def _document(renderer: ET.Element) -> ET.Element:
    root = ET.Element("qgis", version="3.34.0", styleCategories="Symbology|Labeling")
    root.append(renderer)
    return root


def _single_document(symbol: ET.Element) -> ET.Element:
    renderer = ET.Element("renderer-v2", type="singleSymbol")
    ET.SubElement(renderer, "symbols").append(symbol)
    return _document(renderer)


def _sorted_document(attribute: str, classes: Sequence[tuple[str, str, ET.Element]]) -> ET.Element:
    """Draw by the value of one column: (value, label, symbol) for each."""
    renderer = ET.Element("renderer-v2", type="categorizedSymbol", attr=attribute)
    categories = ET.SubElement(renderer, "categories")
    symbols = ET.SubElement(renderer, "symbols")
    for value, label, symbol in classes:
        name = str(symbol.get("name"))
        ET.SubElement(categories, "category", value=value, label=label, symbol=name, render="true")
        symbols.append(symbol)
    return _document(renderer)


def _locations_document() -> ET.Element:
    classes = [
        (name, mark.title, _marker_symbol(str(number), mark.shape, mark.fill, mark.edge))
        for number, (name, mark) in enumerate(MARKS.items())
    ]
    document = _sorted_document("class", classes)
    labelling = ET.SubElement(document, "labeling", type="simple")
    settings = ET.SubElement(labelling, "settings")
    written = ET.SubElement(settings, "text-style", fieldName="short_name", fontSize="9")
    ET.SubElement(
        written, "text-buffer", bufferDraw="1", bufferSize="0.8", bufferColor="255,255,255,255"
    )
    ET.SubElement(settings, "placement", placement="6", dist="2", distUnits="MM")
    return document


def _strata_document(shapes: tuple[Outline, ...]) -> ET.Element:
    classes = []
    for number, shape in enumerate(s for s in shapes if s.kind == "stratum"):
        fill = stratum_fill(number)
        ground = fill.ground if fill.pattern == "plain" else fill.line
        symbol = _fill_symbol(str(number), fill.line, ground, _PATTERNS[fill.pattern], "0.3")
        classes.append((shape.name, shape.name, symbol))
    return _sorted_document("name", classes)


def _line_strata_document(shapes: tuple[Outline, ...]) -> ET.Element:
    classes = [
        (shape.name, shape.name, _line_symbol(str(number), stratum_fill(number).line, style, "1"))
        for number, shape in enumerate(s for s in shapes if s.kind == "stratum")
        for style in [("solid", "dash", "dash dot", "dot")[number % 4]]
    ]
    return _sorted_document("name", classes)


def _line_symbol(name: str, colour: str, style: str, width: str) -> ET.Element:
    symbol = ET.Element("symbol", type="line", name=name, alpha="1")
    options = {
        "line_color": _colour(colour),
        "line_style": style,
        "line_width": width,
        "line_width_unit": "MM",
    }
    return _with_layer(symbol, "SimpleLine", options)


def _marker_symbol(name: str, shape: str, fill: str, edge: str) -> ET.Element:
    symbol = ET.Element("symbol", type="marker", name=name, alpha="1")
    outline = edge if edge != "#ffffff" else fill
    options = {
        "name": shape,
        "color": _colour(fill),
        "outline_color": _colour(outline),
        "outline_width": "0.4",
        "size": "2.6",
        "size_unit": "MM",
    }
    return _with_layer(symbol, "SimpleMarker", options)


def _fill_symbol(name: str, line: str, ground: str, pattern: str, width: str) -> ET.Element:
    symbol = ET.Element("symbol", type="fill", name=name, alpha="0.6")
    options = {
        "color": _colour(ground),
        "style": pattern,
        "outline_color": _colour(line),
        "outline_width": width,
        "outline_width_unit": "MM",
    }
    return _with_layer(symbol, "SimpleFill", options)


def _with_layer(symbol: ET.Element, kind: str, options: dict[str, str]) -> ET.Element:
    layer = ET.SubElement(symbol, "layer", {"class": kind, "enabled": "1", "locked": "0"})
    table = ET.SubElement(layer, "Option", type="Map")
    for name, value in options.items():
        ET.SubElement(table, "Option", name=name, value=value, type="QString")
        # Versions before 3.26 read the older element only.
        ET.SubElement(layer, "prop", k=name, v=value)
    return symbol


def _colour(web: str) -> str:
    red, green, blue = (int(web[start : start + 2], 16) for start in (1, 3, 5))
    return f"{red},{green},{blue},255"
