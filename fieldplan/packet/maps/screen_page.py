"""What stands round the screen map: title block, key, patterns, north arrow, foot."""

from html import escape

from fieldplan.frame.projection import site_zone, utm, utm_in_words
from fieldplan.packet.exchange.outlines import Outline
from fieldplan.packet.exchange.plain_text import plain
from fieldplan.packet.maps.cells import CELL_LINE, cell_words
from fieldplan.packet.maps.palette import (
    BOUNDARY_LINE,
    EXCLUDED_LINE,
    LINE_DASHES,
    MARKS,
    STRATUM_FILLS,
    Mark,
    StratumFill,
    stratum_fill,
)
from fieldplan.plan.model import Plan

_PATTERNS = {
    "plain": "",
    "dots": '<circle cx="5" cy="5" r="1.4" fill="{line}" fill-opacity=".55"/>',
    "rising": '<path d="M-2 2 L2 -2 M0 12 L12 0 M10 14 L14 10" {stroke}/>',
    "level": '<path d="M0 6 H12" {stroke}/>',
    "upright": '<path d="M6 0 V12" {stroke}/>',
    "falling": '<path d="M-2 10 L2 14 M0 0 L12 12 M10 -2 L14 2" {stroke}/>',
    "crosses": '<path d="M3 6 H9 M6 3 V9" {stroke}/>',
    "rings": '<circle cx="6" cy="6" r="2.6" fill="none" {stroke}/>',
}


def said(text: str) -> str:
    """Give typed text as inert HTML whose writing direction stays inside it."""
    return f"<bdi>{escape(plain(text))}</bdi>"


def title_block(plan: Plan) -> str:
    """Write the bar above the map: title, plan, revision, status, datum."""
    centre = plan.frame.projection
    grid = utm(centre.latitude, centre.longitude, zone=site_zone(centre))
    assumed = '<span class="assumed">Boundary ASSUMED</span>'
    site = plan.campaign.plan.site
    return f"""<header class="title-block">
<h1>{said(plan.campaign.plan.title)}</h1>
<span class="revision">{said(plan.revision_name)}</span>
<span class="status">{said(plan.status)}</span>
{assumed if plan.frame.boundary_assumed else ""}
<span class="small">{said(site) + ". " if site else ""}Map made {plan.made_on.isoformat()}. \
Datum WGS 84 (EPSG:4326). Grid: {escape(utm_in_words(grid))}. Up is true north.</span>
</header>"""


def foot(plan: Plan) -> str:
    """Write the bars below the map: measuring, coordinates, and where the outlines come from."""
    lines = "".join(f"<li>{said(line)}</li>" for line in plan.frame.sources)
    sources = f"<details><summary>Sources</summary><ul>{lines}</ul></details>" if lines else ""
    return f"""<div id="measure" role="group" aria-label="Measuring" hidden>
<output aria-live="polite"></output>
<button type="button" name="undo">Undo</button><button type="button" name="clear">Clear</button>\
<button type="button" name="end">End</button></div>
<footer class="foot"><span id="readout">Point at the map, or press it, to read coordinates.</span>
{sources}</footer>"""


def drawings() -> str:
    """Give the north arrow and the ruler as templates that the script puts on the map."""
    return """<template id="north-arrow"><svg viewBox="0 0 30 46" role="img" \
aria-label="North is up"><path d="M15 3 L25 31 L15 25 L5 31 Z" fill="#fff" stroke="#111" \
stroke-width="1.6"/><path d="M15 3 L15 25 L5 31 Z" fill="#111"/><text x="15" y="45" \
text-anchor="middle" font-size="14" font-weight="700" fill="#111">N</text></svg></template>
<template id="ruler"><svg viewBox="0 0 24 24" width="24" height="24" aria-hidden="true">\
<path d="M2 16 L16 2 L22 8 L8 22 Z M6 12 l2.5 2.5 M9 9 l3.5 3.5 M12 6 l2.5 2.5" fill="none" \
stroke="currentColor" stroke-width="1.6"/></svg></template>"""


def pattern_definitions() -> str:
    """Define the fills of strata and the hatching of exclusions."""
    tiles = [_pattern(f"{fill.pattern}-{n}", fill) for n, fill in enumerate(STRATUM_FILLS)]
    hatch = (
        '<pattern id="hatch" width="9" height="9" patternUnits="userSpaceOnUse">'
        '<rect width="9" height="9" fill="#ffffff" fill-opacity=".8"/>'
        f'<path d="M-2 2 L2 -2 M0 9 L9 0 M7 11 L11 7 M-2 7 L2 11 M0 0 L9 9 M7 -2 L11 2" '
        f'stroke="{EXCLUDED_LINE}" stroke-width="1"/></pattern>'
    )
    body = "".join(tiles) + hatch
    return (
        '<svg width="0" height="0" style="position:absolute" aria-hidden="true">'
        f"<defs>{body}</defs></svg>"
    )


def _pattern(name: str, fill: StratumFill) -> str:
    size = 10 if fill.pattern == "dots" else 12
    stroke = f'stroke="{fill.line}" stroke-opacity=".5" stroke-width="1.2"'
    drawn = _PATTERNS[fill.pattern].format(line=fill.line, stroke=stroke)
    return (
        f'<pattern id="{name}" width="{size}" height="{size}" patternUnits="userSpaceOnUse">'
        f'<rect width="{size}" height="{size}" fill="{fill.ground}"/>{drawn}</pattern>'
    )


def layer_titles(plan: Plan, shapes: tuple[Outline, ...]) -> dict[str, str]:
    """Word the layers of a map as rows of its key, by layer.

    Parameters
    ----------
    plan : Plan
    shapes : tuple of Outline

    Returns
    -------
    dict of str to str
        HTML with typed text escaped; a layer without content has no entry.
    """
    titles: dict[str, str] = {}
    for name, mark in MARKS.items():
        count = len(plan.locations.of_class(name))
        if count:
            titles[name] = _point_row(mark, f"{mark.title} ({count})")
    titles |= _outline_titles(plan, shapes)
    if plan.locations.places[0].cell:
        titles["cell"] = _row(_cell_swatch(), cell_words(plan).capitalize())
    titles["grid"] = "Coordinate grid"
    titles["online"] = "Online map (needs a network)"
    return titles


def _outline_titles(plan: Plan, shapes: tuple[Outline, ...]) -> dict[str, str]:
    if plan.frame.kind == "line":
        return _line_titles(plan, shapes)
    titles = {"boundary": _row(_line_swatch(plan), _boundary_words(plan))}
    strata = [shape for shape in shapes if shape.kind == "stratum"]
    excluded = [shape for shape in shapes if shape.kind == "excluded"]
    counts = {size.stratum: size.planned for size in plan.size.strata}
    if strata:
        rows = [
            _row(_box_swatch(f"{fill.pattern}-{n % 8}", fill.line), _stratum_words(shape, counts))
            for n, shape in enumerate(strata)
            for fill in [stratum_fill(n)]
        ]
        titles["stratum"] = _group("Strata" if len(strata) > 1 else "Sampled area", rows)
    if excluded:
        rows = [
            _row(_box_swatch("hatch", EXCLUDED_LINE), f"{said(s.name)}, {hectares(s.area_m2)}")
            for s in excluded
        ]
        titles["excluded"] = _group("Excluded", rows)
    return titles


def _line_titles(plan: Plan, shapes: tuple[Outline, ...]) -> dict[str, str]:
    counts = {size.stratum: size.planned for size in plan.size.strata}
    found: dict[str, list[str]] = {"boundary": [], "stratum": [], "excluded": []}
    for shape in shapes:
        if shape.kind == "boundary":
            swatch, words = _dashed_swatch(BOUNDARY_LINE, 1.5, None), "Lines as drawn"
        elif shape.kind == "stratum":
            number = len(found["stratum"])
            dashes = LINE_DASHES[number % len(LINE_DASHES)]
            swatch = _dashed_swatch(stratum_fill(number).line, 6, dashes)
            words = _stratum_words(shape, counts)
        else:
            swatch = _dashed_swatch(EXCLUDED_LINE, 4, "3 4")
            words = f"{said(shape.name)}, {measured(shape)}"
        found[shape.kind].append(_row(swatch, words))
    groups = {"boundary": "", "excluded": "Excluded",
              "stratum": "Strata" if len(found["stratum"]) > 1 else "Population"}  # fmt: skip
    return {
        kind: _group(groups[kind], rows) if groups[kind] else "".join(rows)
        for kind, rows in found.items()
        if rows
    }


def _dashed_swatch(colour: str, weight: float, dashes: str | None) -> str:
    dashed = f' stroke-dasharray="{dashes}"' if dashes else ""
    return (
        '<span class="swatch"><svg viewBox="0 0 28 18"><path d="M1 9 H27" fill="none" '
        f'stroke="{colour}" stroke-width="{weight:g}"{dashed}/></svg></span>'
    )


def _stratum_words(shape: Outline, counts: dict[str, int]) -> str:
    count = counts.get(shape.name)
    planned = f", {count} locations" if count is not None else ""
    return f"{said(shape.name)}, {measured(shape)}{planned}"


def _boundary_words(plan: Plan) -> str:
    if plan.frame.kind == "list":
        return "Extent of the list, for the map only"
    return "Boundary, ASSUMED" if plan.frame.boundary_assumed else "Boundary"


def measured(shape: Outline) -> str:
    """Write the area of a polygon, or the length of lines."""
    if not shape.length_m:
        return hectares(shape.area_m2)
    if shape.length_m < 1000:
        return f"{shape.length_m:.0f} m"
    return f"{shape.length_m / 1000:.2f} km"


def hectares(square_metres: float) -> str:
    """Write an area in the unit that suits it.

    Examples
    --------
    >>> hectares(400.4), hectares(23600.0)
    ('400 m²', '2.36 ha')
    """
    if square_metres < 10_000:
        return f"{square_metres:.0f} m²"
    return f"{square_metres / 10_000:.2f} ha"


def _group(title: str, rows: list[str]) -> str:
    return f'<span class="group">{title}{"".join(rows)}</span>'


def _row(swatch: str, words: str) -> str:
    return f'<span class="key-row">{swatch}<span>{words}</span></span>'


def _point_row(mark: Mark, words: str) -> str:
    shapes = {
        "circle": '<circle cx="8" cy="8" r="5.5"{paint}/>',
        "square": '<rect x="3" y="3" width="10" height="10"{paint}/>',
        "diamond": '<path d="M8 .8 L15.2 8 L8 15.2 L.8 8 Z"{paint}/>',
    }
    paint = f' fill="{mark.fill}" stroke="{mark.edge}" stroke-width="1.6"'
    drawn = shapes[mark.shape].format(paint=paint)
    swatch = f'<span class="swatch point"><svg viewBox="-1 -1 18 18">{drawn}</svg></span>'
    return _row(swatch, words)


def _box_swatch(pattern: str, line: str) -> str:
    return (
        '<span class="swatch"><svg viewBox="0 0 28 18"><rect x="1" y="1" width="26" height="16" '
        f'fill="url(#{pattern})" stroke="{line}" stroke-width="2"/></svg></span>'
    )


def _cell_swatch() -> str:
    return (
        '<span class="swatch"><svg viewBox="0 0 28 18"><path d="M1 1 H27 V17 H1 Z M15 1 V17" '
        f'fill="none" stroke="{CELL_LINE}" stroke-width="1.2"/></svg></span>'
    )


def _line_swatch(plan: Plan) -> str:
    dashed = plan.frame.boundary_assumed or plan.frame.kind == "list"
    dashes = ' stroke-dasharray="7 5"' if dashed else ""
    return (
        '<span class="swatch"><svg viewBox="0 0 28 18"><path d="M1 9 H27" fill="none" '
        f'stroke="{BOUNDARY_LINE}" stroke-width="3"{dashes}/></svg></span>'
    )
