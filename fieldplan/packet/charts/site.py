"""The site on a sheet: a small map with every location, drawn as the printed map draws them."""

import math
from typing import TYPE_CHECKING

import numpy as np

from fieldplan.base.document import Figure
from fieldplan.packet.drawing import NARROW_MM, WIDE_MM, mm_axes, new_figure, pens, svg_text
from fieldplan.packet.maps.cells import plan_grounds
from fieldplan.packet.maps.content import Entry, MapContent, plan_content
from fieldplan.packet.maps.distance_marks import draw_distance_marks
from fieldplan.packet.maps.ground import Ground, draw_grounds
from fieldplan.packet.maps.legend import draw_entry, within
from fieldplan.packet.maps.names import draw_names, draw_plate, mark_centres, unplaced_names
from fieldplan.packet.maps.page import draw_marks, ground_axes
from fieldplan.packet.maps.panels import draw_bar, draw_north
from fieldplan.packet.maps.paper import Box, Extent, PageLayout, extent_around
from fieldplan.packet.maps.tiles import PageSpec
from fieldplan.plan.model import Plan

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

_LEGEND_MM, _BAR_MM, _POINTS = 50.0, 17.0, 7.6
_NAMED = 40
_HEIGHTS = (62.0, 78.0, 94.0)


def site_figure(plan: Plan) -> Figure:
    """Draw the site with all locations, small enough for the first page of a sheet.

    Parameters
    ----------
    plan : Plan
        Names stand beside the marks where they all find a place; else the caption sends the
        reader to the printed map.

    Returns
    -------
    Figure
        165 mm wide, and as narrow as a phone, with a scale bar.
    """
    content = plan_content(plan)
    spec, slim = _spec(plan, content), _narrow_spec(plan, content)
    named = _all_named(content, spec)
    with pens():
        wide, narrow = (
            svg_text(
                _drawing(
                    plan, content if _all_named(content, s) else content.without_names(), spec=s
                )
            )
            for s in (spec, slim)
        )
    counts = ", ".join(entry.brief for entry in content.legend)
    caption = f"{plan.campaign.plan.site or plan.campaign.plan.title}."
    caption += " Up is grid north of the site plane."
    if not named:
        caption += " The printed map names the locations."
    strata = ", ".join(stratum.name for stratum in plan.frame.strata)
    words = f"Map of the site ({strata}) with its locations: {counts}."
    return Figure(wide, caption, words, narrow_svg=narrow)


def _all_named(content: MapContent, spec: PageSpec) -> bool:
    """Tell whether there is room for every name."""
    return len(content.places) <= _NAMED and not unplaced_names(content, spec)


def _spec(plan: Plan, content: MapContent) -> PageSpec:
    """Lay the map beside its legend: the largest scale, then the flattest figure."""
    boxes = [Box(0.3, 0.3, WIDE_MM - _LEGEND_MM - 3, height - 0.6) for height in _HEIGHTS]
    denominator, ground, extent = _fitted(plan, content, boxes)
    panel = Box(ground.right + 3, 0.3, _LEGEND_MM - 0.6, ground.height)
    height = ground.height + 0.6
    layout = PageLayout(WIDE_MM, height, panel, ground, panel, panel, panel, panel, panel)
    return PageSpec(layout, extent, denominator)


def _narrow_spec(plan: Plan, content: MapContent) -> PageSpec:
    """Lay the map above its legend, as narrow as a phone."""
    rows = len(content.legend) + len(plan_grounds(plan))
    panel = Box(1.0, 0.3, NARROW_MM - 2.0, 6.0 * rows + _BAR_MM)
    boxes = [
        Box(0.3, panel.top + 2, NARROW_MM - 0.6, height) for height in (48.0, 64.0, 80.0, 100.0)
    ]
    denominator, ground, extent = _fitted(plan, content, boxes)
    height = ground.top + 0.3
    layout = PageLayout(NARROW_MM, height, panel, ground, panel, panel, panel, panel, panel)
    return PageSpec(layout, extent, denominator)


def _fitted(plan: Plan, content: MapContent, boxes: list[Box]) -> tuple[int, Box, Extent]:
    """Choose of several boxes the first that shows the site at the largest scale."""
    marks = np.array([(m.easting, m.northing) for m in content.marks]).reshape(-1, 2)
    west, south, east, north = plan.frame.boundary.bounds
    corners = np.vstack([marks, [(west, south), (east, north)]])
    seen = Extent(*map(float, (*corners.min(axis=0), *corners.max(axis=0))))
    trials = []
    for box in boxes:
        room = box.shrunk(6.0)
        needed = 1000 * max(seen.width / room.width, seen.height / room.height, 0.01)
        trials.append((math.ceil(needed), box))
    denominator, ground = min(trials, key=lambda trial: (trial[0], trial[1].height))
    return denominator, ground, extent_around(seen.centre, ground, denominator=denominator)


def _drawing(plan: Plan, content: MapContent, *, spec: PageSpec) -> "Canvas":
    """Draw ground, marks and names, then legend, bar and north in their panel."""
    layout = spec.layout
    figure = new_figure(layout.width, layout.height)
    axes = ground_axes(figure, spec)
    layers = plan_grounds(plan)
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
    taken += draw_distance_marks(over, plan.frame, spec=spec)
    draw_names(over, content, spec=spec, taken=taken)
    _key(over, [*content.legend, *layers], spec=spec)
    return figure


def _key(over: "Axes", entries: list[Entry | Ground], *, spec: PageSpec) -> None:
    """Spread the legend over its panel, with the scale bar and the north arrow below it."""
    panel = spec.layout.legend
    room = panel.height - _BAR_MM
    row = min(7.5, max(4.2, room / len(entries)))
    shown = within(entries, int(room / row + 1e-9))
    for number, entry in enumerate(shown):
        draw_entry(
            over, entry, entry.brief, spot=(panel.left, panel.top - (number + 0.5) * row),
            width_mm=panel.width - 8, points=_POINTS, row_mm=row,
        )  # fmt: skip
    draw_bar(
        over, panel.left + 2, bottom=panel.bottom + 3, denominator=spec.denominator, longest_mm=30.0
    )
    draw_north(over, panel.right - 4, y=panel.bottom + 9.5)
