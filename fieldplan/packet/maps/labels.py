"""Names beside their markers: no two overlap, none leaves the frame.

Greedy, the most crowded marker first. A name tries eight places that touch its marker, then rings
further out with a line that leads back. Positions are millimetres inside the frame.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np
import shapely
from numpy.typing import NDArray

Rectangles = NDArray[np.float64]
"""Shape (n, 4): left, bottom, right, top."""

_RINGS_MM = (2.0, 3.5, 5.5, 8.0, 11.0, 14.5, 18.5, 23.0, 28.0, 34.0)
_TURNS = 32
_CLEAR_MM = 0.35
_NEIGHBOUR_MM = 12.0
_TRIES = 4


@dataclass(frozen=True)
class Placed:
    """A name's rectangle, and whether a line leads back to its marker."""

    left: float
    bottom: float
    width: float
    height: float
    leads: bool


def place_labels(
    anchors: NDArray[np.float64],
    sizes: NDArray[np.float64],
    *,
    frame: tuple[float, float],
    radii: NDArray[np.float64],
    taken: Rectangles,
) -> list[Placed | None]:
    """Place one name beside each marker.

    Parameters
    ----------
    anchors : array of shape (n, 2)
        Centres of the markers.
    sizes : array of shape (n, 2)
        Width and height of the names; a width of 0 asks for none.
    frame : (float, float)
        Width and height of the frame.
    radii : array of shape (n,)
        Half-width of each marker.
    taken : array of shape (m, 4)
        Rectangles that must stay free.

    Returns
    -------
    list of Placed or None
        In the order of ``anchors``; None where no free place is left within 34 mm.
    """
    if _nameless(sizes) == len(anchors):
        return [None] * len(anchors)
    order = _crowded_first(anchors)
    best: list[Placed | None] = []
    for _ in range(_TRIES):
        trial = _place_in(order, anchors, sizes=sizes, frame=frame, radii=radii, taken=taken)
        missing = [i for i in order if trial[i] is None and sizes[i, 0] > 0]
        if not best or len(missing) < sum(p is None for p in best) - _nameless(sizes):
            best = trial
        if not missing:
            break
        # names left over choose first next time
        order = missing + [i for i in order if i not in set(missing)]
    return best or [None] * len(anchors)


def _nameless(sizes: NDArray[np.float64]) -> int:
    """Count markers that ask for no name."""
    return int((sizes[:, 0] <= 0).sum())


def _place_in(
    order: list[int],
    anchors: NDArray[np.float64],
    *,
    sizes: NDArray[np.float64],
    frame: tuple[float, float],
    radii: NDArray[np.float64],
    taken: Rectangles,
) -> list[Placed | None]:
    """Place names in a given order, each at its first free candidate."""
    placed: list[Placed | None] = [None] * len(anchors)
    markers = np.column_stack([anchors - radii[:, None], anchors + radii[:, None]])
    blocked = np.vstack([taken.reshape(-1, 4), markers])
    lines = np.empty((0, 4))
    for index in order:
        if sizes[index, 0] <= 0:
            continue
        near = _touching(anchors[index], sizes[index], radius=radii[index])
        free = _inside(near, frame) & ~_hits(near, blocked) & ~_crossed(near, lines)
        if free.any():
            box = near[int(np.argmax(free))]
            placed[index] = _at(box, leads=False)
        else:
            far, starts = _standing_off(anchors[index], sizes[index], radius=radii[index])
            free = _inside(far, frame) & ~_hits(far, blocked) & ~_crossed(far, lines)
            some = np.flatnonzero(free)
            others = blocked[_apart(blocked, markers[index])]
            some = some[~_meet(starts[some][:, None, :], others[None, :, :]).any(axis=1)]
            if not len(some):
                continue
            box = far[some[0]]
            placed[index] = _at(box, leads=True)
            lines = np.vstack([lines, starts[some[0]]])
        blocked = np.vstack([blocked, box])
    return placed


def _at(box: NDArray[np.float64], *, leads: bool) -> Placed:
    """Turn a rectangle's edges into corner and size."""
    left, bottom, right, top = (float(edge) for edge in box)
    return Placed(left, bottom, right - left, top - bottom, leads)


def _crowded_first(anchors: NDArray[np.float64]) -> list[int]:
    """Order markers by how many neighbours they have, most first; ties as given."""
    if not len(anchors):
        return []
    points: Any = shapely.points(anchors)
    first, _ = shapely.STRtree(points).query(points, predicate="dwithin", distance=_NEIGHBOUR_MM)
    neighbours = np.bincount(first, minlength=len(anchors))
    return [int(i) for i in np.lexsort((np.arange(len(anchors)), -neighbours))]


def _touching(
    anchor: NDArray[np.float64], size: NDArray[np.float64], *, radius: float
) -> Rectangles:
    """List the eight places beside a marker, best first."""
    (x, y), (width, height) = anchor, size
    gap = radius + _CLEAR_MM + 0.05
    right, left, above, below = x + gap, x - gap - width, y + gap, y - gap - height
    middle_x, middle_y = x - width / 2, y - height / 2
    corners = np.array([
        (right, y), (right, y - height), (left, y), (left, y - height),
        (middle_x, above), (middle_x, below), (right, middle_y), (left, middle_y),
    ])  # fmt: skip
    return np.column_stack([corners, corners + size])


def _standing_off(
    anchor: NDArray[np.float64], size: NDArray[np.float64], *, radius: float
) -> tuple[Rectangles, Rectangles]:
    """List places on rings round a marker, nearest first, and the line to each."""
    turns = np.arange(_TURNS) * 2 * np.pi / _TURNS
    rings = np.repeat(np.array(_RINGS_MM) + radius, _TURNS)
    ways = np.tile(np.column_stack([np.cos(turns), np.sin(turns)]), (len(_RINGS_MM), 1))
    centres = anchor + ways * (rings[:, None] + size / 2)
    boxes = np.column_stack([centres - size / 2, centres + size / 2])
    ends = np.clip(anchor, boxes[:, :2], boxes[:, 2:])
    return boxes, np.column_stack([np.broadcast_to(anchor, ends.shape), ends])


def _inside(boxes: Rectangles, frame: tuple[float, float]) -> NDArray[np.bool_]:
    """Tell which rectangles lie in the frame."""
    low = (boxes[:, :2] >= 0.4).all(axis=1)
    return low & (boxes[:, 2] <= frame[0] - 0.4) & (boxes[:, 3] <= frame[1] - 0.4)


def _hits(boxes: Rectangles, blocked: Rectangles) -> NDArray[np.bool_]:
    """Tell which rectangles come within the clear distance of a blocked one."""
    a, b = boxes[:, None, :], blocked[None, :, :]
    apart = (
        (a[..., 2] + _CLEAR_MM <= b[..., 0]) | (b[..., 2] + _CLEAR_MM <= a[..., 0])
        | (a[..., 3] + _CLEAR_MM <= b[..., 1]) | (b[..., 3] + _CLEAR_MM <= a[..., 1])
    )  # fmt: skip
    # a name touches its own marker no closer than the same distance, so none is left out
    return np.asarray((~apart).any(axis=1))


def _apart(boxes: Rectangles, marker: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Tell which rectangles do not touch a marker: not itself, and not one it overlaps."""
    return np.asarray(
        (boxes[:, :2] > marker[2:]).any(axis=1) | (boxes[:, 2:] < marker[:2]).any(axis=1)
    )


def _crossed(boxes: Rectangles, lines: Rectangles) -> NDArray[np.bool_]:
    """Tell which rectangles an existing leading line runs through."""
    if not len(lines):
        return np.zeros(len(boxes), dtype=bool)
    return np.asarray(_meet(lines[None, :, :], boxes[:, None, :]).any(axis=1))


def _meet(lines: Rectangles, boxes: Rectangles) -> NDArray[np.bool_]:
    """Tell whether segments meet rectangles: the slab method of clipping by Liang and Barsky."""
    start, way = lines[..., :2], lines[..., 2:] - lines[..., :2]
    flat = np.abs(way) < 1e-9
    step = np.where(flat, 1.0, way)
    near, far = (boxes[..., :2] - start) / step, (boxes[..., 2:] - start) / step
    near, far = np.minimum(near, far), np.maximum(near, far)
    within = (start >= boxes[..., :2]) & (start <= boxes[..., 2:])
    near = np.where(flat, np.where(within, -np.inf, np.inf), near)
    far = np.where(flat, np.where(within, np.inf, -np.inf), far)
    enter, leave = near.max(axis=-1), far.min(axis=-1)
    return np.asarray((enter <= leave) & (leave >= 0) & (enter <= 1))
