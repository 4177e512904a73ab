"""Coordinates round the frame: grid metres as a receiver shows them, degrees at the corners."""

import math
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
import pyproj
from numpy.typing import NDArray

from fieldplan.frame.model import SiteProjection
from fieldplan.frame.projection import Utm, site_zone, to_degrees, utm
from fieldplan.packet.maps.paper import Extent

_STEPS = tuple(m * 10**power for power in range(7) for m in (1, 2, 5))


@dataclass(frozen=True)
class Tick:
    """One coordinate on one edge of the frame."""

    edge: str
    easting: float
    northing: float
    value: int
    axis: str


@dataclass(frozen=True)
class GridLines:
    """The grid over an extent: ticks on its edges, crosses inside, and how far it turns."""

    reference: Utm
    step: int
    ticks: tuple[Tick, ...]
    crosses: NDArray[np.float64]
    turn: float
    true_turn: float


def grid_step(extent: Extent, denominator: int, *, wanted_mm: float = 38.0) -> int:
    """Choose a round spacing of 1, 2 or 5 × 10ᵏ metres, about ``wanted_mm`` on paper.

    Examples
    --------
    >>> grid_step(Extent(0, 0, 200, 200), 1000)
    50
    """
    wanted = min(wanted_mm * denominator / 1000, max(extent.width, extent.height) / 2)
    nearest: int = min(_STEPS, key=lambda step: abs(math.log(step / max(wanted, 1.0))))
    return nearest


def grid_lines(projection: SiteProjection, extent: Extent, *, step: int) -> GridLines:
    """Find where the UTM (or polar) grid meets the frame, and its crossings inside.

    Parameters
    ----------
    projection : SiteProjection
        The site's plane.
    extent : Extent
        The ground that the frame shows.
    step : int
        Metres between lines.

    Returns
    -------
    GridLines
        ``crosses`` has shape (n, 2), site metres. ``turn`` is the angle in degrees from up on
        the page to grid north, ``true_turn`` that to true north; clockwise is positive.
    """
    latitude, longitude = to_degrees(projection, *extent.centre)
    zone = site_zone(projection)
    reference = utm(latitude, longitude, zone=zone)
    change = _to_grid(projection.definition, reference.epsg)
    ticks = tuple(
        tick
        for edge in ("bottom", "top", "left", "right")
        for tick in _edge(change, extent, edge=edge, step=step)
    )
    return GridLines(
        reference=reference,
        step=step,
        ticks=ticks,
        crosses=_crossings(change, extent, step=step),
        turn=_turn(change, extent),
        true_turn=_true_turn(projection, extent),
    )


def _edge(change: pyproj.Transformer, extent: Extent, *, edge: str, step: int) -> list[Tick]:
    """Find round eastings on a level edge, round northings on an upright one."""
    share = np.linspace(0.0, 1.0, 65)
    level = edge in {"bottom", "top"}
    if level:
        easting = extent.west + share * extent.width
        northing = np.full_like(share, extent.south if edge == "bottom" else extent.north)
    else:
        easting = np.full_like(share, extent.west if edge == "left" else extent.east)
        northing = extent.south + share * extent.height
    values = np.asarray(change.transform(easting, northing)[0 if level else 1])
    order = np.argsort(values)
    first, last = math.ceil(values.min() / step), math.floor(values.max() / step)
    ticks = []
    for value in range(first * step, last * step + 1, step):
        at = float(np.interp(value, values[order], share[order]))
        ticks.append(
            Tick(
                edge,
                extent.west + at * extent.width if level else float(easting[0]),
                float(northing[0]) if level else extent.south + at * extent.height,
                value,
                "E" if level else "N",
            )
        )
    return ticks


def _crossings(change: pyproj.Transformer, extent: Extent, *, step: int) -> NDArray[np.float64]:
    """List the grid's crossings inside the extent, in site metres."""
    corners = np.array(
        [(e, n) for e in (extent.west, extent.east) for n in (extent.south, extent.north)]
    )
    east, north = (np.asarray(v) for v in change.transform(corners[:, 0], corners[:, 1]))
    columns = np.arange(math.floor(east.min() / step), math.ceil(east.max() / step) + 1) * step
    rows = np.arange(math.floor(north.min() / step), math.ceil(north.max() / step) + 1) * step
    grid_east, grid_north = (values.ravel() for values in np.meshgrid(columns, rows))
    x, y = change.transform(grid_east.astype(float), grid_north.astype(float), direction="INVERSE")
    inside = (x > extent.west) & (x < extent.east) & (y > extent.south) & (y < extent.north)
    return np.column_stack([x[inside], y[inside]])


def _turn(change: pyproj.Transformer, extent: Extent) -> float:
    """Measure the direction of grid north on the page: one step north along the grid."""
    easting, northing = extent.centre
    east, north = change.transform(easting, northing)
    x, y = change.transform(east, north + 1000.0, direction="INVERSE")
    return math.degrees(math.atan2(x - easting, y - northing))


def _true_turn(projection: SiteProjection, extent: Extent) -> float:
    """Measure the direction of true north on the page: a thousandth of a degree north."""
    from fieldplan.frame.projection import to_site

    easting, northing = extent.centre
    latitude, longitude = to_degrees(projection, easting, northing)
    step = 0.001 if latitude < 89.99 else -0.001
    x, y = to_site(projection, latitude + step, longitude)
    return math.degrees(math.atan2((x - easting) * step, (y - northing) * step))


@lru_cache(maxsize=32)
def _to_grid(definition: str, epsg: int) -> pyproj.Transformer:
    """Make the way from the site's plane to a grid; both are on WGS 84."""
    pyproj.network.set_network_enabled(active=False)  # type: ignore[attr-defined]
    return pyproj.Transformer.from_crs(definition, f"EPSG:{epsg}", always_xy=True)
