"""Wings beside the gray region: what is drawn, and that the words find room."""

import pytest

from fieldplan.packet.charts.wrong_calls import wrong_calls_drawing
from fieldplan.packet.drawing import NARROW_MM, WIDE_MM, pens
from fieldplan.sizing.asked.wrong_calls import Wing, wrong_calls
from fieldplan.sizing.model import Picture


def made(edge: float) -> Picture:
    """Two wings made by hand; an edge near 0 leaves the left one hardly any room."""
    low = Wing(
        name="gray edge 12 mg/kg",
        chance_name="beta 20 %",
        chance=20.0,
        words="does not come out below the level, though it is below it",
        x=(edge, edge / 2, 0.0),
        y=(18.0, 4.0, 1.0),
        wider=(40.0, 15.0, 4.0),
    )
    high = Wing(
        name="level 150 mg/kg",
        chance_name="alpha 5 %",
        chance=5.0,
        words="comes out below the level, though it is not",
        x=(150.0, 160.0, 170.0),
        y=(5.0, 1.0, 0.1),
        wider=(5.0, 2.0, 0.4),
    )
    return wrong_calls((high, low), caption="c", alternative="a", x_label="x", y_label="y")


@pytest.mark.parametrize("width", [WIDE_MM, NARROW_MM])
@pytest.mark.parametrize("edge", [4.0, 110.0])
def test_no_words_touch_each_other_or_leave_the_figure(width: float, edge: float) -> None:
    """A reader of the narrow page sees every word whole, also where a wing is short."""
    with pens():
        figure = wrong_calls_drawing(made(edge), width)
        figure.draw_without_rendering()
        axes = figure.axes[0]
        boxes = [text.get_window_extent() for text in axes.texts]
        page = figure.bbox
    assert len(boxes) == 5  # two ends, two wings, one dashed line
    for place, box in enumerate(boxes):
        assert page.x0 <= box.x0
        assert box.x1 <= page.x1
        assert box.y1 <= page.y1
        assert not any(box.overlaps(other) for other in boxes[place + 1 :])


@pytest.mark.parametrize("width", [WIDE_MM, NARROW_MM])
def test_nothing_is_drawn_inside_the_gray_region(width: float) -> None:
    """Between edge and level neither call counts as wrong: its shading stands alone."""
    with pens():
        axes = wrong_calls_drawing(made(110.0), width).axes[0]
    for line in axes.lines:
        assert not any(110 < x < 150 for x in line.get_xdata())
