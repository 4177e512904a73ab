"""Precision against money: a line for each kind of design, named at its end, and this plan."""

from typing import TYPE_CHECKING, Any

from fieldplan.packet.drawing import (
    BLUE,
    INK,
    LINE,
    ORANGE,
    SOFT,
    VERMILION,
    new_figure,
    shortened,
    text_width_mm,
)
from fieldplan.sizing.model import Picture, Series

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

_HEIGHT_MM, _LEFT_MM, _BOTTOM_MM, _TOP_MM, _EDGE_MM = 84.0, 17.0, 11.0, 4.0, 3.0
_POINTS, _ROW_MM, _GAP_MM, _WIDE_MM = 8.0, 4.6, 1.8, 80.0
_GREEN, _PURPLE, _SKY = "#009E73", "#CC79A7", "#56B4E9"
_LINES: tuple[tuple[str, Any], ...] = (
    (BLUE, "-"),
    (ORANGE, (0, (5, 1.5))),
    (_GREEN, (0, (1.5, 1.5))),
    (_PURPLE, (0, (7, 1.5, 1.5, 1.5))),
    (_SKY, (0, (3, 1))),
    (SOFT, "-"),
)
"""Colours that the colour-blind tell apart (Okabe and Ito 2008), each with a dash of its own."""

_PAST_PLAN, _PAST_BEST = 1.7, 1.15
"""How far money runs: beyond this plan, and beyond the end of the kind that ends first."""


def frontier_drawing(picture: Picture, width: float) -> "Canvas":
    """Draw the kinds of design, what is beaten and what is not, and this plan.

    Parameters
    ----------
    picture : Picture
        Series: a line for each kind, rings, dots, then one labelled point for the plan.
    width : float
        In mm.

    Returns
    -------
    Figure
        Not yet written.
    """
    figure = new_figure(width, _HEIGHT_MM)
    kinds = [series for series in picture.series if series.style == "line"]
    names = [series.label for series in kinds] + [words for words, _ in picture.levels]
    longest = max(text_width_mm(name, _POINTS) for name in names)
    right = min(longest + 2 * _GAP_MM + 0.5, 0.4 * width)
    room = width - _LEFT_MM - right
    axes = figure.add_axes(
        (
            _LEFT_MM / width,
            _BOTTOM_MM / _HEIGHT_MM,
            room / width,
            1 - (_BOTTOM_MM + _TOP_MM) / _HEIGHT_MM,
        )
    )
    _frame(axes, picture, kinds, room=room)
    ends = _draw(axes, picture, kinds)
    for words, value in picture.levels:
        axes.axhline(value, color=VERMILION, linewidth=0.8, linestyle=(0, (6, 2)))
        ends.append((axes.get_xlim()[1], value, words, VERMILION))
    _name(axes, ends, room=room, right=right)
    return figure


def _frame(axes: "Axes", picture: Picture, kinds: list[Series], *, room: float) -> None:
    """Choose how far money and error run: where the plan and the best kind are to be seen."""
    plan = [series for series in picture.series if series.style == "points" and series.label]
    paid = max((series.x[0] for series in plan), default=0.0)
    first = min(series.x[-1] for series in kinds)
    last = max(series.x[-1] for series in kinds)
    highest = max(max(series.y) for series in kinds)
    axes.set_xlim(0, min(1.02 * last, max(_PAST_PLAN * paid, _PAST_BEST * first)))
    axes.set_ylim(0, 1.06 * highest)
    axes.set_xlabel(picture.x_label)
    axes.set_ylabel(picture.y_label)
    axes.locator_params(axis="x", nbins=7 if room > _WIDE_MM else 4)
    axes.ticklabel_format(style="plain", useOffset=False)
    axes.grid(color=LINE, alpha=0.3, linewidth=0.4)


def _draw(
    axes: "Axes", picture: Picture, kinds: list[Series]
) -> list[tuple[float, float, str, str]]:
    """Draw lines, rings, dots and the plan; return where the name of each kind belongs."""
    far = axes.get_xlim()[1]
    ends: list[tuple[float, float, str, str]] = []
    for place, series in enumerate(kinds):
        colour, dash = _LINES[place % len(_LINES)]
        axes.plot(series.x, series.y, color=colour, linestyle=dash, linewidth=1.1)
        seen = [(x, y) for x, y in zip(series.x, series.y, strict=True) if x <= far]
        if seen:
            ends.append((*seen[-1], series.label, INK))
    for series in picture.series:
        if series.style == "hollow":
            axes.scatter(
                series.x, series.y, s=7, facecolors="white", edgecolors=LINE, linewidths=0.6,
                zorder=3,
            )  # fmt: skip
        elif series.style == "points" and not series.label:
            axes.scatter(series.x, series.y, s=8, color=INK, zorder=4)
        elif series.style == "points":
            axes.scatter(
                series.x, series.y, s=42, marker="D", facecolors=VERMILION, edgecolors="white",
                linewidths=0.8, zorder=5,
            )  # fmt: skip
            # nothing lies below and before a design that no other beats
            axes.annotate(
                series.label, (series.x[0], series.y[0]), (-4, -5), textcoords="offset points",
                ha="right", va="top", color=VERMILION, fontsize=_POINTS,
            )  # fmt: skip
    return ends


def _name(
    axes: "Axes", ends: list[tuple[float, float, str, str]], *, room: float, right: float
) -> None:
    """Write the names in the margin, each level with the end of its line or below the last one.

    Below the lines there is always room: nothing lies under designs that no other beats.
    """
    high, tall = axes.get_ylim()[1], _HEIGHT_MM - _BOTTOM_MM - _TOP_MM
    above = tall + _ROW_MM
    for x, y, words, colour in sorted(ends, key=lambda end: (-end[1], -end[0])):
        up = min(y / high * tall, above - _ROW_MM)
        above = up
        axes.annotate(
            shortened(words, _POINTS, width_mm=right - 2 * _GAP_MM), (x, y),
            ((room + _GAP_MM) / room, up / tall), textcoords="axes fraction", va="center",
            ha="left", color=colour, fontsize=_POINTS, annotation_clip=False,
            arrowprops={"arrowstyle": "-", "linewidth": 0.5, "color": SOFT, "shrinkA": 1,
                        "shrinkB": 2, "relpos": (0, 0.5)},
        )  # fmt: skip
