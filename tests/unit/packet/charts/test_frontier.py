"""Precision against money as a drawing: names, room, colours."""

from dataclasses import replace

import lxml.etree
import pytest
from matplotlib.text import Text
from matplotlib.transforms import Bbox

from fieldplan.packet.charts import frontier as frontier_module
from fieldplan.packet.charts.finding_picture import finding_picture
from fieldplan.packet.charts.frontier import frontier_drawing
from fieldplan.packet.drawing import NARROW_MM, WIDE_MM, pens
from fieldplan.sizing.model import Picture, Series

STEPS = tuple(range(1, 9))


def kind(label: str, each: float) -> Series:
    """One kind of design: the error falls with the root of n, money grows with it."""
    return Series(
        label, tuple(300 + each * 5 * k for k in STEPS), tuple(9 / k**0.5 for k in STEPS), "line"
    )


def make_picture(*extra: Series) -> Picture:
    """Three kinds, their dots and rings, and the plan."""
    kinds = (kind("strata, Neyman", 60), kind("strata, proportional", 90), kind("no strata", 700))
    return Picture(
        kind="frontier", caption="Caption.", alternative="Words.", x_label="cost (EUR)",
        y_label="standard error\n(mg/kg)",
        series=(
            *kinds,
            *extra,
            Series("", kinds[1].x, kinds[1].y, "hollow"),
            Series("", kinds[0].x, kinds[0].y, "points"),
            Series("this plan", (1400.0,), (5.2,), "points"),
        ),
        levels=(("5.00 mg/kg wanted", 5.0),),
    )  # fmt: skip


def drawn(picture: Picture, width: float = WIDE_MM):  # type: ignore[no-untyped-def]
    """The figure, laid out."""
    with pens():
        figure = frontier_drawing(picture, width)
        figure.canvas.draw()
    return figure


def names(figure) -> dict[str, Bbox]:  # type: ignore[no-untyped-def]
    """Every word on the drawing with its box in pixels."""
    renderer = figure.canvas.get_renderer()
    return {
        t.get_text(): Text.get_window_extent(t, renderer)
        for t in figure.axes[0].texts
        if t.get_text()
    }


@pytest.mark.parametrize("width", [WIDE_MM, NARROW_MM])
def test_every_kind_is_named_inside_the_drawing_and_no_name_covers_another(width: float) -> None:
    """Direct labels in place of a legend must all be readable."""
    crowd = [kind(f"results with meter {k}", 61 + k) for k in range(4)]
    figure = drawn(make_picture(*crowd), width)
    boxes = names(figure)
    wanted = {"strata, Neyman", "strata, proportional", "this plan", "5.00 mg/kg wanted"}
    assert wanted | {series.label for series in crowd} <= set(boxes)
    edge = figure.bbox
    for box in boxes.values():
        assert edge.x0 <= box.x0
        assert box.x1 <= edge.x1 + 1
        assert edge.y0 <= box.y0
        assert box.y1 <= edge.y1 + 1
    kinds = [box for words, box in boxes.items() if words != "this plan"]
    for k, one in enumerate(kinds):
        for other in kinds[k + 1 :]:
            assert not one.overlaps(other)


def test_money_runs_past_the_plan_and_not_to_the_dearest_kind() -> None:
    """A kind ten times as dear would press all others against the axis."""
    figure = drawn(make_picture())
    far = figure.axes[0].get_xlim()[1]
    assert 1400 < far < 300 + 700 * 40
    assert far >= 300 + 60 * 40


def test_each_kind_has_a_colour_and_a_dash_of_its_own() -> None:
    """Whoever cannot tell the colours tells the dashes."""
    figure = drawn(make_picture())
    lines = [line for line in figure.axes[0].lines if len(line.get_xdata()) == len(STEPS)]
    assert len(lines) == 3
    assert len({line.get_color() for line in lines}) == 3
    assert len({str(dash) for _, dash in frontier_module._LINES[:5]}) == 5


def test_a_long_name_is_shortened_and_the_figure_is_whole() -> None:
    """A reading may be called anything, dollar signs and all."""
    picture = make_picture(kind("results with " + "a very long $name$ " * 5, 65))
    figure = finding_picture(picture)
    for svg, width in ((figure.svg, WIDE_MM), (figure.narrow_svg, NARROW_MM)):
        tree = lxml.etree.fromstring(svg.encode())
        assert float(tree.get("width").removesuffix("pt")) == pytest.approx(
            width / 25.4 * 72, abs=0.1
        )
    assert finding_picture(picture).svg == figure.svg
    assert (figure.caption, figure.alternative) == ("Caption.", "Words.")


def test_a_kind_too_dear_to_be_seen_is_not_named() -> None:
    """A name in the margin without a line would point at nothing."""
    far = replace(kind("far away", 70), x=tuple(50_000.0 + k for k in STEPS))
    assert "far away" not in names(drawn(make_picture(far)))
