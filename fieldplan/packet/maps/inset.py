"""The inset: where the site lies among latitudes and longitudes, or a page in the map."""

import math
from typing import TYPE_CHECKING

import numpy as np

from fieldplan.frame.projection import to_degrees, to_site
from fieldplan.packet.drawing import INK, LINE, SOFT
from fieldplan.packet.maps.ground import compound_path, grounds
from fieldplan.packet.maps.paper import Box, Extent
from fieldplan.packet.maps.tiles import PageSpec
from fieldplan.plan.model import Plan

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_DEGREE_STEPS = (
    0.001, 0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0,
)  # fmt: skip


def draw_inset(figure: "Figure", plan: Plan, *, spec: PageSpec) -> None:
    """Draw the inset into its box.

    Parameters
    ----------
    figure : matplotlib Figure
    plan : Plan
    spec : PageSpec
        Pages of an atlas get the key with their own ground filled; others get a graticule.
    """
    layout, box = spec.layout, spec.layout.inset
    axes = figure.add_axes(
        (
            box.left / layout.width,
            box.bottom / layout.height,
            box.width / layout.width,
            box.height / layout.height,
        ),
        label="inset",
    )
    axes.set_xticks([])
    axes.set_yticks([])
    for spine in axes.spines.values():
        spine.set_visible(True)
    site = _site_extent(plan)
    if spec.tile is not None and spec.atlas is not None:
        _show(axes, _padded(_around_tiles(spec, site), box, times=1.06))
        _draw_outline(axes, plan)
        _draw_key(axes, spec)
        return
    extent = _padded(site, box, times=9.0)
    _show(axes, extent)
    _draw_outline(axes, plan)
    _draw_where(axes, site)
    _draw_graticule(axes, plan, extent=extent)


def _site_extent(plan: Plan) -> Extent:
    """Give the box round the boundary."""
    return Extent(*plan.frame.boundary.bounds)


def _around_tiles(spec: PageSpec, site: Extent) -> Extent:
    """Give the box round the site and all pages."""
    boxes = [site, *(tile.extent for tile in spec.atlas.tiles)] if spec.atlas else [site]
    return Extent(
        min(b.west for b in boxes),
        min(b.south for b in boxes),
        max(b.east for b in boxes),
        max(b.north for b in boxes),
    )


def _padded(extent: Extent, box: Box, *, times: float) -> Extent:
    """Widen an extent so that it fills a box of the inset's shape."""
    metres_per_mm = times * max(extent.width / box.width, extent.height / box.height, 0.01)
    east, north = extent.centre
    half_width, half_height = box.width * metres_per_mm / 2, box.height * metres_per_mm / 2
    return Extent(east - half_width, north - half_height, east + half_width, north + half_height)


def _show(axes: "Axes", extent: Extent) -> None:
    """Set the limits of the inset."""
    axes.set_xlim(extent.west, extent.east)
    axes.set_ylim(extent.south, extent.north)


def _draw_outline(axes: "Axes", plan: Plan) -> None:
    """Draw the boundary, filled in grey."""
    from matplotlib.patches import PathPatch

    outline = grounds(plan.frame)[-1].geometry
    if outline is not None:
        path = compound_path(outline)
        ground = "none" if plan.frame.kind == "line" else "#c9cfd5"
        axes.add_patch(PathPatch(path, facecolor=ground, edgecolor=INK, linewidth=0.6))


def _draw_key(axes: "Axes", spec: PageSpec) -> None:
    """Draw the pages of the atlas, this one filled."""
    from matplotlib.patches import Rectangle

    for tile in spec.atlas.tiles if spec.atlas else ():
        own, ground = tile == spec.tile, tile.extent
        corner = (ground.west, ground.south)
        axes.add_patch(
            Rectangle(
                corner,
                ground.width,
                ground.height,
                linewidth=1.2 if own else 0.5,
                edgecolor=INK,
                facecolor="white" if own else "none",
                alpha=1.0,
                zorder=3 if own else 2,
            )
        )
        axes.text(
            *ground.centre, str(tile.page), fontsize=8 if own else 6, ha="center", va="center",
            weight="bold" if own else "normal", zorder=4,
        )  # fmt: skip


def _draw_where(axes: "Axes", site: Extent) -> None:
    """Ring the site, which is small here."""
    reach = 0.75 * max(site.width, site.height) + 1e-9
    angle = np.linspace(0, 2 * np.pi, 73)
    east, north = site.centre
    axes.plot(east + reach * np.cos(angle), north + reach * np.sin(angle), color=INK, linewidth=0.8)


def _draw_graticule(axes: "Axes", plan: Plan, *, extent: Extent) -> None:
    """Draw round parallels and meridians with their degrees."""
    projection = plan.frame.projection
    columns = np.linspace(extent.west, extent.east, 9)
    rows = np.linspace(extent.south, extent.north, 9)
    easting, northing = np.meshgrid(columns, rows)
    latitude, longitude = to_degrees(projection, easting.ravel(), northing.ravel())
    middle = projection.longitude
    longitude = middle + (np.asarray(longitude) - middle + 180.0) % 360.0 - 180.0
    for values, level in ((np.asarray(latitude), True), (longitude, False)):
        low, high = float(values.min()), float(values.max())
        step = next((s for s in _DEGREE_STEPS if (high - low) / s <= 4.5), 30.0)
        first, last = math.ceil(low / step), math.floor(high / step)
        across = longitude if level else np.asarray(latitude)
        other = np.linspace(across.min(), across.max(), 40)
        for number in range(first, last + 1):
            value = number * step
            fixed = np.full_like(other, value)
            x, y = to_site(projection, *((fixed, other) if level else (other, fixed)))
            axes.plot(x, y, color=LINE, linewidth=0.5, zorder=0.5)
            _name_line(
                axes, extent, line=np.column_stack([x, y]), words=_degrees(value, step, level=level)
            )


def _name_line(axes: "Axes", extent: Extent, *, line: np.ndarray, words: str) -> None:
    """Write the degrees of a line where it first shows, turned to lie along it."""
    margin_x, margin_y = extent.width * 0.14, extent.height * 0.1
    seen = (
        (line[:, 0] > extent.west + margin_x)
        & (line[:, 0] < extent.east - margin_x)
        & (line[:, 1] > extent.south + margin_y)
        & (line[:, 1] < extent.north - margin_y)
    )
    if seen.sum() < 2:
        return
    at = int(np.flatnonzero(seen)[0])
    across, up = line[min(at + 1, len(line) - 1)] - line[at]
    angle = math.degrees(math.atan2(up, across))
    axes.text(
        line[at, 0], line[at, 1], words, fontsize=5.2, color=SOFT, ha="center", va="center",
        rotation=angle, rotation_mode="anchor",
        bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.4},
    )  # fmt: skip


def _degrees(value: float, step: float, *, level: bool) -> str:
    """Write a round latitude or longitude."""
    value = value if level else (value + 180.0) % 360.0 - 180.0
    letters = "NS" if level else "EW"
    decimals = max(0, -math.floor(math.log10(step)))
    return f"{abs(value):.{decimals}f}° {letters[0] if value >= 0 else letters[1]}"
