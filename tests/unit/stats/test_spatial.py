"""Weights over curves, against contrasts and closed forms of distances in a square."""

import math

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import dblquad
from scipy.linalg import null_space

from fieldplan.base.errors import DesignError
from fieldplan.stats import spatial
from fieldplan.stats.field_integrals import (
    correlation_in_region,
    correlation_in_square,
    correlation_to_centre,
    pair_distances,
)
from fieldplan.stats.spatial import (
    FEW,
    NUGGET_SHARES,
    SHAPES,
    CurveShape,
    correlation_at,
    distances,
    weigh_field,
)
from tests.simulated_fields import KINDS, Kind, cells_of, draw_fields

Floats = NDArray[np.float64]


@pytest.fixture(scope="module")
def pilot() -> tuple[Floats, Floats]:
    """Thirty random places of one field."""
    cells = cells_of("blob2holes", 24)
    field = next(draw_fields("blob2holes", 24, KINDS[4], fields=1, seed=3))
    seen = np.random.default_rng(4).choice(len(cells), 30, replace=False)
    return cells[seen], field[seen]


@pytest.mark.parametrize("few", [FEW, 10])
def test_weights_are_those_of_contrasts_that_know_no_level(
    pilot: tuple[Floats, Floats], few: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Second route to the restricted likelihood, for small pilots and large: n − 1 contrasts."""
    monkeypatch.setattr(spatial, "FEW", few)
    places, values = pilot
    field = weigh_field(places, values, extent=1.0)
    contrasts = null_space(np.ones((1, len(values))))
    apart, seen = distances(places, places), contrasts.T @ values
    heights, variances = [], []
    for shape, reach, nugget in zip(field.shapes, field.ranges, field.nuggets, strict=True):
        whole = (1 - nugget) * correlation_at(apart, reach, shape=shape)
        inside = contrasts.T @ (whole + nugget * np.eye(len(values))) @ contrasts
        square = float(seen @ np.linalg.solve(inside, seen))
        heights.append(-0.5 * (np.linalg.slogdet(inside)[1] + len(seen) * math.log(square)))
        variances.append(square / len(seen))
    expected = np.exp(np.array(heights) - max(heights))
    assert field.weights == pytest.approx(expected / expected.sum(), rel=1e-4, abs=1e-9)
    assert field.variances[expected > 1e-6] == pytest.approx(
        np.array(variances)[expected > 1e-6], rel=1e-4
    )


def test_units_places_and_order_change_no_weight(pilot: tuple[Floats, Floats]) -> None:
    """Milligrams for grams, another origin, a turned map or a sorted file are the same pilot."""
    places, values = pilot
    field = weigh_field(places, values, extent=1.0)
    turn = np.array([[0.6, -0.8], [0.8, 0.6]])
    order = np.argsort(values)
    other = weigh_field(
        (400 * places @ turn + 5000.0)[order], (1e4 + 1000 * values)[order], extent=400.0
    )
    assert other.weights == pytest.approx(field.weights, rel=1e-6, abs=1e-12)
    assert other.variances == pytest.approx(1e6 * field.variances, rel=1e-6)
    assert other.ranges == pytest.approx(400 * field.ranges)
    assert other.typical_range == pytest.approx(400 * field.typical_range)


def test_noise_is_seen_as_nugget_and_a_smooth_surface_as_structure() -> None:
    """The two ends of the grid: nothing in common with neighbours, and everything."""
    places = cells_of("Lhole", 24)[::9]
    noise = weigh_field(places, np.random.default_rng(2).standard_normal(len(places)), extent=1.0)
    smooth = weigh_field(places, np.sin(4 * places[:, 0]) + np.cos(3 * places[:, 1]), extent=1.0)
    assert noise.typical_nugget > 0.5 or noise.typical_range < 0.15
    assert smooth.typical_nugget < 0.05
    assert smooth.typical_range > 0.3
    assert smooth.weights[[shape == "smooth" for shape in smooth.shapes]].sum() > 0.99


def test_known_structure_is_found_again() -> None:
    """Simulated fields of range 0.2 and nugget 0.25: the middle of 40 pilots is within a factor."""
    kind = Kind("exponential", 0.2, 0.25)
    cells = cells_of("blob2holes", 24)
    random = np.random.default_rng(9)
    found = []
    for field in draw_fields("blob2holes", 24, kind, fields=40, seed=8):
        seen = random.choice(len(cells), 80, replace=False)
        found.append(weigh_field(cells[seen], field[seen], extent=1.0))
    middle = float(np.median([each.typical_range for each in found]))
    assert 0.1 < middle < 0.4
    assert abs(np.mean([each.typical_nugget for each in found]) - 0.25) < 0.15


@pytest.mark.parametrize("shape", SHAPES)
def test_five_percent_is_left_at_the_practical_range(shape: CurveShape) -> None:
    """Definition of the practical range; 1 at no distance."""
    assert float(correlation_at(0.0, 30.0, shape=shape)) == 1.0
    assert float(correlation_at(30.0, 30.0, shape=shape)) == pytest.approx(0.05, abs=0.0003)


def test_short_distances_in_a_square_have_their_closed_form() -> None:
    """Mean distance of two places (2 + √2 + 5 ln(1 + √2))/15 and to the centre, by integration.

    Far below its range the exponential curve is 1 − 3h/r, so the mean correlation gives the mean
    distance: 0.5214 and (√2 + ln(1 + √2))/6 = 0.3826 sides.
    """
    far = 1e7
    log = math.log(1 + math.sqrt(2))
    apart = (1 - correlation_in_square(1.0, far, shape="exponential")) * far / 3
    assert apart == pytest.approx((2 + math.sqrt(2) + 5 * log) / 15, rel=1e-5)
    to_centre = (1 - correlation_to_centre(1.0, far, shape="exponential")) * far / 3
    assert to_centre == pytest.approx((math.sqrt(2) + log) / 6, rel=1e-5)


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("reach", [0.05, 0.3, 2.0])
def test_integrals_over_a_square_equal_adaptive_ones(shape: CurveShape, reach: float) -> None:
    """scipy.integrate.dblquad on the density of the offset of two places, 4(1 − x)(1 − y)."""

    def pairs(y: float, x: float) -> float:
        return 4 * (1 - x) * (1 - y) * float(correlation_at(math.hypot(x, y), reach, shape=shape))

    def centre(y: float, x: float) -> float:
        return float(correlation_at(math.hypot(x, y) / 2, reach, shape=shape))

    expected = dblquad(pairs, 0, 1, 0, 1, epsabs=1e-9)[0]
    assert correlation_in_square(1.0, reach, shape=shape) == pytest.approx(expected, abs=2e-6)
    expected = dblquad(centre, 0, 1, 0, 1, epsabs=1e-9)[0]
    assert correlation_to_centre(1.0, reach, shape=shape) == pytest.approx(expected, abs=2e-6)


@pytest.mark.parametrize("shape", SHAPES)
def test_cells_of_a_square_give_what_the_integral_gives(shape: CurveShape) -> None:
    """A square site of 20 × 20 cells, ranges of a few cells and more."""
    at = (np.arange(20) + 0.5) / 20
    cells = np.column_stack([grid.ravel() for grid in np.meshgrid(at, at)])
    for reach in (0.2, 1.0):
        found = correlation_in_region(pair_distances(cells, 1 / 20), reach, shape=shape)
        assert found == pytest.approx(correlation_in_square(1.0, reach, shape=shape), abs=5e-4)


@pytest.mark.parametrize("shape", SHAPES)
def test_classes_of_distance_lose_nothing(shape: CurveShape) -> None:
    """Brute force over the whole matrix of an irregular site, one cell at a time inside itself."""
    cells = cells_of("crescent+box", 24)
    for reach in (0.1, 0.5):
        whole = correlation_at(distances(cells, cells), reach, shape=shape)
        np.fill_diagonal(whole, correlation_in_square(1 / 24, reach, shape=shape))
        found = correlation_in_region(pair_distances(cells, 1 / 24), reach, shape=shape)
        assert found == pytest.approx(whole.mean(), rel=1e-4)


def test_every_curve_is_tried_once(pilot: tuple[Floats, Floats]) -> None:
    """Two shapes, nine ranges, seven nuggets; weights are a distribution over them."""
    field = weigh_field(*pilot, extent=1.0)
    tried = set(zip(field.shapes, field.ranges.tolist(), field.nuggets.tolist(), strict=True))
    assert len(tried) == len(field.weights) == 2 * 9 * len(NUGGET_SHARES)
    assert field.weights.min() >= 0
    assert field.weights.sum() == pytest.approx(1.0)


def test_pilots_that_show_no_structure_are_refused(pilot: tuple[Floats, Floats]) -> None:
    """Each message carries the number that is wrong."""
    places, values = pilot
    cases = [
        (places[:19], values[:19], 1.0, "a pilot of 19 places"),
        (places, np.full(30, 7.0), 1.0, "all 30 results are 7"),
        (places[[0, *range(29)]], values, 1.0, "in one spot"),
        (places, values, 0.0, "not 0.0"),
        (places, np.where(values > 0, np.nan, values), 1.0, "must be numbers"),
    ]
    for where, what, extent, words in cases:
        with pytest.raises(DesignError, match=words):
            weigh_field(where, what, extent=extent)


def test_a_large_pilot_is_thinned_to_what_can_be_weighed_at_once(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """Always the same places, so that the same pilot has one answer."""
    monkeypatch.setattr(spatial, "MOST_PLACES", 60)
    cells = cells_of("Lhole", 24)
    values = next(draw_fields("Lhole", 24, KINDS[4], fields=1, seed=5))
    assert len(cells) > 200
    field = weigh_field(cells, values, extent=1.0)
    assert field.places == 60
    assert (field.weights == weigh_field(cells, values, extent=1.0).weights).all()
