"""Polygons joined and cut on the millimetre grid, with the sum of the parts checked every time."""

from collections.abc import Sequence

import shapely
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError
from fieldplan.base.units import area_in_words
from fieldplan.frame.plane import GRID_M, polygons_of


def joined(shapes: Sequence[BaseGeometry], label: str) -> BaseGeometry:
    """Join polygons to one, their corners brought to the millimetre grid first.

    Parameters
    ----------
    shapes : sequence of BaseGeometry
        Valid polygons in site metres; they may touch or overlap.
    label : str
        What is joined, for messages.

    Returns
    -------
    BaseGeometry
        On the millimetre grid.

    Raises
    ------
    FrameError
        The joined area is not what its parts make.

    Notes
    -----
    Corners that neighbours share may differ in their last bit. A join in full floating-point
    numbers can then lose whole parts without a word; on a fixed grid such corners are one. What
    comes out is checked by the bounds of inclusion and exclusion: at most the sum of the parts,
    at least that sum less the overlap of every two.

    Examples
    --------
    >>> joined([shapely.box(0, 0, 1, 1), shapely.box(1 + 1e-12, 0, 2, 1)], "cells").area
    2.0
    """
    whole = _polygon(shapely.union_all(list(shapes), grid_size=GRID_M))
    parts = area_m2(shapes)
    allowed = allowed_m2(*shapes)
    missing = parts - whole.area
    if missing > allowed:
        # Some of it is ground that two parts share and that is counted once; the rest is lost.
        parts = whole.area + max(missing - _overlaps(shapes), 0.0)
    check_sum(whole.area, parts, allowed=allowed, label=label)
    return whole


def parted(whole: BaseGeometry, by: BaseGeometry, label: str) -> tuple[BaseGeometry, BaseGeometry]:
    """Cut a polygon in two: what lies inside another one, and what lies outside it.

    Parameters
    ----------
    whole, by : BaseGeometry
        Valid polygons in site metres.
    label : str
        What is cut, for messages.

    Returns
    -------
    inside, outside : BaseGeometry
        On the millimetre grid; together they are ``whole``.

    Raises
    ------
    FrameError
        The two do not sum to the whole.

    Examples
    --------
    >>> [part.area for part in parted(shapely.box(0, 0, 4, 1), shapely.box(3, 0, 9, 9), "yard")]
    [1.0, 3.0]
    """
    inside = common(whole, by)
    outside = _polygon(shapely.difference(whole, by, grid_size=GRID_M))
    check_sum(
        whole.area,
        inside.area + outside.area,
        allowed=allowed_m2(whole, inside, outside),
        label=label,
    )
    return inside, outside


def common(first: BaseGeometry, second: BaseGeometry) -> BaseGeometry:
    """Return the ground that two polygons share, once both are on the millimetre grid.

    Examples
    --------
    >>> common(shapely.box(0, 0, 1, 1), shapely.box(1 - 1e-12, 0, 2, 1)).area
    0.0
    """
    return _polygon(shapely.intersection(first, second, grid_size=GRID_M))


def wide_parts(geometry: BaseGeometry) -> list[shapely.Polygon]:
    """List the polygons wider than the grid; thinner ones come from rounding to it.

    Examples
    --------
    >>> wide_parts(shapely.box(0, 0, 100, 0.001)), len(wide_parts(shapely.box(0, 0, 100, 0.003)))
    ([], 1)
    """
    return [part for part in polygons_of(geometry) if 2 * part.area / part.length > GRID_M]


def area_m2(shapes: Sequence[BaseGeometry]) -> float:
    """Sum the areas of polygons, in square metres."""
    return float(shapely.area(list(shapes)).sum())


def allowed_m2(*shapes: BaseGeometry) -> float:
    """Return the area that rounding to the grid may move: 1 mm along every outline."""
    return GRID_M * float(shapely.length(list(shapes)).sum())


def check_sum(whole_m2: float, parts_m2: float, *, allowed: float, label: str) -> None:
    """Refuse a whole that its parts do not make.

    Parameters
    ----------
    whole_m2, parts_m2 : float
        The area as a whole, and the sum of its parts.
    allowed : float
        Difference that rounding to the grid explains, square metres; see `allowed_m2`.
    label : str
        What was measured, for the message.

    Raises
    ------
    FrameError
        They differ by more.
    """
    apart = abs(whole_m2 - parts_m2)
    if apart <= allowed:
        return
    message = (
        f"{label}: the parts do not make the whole: they sum to {area_in_words(parts_m2)}, the "
        f"whole has {area_in_words(whole_m2)}; {area_in_words(apart)} differ, and rounding to the "
        f"millimetre explains {area_in_words(allowed)} at most. Export the file with its "
        "coordinates rounded (degrees to 7 decimals), so that neighbours share their corners, or "
        "draw the borders again."
    )
    raise FrameError(message)


def _polygon(geometry: BaseGeometry) -> BaseGeometry:
    """Drop the points and lines where polygons only touch."""
    parts = polygons_of(geometry)
    return parts[0] if len(parts) == 1 else shapely.MultiPolygon(parts)


def _overlaps(shapes: Sequence[BaseGeometry]) -> float:
    """Sum the overlap of every two shapes."""
    first, second = shapely.STRtree(list(shapes)).query(list(shapes), predicate="intersects")
    pairs = zip(first.tolist(), second.tolist(), strict=True)
    return area_m2([common(shapes[a], shapes[b]) for a, b in pairs if a < b])
