"""Grids: their spacing, their count, their freedom to turn and to shift."""

import math

import numpy as np
import pytest
import shapely

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.design.grid import SQUARE_GRID, TRIANGULAR_GRID, Grid, random_direction
from fieldplan.design.model import DrawnPlaces, StratumCount
from tests.unit.design.sites import MEADOW_POLYGON, area_frame, list_frame

GRIDS = [SQUARE_GRID, TRIANGULAR_GRID]


def drawn(grid: Grid, planned: int, *, seed: int = 1, **options: object) -> DrawnPlaces:
    """Draw one grid in the meadow, without alternates."""
    frame = area_frame(meadow=MEADOW_POLYGON)
    counts = [StratumCount("meadow", planned, 0)]
    return grid.draw(frame, counts, seed=seed, design="main", **options)  # type: ignore[arg-type]


def points(places: DrawnPlaces) -> np.ndarray:
    """Coordinates, shape (n, 2)."""
    return np.array([(p.easting, p.northing) for p in places.places])


def distances(at: np.ndarray) -> np.ndarray:
    """Distance from each place to its nearest neighbour."""
    apart = np.hypot(*(at[:, None] - at[None]).transpose(2, 0, 1))
    np.fill_diagonal(apart, np.inf)
    return apart.min(axis=1)


@pytest.mark.parametrize(("area", "count"), [(900.0, 15), (13_570.0, 24), (2e6, 400)])
def test_spacing_follows_the_published_formulas(area: float, count: int) -> None:
    """MARSSIM (2000), section 5.5.2.5: √(A/(0.866 n)) and √(A/n); n cells then make up the area."""
    triangular, square = TRIANGULAR_GRID.spacing(area, count), SQUARE_GRID.spacing(area, count)
    assert triangular == pytest.approx(math.sqrt(area / (0.866 * count)), rel=1e-4)
    assert square == pytest.approx(math.sqrt(area / count), rel=1e-4)
    # The cell round a node of a triangular grid is a hexagon √3/2 L² large.
    hexagon = shapely.Polygon(
        [
            (
                triangular / 3**0.5 * math.cos(k * math.pi / 3),
                triangular / 3**0.5 * math.sin(k * math.pi / 3),
            )
            for k in range(6)
        ]
    )
    assert count * hexagon.area == pytest.approx(area, rel=2e-4)


@pytest.mark.parametrize("grid", GRIDS, ids=lambda g: g.name)
def test_neighbours_stand_one_spacing_apart(grid: Grid) -> None:
    """Rounding to the centimetre moves a place by at most half its diagonal."""
    places = drawn(grid, 60)
    side = grid.spacing(MEADOW_POLYGON.area, 60)
    assert distances(points(places)) == pytest.approx(np.full(60, side), abs=2 * 0.00708)


@pytest.mark.parametrize(("grid", "neighbours"), [(SQUARE_GRID, 4), (TRIANGULAR_GRID, 6)])
def test_inner_places_have_all_their_neighbours(grid: Grid, neighbours: int) -> None:
    """A square has 4 at one spacing, a triangle 6; the shift of every other row makes it so."""
    at = points(drawn(grid, 80))
    side = grid.spacing(MEADOW_POLYGON.area, 80)
    apart = np.hypot(*(at[:, None] - at[None]).transpose(2, 0, 1))
    near = ((apart > 0) & (apart < side + 0.02)).sum(axis=1)
    assert near.max() == neighbours
    assert (near == neighbours).sum() > 20


@pytest.mark.parametrize("grid", GRIDS, ids=lambda g: g.name)
@pytest.mark.parametrize("planned", [2, 3, 10, 41, 200])
def test_exact_count_puts_exactly_n_inside(grid: Grid, planned: int) -> None:
    """The laboratory is booked for n, not for about n."""
    places = drawn(grid, planned)
    assert places.realised == len(places.places) == planned
    assert all(MEADOW_POLYGON.contains(shapely.Point(p)) for p in points(places))


def test_a_free_grid_reports_a_count_that_differs() -> None:
    """Over many seeds the count averages n within 4 standard errors, and each miss is told."""
    found = [drawn(SQUARE_GRID, 20, seed=s, exact_count=False) for s in range(400)]
    counts = np.array([places.realised for places in found])
    assert counts.std() > 0
    assert abs(counts.mean() - 20) < 4 * counts.std(ddof=1) / math.sqrt(len(counts))
    for places in found:
        told = f"{places.realised} places of the grid fell inside 'meadow'; 20 were asked for."
        assert (places.realised == 20) == (not places.notes)
        assert places.realised == 20 or places.notes[0].startswith(told)


def test_a_free_grid_covers_every_part_equally_often() -> None:
    """Every part must be as likely as its area says: quarters of the box, 4 standard errors."""
    middle = shapely.get_coordinates(MEADOW_POLYGON.centroid)[0]
    west, south, _, _ = MEADOW_POLYGON.bounds
    quarter = shapely.box(west, south, *middle).intersection(MEADOW_POLYGON)
    hits = np.array(
        [
            (points(drawn(TRIANGULAR_GRID, 20, seed=s, exact_count=False)) < middle)
            .all(axis=1)
            .sum()
            for s in range(600)
        ]
    )
    expected = 20 * quarter.area / MEADOW_POLYGON.area
    assert abs(hits.mean() - expected) < 4 * hits.std(ddof=1) / math.sqrt(len(hits))


def test_directions_are_uniform_round_the_circle() -> None:
    """A grid that always faced north would line up with ditches: all eighths equally likely."""
    n = 16_000
    stream = Stream(2, "main", "s", "grid")
    turns = [math.atan2(s, c) for c, s in (random_direction(stream) for _ in range(n))]
    counts = np.histogram(turns, bins=8, range=(-math.pi, math.pi))[0]
    assert np.abs(counts - n / 8).max() < 4 * math.sqrt(n * (1 / 8) * (7 / 8))


def test_each_stratum_has_a_grid_of_its_own() -> None:
    """Grids that ran on over a stratum line would tie the strata's errors together."""
    frame = area_frame(a=shapely.box(0, 0, 100, 100), b=shapely.box(100, 0, 200, 100))
    counts = [StratumCount("a", 9, 0), StratumCount("b", 16, 0)]
    places = SQUARE_GRID.draw(frame, counts, seed=4, design="main")
    by_name = {n: [p for p in places.places if p.stratum == n] for n in "ab"}
    sides = {n: distances(points(DrawnPlaces(tuple(by_name[n]), 0))).min() for n in "ab"}
    assert sides["a"] == pytest.approx(100 / 3, abs=0.02)
    assert sides["b"] == pytest.approx(25, abs=0.02)


def test_alternates_are_random_places_numbered_after_the_grid() -> None:
    """A second grid in the gaps would not stand in for a lost node; a random place may."""
    frame = area_frame(meadow=MEADOW_POLYGON)
    places = SQUARE_GRID.draw(frame, [StratumCount("meadow", 9, 3)], seed=1, design="main").places
    spare = [p for p in places if p.location_class == "alternate"]
    assert [p.list_order for p in spare] == [10, 11, 12]
    assert all(MEADOW_POLYGON.contains(shapely.Point(p.easting, p.northing)) for p in spare)


def test_list_order_does_not_run_along_the_rows() -> None:
    """Work that stops early must leave out a random part of the site, not its far end."""
    eastings = points(drawn(SQUARE_GRID, 100))[:, 0]
    order = np.arange(100)
    # Under a random order the correlation has variance 1/(n - 1).
    assert abs(np.corrcoef(order, eastings)[0, 1]) < 4 / math.sqrt(99)


def test_redrawn_grids_say_what_that_bends() -> None:
    """Keeping only starts with exactly n is no longer equal probability."""
    notes = [note for s in range(8) for note in drawn(SQUARE_GRID, 20, seed=s).notes]
    assert notes
    assert all("slightly less likely" in note for note in notes)


def test_a_grid_that_never_has_the_count_is_refused_with_a_remedy(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """After the last try the person learns which numbers came near, and what else to write."""
    monkeypatch.setattr("fieldplan.design.grid.MOST_TRIES", 2)
    with pytest.raises(
        DesignError,
        match=r"no grid of 2 put exactly 900 places inside 'meadow' \(nearest: \d+, \d+\)\. "
        "Write exact_count = false",
    ):
        drawn(SQUARE_GRID, 900, seed=3)


def test_a_grid_finer_than_its_rounding_is_refused() -> None:
    """Places are given to the centimetre; nodes closer than two could fall together."""
    frame = area_frame(bench=shapely.box(0, 0, 0.3, 0.3))
    with pytest.raises(DesignError, match=r"'bench' stand 0\.015 m apart"):
        SQUARE_GRID.draw(frame, [StratumCount("bench", 400, 0)], seed=1, design="main")


def test_a_grid_finer_than_the_minimum_spacing_is_refused() -> None:
    """The two wishes contradict each other; neither is dropped in silence."""
    with pytest.raises(
        DesignError, match=r"stand [\d.]+ m apart, closer than minimum_spacing_m = 50"
    ):
        drawn(TRIANGULAR_GRID, 60, minimum_spacing_m=50.0)


def test_a_list_has_no_grid() -> None:
    """Wells stand where they stand."""
    with pytest.raises(
        DesignError, match="'square-grid' needs an area, and stratum 'wells' is a list"
    ):
        SQUARE_GRID.draw(list_frame(wells=9), [StratumCount("wells", 4, 0)], seed=1, design="main")
