"""The pilot's values as dots: every result is seen, non-detects hollow, the mean marked."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from fieldplan.base.document import Figure
from fieldplan.lab.model import Spread, StratumSpread
from fieldplan.packet.drawing import (
    BLUE,
    INK,
    LINE,
    NARROW_MM,
    SOFT,
    WIDE_MM,
    new_figure,
    pens,
    shortened,
    svg_text,
    text_width_mm,
    wrapped,
)
from fieldplan.packet.sheets.wording import number

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

_DOT_MM = 1.9


def pilot_dots(spread: Spread, *, name: str = "") -> Figure:
    """Draw one dot a location, one row a stratum.

    Parameters
    ----------
    spread : Spread
        Strata whose values are kept; the whole site where no stratum has any.
    name : str
        The analyte as printed; its id when empty.

    Returns
    -------
    Figure
        165 mm wide, and as narrow as a phone, with its caption and its words. Non-detects are
        hollow and stand at half their limit.

    Raises
    ------
    ValueError
        Sigma was typed, so that there are no values to draw.
    """
    rows = _rows(spread)
    if not rows:
        message = f"sigma of {spread.analyte!r} was typed; there are no pilot values to draw"
        raise ValueError(message)
    with pens():
        wide, narrow = (
            svg_text(_drawing(spread, rows, name=name or spread.analyte, width=mm))
            for mm in (WIDE_MM, NARROW_MM)
        )
    caption = f"Every pilot value of {name or spread.analyte}, one dot a location."
    words = " ".join(_words(row, spread.unit) for row in rows)
    return Figure(wide, caption, words, narrow_svg=narrow)


def _words(row: StratumSpread, unit: str) -> str:
    """Say one row in words for those who cannot see it."""
    low, high = number(min(row.values)), number(max(row.values))
    return f"{row.stratum}: {len(row.values)} values from {low} to {high} {unit}."


def stacked_levels(values: Sequence[float], width: float) -> list[int]:
    """Lift each dot until it covers no other: 0 on the line, then 1, 2 … above it.

    Parameters
    ----------
    values : sequence of float
        Where the dots stand.
    width : float
        Width of a dot in the same unit.

    Returns
    -------
    list of int
        In the order of ``values``.

    Examples
    --------
    >>> stacked_levels([1.0, 1.1, 5.0, 1.05], width=0.5)
    [0, 2, 0, 1]
    """
    levels = [0] * len(values)
    last: list[float] = []  # the rightmost dot of each level
    for index in sorted(range(len(values)), key=lambda at: (values[at], at)):
        level = next((k for k, end in enumerate(last) if values[index] - end >= width), len(last))
        if level == len(last):
            last.append(values[index])
        last[level] = values[index]
        levels[index] = level
    return levels


def _rows(spread: Spread) -> list[StratumSpread]:
    """List the strata with values, or the whole site."""
    rows = [entry for entry in spread.strata if entry.values]
    if not rows and spread.site is not None and spread.site.values:
        rows = [spread.site]
    return rows


def _drawing(
    spread: Spread, rows: list[StratumSpread], *, name: str, width: float = WIDE_MM
) -> "Canvas":
    """Stack one row a stratum above a common axis.

    Names stand at the left, or above their row where the figure is narrow.
    """
    narrow = width < WIDE_MM
    left = 4.0 if narrow else 42.0
    room = width - left - 5.0
    everything = [value for row in rows for value in row.values]
    low, high = min(0.0, *everything), max(everything)
    high = high if high > low else low + 1.0
    unit_per_mm = (high - low) * 1.06 / room
    stacks = [stacked_levels(row.values, _DOT_MM * unit_per_mm) for row in rows]
    above = 5.0 if narrow else 0.0
    heights = [max(11.0, _DOT_MM * (max(levels) + 1) + 6.0) + above for levels in stacks]
    total = sum(heights) + 17.0
    figure = new_figure(width, total)
    axes = figure.add_axes((left / width, 14 / total, room / width, sum(heights) / total))
    axes.set_xlim(low - (high - low) * 0.02, high + (high - low) * 0.04)
    axes.set_ylim(0, sum(heights))
    base = sum(heights)
    for row, levels, height in zip(rows, stacks, heights, strict=True):
        base -= height
        _row(axes, row, levels=np.array(levels), base=base + 3.0)
        if narrow:
            words = shortened(f"{row.stratum}: {_count(row)}", 8, width_mm=room)
            axes.text(axes.get_xlim()[0], base + height - 3.0, words, va="center")
        else:
            _name(axes, row, base=base + 3.0)
    axes.spines["left"].set_visible(False)
    axes.set_yticks([])
    axes.set_xlabel(f"{name} ({spread.unit})")
    words = "● result   ○ non-detect, at half its limit   │ mean"
    figure.text(0.985, 0.4 / total, words, ha="right", va="bottom", fontsize=6.5, color=SOFT)
    return figure


def _row(axes: "Axes", row: StratumSpread, *, levels: np.ndarray, base: float) -> None:
    """Draw the dots of one stratum, its mean as an upright line and its name."""
    values = np.array(row.values)
    detected = np.array(row.detected or (True,) * len(values))
    heights = base + _DOT_MM * (levels + 0.5)
    axes.axhline(base, color=LINE, linewidth=0.5)
    for chosen, face in ((detected, BLUE), (~detected, "white")):
        axes.plot(
            values[chosen], heights[chosen], linestyle="none", marker="o",
            markersize=_DOT_MM * 72 / 25.4 * 0.9, markerfacecolor=face, markeredgecolor=BLUE,
            markeredgewidth=0.9, clip_on=False,
        )  # fmt: skip
    if row.mean is not None:
        axes.plot([row.mean] * 2, [base - 1.6, base + 5.5], color=INK, linewidth=1.6, zorder=1)


def _count(row: StratumSpread) -> str:
    """Count values and non-detects of a row."""
    missing = sum(not detected for detected in row.detected)
    return f"n = {len(row.values)}" + (f", {missing} non-detect" if missing else "")


def _name(axes: "Axes", row: StratumSpread, *, base: float) -> None:
    """Write name and count left of a row."""
    points = 8.0 if text_width_mm(row.stratum, 8, bold=True) <= 38 else 7.0
    names = wrapped(row.stratum, points, width_mm=38, most=2, bold=True)
    lines = [(words, "bold") for words in names] + [(_count(row), "normal")]
    step = 3.6 if len(lines) == 2 else 2.9
    for place, (words, weight) in enumerate(reversed(lines)):
        lift = 0.8 + step * place
        axes.annotate(
            words, (0, base + lift), (-4, 0), xycoords=("axes fraction", "data"),
            textcoords="offset points", ha="right", va="center", weight=weight, fontsize=points,
        )  # fmt: skip
