"""Ranked sets: what ranking is worth."""

import math

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.stats.ranked_sets import (
    highest_ranking_price,
    ranked_count,
    relative_precision,
    standard_scores,
)
from tests.unit.stats.published import area

PUBLISHED = [r for r in area("A07") if "dist" in r.inputs]


@pytest.mark.parametrize("entry", PUBLISHED, ids=lambda r: r.id)
def test_perfect_ranking_has_its_published_precision(entry: object) -> None:
    """Source: Takahasi & Wakimoto 1968, Dell & Clutter 1972, EPA QA/G-5S ch. 9 (values.csv)."""
    inputs = entry.inputs  # type: ignore[attr-defined]
    found = relative_precision(inputs["m"], shape=inputs["dist"])
    assert found == pytest.approx(entry.exact, rel=1e-10)  # type: ignore[attr-defined]


def test_closed_forms_of_uniform_and_exponential_hold_for_every_size() -> None:
    """Uniform (m + 1)/2; exponential m over the harmonic number: Takahasi & Wakimoto 1968."""
    for m in range(2, 21):
        assert relative_precision(m, shape="uniform") == pytest.approx((m + 1) / 2)
        harmonic = math.fsum(1 / j for j in range(1, m + 1))
        assert relative_precision(m, shape="exponential") == pytest.approx(m / harmonic)


def test_normal_scores_have_their_closed_forms() -> None:
    """1/√π for 2 and 3/(2√π) for 3: David & Nagaraja 2003, ch. 3; any set sums to 0."""
    assert standard_scores(2)[1] == pytest.approx(1 / math.sqrt(math.pi), rel=1e-12)
    assert standard_scores(3)[2] == pytest.approx(1.5 / math.sqrt(math.pi), rel=1e-12)
    for m in range(2, 21):
        assert math.fsum(standard_scores(m)) == pytest.approx(0, abs=1e-10)
        assert 1 < relative_precision(m) < (m + 1) / 2


def test_ranking_errors_cost_what_simulated_ones_cost() -> None:
    """Simulation, seed fixed: the variance ratio within 4·√(2/(R−1)) of its own size.

    m = 3 and 6 results a campaign, ranked by a sign that correlates 0.75 with the result.
    """
    rng, runs, m, rho = np.random.default_rng(11), 20_000, 3, 0.75
    results = rng.normal(size=(runs, 2, m, m))
    sign = rho * results + math.sqrt(1 - rho**2) * rng.normal(size=results.shape)
    order = np.argsort(sign, axis=3)
    chosen = np.stack([order[:, :, i, i] for i in range(m)], axis=2)[..., None]
    means = np.take_along_axis(results, chosen, axis=3)[..., 0].mean(axis=(1, 2))
    seen = (1 / 6) / means.var(ddof=1)
    told = relative_precision(m, correlation=rho)
    assert seen == pytest.approx(told, rel=4 * math.sqrt(2 / (runs - 1)))


def test_ranking_by_chance_is_simple_random() -> None:
    """With correlation 0 nothing is gained and nothing lost."""
    assert relative_precision(5, correlation=0.0) == 1.0
    assert ranked_count(21.4, 5, 1.0) == 25


def test_at_the_highest_price_both_ways_cost_the_same() -> None:
    """By the definition of the price: ranked · (c + m·look) = simple · c."""
    price = highest_ranking_price(90.0, 4, simple=30, ranked=20)
    assert 20 * (90.0 + 4 * price) == pytest.approx(30 * 90.0)
    assert highest_ranking_price(90.0, 4, simple=6, ranked=8) == 0.0


def test_bad_numbers_are_refused_with_their_value() -> None:
    """Each line names the thing, its value and the rule."""
    with pytest.raises(DesignError, match="ranking_set_size is 1"):
        relative_precision(1)
    with pytest.raises(DesignError, match=r"ranking_correlation is -0\.3"):
        relative_precision(3, correlation=-0.3)
    with pytest.raises(DesignError, match="shape is 'gamma'"):
        standard_scores(3, "gamma")  # type: ignore[arg-type]
    assert ranked_count(1.0, 4, 2.0) == 8, "one cycle shows no spread"
