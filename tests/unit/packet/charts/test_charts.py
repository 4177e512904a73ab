"""Charts of a sheet: what they draw, read from the drawing, and the same text every time."""

import re
from dataclasses import replace

import lxml.etree
import numpy as np
import pytest

from fieldplan.base.document import Figure
from fieldplan.estimate.model import Interval
from fieldplan.lab.model import Spread, StratumSpread
from fieldplan.packet.charts import interval as interval_module
from fieldplan.packet.charts import interval_figure, pilot_dots, precision_curve, site_figure
from fieldplan.packet.charts import pilot as pilot_module
from fieldplan.packet.charts import precision as precision_module
from fieldplan.packet.charts import site as site_module
from fieldplan.packet.charts.pilot import stacked_levels
from fieldplan.packet.drawing import NARROW_MM, WIDE_MM, pens
from fieldplan.packet.maps.content import plan_content
from tests.factories import make_estimate, make_plan, make_size, make_spread
from tests.unit.packet.maps.sites import make_area_plan, make_list_plan, make_outline


def make_pilot() -> Spread:
    """Eight meadow values, five in the yard with two non-detects at half their limit of 5."""
    meadow = StratumSpread(
        "lead", "meadow", 18.0, 40.0, 8, "pilot.csv",
        values=(22.0, 31.0, 35.0, 35.0, 35.0, 44.0, 58.0, 60.0), detected=(True,) * 8,
    )  # fmt: skip
    yard = StratumSpread(
        "lead", "yard $x$", 45.0, 61.0, 5, "pilot.csv",
        values=(2.5, 2.5, 50.0, 90.0, 160.0), detected=(False, False, True, True, True),
    )  # fmt: skip
    return Spread("lead", "mg/kg", (meadow, yard))


def words_of(figure) -> list[str]:
    """All words on a matplotlib figure."""
    return [t.get_text() for axes in figure.axes for t in axes.texts] + [
        t.get_text() for t in figure.texts
    ]


FIGURES = {
    "precision": lambda: precision_curve(make_size()),
    "pilot": lambda: pilot_dots(make_pilot()),
    "interval": lambda: interval_figure(make_estimate(), action_level=150.0),
    "site": lambda: site_figure(make_plan()),
}


@pytest.mark.parametrize("name", FIGURES)
def test_a_figure_is_whole_svg_with_words_and_no_outside_address(name: str) -> None:
    """It goes into pages that are opened without a network and by people who cannot see."""
    figure = FIGURES[name]()
    assert isinstance(figure, Figure)
    tree = lxml.etree.fromstring(figure.svg.encode())
    assert tree.tag == "{http://www.w3.org/2000/svg}svg"
    assert float(tree.get("width").removesuffix("pt")) == pytest.approx(165 / 25.4 * 72, abs=0.1)
    # letters are outlines, so that every machine shows the same
    assert not tree.findall(".//{*}text")
    links = tree.xpath("//@*[name()='xlink:href' or name()='href']")
    assert all(link.startswith("#") for link in links)
    assert not tree.findall(".//{*}script")
    assert figure.caption
    assert len(figure.alternative) > 20


@pytest.mark.parametrize("name", FIGURES)
def test_a_figure_has_a_drawing_for_phones(name: str) -> None:
    """92 mm are what a phone shows of a page at its own size."""
    tree = lxml.etree.fromstring(FIGURES[name]().narrow_svg.encode())
    assert float(tree.get("width").removesuffix("pt")) == pytest.approx(92 / 25.4 * 72, abs=0.1)


@pytest.mark.parametrize("name", FIGURES)
def test_a_figure_is_the_same_text_every_time(name: str) -> None:
    """Packets are compared byte by byte; matplotlib's ids and dates would differ."""
    first, second = FIGURES[name](), FIGURES[name]()
    assert first == second
    assert "<dc:date>" not in first.svg


def test_the_curve_shows_the_points_the_band_the_target_and_the_chosen_n() -> None:
    """Read off the artists: the numbers of the size, not of the drawing code."""
    size = replace(make_size(), needed=11)
    with pens():
        figure = precision_module._drawing(size)
    upper, lower = figure.axes
    lines = [line.get_xydata().tolist() for line in upper.lines]
    assert [[p.n, p.standard_error] for p in size.curve] in lines
    assert [[p.n, p.standard_error_low] for p in size.curve] in lines
    assert [[p.n, p.standard_error_high] for p in size.curve] in lines
    assert [[0.0, 9.0], [1.0, 9.0]] in lines
    assert [[11.0, 0.0], [11.0, 1.0]] in lines
    assert [[p.n, p.cost] for p in size.curve] in [x.get_xydata().tolist() for x in lower.lines]
    words = words_of(figure)
    assert "target 9 mg/kg" in words
    assert "11 needed" in words
    assert "7 by the plain formula" in words


@pytest.mark.parametrize("width", [WIDE_MM, NARROW_MM])
@pytest.mark.parametrize(
    ("plain", "needed"),
    [(7, 8), (6, 29), (16, 29), (13, 15), (28, 29), (30, 30), (55, 59), (20, 16), (5, 60)],
)
def test_names_of_marks_cross_no_line_and_leave_no_page(
    plain: int, needed: int, width: float
) -> None:
    """Measured on the drawing: a name across the other's line is read as the other's."""
    point = make_size().curve[0]
    curve = tuple(replace(point, n=n, standard_error=60 / n) for n in range(5, 61))
    size = replace(make_size(), curve=curve, plain_n=plain, needed=needed)
    with pens():
        figure = precision_module._drawing(size, width=width)
        axes = figure.axes[0]
        renderer = figure.canvas.get_renderer()
        named = [
            text for text in axes.texts if text.get_text().startswith((f"{plain} ", f"{needed} "))
        ]
        boxes = [text.get_window_extent(renderer) for text in named]
        lines = [
            text.arrow_patch.get_window_extent(renderer) for text in axes.texts if text.arrow_patch
        ]
    assert len(named) == len(lines) == len({plain, needed})
    for box in boxes:
        assert box.x0 >= 0
        assert box.x1 <= figure.bbox.width
        assert box.y0 >= axes.bbox.y1
        assert not any(
            line.x0 > box.x0 and line.x1 < box.x1 and line.y1 > box.y0 + 1 for line in lines
        )
    assert len(boxes) == 1 or not boxes[0].overlaps(boxes[1])


def test_a_target_half_width_is_drawn_as_half_width() -> None:
    """At each n the band keeps its share: half-width is proportional to the standard error."""
    size = replace(make_size(), target_half_width=22.0)
    with pens():
        figure = precision_module._drawing(size)
    lines = [np.asarray(line.get_ydata(), dtype=float) for line in figure.axes[0].lines]
    widths = np.array([p.half_width for p in size.curve])
    assert any(len(y) == len(widths) and np.allclose(y, widths) for y in lines)
    assert any(len(y) == len(widths) and np.allclose(y, widths * 1.25) for y in lines)
    assert "half-width" in figure.axes[0].get_ylabel()
    assert "half-width" in precision_curve(size).alternative


def test_without_a_cost_there_is_one_panel() -> None:
    """No empty axes."""
    size = make_size()
    size = replace(size, curve=tuple(replace(p, cost=None) for p in size.curve))
    with pens():
        assert len(precision_module._drawing(size).axes) == 1


def test_a_curve_without_points_is_refused() -> None:
    """An empty drawing would look like an answer."""
    with pytest.raises(ValueError, match="main"):
        precision_curve(replace(make_size(), curve=()))


def test_every_pilot_value_is_one_dot_and_non_detects_are_hollow() -> None:
    """Counted on the drawing."""
    with pens():
        figure = pilot_module._drawing(make_pilot(), list(make_pilot().strata), name="Lead")
    dots = {"filled": [], "hollow": []}
    for line in figure.axes[0].lines:
        if line.get_marker() == "o":
            kind = "hollow" if line.get_markerfacecolor() == "white" else "filled"
            dots[kind] += list(line.get_xdata())
    assert sorted(dots["hollow"]) == [2.5, 2.5]
    assert len(dots["filled"]) == 11
    words = words_of(figure)
    assert "n = 5, 2 non-detect" in words
    assert "yard $x$" in words


def test_equal_values_are_stacked_so_that_none_hides() -> None:
    """Three results of 35 are three dots."""
    assert stacked_levels([35.0, 35.0, 35.0], 1.0) == [0, 1, 2]
    assert stacked_levels([1.0, 2.0, 3.0], 0.5) == [0, 0, 0]


@pytest.mark.parametrize("seed", range(3))
def test_no_two_dots_of_a_level_come_closer_than_a_dot(seed: int) -> None:
    """By brute force over all pairs."""
    values = np.random.default_rng(seed).normal(0, 1, 60).tolist()
    levels = stacked_levels(values, 0.2)
    for i in range(60):
        for j in range(i):
            assert levels[i] != levels[j] or abs(values[i] - values[j]) >= 0.2


def test_a_typed_sigma_has_no_dots_and_says_so() -> None:
    """ASSUMED spreads have no values."""
    with pytest.raises(ValueError, match="typed"):
        pilot_dots(make_spread())


def test_the_interval_ends_where_the_estimate_says() -> None:
    """Three bars: non-detects at half, at 0 and at the limit; the answer on top."""
    with pens():
        figure = interval_module._drawing(make_estimate(), "Lead", level=150.0)
    (axes,) = figure.axes
    bars = [line.get_xdata() for line in axes.lines if len(line.get_xdata()) == 2]
    spans = {tuple(float(x) for x in bar) for bar in bars}
    assert {(29.15, 95.86), (28.56, 96.10), (29.75, 95.63)} <= spans
    assert [t.get_text() for t in axes.get_yticklabels()][-1] == "non-detects at half"
    assert "action level 150 mg/kg" in words_of(figure)
    assert {"95.9", "28.6", "96.1", "29.8", "95.6"} <= set(words_of(figure))
    assert "95 % two-sided interval" in axes.get_xlabel()


def test_numbers_of_the_interval_keep_their_zeros() -> None:
    """52 beside 51.9 looks like another measurement; 52.0 does not."""
    interval = Interval("two-sided", 0.95, 51.9, 52.04)
    estimate = replace(make_estimate(), bracket=None, interval=interval)
    with pens():
        figure = interval_module._drawing(estimate, "Lead", level=None)
    assert "52.0" in words_of(figure)
    assert "to 52.0 mg/kg" in interval_figure(estimate).alternative


@pytest.mark.parametrize(
    ("interval", "arrow"),
    [
        (Interval("upper-limit", 0.95, None, 88.69), "<"),
        (Interval("lower-limit", 0.95, 40.0, None), ">"),
    ],
)
def test_the_open_end_of_a_limit_is_an_arrow(interval: Interval, arrow: str) -> None:
    """It has no end to draw."""
    estimate = replace(make_estimate(), bracket=None, interval=interval)
    with pens():
        figure = interval_module._drawing(estimate, "Lead", level=None)
    markers = [line.get_marker() for line in figure.axes[0].lines]
    assert markers.count(arrow) == 1
    assert interval.kind.replace("-", " ") in figure.axes[0].get_xlabel()


def test_the_site_figure_names_locations_only_where_all_names_fit() -> None:
    """Else the caption sends the reader to the printed map."""
    few, many = site_figure(make_plan()), site_figure(make_area_plan(make_outline(900.0), 150))
    assert "printed map names" not in few.caption
    assert "printed map names" in many.caption
    assert "random (9), alternate (4), targeted (1)" in few.alternative


def test_the_legend_of_the_site_figure_is_readable_and_fills_its_panel() -> None:
    """7 points on paper; eight strata and exclusions keep their names whole."""
    plan = make_plan()
    for count in (2, 8, 14):
        strata = tuple(
            replace(plan.frame.strata[n % 2], name=f"parcel {n} of the old estate")
            for n in range(count)
        )
        shown = replace(plan, frame=replace(plan.frame, strata=strata))
        content = plan_content(shown)
        with pens():
            figure = site_module._drawing(shown, content, spec=site_module._spec(shown, content))
        words = [t for axes in figure.axes for t in axes.texts if "parcel" in t.get_text()]
        assert len(words) == count or "more" in " ".join(words_of(figure))
        assert all(text.get_text().endswith("estate") for text in words)
        assert min(text.get_fontsize() for text in words) >= (7 if count < 9 else 5)


def test_the_site_figure_draws_lists_and_assumed_boundaries() -> None:
    """Every kind of frame has its sheet."""
    assert site_figure(make_list_plan()).svg
    plain = site_figure(make_area_plan(make_outline(100.0), 8)).svg
    assumed = site_figure(make_area_plan(make_outline(100.0), 8, assumed=True)).svg
    assert re.sub(r"\s", "", plain) != re.sub(r"\s", "", assumed)
