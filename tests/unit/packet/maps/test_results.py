"""The results map: what was found where, without a surface."""

from dataclasses import replace

import pytest

from fieldplan.campaign.model import Paper
from fieldplan.packet.drawing import pens
from fieldplan.packet.maps.classes import class_bounds, class_of, class_words
from fieldplan.packet.maps.content import plan_content
from fieldplan.packet.maps.printed import draw_pages
from fieldplan.packet.maps.results import results_content, results_map
from tests.factories import make_campaign, make_estimate, make_plan


@pytest.fixture(scope="module")
def content():
    """The marks of the factory's returns."""
    return results_content(make_plan(), make_estimate())


def named(content, name: str):
    """The mark whose name starts so."""
    return next(mark for mark in content.marks if mark.name.startswith(name))


def test_every_result_is_named_with_its_value_as_reported(content) -> None:
    """``<5`` stays ``<5``; a number invented for it would look measured."""
    names = {mark.name for mark in content.marks if mark.name}
    assert {"QFA01 41", "QFB04 <5", "QFT01 910", "QFA04 lost"} <= names
    assert len(names) == 11


def test_non_detects_are_hollow_and_detects_are_filled(content) -> None:
    """Readable without colour."""
    assert named(content, "QFB04").pen.face == "white"
    assert named(content, "QFB02").pen.face != "white"


def test_larger_values_have_larger_and_darker_marks(content) -> None:
    """Size carries the class in a grey copy."""
    low, high = named(content, "QFA03").pen, named(content, "QFB02").pen
    assert high.size_mm > low.size_mm

    def light(colour: str) -> int:
        return sum(int(colour[at : at + 2], 16) for at in (1, 3, 5))

    assert light(high.face) < light(low.face)


def test_results_outside_the_mean_are_crossed(content) -> None:
    """The targeted tank and the broken jar: two crosses on top of their marks."""
    crossed = {(mark.easting, mark.northing) for mark in content.marks if mark.pen.marker == "X"}
    tank, jar = named(content, "QFT01"), named(content, "QFB05")
    assert crossed == {(tank.easting, tank.northing), (jar.easting, jar.northing)}


def test_a_moved_location_stands_where_it_was_taken_with_an_arrow_from_the_plan(content) -> None:
    """9 m east and 6 m south of the plan, as the factory moved it."""
    (arrow,) = content.arrows
    mark = named(content, "QFB03")
    assert (arrow.from_easting, arrow.from_northing) == (150.0, 80.0)
    assert (mark.easting, mark.northing) == pytest.approx((159.0, 74.0), abs=0.02)
    assert (arrow.to_easting, arrow.to_northing) == (mark.easting, mark.northing)


def test_the_map_says_the_answer_and_that_no_surface_is_drawn(content) -> None:
    """Nine results do not draw a map of the ground between."""
    with pens():
        (figure,), _ = draw_pages(make_plan(), content)
    words = " ".join(t.get_text() for axes in figure.axes for t in axes.texts)
    assert "The site mean of lead is 62.5 mg/kg" in words
    assert "No surface is drawn between them" in words
    assert "above 150 mg/kg (action level)" in words
    assert not any(axes.images or axes.collections for axes in figure.axes)


@pytest.mark.parametrize("paper", ["A4", "Letter"])
def test_no_sentence_of_the_notes_is_cut_and_nothing_is_open_any_more(paper: str) -> None:
    """A caution cut in its middle says something else; work that is done needs no permission."""
    plan = make_plan(campaign=make_campaign(paper=Paper(size=paper)))
    long = "The interval lies below the action level. " + "It speaks of the mean alone. " * 12
    estimate = make_estimate(level_sentence=long.strip())
    with pens():
        content = results_content(plan, estimate)
        figures, _ = draw_pages(plan, content)
    words = " ".join(t.get_text() for axes in figures[0].axes for t in axes.texts)
    assert long.strip() in content.lines
    assert all(line in words for line in content.lines)
    assert plan.open_items
    assert "OPEN" not in words
    with pens():
        before, _ = draw_pages(plan, plan_content(plan))
    assert "OPEN: " in " ".join(t.get_text() for axes in before[0].axes for t in axes.texts)


def test_sources_give_way_whole_where_there_is_no_room() -> None:
    """Half a source is none; the working has them all."""
    plan = make_plan()
    sources = tuple(f"layer {number} from a survey of 2019, " * 6 for number in range(12))
    plan = replace(plan, frame=replace(plan.frame, sources=sources))
    with pens():
        figures, _ = draw_pages(plan, results_content(plan, make_estimate()))
    words = " ".join(t.get_text() for axes in figures[0].axes for t in axes.texts)
    assert "Sources: in full in The working, office folder." in words
    assert "layer 0" not in words


def test_the_results_map_is_printed_as_pages_and_as_a_picture() -> None:
    """Both are read by the results sheet's writer."""
    printed = results_map(make_plan(), make_estimate())
    assert printed.pdf.startswith(b"%PDF-")
    assert printed.png.startswith(b"\x89PNG")
    assert printed.pages == 1


@pytest.mark.parametrize(
    "values",
    [
        [1.0, 2.0],
        [5.0, 5.0, 5.0],
        [0.001, 0.002, 0.0031, 0.004],
        [3.0, 40.0, 900.0, 1e5],
        [7.0],
        [],
    ],
)
def test_classes_hold_every_value_once_and_none_is_empty_at_the_ends(values: list[float]) -> None:
    """Bounds rise, and lie where values lie."""
    bounds = class_bounds(values, None)
    assert list(bounds) == sorted(set(bounds))
    assert len(class_words(bounds, "mg/kg", action_level=None)) == len(bounds) + 1
    classes = [class_of(value, bounds) for value in values]
    if bounds:
        assert min(classes) == 0
        assert max(classes) >= 1


def test_the_action_level_parts_classes_only_where_values_lie_on_both_sides() -> None:
    """A level far above all results would add an empty class."""
    assert 150.0 in class_bounds([41.0, 66.0, 120.0, 187.0], 150.0)
    assert 150.0 not in class_bounds([41.0, 66.0, 120.0, 130.0], 150.0)
