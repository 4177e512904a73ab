"""The band of the mean against n, with the misses of its interval in numbers below."""

from typing import TYPE_CHECKING

from fieldplan.packet.drawing import (
    BLUE,
    INK,
    LINE,
    SOFT,
    VERMILION,
    WIDE_MM,
    new_figure,
    text_width_mm,
)
from fieldplan.sizing.model import Picture, Series

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

_HEIGHT_MM, _LEFT_MM, _RIGHT_MM, _TOP_MM = 85.0, 33.0, 18.0, 8.0
_NARROW_LEFT_MM = 17.0
_ROW_MM = 5.5
_BELOW_MM = 27.0
_COMMON = "true mean "
_APART_MM = 7.5
"""Columns of numbers stand at least so far apart; one between is left out."""


def mean_band_drawing(picture: Picture, width: float) -> "Canvas":
    """Draw the band, and under each number of results the misses on either side.

    Parameters
    ----------
    picture : Picture
        Two series of the band, two dashed ones of a normal mean, then points: misses per 100.
    width : float
        In mm.

    Returns
    -------
    Figure
        Not yet written; n runs by ratio, as the band narrows by ratio.
    """
    left = _LEFT_MM if width >= WIDE_MM else _NARROW_LEFT_MM
    figure = new_figure(width, _HEIGHT_MM)
    axes = figure.add_axes(
        (
            left / width,
            _BELOW_MM / _HEIGHT_MM,
            1 - (left + _RIGHT_MM) / width,
            1 - (_BELOW_MM + _TOP_MM) / _HEIGHT_MM,
        )
    )
    lines = {style: [s for s in picture.series if s.style == style] for style in _STYLES}
    _draw_band(axes, picture, lines)
    numbers = lines["points"]
    room = width - left - _RIGHT_MM
    _write_numbers(axes, numbers, picture, room=room, left=left)
    axes.set_ylabel(picture.y_label)
    return figure


_STYLES = ("band-low", "band-high", "dashes", "points")


def _draw_band(axes: "Axes", picture: Picture, lines: dict[str, list[Series]]) -> None:
    low, high = lines["band-low"][0], lines["band-high"][0]
    axes.set_xscale("log")
    axes.set_xlim(low.x[0] / 1.08, low.x[-1] * 1.08)
    axes.minorticks_off()
    axes.set_xticks([])
    axes.fill_between(low.x, low.y, high.y, color=BLUE, alpha=0.18, linewidth=0)
    for series in (low, high):
        axes.plot(series.x, series.y, color=BLUE)
    for series in lines["dashes"]:
        axes.plot(series.x, series.y, color=SOFT, linewidth=0.8, linestyle=(0, (4, 2)))
    for words, value in picture.levels:
        axes.axhline(value, color=VERMILION, linewidth=0.9)
        axes.annotate(
            words, (1.0, value), (3, 0), xycoords=("axes fraction", "data"),
            textcoords="offset points", ha="left", va="center", color=VERMILION,
        )  # fmt: skip
    for words, value in picture.marks:
        axes.axvline(value, color=INK, linewidth=0.9)
        axes.annotate(
            words, (value, 1.0), (0, 3), xycoords=("data", "axes fraction"),
            textcoords="offset points", ha="center", va="bottom",
        )  # fmt: skip
    axes.grid(axis="y", color=LINE, alpha=0.35, linewidth=0.4)


def _write_numbers(
    axes: "Axes", numbers: list[Series], picture: Picture, *, room: float, left: float
) -> None:
    """Write n and the misses below the axis, in columns under their n."""
    shown = _columns(axes, numbers[0].x, {value for _, value in picture.marks}, room=room)
    points_per_mm = 72 / 25.4
    narrow = left < _LEFT_MM
    heads = ["n", *(s.label.removeprefix(_COMMON) if narrow else s.label for s in numbers)]
    for row, head in enumerate(heads):
        drop = -(4.0 + _ROW_MM * (row + (row > 0) * 1.1)) * points_per_mm
        axes.annotate(
            head, (0, 0), (-3 * points_per_mm, drop), xycoords="axes fraction",
            textcoords="offset points", ha="right", va="center", fontsize=7.5, color=SOFT,
        )  # fmt: skip
        for place in shown:
            words = f"{numbers[0].x[place]:.0f}" if row == 0 else _one(numbers[row - 1].y[place])
            axes.annotate(
                words, (numbers[0].x[place], 0), (0, drop), xycoords=("data", "axes fraction"),
                textcoords="offset points", ha="center", va="center", fontsize=7.5,
                color=INK, weight="bold" if row == 0 else "normal",
            )  # fmt: skip
    words = "Misses per 100 campaigns" + (f", {_COMMON.strip()}" if narrow else "")
    drop = -(4.0 + _ROW_MM * 1.05) * points_per_mm
    axes.annotate(
        words, (0, 0), (0, drop), xycoords="axes fraction", textcoords="offset points",
        ha="left", va="center", fontsize=7.5, color=SOFT,
    )  # fmt: skip


def _columns(axes: "Axes", x: tuple[float, ...], wanted: set[float], *, room: float) -> list[int]:
    """Choose the numbers whose columns have room; the marked ones first."""
    from math import log

    low, high = axes.get_xlim()
    places = [room * log(value / low) / log(high / low) for value in x]
    order = sorted(range(len(x)), key=lambda k: (x[k] not in wanted, k))
    kept: list[int] = []
    for k in order:
        gap = max(_APART_MM, text_width_mm(f"{x[k]:.0f}", 7.5, bold=True) + 2)
        if all(abs(places[k] - places[other]) >= gap for other in kept):
            kept.append(k)
    return sorted(kept)


def _one(value: float) -> str:
    """Write misses per 100 with one decimal, none from 10 on.

    Examples
    --------
    >>> _one(0.42), _one(12.3)
    ('0.4', '12')
    """
    return f"{value:.1f}" if value < 9.95 else f"{value:.0f}"
