"""Coordinates outside the frame, crosses inside it."""

from typing import TYPE_CHECKING

from fieldplan.frame.projection import to_degrees
from fieldplan.packet.drawing import INK, SOFT, text_width_mm
from fieldplan.packet.maps.grid import GridLines
from fieldplan.packet.maps.tiles import PageSpec
from fieldplan.plan.model import Plan

if TYPE_CHECKING:
    from matplotlib.axes import Axes

_POINTS = 5.8


def draw_ticks(page: "Axes", axes: "Axes", *, plan: Plan, spec: PageSpec, grid: GridLines) -> None:
    """Draw grid ticks with full coordinates, grid crosses, and degrees at the four corners.

    Parameters
    ----------
    page, axes : matplotlib Axes
        In millimetres, and in site metres.
    plan : Plan
    spec : PageSpec
    grid : GridLines
    """
    if len(grid.crosses):
        axes.plot(
            grid.crosses[:, 0], grid.crosses[:, 1], linestyle="none", marker="+", markersize=6,
            markeredgewidth=0.45, color=SOFT, zorder=2.5,
        )  # fmt: skip
    corner_room = _draw_corners(page, plan, spec=spec)
    box = spec.layout.ground
    ends = dict.fromkeys(("bottom", "top", "left", "right"), -1000000000.0)
    for tick in grid.ticks:
        x, y = spec.on_paper(tick.easting, tick.northing)
        level = tick.edge in {"bottom", "top"}
        out = -1.0 if tick.edge in {"bottom", "left"} else 1.0
        page.plot(
            [x, x if level else x + 1.4 * out],
            [y, y + 1.4 * out if level else y],
            color=INK,
            linewidth=0.7,
        )
        words = f"{tick.value} {tick.axis}"
        half = text_width_mm(words, _POINTS) / 2
        at, start, end = (x, box.left, box.right) if level else (y, box.bottom, box.top)
        room = corner_room if level else 0.0
        fits = start + room + half <= at <= end - room - half
        if not fits or at - half < ends[tick.edge] + 1.5:
            continue
        ends[tick.edge] = at + half
        page.text(
            x if level else x + 2.9 * out, y + 2.9 * out if level else y, words,
            fontsize=_POINTS, ha="center", va="center", rotation=0 if level else 90,
        )  # fmt: skip


def degree_words(latitude: float, longitude: float, *, decimals: int = 5) -> str:
    """Write a place in degrees with hemisphere letters.

    Examples
    --------
    >>> degree_words(52.1, -1.9)
    '52.10000° N 1.90000° W'
    """
    north, east = "N" if latitude >= 0 else "S", "E" if longitude >= 0 else "W"
    return f"{abs(latitude):.{decimals}f}° {north} {abs(longitude):.{decimals}f}° {east}"


def _draw_corners(page: "Axes", plan: Plan, *, spec: PageSpec) -> float:
    """Write the degrees of the frame's corners, and return the room that they take."""
    box, extent = spec.layout.ground, spec.extent
    room = 0.0
    for easting, x, side in ((extent.west, box.left, "left"), (extent.east, box.right, "right")):
        for northing, y in ((extent.south, box.bottom - 2.9), (extent.north, box.top + 2.9)):
            latitude, longitude = to_degrees(plan.frame.projection, easting, northing)
            words = degree_words(float(latitude), float(longitude))
            page.text(x, y, words, fontsize=_POINTS, ha=side, va="center", color=SOFT)
            room = max(room, text_width_mm(words, _POINTS) + 4.0)
    return room
