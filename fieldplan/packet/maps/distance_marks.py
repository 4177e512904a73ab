"""Marks of distance along the branches of a line frame, on paper and on the screen."""

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import shapely
from shapely.geometry.base import BaseGeometry

from fieldplan.frame.model import Branch, Frame
from fieldplan.packet.drawing import INK, POINTS_PER_MM, text_width_mm
from fieldplan.packet.exchange.plain_text import plain
from fieldplan.packet.maps.names import Rectangle
from fieldplan.packet.maps.tiles import PageSpec

if TYPE_CHECKING:
    from matplotlib.axes import Axes

_APART_MM = 24.0
_TICK_MM = 1.1
_POINTS = 5.6
_LONGEST_NAME = 24
_ON_SCREEN = 12
"""Marks on the longest branch of a screen map, at most."""


@dataclass(frozen=True)
class DistanceMark:
    """A round distance along a branch: where it is, the way across, and its words."""

    easting: float
    northing: float
    across: tuple[float, float]
    words: str


def distance_marks(frame: Frame, apart_m: float) -> tuple[DistanceMark, ...]:
    """Give round distances along every branch, the start of each among them.

    Parameters
    ----------
    frame : Frame
        Of lines; any other has no marks.
    apart_m : float
        The least distance between two; they stand 1, 2 or 5 × 10ᵏ metres apart.

    Returns
    -------
    tuple of DistanceMark
        Where a branch starts its name stands with the mark.
    """
    step = round_step(apart_m)
    marks = []
    for branch in frame.branches:
        for number in range(int(branch.length_m // step) + 1):
            at = number * step
            words = _short(branch.name) if number == 0 else _words(at)
            marks.append(_mark(branch, at, words))
    return tuple(marks)


def round_step(apart_m: float) -> int:
    """Return the smallest 1, 2 or 5 × 10ᵏ metres that is at least so long.

    Examples
    --------
    >>> round_step(240.0), round_step(60.0), round_step(0.2), round_step(100.0)
    (500, 100, 1, 100)
    """
    power = int(10 ** max(math.floor(math.log10(max(apart_m, 1.0))), 0))
    return next(m * power for m in (1, 2, 5, 10) if m * power >= apart_m - 1e-9)


def _short(name: str) -> str:
    """Keep a name on one line of at most two dozen letters."""
    name = plain(name)
    return name if len(name) <= _LONGEST_NAME else name[: _LONGEST_NAME - 1] + "…"


def _words(metres: float) -> str:
    return f"{metres / 1000:g} km" if metres >= 1000 else f"{metres:g} m"


def _mark(branch: Branch, at: float, words: str) -> DistanceMark:
    """Place one mark; across is the unit vector to the left of the way."""
    spot = branch.geometry.interpolate(at)
    before = branch.geometry.interpolate(max(at - 1.0, 0.0))
    after = branch.geometry.interpolate(min(at + 1.0, branch.length_m))
    east, north = after.x - before.x, after.y - before.y
    long = math.hypot(east, north) or 1.0
    return DistanceMark(spot.x, spot.y, (-north / long, east / long), words)


def draw_distance_marks(over: "Axes", frame: Frame, *, spec: PageSpec) -> list[Rectangle]:
    """Draw ticks across the lines with their distances, as far as they lie on the page.

    Parameters
    ----------
    over : matplotlib Axes
        In millimetres.
    frame : Frame
    spec : PageSpec

    Returns
    -------
    list of Rectangle
        The room that the words take.
    """
    box = spec.layout.ground
    taken: list[Rectangle] = []
    for mark in distance_marks(frame, _APART_MM * spec.denominator / 1000):
        x, y = spec.on_paper(mark.easting, mark.northing)
        half_width = text_width_mm(mark.words, _POINTS) / 2 + 0.3
        half_height = _POINTS / POINTS_PER_MM / 2 + 0.2
        room = _free_room(mark, (x, y), (half_width, half_height), taken)
        inside = (
            box.left < room[0] and room[2] < box.right and box.bottom < room[1] < room[3] < box.top
        )
        if not inside:
            continue
        dx, dy = (_TICK_MM * part for part in mark.across)
        over.plot([x - dx, x + dx], [y - dy, y + dy], color=INK, linewidth=0.7, zorder=4)
        over.text(
            (room[0] + room[2]) / 2, (room[1] + room[3]) / 2, mark.words, fontsize=_POINTS,
            color=INK, ha="center", va="center", style="italic", zorder=4,
            bbox={"facecolor": "white", "edgecolor": "none", "alpha": 0.75, "pad": 0.2},
        )  # fmt: skip
        taken.append(room)
    return taken


def _free_room(
    mark: DistanceMark,
    spot: tuple[float, float],
    half: tuple[float, float],
    taken: list[Rectangle],
) -> Rectangle:
    """Put the words to the left of the way, or to the right where others stand."""
    rooms = []
    for side in (1, -1):
        reach = _TICK_MM + 0.4 + abs(mark.across[0]) * half[0] + abs(mark.across[1]) * half[1]
        x = spot[0] + side * reach * mark.across[0]
        y = spot[1] + side * reach * mark.across[1]
        rooms.append((x - half[0], y - half[1], x + half[0], y + half[1]))
    return next((room for room in rooms if not any(_overlap(room, t) for t in taken)), rooms[0])


def _overlap(one: Rectangle, other: Rectangle) -> bool:
    return one[0] < other[2] and other[0] < one[2] and one[1] < other[3] and other[1] < one[3]


def screen_marks(frame: Frame) -> tuple[DistanceMark, ...]:
    """Give the marks of a screen map: a dozen on the longest branch."""
    longest = max((branch.length_m for branch in frame.branches), default=0.0)
    return distance_marks(frame, max(longest / _ON_SCREEN, 1.0))


def middle_of_longest(geometry: BaseGeometry) -> tuple[float, float]:
    """Give the coordinates halfway along the longest of several lines."""
    longest = max(shapely.get_parts(geometry), key=lambda part: float(part.length))
    middle = longest.interpolate(0.5, normalized=True)
    return float(middle.x), float(middle.y)
