"""How evenly places lie: distances that a person can check."""

import math

import numpy as np
import pytest
import shapely

from fieldplan.base.errors import DesignError
from fieldplan.design.evenness import compare_layouts, largest_gap, nearest_neighbours
from fieldplan.design.grid import SQUARE_GRID
from fieldplan.design.model import StratumCount
from fieldplan.design.simulate import uniform_points
from tests.unit.design.sites import MEADOW_POLYGON, YARD_POLYGON, area_frame, list_frame

COUNTS = [StratumCount("meadow", 12, 3), StratumCount("yard", 9, 0)]


@pytest.mark.parametrize(("nx", "ny", "side"), [(4, 3, 10.0), (7, 7, 3.0)])
def test_largest_gap_of_a_full_square_grid_is_half_a_diagonal(
    nx: int, ny: int, side: float
) -> None:
    """Closed form: the middle of a cell, and the corner of the site, lie side/√2 away."""
    grid = np.array([(side * (i + 0.5), side * (j + 0.5)) for i in range(nx) for j in range(ny)])
    gap = largest_gap(shapely.box(0, 0, nx * side, ny * side), grid)
    assert gap == pytest.approx(side / math.sqrt(2))


@pytest.mark.parametrize("count", [1, 2, 3, 30])
def test_largest_gap_is_never_below_a_search_and_nearly_reached_by_it(count: int) -> None:
    """Brute force: 200 000 spots inside can only come close to the exact answer from below."""
    rng = np.random.default_rng(count)
    places = uniform_points(MEADOW_POLYGON, count, rng)
    spots = uniform_points(MEADOW_POLYGON, 200_000, rng)
    nearest = np.min([np.hypot(*(spots - place).T) for place in places], axis=0)
    exact = largest_gap(MEADOW_POLYGON, places)
    assert nearest.max() <= exact <= nearest.max() + 1.5


def test_each_layout_that_fits_is_measured_once() -> None:
    """Simple random does not fit a frame with strata, stratified not one without."""
    both = area_frame(meadow=MEADOW_POLYGON, yard=YARD_POLYGON)
    found = compare_layouts(both, COUNTS, seed=1, design="main")
    assert [m.layout for m in found] == [
        "stratified",
        "square-grid",
        "triangular-grid",
        "compact-strata",
        "balanced-list",
    ]
    assert {m.locations for m in found} == {21}
    one = area_frame(meadow=MEADOW_POLYGON)
    found = compare_layouts(one, COUNTS[:1], seed=1, design="main")
    assert [m.layout for m in found] == [
        "simple-random",
        "square-grid",
        "triangular-grid",
        "compact-strata",
        "balanced-list",
    ]


def test_grids_keep_neighbours_farther_apart_than_chance_does() -> None:
    """Mean over seeds; the reason why anyone lays a grid."""
    frame = area_frame(meadow=MEADOW_POLYGON)
    counts = [StratumCount("meadow", 20, 0)]
    closest: dict[str, list[float]] = {}
    for seed in range(20):
        for measured in compare_layouts(frame, counts, seed=seed, design="main"):
            closest.setdefault(measured.layout, []).append(measured.closest_m)
    assert max(closest["simple-random"]) < min(closest["square-grid"])
    assert np.mean(closest["square-grid"]) < np.mean(closest["triangular-grid"])


def test_a_layout_that_cannot_be_drawn_says_why_and_spares_the_others() -> None:
    """One refusal must not hide what can be drawn."""
    frame = area_frame(meadow=MEADOW_POLYGON)
    counts = [StratumCount("meadow", 40, 0)]
    square = SQUARE_GRID.spacing(MEADOW_POLYGON.area, 40)
    spacing = round(square + 0.5, 1)  # finer than triangles stand, coarser than squares do
    found = compare_layouts(frame, counts, seed=1, design="main", minimum_spacing_m=spacing)
    assert [bool(m.problem) for m in found] == [True, True, False, True, True]
    assert "room for" in found[0].problem
    assert f"minimum_spacing_m = {spacing:g}" in found[1].problem
    assert "in its 40 cells" in found[3].problem
    assert "balanced list" in found[4].problem


def test_a_list_has_nothing_to_compare() -> None:
    """Wells stand where they stand."""
    with pytest.raises(DesignError, match="for areas only"):
        compare_layouts(list_frame(w=5), [StratumCount("w", 3, 0)], seed=1, design="main")


def test_a_single_place_has_no_neighbour() -> None:
    """An answer of 0 or infinity would mislead."""
    with pytest.raises(DesignError, match="1 location has no neighbour"):
        nearest_neighbours(np.array([[1.0, 2.0]]))
