"""Names and plates above the ground: where they go, and which found no place."""

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from fieldplan.packet.drawing import INK, POINTS_PER_MM, SOFT, text_width_mm
from fieldplan.packet.maps.content import MapContent, Mark
from fieldplan.packet.maps.labels import Placed, place_labels
from fieldplan.packet.maps.tiles import PageSpec

if TYPE_CHECKING:
    from matplotlib.axes import Axes

NAME_POINTS = 6.8
_NAME_HEIGHT_MM = NAME_POINTS / POINTS_PER_MM * 1.1
_PLATE: dict[str, Any] = {"facecolor": "white", "edgecolor": "none", "alpha": 0.75, "pad": 0.4}

Rectangle = tuple[float, float, float, float]
"""Left, bottom, right, top; millimetres on the page."""


def placed_names(
    content: MapContent, spec: PageSpec, *, taken: Sequence[Rectangle] = ()
) -> list[tuple[Mark, Placed | None]]:
    """Find a place for the name of every mark that a page shows.

    Parameters
    ----------
    content : MapContent
    spec : PageSpec
    taken : sequence of Rectangle
        Plates that must stay free.

    Returns
    -------
    list of (Mark, Placed or None)
        Places in millimetres from the lower left corner of the map's frame.
    """
    seen = [m for m in content.marks if spec.extent.holds(m.easting, m.northing)]
    box = spec.layout.ground
    corner = np.array([box.left, box.bottom])
    places = place_labels(
        mark_centres(seen, spec) - corner,
        np.array([_size(m.name) for m in seen]).reshape(-1, 2),
        frame=(box.width, box.height),
        radii=np.array([m.pen.size_mm / 2 + 0.2 for m in seen]),
        taken=np.array(taken).reshape(-1, 4) - np.tile(corner, 2),
    )
    return list(zip(seen, places, strict=True))


def unplaced_names(
    content: MapContent, spec: PageSpec, *, taken: Sequence[Rectangle] = ()
) -> tuple[str, ...]:
    """List the names for which a page that answers for them has no place."""
    return _left_over(placed_names(content, spec, taken=taken), spec)


def draw_names(
    over: "Axes", content: MapContent, *, spec: PageSpec, taken: Sequence[Rectangle]
) -> tuple[str, ...]:
    """Write names, with a line back to the mark where they stand off; return those left over."""
    found = placed_names(content, spec, taken=taken)
    box = spec.layout.ground
    for mark, place in found:
        if place is not None:
            anchor = spec.on_paper(mark.easting, mark.northing)
            _draw_name(over, mark.name, anchor=anchor, place=place, corner=(box.left, box.bottom))
    return _left_over(found, spec)


def mark_centres(marks: Sequence[Mark], spec: PageSpec) -> NDArray[np.float64]:
    """Give the centres of marks on the page, shape (n, 2)."""
    return np.array([spec.on_paper(m.easting, m.northing) for m in marks]).reshape(-1, 2)


def draw_plate(
    over: "Axes",
    words: str,
    *,
    spots: Sequence[tuple[float, float]],
    clear_of: NDArray[np.float64],
    points: float = 8.0,
) -> Rectangle:
    """Write words on a white plate, centred at the first spot where it covers no mark.

    Parameters
    ----------
    over : matplotlib Axes
        In millimetres.
    words : str
    spots : sequence of (float, float)
        Centres to try; the first is taken when all would cover a mark.
    clear_of : array of shape (n, 2)
        Centres of marks.
    points : float

    Returns
    -------
    Rectangle
        The room that it takes.
    """
    half_width = text_width_mm(words, points, bold=True) / 2 + 1.2
    half_height = points / POINTS_PER_MM / 2 + 0.9
    half = np.array([half_width, half_height])

    def covers(spot: tuple[float, float]) -> bool:
        return bool((np.abs(clear_of - np.array(spot)) < half + 1.6).all(axis=1).any())

    x, y = next((spot for spot in spots if not covers(spot)), spots[0])
    over.text(
        x, y, words, fontsize=points, weight="bold", ha="center", va="center", zorder=9,
        bbox={"facecolor": "white", "edgecolor": INK, "linewidth": 0.8, "pad": 2.0},
    )  # fmt: skip
    return x - half_width, y - half_height, x + half_width, y + half_height


def _size(name: str) -> tuple[float, float]:
    """Measure a name on paper; nothing for a mark without one."""
    return (text_width_mm(name, NAME_POINTS) + 0.3, _NAME_HEIGHT_MM) if name else (0.0, 0.0)


def _left_over(found: list[tuple[Mark, Placed | None]], spec: PageSpec) -> tuple[str, ...]:
    """List names without a place, unless another page answers for them."""
    return tuple(
        mark.name
        for mark, place in found
        if mark.name and place is None and spec.answers_for(mark.easting, mark.northing)
    )


def _draw_name(
    over: "Axes",
    name: str,
    *,
    anchor: tuple[float, float],
    place: Placed,
    corner: tuple[float, float],
) -> None:
    """Write one name, with its line where it has one."""
    left, bottom = corner[0] + place.left, corner[1] + place.bottom
    if place.leads:
        end_x = min(max(anchor[0], left), left + place.width)
        end_y = min(max(anchor[1], bottom), bottom + place.height)
        over.plot([anchor[0], end_x], [anchor[1], end_y], color=SOFT, linewidth=0.5, zorder=4)
    over.text(
        left + place.width / 2, bottom + place.height / 2, name, fontsize=NAME_POINTS,
        ha="center", va="center", bbox=_PLATE, zorder=6, gid="name",
    )  # fmt: skip
