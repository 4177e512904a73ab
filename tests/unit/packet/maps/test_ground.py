"""The ground of a map: what is drawn on a page, and with how many different fills."""

from collections.abc import Iterator
from dataclasses import replace

import pytest
import shapely
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import PathPatch

from fieldplan.frame.model import Frame, Stratum
from fieldplan.packet.maps.content import plan_content
from fieldplan.packet.maps.ground import DIFFERENT_FILLS, draw_grounds, grounds
from fieldplan.packet.maps.panels import note_lines
from fieldplan.plan.model import Plan
from tests.factories import make_plan


def striped(count: int) -> Frame:
    """The factory's frame cut into strips of 1 m by 10 m."""
    strips = tuple(
        Stratum(f"s{k:03d}", 10.0, 1 / count, shapely.box(k, 0, k + 1, 10)) for k in range(count)
    )
    return replace(
        make_plan().frame, strata=strips, excluded=(), boundary=shapely.box(0, 0, count, 10)
    )


def striped_plan(count: int) -> Plan:
    """The factory's plan on such a frame."""
    return replace(make_plan(), frame=striped(count))


@pytest.fixture
def axes() -> Iterator[Axes]:
    """Axes that show 20 m by 10 m, from the third strip on."""
    found = Figure().add_axes((0, 0, 1, 1))
    found.set_xlim(2.5, 22.5)
    found.set_ylim(0, 10)
    return found


def patches(axes: Axes) -> list[PathPatch]:
    """What was drawn."""
    return [artist for artist in axes.get_children() if isinstance(artist, PathPatch)]


def test_fills_differ_for_24_strata_and_then_come_again() -> None:
    """Lines of a hatch grow with the square of its density: 13 times as dense took 35 s a map."""
    styles = [repr(layer.style) for layer in grounds(striped(400))[:-1]]
    assert len(set(styles[:24])) == len(set(styles)) == DIFFERENT_FILLS == 24
    assert styles[24:48] == styles[:24]


def test_a_map_says_that_fills_come_again() -> None:
    """Who reads a stratum off the hatch would read the wrong one."""
    for count, said in ((24, False), (25, True)):
        plan = striped_plan(count)
        words = f"{count} strata share 24 fills, which come again and again; the list of points"
        assert any(words in line for line in note_lines(plan, plan_content(plan))) == said


def test_a_page_draws_only_the_ground_that_it_shows(axes: Axes) -> None:
    """Every page of an atlas drawing every stratum would grow with the square of the site."""
    draw_grounds(axes, grounds(striped(400)), metres_per_mm=0.01)
    *fills, _outline = patches(axes)
    shown = {float(x) for patch in fills for x in patch.get_path().vertices[:, 0]}
    assert (min(shown), max(shown)) == (2.0, 23.0)


def test_ground_of_one_style_is_drawn_with_one_pen(axes: Axes) -> None:
    """400 strata in 24 fills take 24 pens; all of their ground is drawn."""
    axes.set_xlim(0, 400)
    draw_grounds(axes, grounds(striped(400)), metres_per_mm=0.01)
    *fills, outline = patches(axes)
    assert len(fills) == 24
    assert outline.get_facecolor()[3] == 0.0
    corners = sum(len(patch.get_path().vertices) for patch in fills)
    assert corners == 400 * 5


def test_axes_keep_the_limits_that_give_the_scale(axes: Axes) -> None:
    """A map that widened to its ground would no longer be true to scale."""
    draw_grounds(axes, grounds(striped(400)), metres_per_mm=0.01)
    assert axes.get_xlim() == (2.5, 22.5)
    assert axes.get_ylim() == (0, 10)
