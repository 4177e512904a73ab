"""The ground of a map: boundary, strata and exclusions, told apart by hatching alone."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from fieldplan.frame.model import Frame
from fieldplan.frame.plane import GRID_M
from fieldplan.packet.drawing import INK
from fieldplan.packet.maps.palette import stratum_fill

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.path import Path

_HATCHES = {
    "plain": "", "dots": "..", "rising": "//", "level": "--", "upright": "||", "falling": "\\\\",
    "crosses": "++", "rings": "oo",
}  # fmt: skip
_DENSITIES = 3
DIFFERENT_FILLS = len(_HATCHES) * _DENSITIES
"""Strata that the eye can tell apart by ground and hatch; after so many the fills come again."""


@dataclass(frozen=True)
class Ground:
    """One sort of ground, as drawn on the map and in its legend."""

    geometry: BaseGeometry | None
    words: str
    brief: str
    style: dict[str, Any]


def grounds(frame: Frame) -> tuple[Ground, ...]:
    """List what is drawn under the marks, in drawing order.

    Parameters
    ----------
    frame : Frame
        Of an area: strata, exclusions, the boundary. Of a list: the outline of its units. Of
        lines: strata, what was left out, and all of them whole.

    Returns
    -------
    tuple of Ground
        With the words for the legend.
    """
    if frame.kind == "line":
        return _lines(frame)
    layers = []
    many = len(frame.strata) > 1
    for number, stratum in enumerate(frame.strata):
        if stratum.geometry is None:
            continue
        words = f"stratum: {stratum.name}" if many else "population, net of what is left out"
        brief = stratum.name if many else "population"
        style = _stratum_style(number) if many else _WHOLE
        layers.append(Ground(stratum.geometry, words, brief, style))
    for number, (reason, geometry) in enumerate(_excluded(frame).items()):
        style = _LEFT_OUT | {"hatch": _CROSSED[number % len(_CROSSED)]}
        layers.append(Ground(geometry, f"left out: {reason}", f"out: {reason}", style))
    return (*layers, _outline(frame))


_DASHES = ("-", (0, (2.6, 0.6)), (0, (2.2, 0.5, 0.5, 0.5)), (0, (1.0, 0.5)))
_LEFT_OUT_DASHES = ((0, (1.0, 1.0)), (0, (2.4, 1.6)), (0, (0.5, 1.4)))


def _lines(frame: Frame) -> tuple[Ground, ...]:
    """List the reaches of strata, the reaches left out, and last the lines as they were drawn."""
    layers = []
    many = len(frame.strata) > 1
    for number, stratum in enumerate(frame.strata):
        words = f"stratum: {stratum.name}" if many else "the population: lines net of what is out"
        colour = stratum_fill(number).line if many else "#7d93a8"
        style = _line_style(colour, 2.6, _DASHES[number % len(_DASHES)], 1.5)
        layers.append(Ground(stratum.geometry, words, stratum.name if many else "lines", style))
    reasons = dict.fromkeys(entry.reason for entry in frame.excluded)
    for number, reason in enumerate(reasons):
        shapes = [entry.geometry for entry in frame.excluded if entry.reason == reason]
        dashes = _LEFT_OUT_DASHES[number % len(_LEFT_OUT_DASHES)]
        style = _line_style(INK, 1.7, dashes, 2.0)
        whole = shapely.union_all(shapes)
        layers.append(Ground(whole, f"left out: {reason}", f"out: {reason}", style))
    ends = frame.population.inset_loss > 0
    words = "as drawn; alone: left out at an end" if ends else "lines as drawn"
    style = _line_style(INK, 0.7, "-", 1.0)
    return (*layers, Ground(frame.boundary, words, "as drawn", style))


def _line_style(colour: str, width: float, dashes: Any, depth: float) -> dict[str, Any]:
    return {
        "facecolor": "none",
        "edgecolor": colour,
        "linewidth": width,
        "linestyle": dashes,
        "zorder": depth,
        "capstyle": "butt",
    }


def _stratum_style(number: int) -> dict[str, Any]:
    """Choose ground and hatch; after eight strata they come again, the hatch denser.

    A hatch four times as dense would read as grey, and its lines grow with the square of that.
    """
    fill = stratum_fill(number)
    return {
        "facecolor": fill.ground,
        "edgecolor": _paled(fill.line),
        "hatch": _hatch(fill.pattern, number // 8 % _DENSITIES),
        "linewidth": 0.6,
        "zorder": 1.0,
    }


def _hatch(pattern: str, again: int) -> str:
    """Choose a hatch, denser each time it comes again; a plain ground then gets wide rings."""
    return _HATCHES[pattern] * (1 + again) if _HATCHES[pattern] else "O" * again


def _paled(colour: str) -> str:
    """Mix a colour with as much white, so that names above the hatch stay readable."""
    parts = (int(colour[at : at + 2], 16) for at in (1, 3, 5))
    return "#" + "".join(f"{(part + 255) // 2:02x}" for part in parts)


_WHOLE: dict[str, Any] = {
    "facecolor": "#f4f5f6", "edgecolor": "#c9cfd5", "linewidth": 0.4, "zorder": 1.0,
}  # fmt: skip
_CROSSED = ("xxxx", "++++", "////", "****")
_LEFT_OUT: dict[str, Any] = {
    "facecolor": "#d4d8dc", "edgecolor": INK, "linewidth": 0.6, "zorder": 2.0,
}  # fmt: skip


def _excluded(frame: Frame) -> dict[str, BaseGeometry]:
    """Join exclusions that have one reason, as far as they lie on the site."""
    reasons = dict.fromkeys(entry.reason for entry in frame.excluded)
    return {
        reason: shapely.intersection(
            shapely.union_all(
                [e.geometry for e in frame.excluded if e.reason == reason], grid_size=GRID_M
            ),
            frame.boundary,
        )
        for reason in reasons
    }


def _outline(frame: Frame) -> Ground:
    """Choose the line round the site and what the legend says of it."""
    style: dict[str, Any] = {"facecolor": "none", "edgecolor": INK, "linewidth": 1.4, "zorder": 3.0}
    if frame.kind == "list":
        style |= {"linewidth": 0.8, "linestyle": (0, (2, 2))}
        return Ground(frame.boundary, "outline of the list, for orientation only", "outline", style)
    if frame.boundary_assumed:
        style |= {"linestyle": (0, (6, 3))}
        return Ground(frame.boundary, "ASSUMED boundary", "ASSUMED boundary", style)
    return Ground(frame.boundary, "site boundary", "site boundary", style)


def draw_grounds(axes: "Axes", layers: tuple[Ground, ...], *, metres_per_mm: float) -> None:
    """Draw grounds on axes in site metres: what the axes show, no finer than the eye sees.

    Parameters
    ----------
    axes : matplotlib Axes
        Their limits are set already.
    layers : tuple of Ground
        Neighbours in the list with one style are drawn with one pen.
    metres_per_mm : float
        The scale, so that nothing above 0.05 mm on paper is lost.
    """
    from matplotlib.patches import PathPatch

    (west, east), (south, north) = axes.get_xlim(), axes.get_ylim()
    window = shapely.box(west, south, east, north)
    for style, geometries in _by_style(layers, window):
        seen = shapely.simplify(geometries, 0.05 * metres_per_mm, preserve_topology=True)
        # Not add_patch, which takes the patch's measure to fit limits that are fixed here.
        axes.add_artist(PathPatch(compound_path(list(seen)), **style))


def _by_style(
    layers: tuple[Ground, ...], window: BaseGeometry
) -> list[tuple[dict[str, Any], list[BaseGeometry]]]:
    """Gather grounds of one style; strata do not overlap, so their order tells nothing."""
    gathered: dict[str, tuple[dict[str, Any], list[BaseGeometry]]] = {}
    for layer in layers:
        if layer.geometry is not None and shapely.intersects(window, layer.geometry):
            gathered.setdefault(repr(layer.style), (layer.style, []))[1].append(layer.geometry)
    return list(gathered.values())


def compound_path(geometry: BaseGeometry | Sequence[BaseGeometry]) -> "Path":
    """Turn polygons with holes into one path; holes run against their shells, so they stay open.

    Parameters
    ----------
    geometry : BaseGeometry or sequence of BaseGeometry
        Polygons or multipolygons, or lines, whose paths stay open; points are left out.

    Returns
    -------
    matplotlib Path
    """
    from matplotlib.path import Path

    vertices: list[np.ndarray] = []
    codes: list[np.ndarray] = []
    for part in shapely.get_parts(geometry):
        if part.geom_type == "LineString" and not part.is_empty:
            corners = shapely.get_coordinates(part)
            code = np.full(len(corners), Path.LINETO, dtype=Path.code_type)
            code[0] = Path.MOVETO
            vertices.append(corners)
            codes.append(code)
        if part.geom_type != "Polygon" or part.is_empty:
            continue
        for ring in shapely.get_rings(shapely.orient_polygons(part)):
            corners = shapely.get_coordinates(ring)
            code = np.full(len(corners), Path.LINETO, dtype=Path.code_type)
            code[0], code[-1] = Path.MOVETO, Path.CLOSEPOLY
            vertices.append(corners)
            codes.append(code)
    if not vertices:
        return Path(np.empty((0, 2)))
    return Path(np.concatenate(vertices), np.concatenate(codes))
