"""The picture of a finding: lines and points with their words beside them, no legend."""

from typing import TYPE_CHECKING

from fieldplan.base.document import Figure
from fieldplan.packet.drawing import (
    BLUE,
    INK,
    LINE,
    NARROW_MM,
    ORANGE,
    SOFT,
    VERMILION,
    WIDE_MM,
    new_figure,
    pens,
    svg_text,
)
from fieldplan.sizing.model import Picture, Series

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

_HEIGHT_MM, _LEFT_MM, _RIGHT_MM, _BOTTOM_MM, _TOP_MM = 72.0, 18.0, 30.0, 11.0, 9.0
_COLOURS = (BLUE, "#009E73", ORANGE, "#CC79A7", INK)
"""Of lines; levels have a colour of their own."""


def finding_picture(picture: Picture) -> Figure:
    """Draw the picture of a finding.

    Parameters
    ----------
    picture : Picture
        Drawn by its ``kind``; one that has no drawing of its own is drawn as lines.

    Returns
    -------
    Figure
        165 mm wide, and as narrow as a phone.

    Raises
    ------
    ValueError
        There is nothing to draw.
    """
    if not any(series.x for series in picture.series):
        message = f"the picture {picture.kind!r} has no series to draw"
        raise ValueError(message)
    with pens():
        wide, narrow = (svg_text(_drawn(picture, mm)) for mm in (WIDE_MM, NARROW_MM))
    return Figure(wide, picture.caption, picture.alternative, narrow_svg=narrow)


def _drawn(picture: Picture, width: float) -> "Canvas":
    """Draw by kind; a kind without a drawing of its own as lines."""
    if picture.kind == "mean-band":
        from fieldplan.packet.charts.mean_band import mean_band_drawing

        return mean_band_drawing(picture, width)
    if picture.kind == "frontier":
        from fieldplan.packet.charts.frontier import frontier_drawing

        return frontier_drawing(picture, width)
    if picture.kind == "wrong-calls":
        from fieldplan.packet.charts.wrong_calls import wrong_calls_drawing

        return wrong_calls_drawing(picture, width)
    return _drawing(picture, width)


def _drawing(picture: Picture, width: float) -> "Canvas":
    figure = new_figure(width, _HEIGHT_MM)
    axes = figure.add_axes(
        (
            _LEFT_MM / width,
            _BOTTOM_MM / _HEIGHT_MM,
            1 - (_LEFT_MM + _RIGHT_MM) / width,
            1 - (_BOTTOM_MM + _TOP_MM) / _HEIGHT_MM,
        )
    )
    for _, value in picture.levels:
        axes.axhline(value, color=VERMILION, linewidth=1.0, linestyle=(0, (6, 2)))
    ends = _draw_series(axes, picture)
    _name_lines(axes, [*ends, *((value, words, VERMILION) for words, value in picture.levels)])
    for words, value in picture.marks:
        axes.axvline(value, color=INK, linewidth=0.9)
        axes.annotate(
            words, (value, 1.0), (3, 2), xycoords=("data", "axes fraction"),
            textcoords="offset points", va="bottom",
        )  # fmt: skip
    axes.set_xlabel(picture.x_label)
    axes.set_ylabel(picture.y_label)
    axes.grid(axis="y", color=LINE, alpha=0.35, linewidth=0.4)
    return figure


def _draw_series(axes: "Axes", picture: Picture) -> list[tuple[float, str, str]]:
    """Draw lines, points and bands; give where each line ends, its name and its colour."""
    named: list[tuple[float, str, str]] = []
    bands: list[Series] = []
    for position, series in enumerate(picture.series):
        colour = _COLOURS[position % len(_COLOURS)]
        if series.style in ("band-low", "band-high"):
            bands.append(series)
            continue
        _draw_one(axes, series, colour)
        if series.label and series.y:
            named.append((series.y[-1], series.label, colour))
    for low, high in zip(bands[::2], bands[1::2], strict=False):
        axes.fill_between(low.x, low.y, high.y, color=BLUE, alpha=0.18, linewidth=0)
    return named


def _draw_one(axes: "Axes", series: Series, colour: str) -> None:
    if series.style in ("points", "hollow"):
        inside = "none" if series.style == "hollow" else colour
        edge = SOFT if series.style == "hollow" else colour
        axes.scatter(series.x, series.y, s=14, facecolors=inside, edgecolors=edge, linewidths=0.8)
        return
    dashes = (0, (4, 2)) if series.style == "dashes" else "-"
    axes.plot(series.x, series.y, color=colour, linestyle=dashes)


def _name_lines(axes: "Axes", named: list[tuple[float, str, str]]) -> None:
    """Write the name of each line behind its end, apart from one another."""
    low, high = axes.get_ylim()
    least, last = (high - low) / 14, -float("inf")
    for value, label, colour in sorted(named):
        last = max(value, last + least)
        axes.annotate(
            label, (1.0, last), (4, 0), xycoords=("axes fraction", "data"),
            textcoords="offset points", va="center", color=colour, annotation_clip=False,
        )  # fmt: skip
