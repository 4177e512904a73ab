"""Sigma split by nested analysis of variance."""

import math
from itertools import pairwise

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import special

from fieldplan.base.errors import DesignError
from fieldplan.stats.nested import Results, nested_components

WINGS: Results = (
    ((58.5, 59.5), (77.8, 80.9), (84.0, 83.6), (70.1, 68.3)),
    ((69.8, 69.8), (56.0, 54.5), (50.7, 49.3), (63.8, 65.8)),
    ((56.6, 57.5), (77.8, 79.2), (69.9, 69.2), (62.1, 64.5)),
)
"""Sokal & Rohlf, Biometry, box 10.1: 3 cages, 4 females each, measured twice (from memory)."""

LEAVES: Results = (
    ((3.28, 3.09), (3.52, 3.48), (2.88, 2.80)),
    ((2.46, 2.44), (1.87, 1.92), (2.19, 2.19)),
    ((2.77, 2.66), (3.74, 3.44), (2.55, 2.55)),
    ((3.78, 3.87), (4.07, 4.12), (3.31, 3.31)),
)
"""Snedecor & Cochran, Statistical Methods: calcium in 4 plants, 3 leaves of each (from memory)."""


def test_mosquito_wings_have_their_published_parts() -> None:
    """Source: Sokal & Rohlf, Biometry, box 10.1 (from memory): MS 332.8379, 191.1864, 1.3017."""
    found = nested_components(WINGS)
    squares = [s.value for s in found.mean_squares]
    assert squares == pytest.approx([332.8379, 191.1864, 1.3017], abs=5e-5)
    assert [s.degrees_of_freedom for s in found.mean_squares] == [2, 9, 12]
    parts = [c.variance for c in found.components]
    assert parts == pytest.approx([17.71, 94.94, 1.30], abs=0.005)


def test_turnip_leaves_have_their_published_parts() -> None:
    """Source: Snedecor & Cochran, Statistical Methods (from memory): 0.3652, 0.1610, 0.0067."""
    found = nested_components(LEAVES)
    parts = [c.variance for c in found.components]
    assert parts == pytest.approx([0.3652, 0.1610, 0.0067], abs=1e-4)
    assert found.balanced


UNBALANCED = ((2, 1, 3), (1, 1), (2,), (4, 2), (1, 3, 1, 2))
"""Analyses per sample, places in brackets."""


def _design(shape: tuple[tuple[int, ...], ...]) -> tuple[NDArray[np.float64], ...]:
    """Indicator matrices of the mean, the places and the samples."""
    places = [i for i, place in enumerate(shape) for n in place for _ in range(n)]
    jars = [n for place in shape for n in place]
    samples = [j for j, n in enumerate(jars) for _ in range(n)]
    return (
        np.ones((len(places), 1)),
        np.eye(len(shape))[places],
        np.eye(len(jars))[samples],
    )


def _projection(z: NDArray[np.float64]) -> NDArray[np.float64]:
    return z @ np.linalg.pinv(z)


def _nest(values: NDArray[np.float64], shape: tuple[tuple[int, ...], ...]) -> Results:
    given = iter(values.tolist())
    return [[[next(given) for _ in range(n)] for n in place] for place in shape]


def test_unbalanced_estimates_are_those_of_linear_algebra() -> None:
    """E(yᵀQy) = Σ σ² tr(QZZᵀ), solved by numpy: no formula for k1, k2, k3 enters."""
    one, places, samples = _design(UNBALANCED)
    everything = np.eye(len(one))
    spans = [_projection(z) for z in (one, places, samples, everything)]
    y = np.random.default_rng(3).normal(10, 4, len(one))
    quadratic = [b - a for a, b in pairwise(spans)]
    sums = np.array([y @ q @ y for q in quadratic])
    expected = np.array(
        [[np.trace(q @ z @ z.T) for z in (places, samples, everything)] for q in quadratic]
    )
    truth = np.linalg.solve(expected, sums)
    found = nested_components(_nest(y, UNBALANCED))
    assert not found.balanced
    assert [c.raw for c in found.components] == pytest.approx(truth.tolist(), rel=1e-9)


def _chance_f(value: float, above: int, below: int) -> float:
    return float(special.fdtr(above, below, value))


def test_the_low_end_touches_zero_just_where_the_f_test_does() -> None:
    """Ting et al. 1990 built their limits so: a limit is 0 at the tail quantile of F."""
    found = nested_components(WINGS, confidence=0.90)
    places, samples = found.mean_squares[:2]
    share = _chance_f(
        places.value / samples.value, places.degrees_of_freedom, samples.degrees_of_freedom
    )
    for tail, zero in ((1 - share + 1e-6, False), (1 - share - 1e-6, True)):
        low = nested_components(WINGS, confidence=1 - 2 * tail).component("between locations").low
        assert (low == 0) is zero


def test_the_smallest_scale_has_the_exact_interval() -> None:
    """Chi-square limits of a variance, by the other library's quantiles."""
    part = nested_components(WINGS, confidence=0.95).component("analysis")
    ends = [12 * part.variance / special.chdtri(12, p) for p in (0.025, 0.975)]
    assert [part.low, part.high] == pytest.approx(ends, rel=1e-9)


def _simulated(rng: np.random.Generator, shape: tuple[tuple[int, ...], ...]) -> Results:
    _, places, samples = _design(shape)
    y = (
        places @ rng.normal(0, 2.0, places.shape[1])
        + samples @ rng.normal(0, 1.0, samples.shape[1])
        + rng.normal(0, 0.5, len(places))
    )
    return _nest(y, shape)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("shape", "lowest"),
    [(((2, 2),) * 8, 0.90), (((2, 2),) * 6 + ((1, 1),) * 6, 0.88), (((2, 1),) * 10, 0.88)],
)
def test_intervals_hold_the_truth_as_often_as_they_say(
    shape: tuple[tuple[int, ...], ...], lowest: float
) -> None:
    """Simulation, seed fixed: 90 % intervals; unbalanced data may lose 2 points.

    Tolerance 4·√(0.9·0.1/R).
    """
    rng, runs = np.random.default_rng(19), 3000
    hits = dict.fromkeys(("between locations", "sampling", "analysis"), 0)
    for _ in range(runs):
        found = nested_components(_simulated(rng, shape), confidence=0.90)
        for stage, truth in zip(hits, (4.0, 1.0, 0.25), strict=True):
            part = found.component(stage)
            hits[stage] += part.low <= truth <= part.high
    for stage, count in hits.items():
        assert count / runs >= lowest - 4 * math.sqrt(0.09 / runs), (stage, count / runs)
        assert count / runs <= 0.95 + 4 * math.sqrt(0.09 / runs), (stage, count / runs)


def test_raw_parts_are_right_on_average() -> None:
    """Simulation, seed fixed: unbiased before the cut at 0; 4 standard errors of the mean seen."""
    rng, runs = np.random.default_rng(23), 600
    found = [nested_components(_simulated(rng, UNBALANCED)) for _ in range(runs)]
    for stage, truth in (("between locations", 4.0), ("sampling", 1.0), ("analysis", 0.25)):
        raw = np.array([f.component(stage).raw for f in found])
        assert abs(raw.mean() - truth) <= 4 * raw.std(ddof=1) / math.sqrt(runs)


def test_a_negative_part_is_cut_at_zero_and_says_so() -> None:
    """Places that differ less than their own duplicates: no variance is below 0."""
    found = nested_components([[[1.0], [9.0]], [[9.0], [1.0]], [[2.0], [8.0]]])
    part = found.component("between locations")
    assert part.cut_at_zero
    assert (part.variance, part.low, part.degrees_of_freedom) == (0.0, 0.0, 0.0)
    assert found.total == found.component("sampling and analysis").variance


def test_duplicates_without_a_second_analysis_give_two_parts() -> None:
    """By hand: duplicates (1, 3), (5, 7), (9, 11): within 2, between (32 − 2)/2 = 15."""
    found = nested_components([[[1.0], [3.0]], [[5.0], [7.0]], [[9.0], [11.0]]])
    assert [c.stage for c in found.components] == ["between locations", "sampling and analysis"]
    assert [c.variance for c in found.components] == pytest.approx([15.0, 2.0])


def test_data_that_cannot_be_split_are_refused() -> None:
    """Each line says what is missing."""
    with pytest.raises(DesignError, match="2 or more"):
        nested_components([[[1.0], [2.0]]])
    with pytest.raises(DesignError, match="none of the 3 locations has a second sample"):
        nested_components([[[1.0, 2.0]], [[2.0]], [[3.0]]])
    with pytest.raises(DesignError, match="no spread"):
        nested_components([[[4.0], [4.0]], [[4.0]]])
    with pytest.raises(DesignError, match="no number"):
        nested_components([[[4.0], [math.nan]], [[4.0]]])
    with pytest.raises(DesignError, match="no result"):
        nested_components([[[4.0], []], [[4.0]]])
    with pytest.raises(DesignError, match="confidence is 1"):
        nested_components(WINGS, confidence=1)
