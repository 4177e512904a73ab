"""One printed page: the ground at a true scale, its marks and names, and all that stands around."""

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldplan.packet.drawing import INK, POINTS_PER_MM, mm_axes, new_figure
from fieldplan.packet.maps.cells import plan_grounds
from fieldplan.packet.maps.content import MapContent, Mark
from fieldplan.packet.maps.distance_marks import draw_distance_marks
from fieldplan.packet.maps.grid import grid_lines, grid_step
from fieldplan.packet.maps.ground import draw_grounds
from fieldplan.packet.maps.inset import draw_inset
from fieldplan.packet.maps.legend import draw_legend
from fieldplan.packet.maps.names import Rectangle, draw_names, draw_plate, mark_centres
from fieldplan.packet.maps.panels import draw_notes, draw_scale, draw_title
from fieldplan.packet.maps.ticks import draw_ticks
from fieldplan.packet.maps.tiles import Atlas, PageSpec
from fieldplan.plan.model import Plan

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_ALONG = (0.5, 0.35, 0.65, 0.2, 0.8, 0.42, 0.58, 0.28, 0.72)


def draw_page(
    plan: Plan, content: MapContent, *, spec: PageSpec
) -> tuple["Figure", tuple[str, ...]]:
    """Draw one page.

    Parameters
    ----------
    plan : Plan
    content : MapContent
        The marks; the key page shows them without names.
    spec : PageSpec

    Returns
    -------
    figure : matplotlib Figure
        At its true size.
    unplaced : tuple of str
        Names for which no free place was found; they are listed in the notes panel.
    """
    layout = spec.layout
    figure = new_figure(layout.width, layout.height)
    page = mm_axes(figure)
    shown = content.without_names() if spec.is_key else content
    axes = ground_axes(figure, spec)
    layers = plan_grounds(plan)
    draw_grounds(axes, layers, metres_per_mm=spec.denominator / 1000)
    step = grid_step(spec.extent, spec.denominator)
    grid = grid_lines(plan.frame.projection, spec.extent, step=step)
    draw_ticks(page, axes, plan=plan, spec=spec, grid=grid)
    if spec.is_key and spec.atlas is not None:
        _draw_tiles(axes, spec.atlas)
    draw_marks(axes, shown, metres_per_mm=spec.denominator / 1000)
    over = mm_axes(figure)  # names lie above the ground
    centres = mark_centres(shown.marks, spec)
    taken = _draw_stamp(over, plan, spec=spec, centres=centres) + _draw_neighbours(
        over, spec, centres=centres
    )
    taken += draw_distance_marks(over, plan.frame, spec=spec)
    unplaced = draw_names(over, shown, spec=spec, taken=taken)
    draw_title(page, plan, title=content.title, spec=spec)
    draw_scale(page, plan, spec=spec, grid=grid)
    draw_legend(page, content, layers=layers, box=layout.legend, grid=grid)
    draw_inset(figure, plan, spec=spec)
    draw_notes(page, plan, content=content, spec=spec, unplaced=unplaced)
    return figure, unplaced


def ground_axes(figure: "Figure", spec: PageSpec) -> "Axes":
    """Make axes over the map's box whose units are site metres at the exact scale."""
    layout, box, extent = spec.layout, spec.layout.ground, spec.extent
    axes = figure.add_axes(
        (
            box.left / layout.width,
            box.bottom / layout.height,
            box.width / layout.width,
            box.height / layout.height,
        ),
        label="ground",
    )
    axes.set_xlim(extent.west, extent.east)
    axes.set_ylim(extent.south, extent.north)
    axes.set_xticks([])
    axes.set_yticks([])
    for spine in axes.spines.values():
        spine.set_visible(True)
        spine.set_linewidth(0.9)
    return axes


def draw_marks(axes: "Axes", content: MapContent, *, metres_per_mm: float) -> None:
    """Draw arrows of 3 mm and more, then the marks of one pen together, those in front last."""
    for arrow in content.arrows:
        if arrow.length < 3.0 * metres_per_mm:
            continue
        axes.annotate(
            "",
            (arrow.to_easting, arrow.to_northing),
            (arrow.from_easting, arrow.from_northing),
            arrowprops={"arrowstyle": "-|>", "linewidth": 0.9, "color": INK, "shrinkA": 0},
            zorder=4.5,
        )
    for front, pen in dict.fromkeys((m.front, m.pen) for m in sorted(content.marks, key=_front)):
        here = np.array(
            [(m.easting, m.northing) for m in content.marks if (m.front, m.pen) == (front, pen)]
        )
        axes.plot(
            here[:, 0], here[:, 1], linestyle="none", marker=pen.marker,
            markersize=pen.size_mm * POINTS_PER_MM, markerfacecolor=pen.face,
            markeredgecolor=pen.edge, markeredgewidth=pen.edge_width, zorder=5.0 + front,
        )  # fmt: skip


def _front(mark: Mark) -> int:
    """Order marks from back to front."""
    return mark.front


def _draw_stamp(
    over: "Axes", plan: Plan, *, spec: PageSpec, centres: NDArray[np.float64]
) -> list[Rectangle]:
    """Stamp a boundary that was assumed, on the map itself."""
    if not plan.frame.boundary_assumed:
        return []
    box = spec.layout.ground
    middle = (box.left + box.right) / 2
    spots = [(middle + 33 * side, y) for y in (box.top - 5, box.bottom + 5) for side in (0, 1, -1)]
    words = "ASSUMED BOUNDARY: not surveyed, not from a record"
    return [draw_plate(over, words, spots=spots, clear_of=centres)]


def _draw_neighbours(
    over: "Axes", spec: PageSpec, *, centres: NDArray[np.float64]
) -> list[Rectangle]:
    """Say at the edges of a page which page goes on there."""
    if spec.atlas is None or spec.tile is None:
        return []
    box = spec.layout.ground
    level = [box.left + share * box.width for share in _ALONG]
    upright = [box.bottom + share * box.height for share in _ALONG]
    edges = (
        (1, 0, [(x, box.top - 2.6) for x in level]),
        (-1, 0, [(x, box.bottom + 2.6) for x in level]),
        (0, -1, [(box.left + 7.5, y) for y in upright]),
        (0, 1, [(box.right - 7.5, y) for y in upright]),
    )
    plates = []
    for row, column, spots in edges:
        number = spec.atlas.beside(spec.tile, row, column=column)
        if number is not None:
            words = f"page {number}"
            plates.append(draw_plate(over, words, spots=spots, clear_of=centres, points=6.5))
    return plates


def _draw_tiles(axes: "Axes", atlas: Atlas) -> None:
    """Draw the ground of every further page on the key, its number behind the marks."""
    from matplotlib.patches import Rectangle as Patch

    for tile in atlas.tiles:
        ground = tile.extent
        axes.add_patch(
            Patch(
                (ground.west, ground.south),
                ground.width,
                ground.height,
                fill=False,
                edgecolor=INK,
                linewidth=0.8,
                linestyle=(0, (5, 2)),
                zorder=3.5,
            )
        )
        axes.text(
            *ground.centre, str(tile.page), fontsize=18, weight="bold", ha="center",
            va="center", zorder=4, alpha=0.6, clip_on=True,
        )  # fmt: skip
