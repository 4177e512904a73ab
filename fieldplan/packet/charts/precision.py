"""Precision and cost against the number of results, with how far off sigma may be."""

from typing import TYPE_CHECKING

import numpy as np

from fieldplan.base.document import Figure
from fieldplan.packet.drawing import (
    BLUE,
    INK,
    LINE,
    NARROW_MM,
    VERMILION,
    WIDE_MM,
    new_figure,
    pens,
    svg_text,
    text_width_mm,
)
from fieldplan.packet.sheets.wording import number
from fieldplan.sizing.model import Size

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

CHOSEN = {
    "target": "needed",
    "locations": "expected",
    "budget": "expected",
    "census": "in the list",
    "question": "needed",
}
"""What the marked number of results is, by what decided it."""

_LEFT_MM, _RIGHT_MM, _ROW_POINTS = 18.0, 5.0, 10.0


def precision_curve(size: Size) -> Figure:
    """Draw precision against n with a band for sigma off by 25 %, the target, and the n needed.

    Parameters
    ----------
    size : Size
        Its ``curve`` is drawn: the half-width of the interval where that was the target, else
        the standard error. A second panel shows cost where the campaign has one.

    Returns
    -------
    Figure
        165 mm wide, with its caption and its words, and as narrow as a phone.

    Raises
    ------
    ValueError
        ``size.curve`` is empty.
    """
    if not size.curve:
        message = f"the size of design {size.design!r} has no curve to draw"
        raise ValueError(message)
    with pens():
        wide, narrow = (svg_text(_drawing(size, width=mm)) for mm in (WIDE_MM, NARROW_MM))
    return Figure(wide, _caption(size), _words(size), narrow_svg=narrow)


def _caption(size: Size) -> str:
    """Say what is drawn and what the band means."""
    what = "Standard error" if size.target_half_width is None else "Half-width of the interval"
    cost = " and cost" if size.curve[0].cost is not None else ""
    return (
        f"{what}{cost} against the number of results. The band shows what happens when "
        "the true standard deviation is a quarter smaller or larger than the one used."
    )


def _words(size: Size) -> str:
    """Say the curve in words for those who cannot see it."""
    first, last = size.curve[0], size.curve[-1]
    name, low, high = "standard error", first.standard_error, last.standard_error
    if size.target_half_width is not None:
        name, low, high = "half-width", first.half_width, last.half_width
    return (
        f"Curve: the {name} falls from {number(float(f'{low:.3g}'))} {size.unit} at "
        f"{first.n} results to {number(float(f'{high:.3g}'))} {size.unit} at {last.n}; "
        f"{size.needed} are {CHOSEN[size.number_from]}. Target: {size.target}."
    )


def _drawing(size: Size, *, width: float = WIDE_MM) -> "Canvas":
    """Lay out one panel, or two when there is a cost."""
    priced = all(point.cost is not None for point in size.curve)
    height = 101.0 if priced else 75.0
    figure = new_figure(width, height)

    def panel(bottom: float, top: float, *, sharex: "Axes | None" = None) -> "Axes":
        room = (_LEFT_MM / width, bottom / height, 1 - (_LEFT_MM + _RIGHT_MM) / width)
        return figure.add_axes((*room, (top - bottom) / height), sharex=sharex)

    if priced:
        upper = panel(39, height - 9)
        lower = panel(11, 31.5, sharex=upper)
        _cost(lower, size)
        upper.tick_params(labelbottom=False)
    else:
        upper = lower = panel(11, height - 9)
    _precision(upper, size)
    _name_marks(upper, size, width=width - _LEFT_MM - _RIGHT_MM)
    lower.set_xlabel("number of results, n")
    return figure


def _precision(axes: "Axes", size: Size) -> None:
    """Draw the curve, its band, the target line and the chosen n."""
    n = np.array([point.n for point in size.curve])
    error = np.array([point.standard_error for point in size.curve])
    low = np.array([point.standard_error_low for point in size.curve])
    high = np.array([point.standard_error_high for point in size.curve])
    target, name = size.target_standard_error, "standard error of the mean"
    if size.target_half_width is not None:
        # at a given n the half-width is proportional to the standard error
        widths = np.array([point.half_width for point in size.curve])
        # (a whole list leaves no error to scale)
        ratio = np.divide(widths, error, out=np.zeros_like(error), where=error > 0)
        error, low, high = widths, low * ratio, high * ratio
        target, name = size.target_half_width, "half-width of the interval"
    axes.fill_between(n, low, high, color=BLUE, alpha=0.18, linewidth=0)
    axes.plot(n, error, color=BLUE, marker="o", markersize=3)
    axes.plot(n, high, color=BLUE, linewidth=0.7, linestyle=(0, (4, 2)))
    axes.plot(n, low, color=BLUE, linewidth=0.7, linestyle=(0, (4, 2)))
    axes.set_ylabel(f"{name}\n({size.unit})")
    axes.set_ylim(0, max(float(high.max()), target or 0.0) * 1.15)
    axes.set_xlim(n.min() - 0.5, n.max() + 0.5)
    axes.grid(axis="y", color=LINE, alpha=0.35, linewidth=0.4)
    if target is not None:
        axes.axhline(target, color=VERMILION, linewidth=1.0, linestyle=(0, (6, 2)))
        axes.annotate(
            f"target {number(target)} {size.unit}", (n.max() + 0.5, target), (0, 2),
            textcoords="offset points", ha="right", va="bottom", color=VERMILION,
        )  # fmt: skip
    _mark(axes, size)


def _marked(size: Size) -> list[tuple[int, str, str]]:
    """List the n to mark, smaller first: the number, its line, its words."""
    marks = [(size.needed, "-", f"{size.needed} needed")]
    if size.plain_n != size.needed:
        marks.append((size.plain_n, ":", f"{size.plain_n} by the plain formula"))
    return sorted(mark for mark in marks if size.curve[0].n <= mark[0] <= size.curve[-1].n)


def _mark(axes: "Axes", size: Size) -> None:
    """Mark the n that was chosen, and the plain n where it is another."""
    for n, style, _ in _marked(size):
        axes.axvline(n, color=INK, linewidth=0.9, linestyle=style)


def _name_marks(axes: "Axes", size: Size, *, width: float) -> None:
    """Name the marks above the frame, each away from the other so that no line is crossed.

    A name without room on its side goes to the other side, a row higher, its line with it.
    """
    marks = _marked(size)
    low, high = axes.get_xlim()
    for place, (n, style, words) in enumerate(marks):
        at, wide = (n - low) / (high - low) * width, text_width_mm(words, 8.0) + 1.5
        left = place == 0 and len(marks) == 2
        fits = wide <= at + _LEFT_MM if left else wide <= width - at + _RIGHT_MM
        raised = 0.0 if fits else _ROW_POINTS
        axes.annotate(
            words, (n, 1.0), (-3 if left == fits else 3, 2 + raised), ha="right" if left == fits
            else "left", xycoords=("data", "axes fraction"), textcoords="offset points",
            va="bottom",
        )  # fmt: skip
        axes.annotate(
            "", (n, 1.0), (0, 9 + raised), xycoords=("data", "axes fraction"),
            textcoords="offset points",
            arrowprops={"arrowstyle": "-", "linestyle": style, "linewidth": 0.9, "shrinkA": 0,
                        "shrinkB": 0, "color": INK},
        )  # fmt: skip


def _cost(axes: "Axes", size: Size) -> None:
    """Draw what each n costs."""
    axes.plot(
        [point.n for point in size.curve],
        [point.cost or 0.0 for point in size.curve],
        color=INK,
        marker="s",
        markersize=2.5,
    )
    axes.set_ylabel(f"cost ({size.currency})" if size.currency else "cost")
    axes.set_ylim(bottom=0)
    axes.locator_params(axis="x", integer=True)
    axes.locator_params(axis="y", nbins=4)
    axes.ticklabel_format(style="plain", useOffset=False)
    axes.grid(axis="y", color=LINE, alpha=0.35, linewidth=0.4)
    _mark(axes, size)
