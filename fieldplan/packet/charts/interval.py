"""The mean with its interval, the action level, and the bracket that non-detects leave open."""

from typing import TYPE_CHECKING

from fieldplan.base.document import Figure
from fieldplan.base.units import significant
from fieldplan.estimate.model import Estimate, Interval
from fieldplan.packet.drawing import (
    BLUE,
    INK,
    NARROW_MM,
    SOFT,
    VERMILION,
    WIDE_MM,
    new_figure,
    pens,
    svg_text,
)
from fieldplan.packet.sheets.wording import number

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

_Row = tuple[str, float, Interval]


def interval_figure(
    estimate: Estimate, *, name: str = "", action_level: float | None = None
) -> Figure:
    """Draw the mean and its declared interval as one bar, more bars where non-detects bracket it.

    Parameters
    ----------
    estimate : Estimate
        A one-sided limit is drawn with an arrow towards its open side.
    name : str
        The analyte as printed; its id when empty.
    action_level : float, optional
        In the laboratory's unit; drawn as an upright line.

    Returns
    -------
    Figure
        165 mm wide, with its caption and its words, and as narrow as a phone.
    """
    with pens():
        wide, narrow = (
            svg_text(_drawing(estimate, name or estimate.analyte, level=action_level, width=mm))
            for mm in (WIDE_MM, NARROW_MM)
        )
    caption = f"The mean of {name or estimate.analyte} and its {_kind(estimate.interval)}."
    if estimate.bracket is not None:
        which = "0, half and the limit" if estimate.as_bounds else "0 and at the limit"
        caption += f" Non-detects at {which} bracket the answer."
    words = "; ".join(_words(row, estimate.unit) for row in _rows(estimate))
    if action_level is not None:
        words += f"; action level {number(action_level)} {estimate.unit}"
    return Figure(wide, caption, words, narrow_svg=narrow)


def _words(row: _Row, unit: str) -> str:
    """Say one bar in words for those who cannot see it."""
    name, mean, span = row
    ends = [
        f"{word} {significant(end)} {unit}"
        for word, end in (("from", span.low), ("to", span.high))
        if end is not None
    ]
    return f"{name}: {significant(mean)} {unit}, {' '.join(ends)}"


def _rows(estimate: Estimate) -> list[_Row]:
    """List what is drawn, the answer first."""
    bracket = estimate.bracket
    if bracket is None:
        return [("mean", estimate.mean.mean, estimate.interval)]
    if not estimate.as_bounds:
        return [
            (
                "mean, at most" if estimate.upper_bound else "mean",
                estimate.mean.mean,
                estimate.interval,
            ),
            ("non-detects at 0", bracket.mean_low, bracket.interval_low),
            ("non-detects at the limit", bracket.mean_high, bracket.interval_high),
        ]
    return [
        ("non-detects at half", bracket.mean_half, bracket.interval_half),
        ("non-detects at 0", bracket.mean_low, bracket.interval_low),
        ("non-detects at the limit", bracket.mean_high, bracket.interval_high),
    ]


def _drawing(
    estimate: Estimate, name: str, *, level: float | None, width: float = WIDE_MM
) -> "Canvas":
    """Lay rows above an axis that starts where the numbers need it.

    Their names stand at the left, or above them where the figure is narrow.
    """
    rows, narrow = _rows(estimate), width < WIDE_MM
    height = (30.0 if narrow else 26.0) + (18.0 if narrow else 11.0) * len(rows)
    left, low = (4.0, 17.0) if narrow else (44.0, 13.0)
    figure = new_figure(width, height)
    axes = figure.add_axes(
        (left / width, low / height, (width - left - 7) / width, (height - low - 7) / height)
    )
    start, end = _limits(rows, level)
    axes.set_xlim(start, end)
    axes.set_ylim(-0.65, len(rows) - 0.35)
    for place, row in enumerate(reversed(rows)):
        _bar(axes, row, place=float(place), first=place == len(rows) - 1)
    if level is not None:
        _level(axes, level, unit=estimate.unit, late=level > (start + end) / 2)
    axes.spines["left"].set_visible(False)
    axes.set_yticks(range(len(rows)), [words for words, _, _ in reversed(rows)])
    axes.tick_params(axis="y", length=0, pad=9)
    if narrow:
        axes.set_yticks([])
        for place, (words, _, _) in enumerate(reversed(rows)):
            axes.annotate(
                words, (0, place), (0, 22), xycoords=("axes fraction", "data"),
                textcoords="offset points", va="center", color=SOFT,
            )  # fmt: skip
    axis = f"mean of {name} ({estimate.unit}),{chr(10) if narrow else ' '}"
    axes.set_xlabel(axis + _kind(estimate.interval))
    return figure


def _kind(interval: Interval) -> str:
    """Name the interval and its confidence."""
    name = {"two-sided": "two-sided interval"}.get(interval.kind, interval.kind.replace("-", " "))
    return f"{number(interval.confidence * 100)} % {name}"


def _limits(rows: list[_Row], action_level: float | None) -> tuple[float, float]:
    """Choose the ends of the axis with room for numbers and arrows."""
    ends = [mean for _, mean, _ in rows]
    ends += [end for _, _, span in rows for end in (span.low, span.high) if end is not None]
    if action_level is not None:
        ends.append(action_level)
    low, high = min(ends), max(ends)
    room = (high - low) * 0.16 or abs(high) * 0.1 or 1.0
    return low - room, high + room


def _bar(axes: "Axes", row: _Row, *, place: float, first: bool) -> None:
    """Draw one mean with its interval; an open end becomes an arrow."""
    _, mean, span = row
    colour, width = (BLUE, 2.4) if first else (SOFT, 1.3)
    left, right = axes.get_xlim()
    low = left if span.low is None else span.low
    high = right if span.high is None else span.high
    axes.plot([low, high], [place, place], color=colour, linewidth=width, solid_capstyle="butt")
    for end, value, arrow in ((low, span.low, "<"), (high, span.high, ">")):
        marker = arrow if value is None else "|"
        axes.plot([end], [place], marker=marker, color=colour, markersize=8, clip_on=False)
        if value is not None:
            axes.annotate(
                significant(value), (value, place), (0, -6), ha="center", va="top",
                textcoords="offset points", fontsize=7,
            )  # fmt: skip
    axes.plot([mean], [place], marker="o", color=colour, markersize=6)
    axes.annotate(
        significant(mean), (mean, place), (0, 6), ha="center", va="bottom",
        textcoords="offset points", weight="bold" if first else "normal", color=INK,
    )  # fmt: skip


def _level(axes: "Axes", level: float, *, unit: str, late: bool) -> None:
    """Draw the action level with its value above the frame."""
    axes.axvline(level, color=VERMILION, linewidth=1.2, linestyle=(0, (6, 2)))
    axes.annotate(
        f"action level {number(level)} {unit}", (level, 1.0), (0, 3),
        xycoords=("data", "axes fraction"), textcoords="offset points",
        ha="right" if late else "left", va="bottom", color=VERMILION,
    )  # fmt: skip
