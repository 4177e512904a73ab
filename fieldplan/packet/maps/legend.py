"""The legend: marks, ground, lines; in as many columns as the panel takes."""

from typing import TYPE_CHECKING

from fieldplan.packet.drawing import INK, POINTS_PER_MM, SOFT, shortened, text_width_mm, wrapped
from fieldplan.packet.maps.content import ARROW, Entry, MapContent, Pen
from fieldplan.packet.maps.grid import GridLines
from fieldplan.packet.maps.ground import Ground
from fieldplan.packet.maps.paper import Box

if TYPE_CHECKING:
    from matplotlib.axes import Axes

_CROSS = Pen("+", SOFT, SOFT, 2.4, 0.5)
_ROW_MM = 4.4
_LEAST_ROW_MM = 3.4
_NO_PEN = Pen("", "none", "none")


def draw_legend(
    page: "Axes", content: MapContent, *, layers: tuple[Ground, ...], box: Box, grid: GridLines
) -> None:
    """Draw the legend into its box.

    Parameters
    ----------
    page : matplotlib Axes
        In millimetres.
    content : MapContent
        Its marks come first.
    layers : tuple of Ground
        Then the ground, then the grid crosses.
    box : Box
    grid : GridLines
    """
    draw_entries(page, [*content.legend, *layers, _crossing(grid)], box=box)


def draw_entries(
    page: "Axes", entries: list[Entry | Ground], *, box: Box, brief: bool = False
) -> None:
    """Draw entries in one to three columns inside a box, framed to their number."""
    columns = 1
    while columns < 3 and len(entries) > columns * int((box.height - 3) / _LEAST_ROW_MM):
        columns += 1
    rows = -(-len(entries) // columns)
    height = min(_ROW_MM, max(_LEAST_ROW_MM, (box.height - 3) / rows))
    entries = within(entries, columns * int((box.height - 3) / height + 1e-9))
    rows = min(rows, int((box.height - 3) / height + 1e-9))
    _frame(page, box, height=3 + height * rows)
    width = (box.width - 2) / columns
    for index, entry in enumerate(entries):
        x = box.left + 2 + (index // rows) * width
        y = box.top - 1.5 - (index % rows + 0.5) * height
        words = entry.brief if brief or columns > 1 else entry.words
        points = 6.6 if columns == 1 else 5.8
        draw_entry(
            page, entry, words, spot=(x, y), width_mm=width - 8.5, points=points, row_mm=height
        )


def within(entries: list[Entry | Ground], room: int) -> list[Entry | Ground]:
    """Keep as many entries as there is room for, and say how many were left out."""
    if len(entries) <= room:
        return entries
    words = f"and {len(entries) - room + 1} more"
    return [*entries[: room - 1], Entry(_NO_PEN, words, words)]


def draw_entry(
    page: "Axes",
    entry: Entry | Ground,
    words: str,
    *,
    spot: tuple[float, float],
    width_mm: float,
    points: float,
    row_mm: float,
) -> None:
    """Draw the sample of one entry and its words, in one line or, where the row is high, in two."""
    _sample(page, entry, x=spot[0], y=spot[1])
    if row_mm >= 4.2 and text_width_mm(words, points) > width_mm:
        points = min(5.2 * row_mm / 4.4, points)
        lines = wrapped(words, points, width_mm=width_mm, most=2)
    else:
        lines = [shortened(words, points, width_mm=width_mm)]
    page.text(
        spot[0] + 7.5, spot[1], "\n".join(lines), fontsize=points, va="center", linespacing=1.0
    )


def _crossing(grid: GridLines) -> Entry:
    """Explain the crosses."""
    spacing = f"{grid.step} m" if grid.step < 1000 else f"{grid.step // 1000} km"
    name = "UTM" if grid.reference.zone else "polar grid"
    return Entry(_CROSS, f"{name} crossing, every {spacing}", f"{name}, {spacing}")


def _frame(page: "Axes", box: Box, *, height: float) -> None:
    """Draw the frame round the rows in use."""
    from matplotlib.patches import Rectangle

    corner = (box.left, box.top - height)
    page.add_patch(Rectangle(corner, box.width, height, fill=False, linewidth=0.5))


def _sample(page: "Axes", entry: Entry | Ground, *, x: float, y: float) -> None:
    """Draw the sample of one entry, 6 mm wide."""
    from matplotlib.patches import Rectangle

    if isinstance(entry, Ground):
        if entry.style["facecolor"] == "none":
            page.plot(
                [x, x + 6],
                [y, y],
                color=entry.style["edgecolor"],
                linewidth=entry.style["linewidth"],
                linestyle=entry.style.get("linestyle", "-"),
            )
            return
        page.add_patch(Rectangle((x, y - 1.6), 6, 3.2, **entry.style))
        return
    pen = entry.pen
    if pen.marker == ARROW:
        page.annotate("", (x + 6, y), (x, y), arrowprops={"arrowstyle": "-|>", "color": INK})
    elif pen.marker:
        page.plot(
            [x + 3], [y], marker=pen.marker, markersize=pen.size_mm * POINTS_PER_MM,
            markerfacecolor=pen.face, markeredgecolor=pen.edge, markeredgewidth=pen.edge_width,
        )  # fmt: skip
