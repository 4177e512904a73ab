"""Areas of influence, bunched pilots and slopes."""

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import DesignError
from fieldplan.stats.pilot_places import (
    area_weights,
    is_bunched,
    slope_share,
    weighed_spread,
    worth_of_weights,
)
from tests.simulated_fields import cells_of, polygon


@pytest.mark.parametrize("name", ["blob2holes", "crescent+box"])
def test_areas_are_those_of_polygons_cut_at_the_boundary(name: str) -> None:
    """Voronoi polygons of another library, intersected with the site: another construction."""
    cells = cells_of(name, 80)
    places = cells[np.random.default_rng(1).choice(len(cells), 15, replace=False)]
    site = polygon(name)
    around = shapely.voronoi_polygons(shapely.MultiPoint(places), extend_to=site.buffer(1))
    found = area_weights(places, cells)
    for part in around.geoms:
        (inside,) = np.flatnonzero(shapely.contains_xy(part, places[:, 0], places[:, 1]))
        expected = part.intersection(site).area / site.area
        assert found[inside] == pytest.approx(expected, abs=0.006)


@settings(deadline=None, max_examples=25)
@given(st.integers(2, 40), st.integers(0, 10_000))
def test_weights_share_out_the_whole_site(n: int, seed: int) -> None:
    """They sum to 1, none is negative, and are worth at most as many places as there are."""
    cells = cells_of("Lhole", 24)
    places = cells[np.random.default_rng(seed).choice(len(cells), n, replace=False)]
    weights = area_weights(places, cells)
    assert weights.sum() == pytest.approx(1.0)
    assert weights.min() >= 0
    assert 1 <= worth_of_weights(weights) <= n + 1e-9


def test_few_random_pilots_are_called_bunched() -> None:
    """The rule is 1 in 100; of 60 random pilots no more than 4 may be (binomial, 3 in 1,000)."""
    cells = cells_of("blob2holes", 20)
    random = np.random.default_rng(6)
    called = [
        is_bunched(cells[random.choice(len(cells), 15, replace=False)], cells) for _ in range(60)
    ]
    assert sum(called) <= 4


def test_a_pilot_round_a_source_is_called_bunched() -> None:
    """Half of the places lie in a twentieth of the site."""
    cells = cells_of("blob2holes", 30)
    random = np.random.default_rng(7)
    near = np.argsort(((cells - cells.mean(axis=0)) ** 2).sum(axis=1))[: len(cells) // 20]
    seen = [*random.choice(near, 12, replace=False), *random.choice(len(cells), 12, replace=False)]
    assert is_bunched(cells[seen], cells)


def test_an_even_pilot_is_not_called_bunched() -> None:
    """A grid is more even than any random pilot."""
    cells = cells_of("Lhole", 30)
    on = (np.round(cells * 30 - 0.5) % 5 == 2).all(axis=1)
    assert not is_bunched(cells[on], cells)


def test_weighing_takes_the_source_back_to_its_size() -> None:
    """By hand: 100 on a tenth of the site, 10 on the rest: 19, however many places saw the 100."""
    cells = np.column_stack([np.arange(1000) + 0.5, np.zeros(1000)])
    places = np.column_stack([np.array([10, 30, 50, 70, 90, 110, 500, 900.0]), np.zeros(8)])
    values = np.array([100, 100, 100, 100, 100, 10, 10, 10.0])
    mean, sigma = weighed_spread(values, area_weights(places, cells))
    assert mean == pytest.approx(19.0)
    plain = values.mean()
    assert plain > 60
    assert sigma == pytest.approx(27.0 / np.sqrt(1 - (area_weights(places, cells) ** 2).sum()))


def test_equal_weights_give_the_plain_mean_and_s() -> None:
    """Divisor n − 1."""
    values = np.array([3.0, 8.0, 1.0, 4.0])
    mean, sigma = weighed_spread(values, np.full(4, 0.25))
    assert (mean, sigma) == pytest.approx((values.mean(), values.std(ddof=1)))


def test_the_slope_is_corrected_for_its_two_slopes() -> None:
    """Second route: R² from scipy's least squares with a level, and 0 on average without slope."""
    from scipy.linalg import lstsq

    random = np.random.default_rng(3)
    places, values = random.random((30, 2)), random.standard_normal(30)
    values = values + 2 * places[:, 0]
    design = np.column_stack([np.ones(30), places])
    rest = float(np.sum((values - design @ lstsq(design, values)[0]) ** 2))
    expected = 1 - rest / 27 / values.var(ddof=1)
    assert slope_share(places, values) == pytest.approx(expected)
    noise = [slope_share(places, random.standard_normal(30)) for _ in range(300)]
    assert 0 <= np.mean(noise) < 0.06


def test_pilots_that_can_show_nothing_are_refused() -> None:
    """Each message carries the number that is wrong."""
    cells = cells_of("Lhole", 10)
    with pytest.raises(DesignError, match="n = 1 and"):
        area_weights(cells[:1], cells)
    with pytest.raises(DesignError, match="and 0 cells"):
        area_weights(cells[:3], cells[:0])
    with pytest.raises(DesignError, match="2 cells"):
        is_bunched(cells[:3], cells[:2])
    with pytest.raises(DesignError, match="3 values"):
        slope_share(cells[:3], np.array([1.0, 2.0, 3.0]))
    with pytest.raises(DesignError, match="whole site"):
        weighed_spread(np.array([1.0, 2.0]), np.array([1.0, 0.0]))
