"""Variance from neighbours, against enumeration, closed forms and a field with structure."""

from itertools import permutations

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.stats.neighbour_variance import (
    neighbour_form,
    neighbour_variance,
    neighbour_weights,
)

SPOTS = np.array([[0.0, 0.0], [1.0, 0.2], [5.0, 1.0], [5.5, 4.0], [9.0, 9.0], [9.1, 9.0]])
VALUES = np.array([2.0, 7.0, 1.0, 8.0, 2.5, 8.5])


def test_values_without_structure_have_the_plain_variance() -> None:
    """Brute force: over all 720 ways to set values on places, the mean is s²/n exactly."""
    found = [neighbour_variance(np.array(p), SPOTS).variance for p in permutations(VALUES)]
    assert np.mean(found) == pytest.approx(VALUES.var(ddof=1) / 6)


@pytest.mark.parametrize("count", [2, 3, 4])
def test_few_places_are_all_neighbours(count: int) -> None:
    """With 2 places both weights are alike in every sum, and the variance is s²/2 itself."""
    weights = neighbour_weights(SPOTS[:count])
    assert (weights > 0).all()
    two = neighbour_variance(VALUES[:2], SPOTS[:2])
    assert two.variance == pytest.approx(VALUES[:2].var(ddof=1) / 2)
    assert two.degrees_of_freedom == pytest.approx(1.0)


def test_weights_are_given_and_received_in_full() -> None:
    """Rows and columns sum to 1; nobody far away has any (Stevens & Olsen 2003, from memory)."""
    random = np.random.default_rng(3)
    places = random.random((40, 2))
    weights = neighbour_weights(places)
    assert weights.sum(axis=0) == pytest.approx(1.0, abs=1e-3)
    assert weights.sum(axis=1) == pytest.approx(1.0)
    assert ((weights > 0) == (weights.T > 0)).all()
    assert (weights > 0).sum(axis=1).min() >= 4
    assert (weights > 0).mean() < 0.25
    assert (np.diag(weights) > 0).all()


def test_places_in_one_spot_are_neighbours_like_any() -> None:
    """Nested wells share coordinates; each still weighs itself most at the start."""
    places = np.array([[0.0, 0.0]] * 3 + [[5.0, 5.0]] * 3)
    weights = neighbour_weights(places)
    assert weights.sum(axis=0) == pytest.approx(1.0, abs=1e-3)
    assert neighbour_variance(VALUES, places).variance > 0


def test_a_slope_hardly_counts() -> None:
    """On a plane the neighbours differ little: far below s²/n, the error of random places."""
    side = np.arange(10.0)
    across, up = (grid.ravel() for grid in np.meshgrid(side, side))
    found = neighbour_variance(3.0 * across, np.column_stack([across, up]))
    assert found.variance < 0.2 * (3.0 * across).var(ddof=1) / 100


def test_form_is_a_variance() -> None:
    """Trace 1, rows that sum to 0, nothing negative: what a variance of values must be."""
    form = neighbour_form(np.random.default_rng(5).random((30, 2)))
    assert np.trace(form) == pytest.approx(1.0)
    assert form.sum(axis=1) == pytest.approx(0.0, abs=1e-12)
    assert np.linalg.eigvalsh(form).min() > -1e-12


def test_degrees_of_freedom_are_those_of_the_form() -> None:
    """Simulation: 2 E² / Var of the estimate for normal values, within 4 standard errors.

    The variance of a sample variance over k draws has a relative standard error of about
    √(2/k)·√(1 + 6/f) for a scaled chi-square of f degrees of freedom.
    """
    random = np.random.default_rng(8)
    places, draws = random.random((25, 2)), 20_000
    form = neighbour_form(places)
    values = random.standard_normal((draws, 25))
    found = np.einsum("ki,ij,kj->k", values, form, values)
    stated = neighbour_variance(values[0], places).degrees_of_freedom
    seen = 2 * found.mean() ** 2 / found.var()
    assert seen == pytest.approx(stated, rel=4 * (2 / draws * (1 + 6 / stated)) ** 0.5)


def test_one_place_and_unequal_numbers_are_refused() -> None:
    """No neighbour, no variance."""
    with pytest.raises(DesignError, match="1 place has no neighbour"):
        neighbour_variance(VALUES[:1], SPOTS[:1])
    with pytest.raises(DesignError, match="5 values came with 6 places"):
        neighbour_variance(VALUES[:5], SPOTS)
