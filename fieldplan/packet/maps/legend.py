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
    room = int((box.height - 3) / height + 1e-9)
    if len(entries) > columns * room:
        left_out = len(entries) - columns * room + 1
        words = f"and {left_out} more"
        entries = [*entries[: columns * room - 1], Entry(_NO_PEN, words, words)]
    rows = min(rows, room)
    _frame(page, box, height=3 + height * rows)
    width = (box.width - 2) / columns
    for index, entry in enumerate(entries):
        x = box.left + 2 + (index // rows) * width
        y = box.top - 1.5 - (index % rows + 0.5) * height
        _sample(page, entry, x=x, y=y)
        words = entry.brief if brief or columns > 1 else entry.words
        points = 6.6 if columns == 1 else 5.8
        _words(page, words, x=x + 7.5, y=y, width_mm=width - 8.5, points=points, row_mm=height)


def _words(
    page: "Axes", words: str, *, x: float, y: float, width_mm: float, points: float, row_mm: float
) -> None:
    """Write the words of an entry in one line, or in two smaller ones where the row is high."""
    if row_mm >= 4.2 and text_width_mm(words, points) > width_mm:
        points = 5.2
        lines = wrapped(words, points, width_mm=width_mm, most=2)
    else:
        lines = [shortened(words, points, width_mm=width_mm)]
    page.text(x, y, "\n".join(lines), fontsize=points, va="center", linespacing=1.0)


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
                color=INK,
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
