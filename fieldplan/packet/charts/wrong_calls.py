"""How often a call is wrong: two wings beside a shaded region, words in the room above each."""

from typing import TYPE_CHECKING

from fieldplan.packet.drawing import (
    BLUE,
    INK,
    LINE,
    SOFT,
    VERMILION,
    new_figure,
    text_width_mm,
)
from fieldplan.sizing.model import Picture, Series

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

_HEIGHT_MM, _LEFT_MM, _RIGHT_MM, _BOTTOM_MM, _TOP_MM = 72.0, 15.0, 4.0, 11.0, 9.5
_POINTS, _ROW_MM, _GAP_MM, _TICK_MM = 8.0, 3.6, 1.2, 2.6
_LEAST_MM = 28.0
"""A wing is given this much room at least, for its words."""


def wrong_calls_drawing(picture: Picture, width: float) -> "Canvas":
    """Draw the wings, the region between them, and a tick for the chance allowed at each end.

    Parameters
    ----------
    picture : Picture
        A line for each wing, from the region outwards, and dashes for a larger sigma; ``marks``
        and ``levels`` in the order of the lines.
    width : float
        In mm.

    Returns
    -------
    Figure
        Not yet written.
    """
    figure = new_figure(width, _HEIGHT_MM)
    room, tall = width - _LEFT_MM - _RIGHT_MM, _HEIGHT_MM - _BOTTOM_MM - _TOP_MM
    axes = figure.add_axes(
        (_LEFT_MM / width, _BOTTOM_MM / _HEIGHT_MM, room / width, tall / _HEIGHT_MM)
    )
    wings = [series for series in picture.series if series.style == "line"]
    least, most = _span(picture, wings, room=room)
    axes.set_xlim(least, most)
    mm_of_x = room / (most - least)
    ends = [value for _, value in picture.marks]
    axes.axvspan(min(ends), max(ends), color=LINE, alpha=0.22, linewidth=0)
    rows = []
    for wing, end in zip(wings, ends, strict=True):
        right = end == max(ends)
        wing_mm = mm_of_x * ((most - end) if right else (end - least))
        rows.append(_wrapped(wing.label, wing_mm - 2 * _GAP_MM))
    words_mm = _ROW_MM * max(len(lines) for lines in rows) + 2 * _GAP_MM
    highest = max(max(s.y) for s in picture.series)
    highest = max(highest, *(chance for _, chance in picture.levels))
    axes.set_ylim(0, highest * tall / (tall - words_mm - _ROW_MM - _GAP_MM))
    dashed = [series.y[0] for series in picture.series if series.style == "dashes"]
    for series in picture.series:
        named = series.style == "dashes" and series.y[0] == max(dashed)
        _draw_line(axes, series, right=series.x[0] == max(ends), named=named)
    for position, lines in enumerate(rows):
        _mark_end(axes, picture, position, lines, mm_of_x)
    axes.set_xticks([tick for tick in axes.get_xticks() if _reached(tick, picture, least, most)])
    axes.set_xlabel(picture.x_label)
    axes.set_ylabel(picture.y_label)
    return figure


def _span(picture: Picture, wings: list[Series], *, room: float) -> tuple[float, float]:
    """Give the ends of the axis: those of the wings, farther out where one has no room for words.

    A wing is widened at the cost of the rest, so the least room is a share of what is there.
    """
    low = min(min(wing.x) for wing in wings)
    high = max(max(wing.x) for wing in wings)
    ends = sorted(value for _, value in picture.marks)
    share = _LEAST_MM / room
    inner = ends[1] - ends[0]
    left, right = ends[0] - low, high - ends[1]
    for _ in range(20):
        total = left + inner + right
        left, right = max(left, share * total), max(right, share * total)
    return ends[0] - left, ends[1] + right


def _reached(tick: float, picture: Picture, least: float, most: float) -> bool:
    """Whether a tick of the axis lies where a line was drawn, or between the lines."""
    drawn = [x for series in picture.series for x in series.x]
    slack = 1e-9 * (most - least)
    return min(drawn) - slack <= tick <= max(drawn) + slack


def _draw_line(axes: "Axes", series: Series, *, right: bool, named: bool) -> None:
    if len(series.x) == 1:
        axes.scatter(series.x, series.y, s=14, color=BLUE, zorder=3)
        return
    if series.style != "dashes":
        axes.plot(series.x, series.y, color=BLUE)
        return
    axes.plot(series.x, series.y, color=VERMILION, linestyle=(0, (4, 2)), linewidth=1.0)
    if named:
        axes.annotate(
            series.label, (series.x[0], series.y[0]), (3 if right else -3, 2),
            textcoords="offset points", ha="left" if right else "right", va="bottom",
            color=VERMILION, fontsize=_POINTS,
        )  # fmt: skip


def _mark_end(
    axes: "Axes", picture: Picture, position: int, lines: list[str], mm_of_x: float
) -> None:
    """Name an end of the region above the axes, tick its chance, and write what goes wrong."""
    name, end = picture.marks[position]
    chance_name, chance = picture.levels[position]
    right = end == max(value for _, value in picture.marks)
    outward, align = (1, "left") if right else (-1, "right")
    tick = outward * _TICK_MM / mm_of_x
    axes.plot([end, end + tick], [chance, chance], color=INK, linewidth=1.8, zorder=4)
    axes.annotate(
        f"{name}\n{chance_name}", (end, 1.0), (outward * 3, 3), xycoords=("data", "axes fraction"),
        textcoords="offset points", ha=align, va="bottom", color=INK, fontsize=_POINTS,
    )  # fmt: skip
    axes.annotate(
        "\n".join(lines), (end, 1.0), (outward * 3, -3), xycoords=("data", "axes fraction"),
        textcoords="offset points", ha=align, va="top", color=SOFT, fontsize=_POINTS,
    )  # fmt: skip


def _wrapped(text: str, width_mm: float) -> list[str]:
    """Break a sentence into lines that fit; a word that is longer stands alone."""
    lines = [""]
    for word in text.split():
        longer = f"{lines[-1]} {word}".strip()
        if lines[-1] and text_width_mm(longer, _POINTS) > width_mm:
            lines.append(word)
        else:
            lines[-1] = longer
    return lines
