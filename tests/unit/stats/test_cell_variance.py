"""The variance of a mean from one or two places in each compact cell."""

import math
from itertools import product

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.stats.cell_variance import (
    can_weigh_curves,
    cells_joined,
    curve_variance,
    freedom_of_small_parts,
    neighbour_groups,
    pair_parts,
)
from fieldplan.stats.spatial import correlation_at, distances


def test_two_results_a_cell_give_a_variance_without_bias() -> None:
    """Brute force: all draws of 2 with replacement from 3 cells of 3 places (Cochran 1977, 5.4)."""
    ground = np.array([[1.0, 2.0, 6.0], [0.0, 5.0, 7.0], [3.0, 3.0, 12.0]])
    shares = np.array([0.3, 0.3, 0.4])
    pairs = list(product(range(3), repeat=2))
    means, variances = [], []
    for draw in product(pairs, repeat=3):
        values = np.concatenate([ground[k, list(pair)] for k, pair in enumerate(draw)])
        cell_of = np.repeat(np.arange(3), 2)
        means.append(shares @ values.reshape(3, 2).mean(axis=1))
        parts = pair_parts(values, cell_of, shares, np.arange(3))
        variances.append(sum(part.variance for part in parts))
    assert np.mean(means) == pytest.approx(shares @ ground.mean(axis=1))
    assert np.mean(variances) == pytest.approx(np.var(means))


def test_pairs_of_cells_overstate_by_half_the_squared_difference_of_their_means() -> None:
    """Brute force over all draws of one place a cell; Cochran (1977), sec. 5A.12."""
    ground = np.array([[1.0, 2.0, 6.0], [2.0, 5.0, 8.0], [30.0, 31.0, 35.0], [28.0, 33.0, 38.0]])
    shares = np.full(4, 0.25)
    centres = np.array([[0.0, 0.0], [1.0, 0.0], [9.0, 0.0], [10.0, 0.0]])
    groups = neighbour_groups(np.ones(4, dtype=np.int64), centres)
    assert groups.tolist() == [0, 0, 1, 1]
    means, variances = [], []
    for draw in product(range(3), repeat=4):
        values = ground[np.arange(4), list(draw)]
        means.append(shares @ values)
        parts = pair_parts(values, np.arange(4), shares, groups)
        variances.append(sum(part.variance for part in parts))
    of_cells = ground.mean(axis=1)
    between = (of_cells[0] - of_cells[1]) ** 2 + (of_cells[2] - of_cells[3]) ** 2
    assert np.mean(variances) - np.var(means) == pytest.approx(between / 16)


def test_pairs_are_the_same_whatever_the_results() -> None:
    """Groups come from centres alone, closest pairs first: a rule that results could bend is none.

    By hand: 3–4 are 1 apart, then 0–1 are 2 apart; 2 is left and joins 1, its nearest.
    """
    centres = np.array([[0.0, 0.0], [2.0, 0.0], [4.5, 0.0], [10.0, 0.0], [11.0, 0.0]])
    assert neighbour_groups(np.ones(5, dtype=np.int64), centres).tolist() == [0, 0, 0, 1, 1]


def test_a_cell_left_with_one_result_joins_its_nearest_neighbour() -> None:
    """Two a cell, one lost: the lone result is compared with the cell beside it, not with none."""
    centres = np.array([[0.0, 0.0], [5.0, 0.0], [6.0, 0.0]])
    assert neighbour_groups(np.array([2, 2, 1]), centres).tolist() == [0, 1, 1]


def test_cells_without_results_join_the_nearest_with_one() -> None:
    """Neighbouring ground stands in for ground that gave nothing."""
    centres = np.array([[0.0, 0.0], [4.0, 0.0], [10.0, 0.0], [11.0, 0.0]])
    assert cells_joined(np.array([1, 0, 0, 2]), centres).tolist() == [0, 0, 3, 3]
    with pytest.raises(DesignError, match="none of 2 cells has a result"):
        cells_joined(np.zeros(2, dtype=np.int64), centres[:2])
    with pytest.raises(DesignError, match="needs 2"):
        neighbour_groups(np.array([1]), centres[:1])


def test_many_alike_pairs_have_as_many_degrees_of_freedom() -> None:
    """Simulation: the plain formula gives a third of 30 pairs; this one about all of them."""
    rng = np.random.default_rng(7)
    found = [freedom_of_small_parts(rng.chisquare(1, 30), [1.0] * 30) for _ in range(400)]
    assert 24 < np.mean(found) <= 30
    parts = rng.chisquare(1, 3000)
    # (Σv)²/Σv² estimates m/3; squares of χ² have relative SE √(96)/3/√m, so 4 SE are 24 %.
    assert freedom_of_small_parts(parts, np.ones(3000)) == pytest.approx(3000, rel=0.24)
    assert math.isinf(freedom_of_small_parts([0.0, 0.0], [1, 1]))
    assert freedom_of_small_parts([5.0, 1e-9, 1e-9], [1, 1, 1]) == pytest.approx(1.0)


def square_cells(side: int) -> tuple[np.ndarray, np.ndarray]:
    """Give places at random in the cells of a square of 1 m cells, and their cells."""
    rng = np.random.default_rng(side)
    across, up = (grid.ravel() for grid in np.meshgrid(np.arange(side), np.arange(side)))
    places = np.column_stack([across, up]) + rng.random((side * side, 2))
    return places, np.arange(side * side)


def test_a_field_without_structure_gets_the_variance_of_random_places() -> None:
    """Independent normal results: s²/n in the middle of many, within 4 standard errors."""
    places, cells = square_cells(7)
    shares = np.full(49, 1 / 49)
    rng = np.random.default_rng(3)
    ratios = []
    for _ in range(40):
        values = rng.normal(size=49)
        found = curve_variance(values, places, cells, shares, area=49.0)
        ratios.append(found.variance / (values.var(ddof=1) / 49))
        assert found.degrees_of_freedom == 46
    assert 0.85 < np.median(ratios) <= 1.02


def test_a_smooth_field_gets_the_variance_inside_its_cells() -> None:
    """Simulated field of known curve: the middle of 40 estimates within a fifth of the truth.

    The truth by brute force: one minus the mean correlation of 4,000 pairs in a square of 1 m.
    """
    places, cells = square_cells(7)
    shares = np.full(49, 1 / 49)
    rng = np.random.default_rng(4)
    curve = correlation_at(distances(places, places), 6.0, shape="exponential")
    root = np.linalg.cholesky(curve + 1e-9 * np.eye(49))
    pairs = rng.random((4000, 2, 2))
    apart = np.hypot(*(pairs[:, 0] - pairs[:, 1]).T)
    truth = (1 - correlation_at(apart, 6.0, shape="exponential").mean()) / 49
    found = [
        curve_variance(root @ rng.normal(size=49), places, cells, shares, area=49.0).variance
        for _ in range(40)
    ]
    assert np.median(found) == pytest.approx(truth, rel=0.2)


def test_curves_are_weighed_for_20_to_400_results_that_differ() -> None:
    """Fewer cannot weigh them (measured); more take seconds and know no more than pairs."""
    assert [can_weigh_curves(np.arange(float(n))) for n in (19, 20, 400, 401)] == [
        False,
        True,
        True,
        False,
    ]
    assert not can_weigh_curves(np.full(30, 7.0))
    n = 401
    values, places, shares = np.arange(float(n)), np.zeros((n, 2)), np.full(n, 1 / n)
    with pytest.raises(DesignError, match="401 results"):
        curve_variance(values, places, np.arange(n), shares, area=1.0)
