"""The chance of hitting a patch against printed values, unions of polygons, brute force, draws."""

import math

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import integrate, optimize
from scipy import stats as scipy_stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.patches import (
    SQUARE,
    TRIANGULAR,
    Lattice,
    Patch,
    chance_at_random,
    chance_on_grid,
    count_at_random,
    smallest_at_random,
    smallest_on_grid,
    spacing_for_chance,
)
from tests.unit.stats.published import area, row

LATTICES = {"square": SQUARE, "triangular": TRIANGULAR}
GIVEN_CHANCE = ("A05-003", "A05-004", "A05-007")
GIVEN_PATCH = ("A05-001", "A05-002", "A05-015", "A05-016", "A05-017", "A05-018")
DETECTABLE = ("A05-009", "A05-010", "A05-011", "A05-014")


def test_every_printed_row_about_patches_is_tested_here() -> None:
    """A row that nothing reads would be a promise that nobody keeps."""
    ids = {*GIVEN_CHANCE, *GIVEN_PATCH, *DETECTABLE, "A05-006"}
    assert ids == {entry.id for entry in area("A05")}


@pytest.mark.parametrize("row_id", GIVEN_PATCH)
def test_chance_of_a_given_patch_is_the_printed_one(row_id: str) -> None:
    """Singer & Wickman (1969) and Gilbert (1987), ch. 10; two derived anchors where they overlap.

    The derived rows and the ellipses came from a raster good to 1e-3, the circles are exact.
    """
    entry = row(row_id)
    given_ = entry.inputs
    lattice = LATTICES.get(given_.get("grid", ""), Lattice(given_.get("aspect", 1.0)))
    length = 2 * given_["LG"]
    found = chance_on_grid(
        Patch(length, length * given_.get("S", 1.0)),
        1.0,
        lattice=lattice,
        angle=math.degrees(given_.get("angle", 0.0)),
    )
    near = 1e-9 if "S" not in given_ else 1e-3
    assert found == pytest.approx(entry.exact, abs=near)


@pytest.mark.parametrize("row_id", GIVEN_CHANCE)
def test_radius_over_spacing_for_a_chance_is_the_printed_one(row_id: str) -> None:
    """Gilbert (1987), Fig. 10.5, and the circumradius of a cell where nothing is missed."""
    entry = row(row_id)
    if "grid" in entry.inputs:
        lattice = LATTICES[entry.inputs["grid"]]
    else:
        lattice = SQUARE if entry.id == "A05-003" else TRIANGULAR
    spacing = spacing_for_chance(Patch(2.0, 2.0), entry.inputs["P"], lattice=lattice)
    assert 1 / spacing == pytest.approx(entry.exact, abs=2e-6)


def test_spacing_of_gilberts_example() -> None:
    """Gilbert (1987), Example 10.1: radius 100 cm, missed in 10 %; printed 180 from a chart."""
    entry = row("A05-006")
    assert spacing_for_chance(Patch(200.0, 200.0), 0.9) == pytest.approx(entry.exact, abs=1e-4)


@pytest.mark.parametrize("row_id", DETECTABLE)
def test_detectable_diameter_differs_from_the_print_by_its_rounded_factor(row_id: str) -> None:
    """NSW EPA (1995), Table A, prints 1.18 spacings for 95 %; elementary geometry says 1.198."""
    entry = row(row_id)
    spacing = SQUARE.spacing(entry.inputs["ha"] * 10_000, entry.inputs["n"])
    assert smallest_on_grid(spacing, 0.95).length == pytest.approx(entry.exact, rel=1e-6)
    with_print = chance_on_grid(Patch(1.18, 1.18), 1.0)
    assert with_print == pytest.approx(0.9408, abs=1e-4)  # four segments by hand


def covered(patch: Patch, lattice: Lattice, angle: float) -> float:
    """Share of a cell covered by copies of a polygon of the ellipse's own area (spacing 1)."""
    corners = 2048
    turns = 2 * math.pi * np.arange(corners) / corners
    swell = math.sqrt(math.pi / (corners / 2 * math.sin(2 * math.pi / corners)))
    long, wide = patch.length / 2 * swell * np.cos(turns), patch.width / 2 * swell * np.sin(turns)
    c, s = math.cos(math.radians(angle)), math.sin(math.radians(angle))
    ring = np.stack([long * c - wide * s, long * s + wide * c], axis=1)
    shift, rows = lattice.row_shift, lattice.row_distance
    far = math.ceil(patch.length / min(1.0, rows)) + 2
    copies = [
        shapely.Polygon(ring + np.array([i + shift * (j % 2), j * rows]))
        for i in range(-far, far + 1)
        for j in range(-far, far + 1)
    ]
    cell = shapely.box(0, 0, 1, 2 * rows)  # two rows repeat, whatever the shift of one half
    near = [copy for copy in copies if copy.intersects(cell)]
    return float(shapely.union_all(near).intersection(cell).area / (2 * rows))


@pytest.mark.parametrize("lattice", [SQUARE, TRIANGULAR, Lattice(2.0), Lattice(0.6)], ids=str)
@pytest.mark.parametrize(("length", "width"), [(0.9, 0.9), (1.1, 1.1), (1.6, 0.8), (3.0, 0.25)])
@pytest.mark.parametrize("angle", [0.0, 17.0, 45.0, 112.0])
def test_chance_is_the_share_covered_by_all_copies(
    lattice: Lattice, length: float, width: float, angle: float
) -> None:
    """Brute force: union of 2048-cornered polygons, none of the lattice argument in it."""
    patch = Patch(length, width)
    found = chance_on_grid(patch, 1.0, lattice=lattice, angle=angle)
    assert found == pytest.approx(covered(patch, lattice, angle), abs=1e-6)


@pytest.mark.parametrize("lattice", [SQUARE, TRIANGULAR, Lattice(2.0)], ids=str)
@pytest.mark.parametrize("patch", [Patch(1.6, 0.8), Patch(3.0, 0.25), Patch(1.3, 1.0)], ids=str)
def test_unknown_direction_is_the_average_over_all_directions(
    lattice: Lattice, patch: Patch
) -> None:
    """Simpson's rule of scipy.integrate over 1,500 angles of half a turn, one call each."""
    angles = np.linspace(0.0, 180.0, 1501)
    chances = [chance_on_grid(patch, 1.0, lattice=lattice, angle=angle) for angle in angles]
    expected = integrate.simpson(chances, x=angles) / 180
    assert chance_on_grid(patch, 1.0, lattice=lattice) == pytest.approx(expected, abs=1e-6)


def test_random_origins_and_directions_hit_as_often_as_stated() -> None:
    """Simulation with a fixed seed, 4 standard errors: nearest nodes of 40,000 thrown grids."""
    rng, throws, patch = np.random.default_rng(20261102), 40_000, Patch(1.5, 0.9)
    turn, x0, y0 = rng.uniform(0, math.pi, throws), rng.random(throws), rng.random(throws)
    i, j = (axis.ravel() for axis in np.meshgrid(np.arange(-3, 4), np.arange(-3, 4)))
    rows = TRIANGULAR.row_distance
    x = i + 0.5 * j + (x0 + 0.5 * np.floor(2 * y0))[:, None]
    y = j * rows + (y0 * rows)[:, None]
    c, s = np.cos(turn)[:, None], np.sin(turn)[:, None]
    along, across = (x * c + y * s) * 2 / patch.length, (y * c - x * s) * 2 / patch.width
    hits = (along**2 + across**2 <= 1).any(axis=1).mean()
    stated = chance_on_grid(patch, 1.0, lattice=TRIANGULAR)
    assert abs(hits - stated) <= 4 * math.sqrt(stated * (1 - stated) / throws)


@settings(deadline=None, max_examples=60)
@given(
    st.floats(0.05, 5),
    st.floats(0.05, 1),
    st.floats(0.3, 3),
    st.sampled_from([0.0, 0.25, 0.5]),
    st.floats(0, 180),
)
def test_chance_keeps_within_what_areas_allow(
    length: float, shape: float, rows: float, shift: float, angle: float
) -> None:
    """A union covers no more than its parts, and a larger patch no less than a smaller one."""
    patch, lattice = Patch(length, length * shape), Lattice(rows, shift)
    found = chance_on_grid(patch, 1.0, lattice=lattice, angle=angle)
    assert 0 < found <= min(1.0, patch.area / rows) * (1 + 1e-9)
    larger = chance_on_grid(patch.scaled(1.1), 1.0, lattice=lattice, angle=angle)
    assert larger >= found * (1 - 1e-12)


@settings(deadline=None, max_examples=40)
@given(
    st.floats(0.05, 1),
    st.floats(0.02, 0.999),
    st.sampled_from([SQUARE, TRIANGULAR, Lattice(1.7)]),
    st.one_of(st.none(), st.floats(0, 90)),
)
def test_spacing_is_the_widest_that_gives_the_chance(
    shape: float, chance: float, lattice: Lattice, angle: float | None
) -> None:
    """By definition: it does, and a spacing wider by 1e-6 does not."""
    patch = Patch(30.0, 30.0 * shape)
    widest = spacing_for_chance(patch, chance, lattice=lattice, angle=angle)
    assert chance_on_grid(patch, widest, lattice=lattice, angle=angle) >= chance - 1e-12
    wider = chance_on_grid(patch, widest * (1 + 1e-6), lattice=lattice, angle=angle)
    assert wider < chance


def test_circle_on_a_triangular_grid_agrees_with_a_root_finder() -> None:
    """Elementary geometry of one hexagon, solved by scipy.optimize.brentq."""

    def share(radius: float) -> float:
        cut = radius**2 * math.acos(0.5 / radius) - 0.5 * math.sqrt(radius**2 - 0.25)
        return (math.pi * radius**2 - 6 * cut) / math.sqrt(0.75)

    radius = optimize.brentq(lambda r: share(r) - 0.95, 0.5, 0.577)
    spacing = spacing_for_chance(Patch(2.0, 2.0), 0.95, lattice=TRIANGULAR)
    assert 1 / spacing == pytest.approx(radius, abs=1e-9)


def test_nodes_on_an_area_give_back_their_spacing() -> None:
    """MARSSIM (2000), section 5.5.2.5: √(A/n) and √(A/(0.866 n))."""
    assert SQUARE.spacing(10_000, 25) == 20
    assert TRIANGULAR.spacing(10_000, 20) == pytest.approx(math.sqrt(10_000 / (0.866 * 20)), 1e-4)
    assert TRIANGULAR.count(10_000, TRIANGULAR.spacing(10_000, 20)) == pytest.approx(20)


@pytest.mark.parametrize(("share", "chance"), [(0.05, 0.95), (0.01, 0.9), (0.3, 0.5)])
def test_random_places_by_the_geometric_distribution(share: float, chance: float) -> None:
    """scipy.stats.geom: the first hit comes no later than the n-th place."""
    patch = Patch(10.0, 4.0)
    ground = patch.area / share
    count = count_at_random(patch, ground, chance)
    assert count == scipy_stats.geom.ppf(chance, share)
    assert chance_at_random(patch, ground, count) == pytest.approx(
        scipy_stats.geom.cdf(count, share), rel=1e-12
    )
    found = smallest_at_random(ground, count, scipy_stats.geom.cdf(count, share), shape=0.4)
    assert found.length == pytest.approx(10.0, rel=1e-9)


def test_fifty_nine_random_places_hit_one_part_in_twenty() -> None:
    """The all-clear number of 95 %/95 % (Wilks 1941): it is the same arithmetic."""
    patch = Patch(2.0, 2.0)
    assert count_at_random(patch, patch.area / 0.05, 0.95) == 59


@settings(deadline=None, max_examples=40)
@given(st.floats(0.05, 1), st.floats(0, 0.99), st.floats(0, 2 * math.pi), st.floats(0, 2 * math.pi))
def test_location_in_the_shrunk_patch_is_taken_in_the_patch(
    shape: float, of_width: float, around: float, direction: float
) -> None:
    """The bound holds for an error of full size in any direction, from any place on the edge."""
    patch = Patch(2.0, 2.0 * shape)
    error = of_width * shape
    inner = patch.shrunk(error)
    x = inner.length / 2 * math.cos(around) + error * math.cos(direction)
    y = inner.width / 2 * math.sin(around) + error * math.sin(direction)
    assert x**2 + (y / shape) ** 2 <= 1 + 1e-9


def test_errors_of_any_kind_hit_at_least_as_often_as_the_shrunk_patch() -> None:
    """Simulation, fixed seed: independent errors of full size on a grid, 4 standard errors."""
    rng, throws, patch, error = np.random.default_rng(7), 20_000, Patch(1.2, 1.2), 0.15
    origin, turn = rng.random((throws, 1, 2)), rng.uniform(0, 2 * math.pi, (throws, 25))
    nodes = np.stack(np.meshgrid(np.arange(-2, 3), np.arange(-2, 3)), axis=-1).reshape(1, 25, 2)
    taken = nodes + origin + error * np.stack([np.cos(turn), np.sin(turn)], axis=-1)
    hits = ((taken**2).sum(axis=-1) <= 0.36).any(axis=1).mean()
    bound = chance_on_grid(patch.shrunk(error), 1.0)
    planned = chance_on_grid(patch, 1.0)
    slack = 4 * math.sqrt(planned * (1 - planned) / throws)
    assert bound - slack <= hits <= planned + slack
    assert bound < planned - 0.2


@pytest.mark.parametrize(
    ("asked", "said"),
    [
        (lambda: Patch(0.0, 0.0), "length of the patch is 0.0"),
        (lambda: Patch(5.0, -1.0), "width of the patch is -1.0"),
        (lambda: Patch(math.inf, 1.0), "length of the patch is inf"),
        (lambda: Patch(math.nan, 1.0), "length of the patch is nan"),
        (lambda: Patch(2.0, 3.0), "exchange the two"),
        (lambda: Patch(4.0, 2.0).shrunk(1.0), "leaves nothing of a patch 2 wide"),
        (lambda: Patch(4.0, 2.0).shrunk(-0.1), "position error of -0.1"),
        (lambda: Lattice(0.0), "distance between rows is 0.0"),
        (lambda: chance_on_grid(Patch(1.0, 1.0), 0.0), "spacing is 0.0"),
        (lambda: spacing_for_chance(Patch(1.0, 1.0), 1.0), "chance of hitting the patch is 1.0"),
        (lambda: spacing_for_chance(Patch(1.0, 1.0), 95), "chance of hitting the patch is 95"),
        (lambda: smallest_on_grid(-2.0, 0.9), "spacing is -2.0"),
        (lambda: count_at_random(Patch(20.0, 20.0), 300.0, 0.9), "no smaller than the ground"),
        (lambda: count_at_random(Patch(1e-6, 1e-6), 300.0, 0.9), "random places, more than"),
        (lambda: count_at_random(Patch(2.0, 2.0), 300.0, 0.0), "chance of hitting the patch is 0"),
        (lambda: smallest_at_random(300.0, 0, 0.9), "count is 0"),
        (lambda: SQUARE.count(-1.0, 2.0), "area is -1.0"),
    ],
)
def test_what_has_no_answer_is_refused_with_its_value(asked, said: str) -> None:
    """One line that names the thing and the value."""
    with pytest.raises(DesignError, match=said):
        asked()
