"""Compact cells of nearly equal area: a stratum cut into as many parts as it gets locations.

Everything that decides where a cell ends is whole-number arithmetic, so that the cut, and with it
every location drawn inside, is the same on every machine and with every version of the libraries.
"""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import DesignError
from fieldplan.design.area import Ground

Whole = NDArray[np.int64]

POINTS_PER_CELL = 64
FEWEST_POINTS = 4_000
MOST_POINTS = 60_000
FINE = 16
"""Parts of a raster step in which centres are counted."""
MOVING, SETTLING = 30, 40
"""Rounds in which centres move, and rounds in which only the edges do."""
MOST_CELLS = 2_000
BLOCK = 8_000_000
ROOM = 300_000
"""Numbers held at once, so that they stay near the processor."""
AROUND = 14
"""Cells looked at round the one a point was in; all of them every tenth round."""


@dataclass(frozen=True)
class Cells:
    """Parts of a polygon: every place belongs to the centre from which it is least far.

    Parameters
    ----------
    centres_cm : ndarray of int, shape (k, 2)
        Easting and northing.
    pulls_cm2 : ndarray of int, shape (k,)
        Taken off the squared distance, so that the parts come out equal (a power diagram).
    """

    centres_cm: Whole
    pulls_cm2: Whole

    @property
    def count(self) -> int:
        """Number of cells."""
        return len(self.centres_cm)

    def cell_of(self, places_cm: Whole) -> Whole:
        """Tell the cell of each place; on a line between two it is the one with the lower number.

        Parameters
        ----------
        places_cm : ndarray of int, shape (m, 2)

        Returns
        -------
        ndarray of int, shape (m,)
        """
        found = np.empty(len(places_cm), dtype=np.int64)
        step = max(1, BLOCK // max(1, self.count))
        for start in range(0, len(places_cm), step):
            some = places_cm[start : start + step]
            off = some[:, None, :] - self.centres_cm[None, :, :]
            found[start : start + step] = np.argmin(
                (off**2).sum(axis=2) - self.pulls_cm2[None, :], axis=1
            )
        return found


def compact_cells(ground: Ground, count: int) -> Cells:
    """Cut a polygon into compact cells of nearly equal area.

    Parameters
    ----------
    ground : Ground
    count : int
        Number of cells, at least 1.

    Returns
    -------
    Cells
        The same for the same polygon and count, whatever the seed.

    Raises
    ------
    DesignError
        The polygon is too small, or too ragged, for so many cells.

    Notes
    -----
    A raster of whole centimetres stands for the polygon. Centres start along a Hilbert curve; then
    each moves to the middle of its cell while the cells' pulls are raised or lowered until all
    hold the same number of raster points (Lloyd 1982 for the moves; Aurenhammer, Hoffmann & Aronov
    1998, Algorithmica 20:61, for equal parts by a power diagram; both from memory). Areas are then
    equal to about 1 %, and their exact values are the weights.

    Examples
    --------
    >>> cells = compact_cells(Ground("field", shapely.box(0, 0, 200, 100)), 2)
    >>> cells.centres_cm.tolist()
    [[4995, 4995], [14985, 4995]]
    """
    if not 1 <= count <= MOST_CELLS:
        message = (
            f"stratum '{ground.name}' would be cut into {count} cells; between 1 and {MOST_CELLS} "
            "can be made. Ask for fewer locations, or use another layout."
        )
        raise DesignError(message)
    points, step, corner = _raster(ground, count)
    if len(points) < 4 * count:
        message = (
            f"stratum '{ground.name}' ({ground.geometry.area:.4g} m²) is too small or too ragged "
            f"to be cut into {count} cells. Ask for fewer locations, or use another layout."
        )
        raise DesignError(message)
    centres, pulls = _equal_parts(points * FINE, count)
    return Cells(corner + centres * step // FINE, pulls * step * step // (FINE * FINE))


def _raster(ground: Ground, count: int) -> tuple[Whole, int, Whole]:
    """Give raster points inside, as whole steps from a corner, the step, and the corner in cm."""
    wanted = min(max(FEWEST_POINTS, POINTS_PER_CELL * count), max(MOST_POINTS, 16 * count))
    step = max(2, int((ground.geometry.area * 1e4 / wanted) ** 0.5) // 2 * 2)
    box = ground.box
    columns = -(-(box.east - box.west) * 100 // step)
    rows = -(-(box.north - box.south) * 100 // step)
    if columns * rows > 40 * MOST_POINTS * max(1, count // 100):
        message = (
            f"stratum '{ground.name}' fills too little of its box to be cut into cells; give "
            "its parts as strata of their own."
        )
        raise DesignError(message)
    east, north = np.meshgrid(np.arange(columns), np.arange(rows), indexing="ij")
    steps = np.column_stack([east.ravel(), north.ravel()]).astype(np.int64)
    corner = np.array([box.west * 100 + step // 2, box.south * 100 + step // 2], dtype=np.int64)
    places = corner + steps * step
    return steps[ground.holds(places[:, 0], places[:, 1])], step, corner


def _equal_parts(points: Whole, count: int) -> tuple[Whole, Whole]:
    """Move centres and raise pulls until every cell holds the same number of points."""
    centres = _along_a_curve(points, count)
    pulls = np.zeros(count, dtype=np.int64)
    best: tuple[int, Whole] | None = None
    cells = np.zeros(len(points), dtype=np.int64)
    for turn in range(MOVING + SETTLING):
        if turn % 10 == 0 or turn == MOVING + SETTLING - 1:
            cells = _nearest(points, centres, pulls)
        else:
            cells = _nearest_around(points, centres, pulls, cells)
        held = np.bincount(cells, minlength=count).astype(np.int64)
        if turn < MOVING:
            centres = _middles(points, cells, held, centres)
        else:
            off = int(np.abs(held * count - len(points)).max())
            if best is None or off < best[0]:
                best = off, pulls.copy()
        # a pull of p moves an edge so that the cell's area changes by about π p / 2
        gain = 80 if turn < MOVING else 60 - 30 * (turn - MOVING) // SETTLING
        pulls = pulls + gain * (len(points) - held * count) // count
        pulls -= int(pulls.min())
    assert best is not None  # SETTLING is above 0
    return centres, best[1]


def _middles(points: Whole, cells: Whole, held: Whole, centres: Whole) -> Whole:
    """Give the middle of each cell, rounded down; an empty cell keeps its centre."""
    sums = np.zeros_like(centres)
    np.add.at(sums, cells, points)
    moved = sums // np.maximum(held, 1)[:, None]
    return np.where((held > 0)[:, None], moved, centres)


def _nearest(points: Whole, centres: Whole, pulls: Whole) -> Whole:
    """Tell the cell of each raster point among all."""
    offset = (centres**2).sum(axis=1) - pulls
    found = np.empty(len(points), dtype=np.int64)
    step = max(1, ROOM // len(centres))
    for start in range(0, len(points), step):
        some = -2 * points[start : start + step]
        far = some[:, :1] * centres[:, 0]
        far += some[:, 1:] * centres[:, 1]
        far += offset
        found[start : start + step] = np.argmin(far, axis=1)
    return found


def _nearest_around(points: Whole, centres: Whole, pulls: Whole, cells: Whole) -> Whole:
    """Tell the cell of each raster point among those around the cell it was in."""
    around = _around(centres)
    offset = (centres**2).sum(axis=1) - pulls
    candidates = around[cells]
    far = -2 * points[:, :1] * centres[candidates, 0]
    far += -2 * points[:, 1:] * centres[candidates, 1]
    far += offset[candidates]
    return np.asarray(candidates[np.arange(len(points)), np.argmin(far, axis=1)], dtype=np.int64)


def _around(centres: Whole) -> Whole:
    """List the cells whose centres are nearest to each centre, of equals the lower numbers."""
    count = len(centres)
    if count <= AROUND:
        return np.tile(np.arange(count), (count, 1))
    far = (centres[:, None, 0] - centres[:, 0]) ** 2
    far += (centres[:, None, 1] - centres[:, 1]) ** 2
    order = far * count + np.arange(count)  # no two alike, so that every library picks the same
    return np.sort(np.argpartition(order, AROUND - 1, axis=1)[:, :AROUND], axis=1)


def _along_a_curve(points: Whole, count: int) -> Whole:
    """Give the middles of equal runs of points along a Hilbert curve."""
    order = np.argsort(_hilbert(points // FINE), kind="stable")
    bounds = np.arange(count + 1, dtype=np.int64) * len(points) // count
    return np.stack(
        [
            points[order[low:high]].sum(axis=0) // (high - low)
            for low, high in pairwise(bounds.tolist())
        ]
    )


def _hilbert(steps: Whole, bits: int = 16) -> Whole:
    """Give the position of each raster point along a Hilbert curve (Hilbert 1891)."""
    x, y = steps[:, 0].copy(), steps[:, 1].copy()
    distance = np.zeros(len(steps), dtype=np.int64)
    side = 1 << (bits - 1)
    while side:
        right, up = (x & side) > 0, (y & side) > 0
        distance += side * side * ((3 * right) ^ up)
        turned = ~up & right
        x = np.where(turned, side - 1 - (x & (side - 1)), x & (side - 1))
        y = np.where(turned, side - 1 - (y & (side - 1)), y & (side - 1))
        x, y = np.where(up, x, y), np.where(up, y, x)
        side >>= 1
    return distance


def cell_polygons(ground: Ground, cells: Cells) -> tuple[BaseGeometry, ...]:
    """Give the cells as polygons in metres, for areas and maps.

    Parameters
    ----------
    ground : Ground
    cells : Cells

    Returns
    -------
    tuple of geometry
        Their areas sum to the polygon's.
    """
    low_x, low_y, high_x, high_y = ground.geometry.bounds
    box = np.array([[low_x, low_y], [high_x, low_y], [high_x, high_y], [low_x, high_y]])
    centres, pulls = cells.centres_cm / 100.0, cells.pulls_cm2 / 1e4
    rings = [_power_cell(box, centres, pulls, k) for k in range(cells.count)]
    shapes = [shapely.Polygon(ring) if len(ring) > 2 else shapely.Polygon() for ring in rings]
    cut = shapely.intersection(np.array(shapes, dtype=object), ground.geometry)
    return tuple(cut)


def _power_cell(
    ring: NDArray[np.float64],
    centres: NDArray[np.float64],
    pulls: NDArray[np.float64],
    k: int,
) -> NDArray[np.float64]:
    """Clip a convex ring by the lines between one centre and every other, nearest first.

    A line lies (d² − pull + own pull) / 2d away from the centre; from the first one that must lie
    beyond the ring on, none can cut it.
    """
    normals = 2 * (centres - centres[k])
    limits = (centres**2).sum(axis=1) - pulls - ((centres[k] ** 2).sum() - pulls[k])
    square = ((centres - centres[k]) ** 2).sum(axis=1)
    order = np.argsort(square, kind="stable")
    nearest_line = (square - pulls.max() + pulls[k]) / (2 * np.sqrt(np.maximum(square, 1e-12)))
    reach = np.inf
    for other in order.tolist():
        if len(ring) == 0 or nearest_line[other] > reach:
            break
        outside = ring @ normals[other] - limits[other]
        if other != k and (outside > 0).any():
            ring = _clipped(ring, outside)
            reach = np.sqrt(((ring - centres[k]) ** 2).sum(axis=1).max(initial=0.0))
    return ring


def _clipped(ring: NDArray[np.float64], outside: NDArray[np.float64]) -> NDArray[np.float64]:
    """Keep the part of a convex ring where ``outside`` is not above 0 (Sutherland & Hodgman)."""
    kept = []
    for here, there, a, b in zip(
        ring, np.roll(ring, -1, axis=0), outside, np.roll(outside, -1), strict=True
    ):
        if a <= 0:
            kept.append(here)
        if (a > 0) != (b > 0):
            kept.append(here + (there - here) * (a / (a - b)))
    return np.array(kept).reshape(-1, 2)
