"""Words beside the lines of a finding's picture: none crosses a line or another word."""

import itertools

import pytest
from matplotlib.text import Text

from fieldplan.packet.charts.finding_picture import _drawn
from fieldplan.packet.charts.frontier import frontier_drawing
from fieldplan.packet.drawing import NARROW_MM, WIDE_MM, pens
from fieldplan.sizing.asked import count
from fieldplan.sizing.model import Picture, Series
from tests.unit.sizing.askings import asked_numbers


def two_lines(kind: str = "lines") -> Picture:
    """Two lines that end close to each other, and a level between them."""
    high = Series("as planned", (10.0, 20.0, 40.0), (8.0, 5.0, 4.1))
    low = Series("compact parts", (10.0, 20.0, 40.0), (6.0, 4.5, 4.0))
    plan = Series("this plan", (20.0,), (5.0,), "points")
    more = (plan,) if kind == "frontier" else ()
    return Picture(
        kind, "c", "a", "x", "y", (high, low, *more), levels=(("target 4.05 mg/kg", 4.05),)
    )


@pytest.mark.parametrize("width", [WIDE_MM, NARROW_MM])
@pytest.mark.parametrize("kind", ["lines", "frontier"])
def test_names_at_the_ends_stand_apart_outside_the_lines(kind: str, width: float) -> None:
    """Three ends within a twentieth of the height: their names still have room between them."""
    with pens():
        draw = frontier_drawing if kind == "frontier" else _drawn
        figure = draw(two_lines(kind), width)
        figure.draw_without_rendering()
        axes = figure.axes[0]
        names = [text for text in axes.texts if text.get_text() != "this plan"]
        assert len(names) == 3
        boxes = [Text.get_window_extent(text) for text in names]  # without its leader
        edge = axes.get_window_extent().x1
        least = 0.05 * min(box.height for box in boxes)
    ordered = sorted(boxes, key=lambda box: box.y0)
    for below, above in itertools.pairwise(ordered):
        assert above.y0 - below.y1 > least
    assert all(box.x1 <= figure.bbox.x1 for box in boxes)
    assert kind == "frontier" or all(box.x0 >= edge for box in boxes)


@pytest.mark.parametrize("width", [WIDE_MM, NARROW_MM])
def test_the_true_mean_is_named_beside_the_band(width: float) -> None:
    """Neither the line of the mean nor that of the plan runs through its name."""
    low = Series("", (4.0, 9.0, 15.0), (2.0, 3.0, 3.5), "band-low")
    high = Series("", (4.0, 9.0, 15.0), (7.0, 5.6, 5.0), "band-high")
    misses = Series("true mean above", (4.0, 9.0, 15.0), (10.0, 9.1, 7.1), "points")
    picture = Picture(
        "mean-band", "c", "a", "n", "mean", (low, high, misses),
        marks=(("15 planned", 15.0),), levels=(("true mean", 4.3),),
    )  # fmt: skip
    with pens():
        figure = _drawn(picture, width)
        figure.draw_without_rendering()
        axes = figure.axes[0]
        name = next(text for text in axes.texts if text.get_text() == "true mean")
        box, inside = name.get_window_extent(), axes.get_window_extent()
    assert inside.x1 < box.x0
    assert box.x1 <= figure.bbox.x1


def test_the_picture_of_change_gives_the_value_of_its_target() -> None:
    """A line called target, without a number, has to be read off the axis."""
    asked = asked_numbers(
        question="change", sigma=6.0, unit="mg/kg", keys=("correlation=0.6", "half_width=4")
    )
    picture = count(asked).finding.picture
    assert picture is not None
    assert picture.levels == (("target 4 mg/kg", 4.0),)
