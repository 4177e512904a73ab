"""Patches on true populations: against closed forms, thrown points and the layouts' own draws."""

import math

import numpy as np
import pytest
import shapely
from shapely import affinity

from fieldplan.base.errors import DesignError
from fieldplan.design.grid import SQUARE_GRID, TRIANGULAR_GRID, Grid
from fieldplan.design.layouts import layout_named
from fieldplan.design.model import StratumCount
from fieldplan.design.patch import RandomPlaces, check_fits, share_hit
from fieldplan.design.patch_starts import GridStarts, patch_chances
from fieldplan.design.simulate import uniform_points
from fieldplan.frame.model import Frame
from fieldplan.stats.patches import SQUARE, TRIANGULAR, Patch, chance_on_grid
from tests.unit.design.sites import MEADOW_POLYGON, YARD_POLYGON, area_frame, list_frame

FIELD = area_frame(site=MEADOW_POLYGON)
TWO = area_frame(meadow=MEADOW_POLYGON, yard=affinity.translate(YARD_POLYGON, -10.0, 0.0))
LONG = Patch(48.0, 20.0)


def within(places: np.ndarray, centres: np.ndarray, patch: Patch, angles: np.ndarray) -> np.ndarray:
    """Tell for each row of places (k, n, 2) whether one lies in the patch about its centre."""
    east, north = (places - centres[:, None, :]).transpose(2, 0, 1)
    sine, cosine = np.sin(np.radians(angles))[:, None], np.cos(np.radians(angles))[:, None]
    along, across = east * sine + north * cosine, east * cosine - north * sine
    inside = (along * 2 / patch.length) ** 2 + (across * 2 / patch.width) ** 2 <= 1
    return inside.any(axis=1)


@pytest.mark.parametrize("radius", [5.0, 10.0, 20.0])
def test_one_random_place_in_a_square_hits_a_disc_as_geometry_says(radius: float) -> None:
    """Distance of two random points of a unit square: P(d ≤ r) = πr² − 8r³/3 + r⁴/2, r ≤ 1."""
    found = RandomPlaces(
        area_frame(site=shapely.box(0, 0, 100, 100)), Patch(2 * radius, 2 * radius)
    )
    r = radius / 100
    expected = math.pi * r**2 - 8 * r**3 / 3 + r**4 / 2
    assert found.chance([1]).chance == pytest.approx(expected, abs=3e-5)


@pytest.mark.parametrize("direction", [None, 30.0])
def test_random_places_hit_as_often_as_thrown_ones(direction: float | None) -> None:
    """Simulation, fixed seed: centres and places thrown on two strata, 4 standard errors."""
    rng, throws, counts = np.random.default_rng(3), 6000, (14, 5)
    patch = LONG
    whole = shapely.union_all([stratum.geometry for stratum in TWO.strata])
    centres = uniform_points(whole, throws, rng)
    angles = rng.uniform(0, 180, throws) if direction is None else np.full(throws, direction)
    places = np.concatenate(
        [
            uniform_points(stratum.geometry, throws * count, rng).reshape(throws, count, 2)
            for stratum, count in zip(TWO.strata, counts, strict=True)
        ],
        axis=1,
    )
    hits = within(places, centres, patch, angles).mean()
    stated = RandomPlaces(TWO, patch, direction).chance(counts).chance
    assert abs(hits - stated) <= 4 * math.sqrt(stated * (1 - stated) / throws)


def test_small_patch_far_from_any_edge_is_hit_as_on_endless_ground() -> None:
    """1 − (1 − a/A)ⁿ, and a grid's share of a cell; the edge takes less than its own strip."""
    frame = area_frame(site=shapely.box(0, 0, 1000, 1000))
    patch = Patch(20.0, 20.0)
    endless = 1 - (1 - patch.area / 1e6) ** 400
    found = RandomPlaces(frame, patch).chance([400]).chance
    assert endless - 0.02 * endless <= found <= endless
    grid = GridStarts(frame, patch, None, SQUARE_GRID).chance([400])
    endless = chance_on_grid(patch, 50.0)
    assert (
        endless * 0.98 - 4 * grid.standard_error <= grid.chance <= endless + 4 * grid.standard_error
    )


def test_set_of_locations_scores_as_thrown_centres_do() -> None:
    """Simulation, fixed seed, 4 standard errors; a patch of known direction across edges."""
    rng, throws = np.random.default_rng(11), 40_000
    places = uniform_points(MEADOW_POLYGON, 15, rng)
    centres = uniform_points(MEADOW_POLYGON, throws, rng)
    for direction in (25.0, None):
        angles = np.full(throws, 25.0) if direction else rng.uniform(0, 180, throws)
        hits = within(np.broadcast_to(places, (throws, 15, 2)), centres, LONG, angles).mean()
        scored = share_hit(places, MEADOW_POLYGON, LONG, direction=direction)
        assert abs(hits - scored) <= 4 * math.sqrt(scored * (1 - scored) / throws) + 1e-4


@pytest.mark.parametrize(
    ("lattice", "grid"), [(SQUARE, SQUARE_GRID), (TRIANGULAR, TRIANGULAR_GRID)]
)
@pytest.mark.parametrize("size", [8.0, 10.6, 11.4])
def test_score_of_a_grid_on_one_of_its_cells_is_the_closed_form(lattice, grid: Grid, size) -> None:
    """The union on one cell is the share of a lattice, to 1e-4; circles that overlap too."""
    rows = np.arange(-4, 5)
    i, j = (axis.ravel() for axis in np.meshgrid(rows, rows))
    nodes = 10.0 * np.stack([i + grid.row_shift * (j % 2), j * grid.row_distance], axis=1)
    cell = shapely.box(0, 0, 10, 20 * grid.row_distance)
    patch = Patch(size, size)
    expected = chance_on_grid(patch, 10.0, lattice=lattice)
    assert share_hit(nodes, cell, patch) == pytest.approx(expected, abs=1e-4)


def test_score_agrees_with_a_union_of_finer_polygons() -> None:
    """Brute force: 2048-cornered discs of shapely's own buffer, to 1e-4."""
    rng = np.random.default_rng(5)
    places = uniform_points(MEADOW_POLYGON, 200, rng)
    discs = shapely.buffer(shapely.points(places), 6.0, quad_segs=512)
    expected = shapely.union_all(discs).intersection(MEADOW_POLYGON).area / MEADOW_POLYGON.area
    assert share_hit(places, MEADOW_POLYGON, Patch(12.0, 12.0)) == pytest.approx(expected, abs=1e-4)


def layout_scores(frame: Frame, layout: str, counts: list[int], patch: Patch, draws: int) -> list:
    """Score draws of the layout itself by union, each with a seed of its own."""
    whole = shapely.union_all([stratum.geometry for stratum in frame.strata])
    asked = [StratumCount(s.name, n, 0) for s, n in zip(frame.strata, counts, strict=True)]
    scores = []
    for seed in range(draws):
        drawn = layout_named(layout).draw(frame, asked, seed=seed, design="main")
        places = np.array([(place.easting, place.northing) for place in drawn.places])
        scores.append(share_hit(places, whole, patch, direction=40.0))
    return scores


@pytest.mark.slow
@pytest.mark.parametrize(
    ("layout", "frame", "counts"),
    [
        ("square-grid", FIELD, [12]),
        ("triangular-grid", FIELD, [30]),
        ("square-grid", TWO, [16, 4]),
        ("simple-random", FIELD, [20]),
        ("stratified", TWO, [16, 4]),
    ],
)
def test_chance_is_the_mean_score_of_the_layouts_own_draws(layout, frame, counts) -> None:
    """400 issued draws with their exact count, scored by union; 4 standard errors of both."""
    scores = layout_scores(frame, layout, counts, LONG, 400)
    stated = patch_chances(layout, frame, LONG, direction=40.0).chance(counts)
    error = math.hypot(np.std(scores, ddof=1) / math.sqrt(len(scores)), stated.standard_error)
    assert abs(np.mean(scores) - stated.chance) <= 4 * error + 3e-4


def test_grid_started_at_random_agrees_with_a_few_draws_of_the_layout() -> None:
    """A quick form of the slow test above: 40 draws, 4 standard errors of both."""
    scores = layout_scores(FIELD, "triangular-grid", [14], LONG, 40)
    stated = patch_chances("triangular-grid", FIELD, LONG, direction=40.0).chance([14])
    error = math.hypot(np.std(scores, ddof=1) / math.sqrt(len(scores)), stated.standard_error)
    assert stated.standard_error < 0.005
    assert abs(np.mean(scores) - stated.chance) <= 4 * error


@pytest.mark.parametrize("layout", ["simple-random", "square-grid", "triangular-grid"])
def test_more_locations_and_larger_patches_are_hit_more_often(layout: str) -> None:
    """Both only ever add ground."""
    chances = patch_chances(layout, FIELD, LONG)
    by_count = [chances.chance([n]).chance for n in (4, 12, 36)]
    by_size = [chances.chance([12], scale=scale).chance for scale in (0.5, 1.0, 1.5)]
    assert by_count == sorted(by_count)
    assert by_size == sorted(by_size)


@pytest.mark.parametrize("layout", ["simple-random", "square-grid"])
def test_smallest_patch_has_the_chance_that_was_asked_for(layout: str) -> None:
    """By definition; a scale smaller by a hundredth has less."""
    chances = patch_chances(layout, FIELD, LONG)
    scale = chances.smallest_scale([20], 0.8)
    assert chances.chance([20], scale=scale * 1.001).chance >= 0.8 - 1e-4
    assert chances.chance([20], scale=scale * 0.99).chance < 0.8


def test_losses_leave_at_least_the_share_of_hits_that_one_node_keeps() -> None:
    """A hit by one node survives with 1 − loss, by several more often; and less than no loss."""
    whole = GridStarts(FIELD, LONG, None, SQUARE_GRID)
    thinned = GridStarts(FIELD, LONG, None, SQUARE_GRID, losses=(0.3,))
    full, left = whole.chance([30]), thinned.chance([30])
    error = 4 * math.hypot(full.standard_error, left.standard_error)
    assert 0.7 * full.chance - error <= left.chance < full.chance


def test_grid_that_never_has_its_count_inside_says_so(monkeypatch: pytest.MonkeyPatch) -> None:
    """With three tries no two starts keep 60 nodes; the chance is then that of any count."""
    monkeypatch.setattr("fieldplan.design.patch_starts.MOST_TRIES", 3)
    found = patch_chances("square-grid", FIELD, LONG).chance([60])
    assert not found.exact_count
    assert found.starts == 3
    assert 0.5 < found.chance < 1


def test_long_strip_takes_no_longer_than_a_field() -> None:
    """2 km by 1 m: rows are cut to the strip, which lays 4 million nodes a start otherwise."""
    strip = area_frame(site=shapely.box(0, 0, 2000, 1))
    found = patch_chances("square-grid", strip, Patch(1.0, 1.0)).chance([2000])
    assert found.starts >= 16
    assert found.chance < chance_on_grid(Patch(1.0, 1.0), 1.0)


def test_known_direction_matters_on_a_narrow_site() -> None:
    """Along a strip the patch lies inside it, across it most of the patch lies outside."""
    strip = area_frame(site=shapely.box(0, 0, 400, 12))  # long from west to east
    along = patch_chances("simple-random", strip, LONG, direction=90.0).chance([8]).chance
    across = patch_chances("simple-random", strip, LONG, direction=0.0).chance([8]).chance
    either = patch_chances("simple-random", strip, LONG).chance([8]).chance
    assert across < either < along


@pytest.mark.parametrize(
    ("asked", "said"),
    [
        (lambda: check_fits(list_frame(wells=9), LONG), "a list of 9 units has no area"),
        (lambda: check_fits(FIELD, Patch(500.0, 500.0)), "does not fit into a population"),
        (lambda: check_fits(FIELD, Patch(300.0, 2.0)), "300 m by 2 m"),
        (lambda: patch_chances("census", FIELD, LONG), 'layout "census"'),
        (
            lambda: patch_chances("square-grid", FIELD, Patch(0.1, 0.1)).chance([60_000]),
            "60000 locations",
        ),
    ],
)
def test_what_has_no_answer_is_refused_with_its_value(asked, said: str) -> None:
    """One line that names the thing and the value."""
    with pytest.raises(DesignError, match=said):
        asked()
