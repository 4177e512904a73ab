"""Places in an area: inside, uniform, stable, spaced."""

import math

import hypothesis.strategies as st
import numpy as np
import pytest
import shapely
from hypothesis import given, settings

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.design.area import Ground, draw_places
from tests.unit.design import by_hand
from tests.unit.design.sites import MEADOW, MEADOW_POLYGON, YARD_POLYGON, polygon


def stream(seed: int = 1, stratum: str = "s") -> Stream:
    """Return the stream that places of a stratum are read from."""
    return Stream(seed, "main", stratum, "places")


@st.composite
def rings_with_a_hole(draw: st.DrawFn) -> list[by_hand.Ring]:
    """A star-shaped ring of 3 to 12 corners anywhere within 5 km, and a smaller one inside it."""
    corners = draw(st.integers(3, 12))
    radii = draw(st.lists(st.integers(20_000, 90_000), min_size=corners, max_size=corners))
    east, north = draw(st.integers(-5_000_000, 5_000_000)), draw(st.integers(-5_000_000, 5_000_000))
    turns = [(math.cos(2 * math.pi * k / corners), math.sin(2 * math.pi * k / corners))
             for k in range(corners)]  # fmt: skip
    shell = [(east + round(r * c), north + round(r * s))
             for r, (c, s) in zip(radii, turns, strict=True)]  # fmt: skip
    hole = [(east + round(0.4 * (x - east)), north + round(0.4 * (y - north))) for x, y in shell]
    return [shell, hole]


@settings(max_examples=60, deadline=None)
@given(rings=rings_with_a_hole(), seed=st.integers(0, 2**63 - 1))
def test_every_place_lies_inside_a_site_with_a_hole(rings: list[by_hand.Ring], seed: int) -> None:
    """Exact ray casting in whole millimetres, written apart, must agree for every place."""
    places = draw_places(Ground("s", polygon(rings)), 15, stream(seed))
    assert all(by_hand.inside(rings, (east, north)) for east, north in places.tolist())


@settings(max_examples=60, deadline=None)
@given(rings=rings_with_a_hole(), data=st.data())
def test_inside_agrees_with_exact_arithmetic_on_corners_and_lines(
    rings: list[by_hand.Ring], data: st.DataObject
) -> None:
    """The library's orientation test must be exact where rounding could tip it: on the line."""
    shell = [(round(x, -1), round(y, -1)) for x, y in rings[0]]
    near = []
    for (x1, y1), (x2, y2) in zip(shell, shell[1:] + shell[:1], strict=True):
        t = data.draw(st.fractions(0, 1, max_denominator=50))
        x, y = round(x1 + t * (x2 - x1)) // 10, round(y1 + t * (y2 - y1)) // 10
        near += [(x1 // 10, y1 // 10), (x, y), (x + 1, y), (x - 1, y), (x, y + 1), (x, y - 1)]
    ground = Ground("s", polygon([shell]))
    places = np.array(near, dtype=np.int64)
    found = ground.holds(places[:, 0], places[:, 1])
    assert found.tolist() == [by_hand.inside([shell], place) for place in near]


def test_a_place_on_the_line_is_not_inside() -> None:
    """Two strata that share a line must never both claim a place."""
    left, right = Ground("l", shapely.box(0, 0, 10, 10)), Ground("r", shapely.box(10, 0, 20, 10))
    east, north = np.full(3, 1000), np.array([0, 500, 999])
    assert not left.holds(east, north).any()
    assert not right.holds(east, north).any()


@pytest.mark.parametrize("geometry", [MEADOW_POLYGON, YARD_POLYGON], ids=["meadow", "yard"])
def test_places_are_uniform_over_equal_area_cells(geometry: shapely.Geometry) -> None:
    """Chi-square over cells cut to known areas stays within 4 standard deviations of its mean."""
    n = 40_000
    places = draw_places(Ground("s", geometry), n, stream(77)) / 100
    west, south, east, north = geometry.bounds
    edges_x, edges_y = np.linspace(west, east, 9), np.linspace(south, north, 9)
    counts = np.histogram2d(places[:, 0], places[:, 1], [edges_x, edges_y])[0].ravel()
    cells = [
        shapely.box(edges_x[i], edges_y[j], edges_x[i + 1], edges_y[j + 1])
        for i in range(8)
        for j in range(8)
    ]
    expected = n * shapely.area(shapely.intersection(cells, geometry)) / geometry.area
    kept = expected > 20
    assert expected[kept].sum() > 0.99 * n
    chi_square = np.sum((counts[kept] - expected[kept]) ** 2 / expected[kept])
    degrees = kept.sum() - 1
    # A chi-square variable has mean k and variance 2k.
    assert abs(chi_square - degrees) < 4 * math.sqrt(2 * degrees)


def test_places_of_a_moved_site_are_as_uniform_as_before() -> None:
    """Where the projection's centre lies must not matter: the mean is the centroid everywhere."""
    n = 20_000
    for turn, shift in ((0, (0, 0)), (37, (0, 0)), (90, (-3333.333, 12_345.678))):
        moved = shapely.affinity.translate(shapely.affinity.rotate(MEADOW_POLYGON, turn), *shift)
        places = draw_places(Ground("s", moved), n, stream(5)) / 100
        spread = places.std(axis=0)
        off = np.abs(places.mean(axis=0) - shapely.get_coordinates(moved.centroid)[0])
        assert (off < 4 * spread / math.sqrt(n)).all()


@pytest.mark.parametrize("spacing", [0.0, 12.0])
def test_first_places_are_the_same_for_every_length_of_list(spacing: float) -> None:
    """A revision that asks for more must keep what the crew already has."""
    ground = Ground("s", MEADOW_POLYGON)
    longest = draw_places(ground, 60, stream(), spacing_m=spacing).tolist()
    for count in (0, 1, 2, 17, 59):
        shorter = draw_places(ground, count, stream(), spacing_m=spacing)
        assert shorter.tolist() == longest[:count]


def test_a_tiny_edit_of_the_boundary_keeps_the_places() -> None:
    """The box is snapped, so that a corner moved by a metre only drops places beyond it."""
    before = draw_places(Ground("s", MEADOW_POLYGON), 30, stream()).tolist()
    shell = [(x + 1_000 if x == 140_009 else x, y) for x, y in MEADOW[0]]
    after = draw_places(Ground("s", polygon([shell, *MEADOW[1:]])), 30, stream()).tolist()
    assert [place for place in after if place in before] == before[: len(after)]


def test_boxes_are_whole_metres_around_the_site_and_not_much_larger() -> None:
    """A loose box wastes candidates; half as much again on each side is the worst."""
    for size in (0.5, 3.0, 17.3, 100.0, 1023.999, 4096.0):
        box = Ground("s", shapely.box(-size / 3, 5.0, 2 * size / 3, 5.0 + size)).box
        assert box.west <= -size / 3
        assert box.east >= 2 * size / 3
        assert box.east - box.west <= max(1.5 * size, size + 2)
        assert box.north - box.south <= max(1.5 * size, size + 2)


@pytest.mark.parametrize("spacing", [5.0, 20.0])
def test_no_two_places_are_closer_than_the_minimum_spacing(spacing: float) -> None:
    """All pairs, measured without the code under test."""
    places = draw_places(Ground("s", MEADOW_POLYGON), 25, stream(), spacing_m=spacing)
    apart = np.hypot(*(places[:, None] - places[None]).transpose(2, 0, 1)) / 100
    assert apart[~np.eye(25, dtype=bool)].min() >= spacing


def test_places_already_taken_are_kept_clear_of() -> None:
    """Alternates must not fall on the places they stand in for."""
    taken = [(0, 0), (4000, 4000), (-5000, 3000)]
    places = draw_places(
        Ground("s", MEADOW_POLYGON), 20, stream(), spacing_m=15.0, taken=taken
    ).tolist()
    assert min(math.dist(a, b) for a in places for b in taken) >= 1500


def test_a_spacing_that_cannot_fit_is_refused_with_a_remedy() -> None:
    """A crew lead must learn how many fit and which spacing would."""
    ground = Ground("paddock", shapely.box(0, 0, 100, 100))
    with pytest.raises(
        DesignError, match=r"'paddock' \(1e\+04 m²\) has room for \d+ of 40 .* 30 m"
    ):
        draw_places(ground, 40, stream(), spacing_m=30.0)


def test_the_suggested_spacing_does_fit() -> None:
    """A remedy that fails is worse than none."""
    ground = Ground("paddock", shapely.box(0, 0, 100, 100))
    with pytest.raises(DesignError) as caught:
        draw_places(ground, 40, stream(), spacing_m=30.0)
    suggested = float(str(caught.value).split("(about ")[1].split(" m")[0])
    assert len(draw_places(ground, 40, stream(), spacing_m=suggested)) == 40


def test_more_places_than_centimetres_are_refused() -> None:
    """A square of 5 cm holds 4 × 4 places strictly inside, and no two places may coincide."""
    ground = Ground("spot", shapely.box(0, 0, 0.05, 0.05))
    places = draw_places(ground, 16, stream()).tolist()
    assert sorted(places) == [[x, y] for x in range(1, 5) for y in range(1, 5)]
    with pytest.raises(DesignError, match="only 16 of 17 places were found"):
        draw_places(ground, 17, stream())


def test_a_sliver_in_a_wide_box_is_refused_before_a_long_wait() -> None:
    """A millimetre strip across a kilometre cannot be sampled by location."""
    strip = shapely.Polygon([(0, 0), (1000, 1000), (1000, 1000.001)])
    with pytest.raises(DesignError, match=r"'strip' has 0\.5 m² within a box of"):
        draw_places(Ground("strip", strip), 1000, stream())


@pytest.mark.parametrize("geometry", [shapely.Polygon(), shapely.LineString([(0, 0), (5, 5)])])
def test_a_stratum_without_area_is_refused(geometry: shapely.Geometry) -> None:
    """Nothing can be drawn from a line."""
    with pytest.raises(DesignError, match="'ditch' has no area"):
        Ground("ditch", geometry)
