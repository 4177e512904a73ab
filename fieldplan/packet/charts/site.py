"""The site on a sheet: a small map with every location, drawn as the printed map draws them."""

import math
from typing import TYPE_CHECKING

import numpy as np

from fieldplan.base.document import Figure
from fieldplan.packet.drawing import INK, mm_axes, new_figure, pens, shortened, svg_text
from fieldplan.packet.maps.content import MapContent, plan_content
from fieldplan.packet.maps.ground import draw_grounds, grounds
from fieldplan.packet.maps.legend import draw_entries
from fieldplan.packet.maps.names import draw_names, draw_plate, mark_centres, unplaced_names
from fieldplan.packet.maps.page import draw_marks, ground_axes
from fieldplan.packet.maps.panels import draw_bar, draw_north
from fieldplan.packet.maps.paper import Box, Extent, PageLayout, extent_around
from fieldplan.packet.maps.tiles import PageSpec
from fieldplan.plan.model import Plan

if TYPE_CHECKING:
    from matplotlib.figure import Figure as Canvas

_WIDTH, _LEGEND_WIDTH = 165.0, 56.0
_NAMED = 40
_HEIGHTS = (62.0, 90.0, 118.0)


def site_figure(plan: Plan) -> Figure:
    """Draw the site with all locations, small enough for a sheet.

    Parameters
    ----------
    plan : Plan
        Names stand beside the marks where they all find a place; else the caption sends the
        reader to the printed map.

    Returns
    -------
    Figure
        165 mm wide, with a scale bar.
    """
    content = plan_content(plan)
    spec = _spec(plan, content)
    named = len(content.places) <= _NAMED and not unplaced_names(content, spec)
    shown = content if named else content.without_names()
    with pens():
        drawing = svg_text(_drawing(plan, shown, spec=spec))
    counts = ", ".join(entry.brief for entry in content.legend)
    caption = f"{plan.campaign.plan.site or plan.campaign.plan.title}."
    caption += " Up is grid north of the site plane."
    if not named:
        caption += " The printed map names the locations."
    strata = ", ".join(stratum.name for stratum in plan.frame.strata)
    return Figure(drawing, caption, f"Map of the site ({strata}) with its locations: {counts}.")


def _spec(plan: Plan, content: MapContent) -> PageSpec:
    """Choose the height and the scale: the largest scale, then the flattest figure."""
    marks = np.array([(m.easting, m.northing) for m in content.marks]).reshape(-1, 2)
    west, south, east, north = plan.frame.boundary.bounds
    corners = np.vstack([marks, [(west, south), (east, north)]])
    seen = Extent(*map(float, (*corners.min(axis=0), *corners.max(axis=0))))
    trials = []
    for height in _HEIGHTS:
        ground = Box(0.3, 0.3, _WIDTH - _LEGEND_WIDTH - 3, height - 0.6)
        room = ground.shrunk(7.0)
        needed = 1000 * max(seen.width / room.width, seen.height / room.height, 0.01)
        trials.append((math.ceil(needed), height, ground))
    denominator, height, ground = min(trials, key=lambda trial: trial[:2])
    panel = Box(ground.right + 3, 0.3, _LEGEND_WIDTH - 0.6, height - 0.6)
    layout = PageLayout(_WIDTH, height, panel, ground, panel, panel, panel, panel, panel)
    return PageSpec(
        layout, extent_around(seen.centre, ground, denominator=denominator), denominator
    )


def _drawing(plan: Plan, content: MapContent, *, spec: PageSpec) -> "Canvas":
    """Draw ground, marks and names at the left, legend, bar and north at the right."""
    layout = spec.layout
    figure = new_figure(layout.width, layout.height)
    axes = ground_axes(figure, spec)
    layers = grounds(plan.frame)
    draw_grounds(axes, layers, metres_per_mm=spec.denominator / 1000)
    draw_marks(axes, content, metres_per_mm=spec.denominator / 1000)
    over = mm_axes(figure)
    taken = []
    if plan.frame.boundary_assumed:
        box = layout.ground
        spots = [((box.left + box.right) / 2, y) for y in (box.top - 4, box.bottom + 4)]
        centres = mark_centres(content.marks, spec)
        taken.append(
            draw_plate(over, "ASSUMED BOUNDARY", spots=spots, clear_of=centres, points=7.0)
        )
    draw_names(over, content, spec=spec, taken=taken)
    panel = layout.legend
    draw_entries(
        over,
        [*content.legend, *layers],
        box=Box(panel.left, 18, panel.width, panel.top - 18),
        brief=True,
    )
    draw_bar(over, panel.left + 2, bottom=4.0, denominator=spec.denominator, longest_mm=36.0)
    draw_north(over, panel.right - 4, y=9.0)
    status = shortened(plan.status, 7, width_mm=panel.width - 11, bold=True)
    over.text(panel.left + 2, 12, status, fontsize=7, weight="bold", color=INK)
    return figure
