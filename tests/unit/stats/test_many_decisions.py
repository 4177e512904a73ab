"""Many decisions at once: independent, tied together, and what each may risk."""

import itertools
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.many_decisions import (
    chance_for_each,
    chance_of_any,
    n_for_many,
    risks_for_each,
)
from fieldplan.stats.power import one_sample_n, one_sample_power

CHANCES = st.lists(st.floats(0, 1), min_size=1, max_size=6)


@given(CHANCES)
def test_chance_of_any_is_the_sum_over_all_outcomes(chances: list[float]) -> None:
    """Brute force: add up the probability of every outcome with at least one wrong decision."""
    total = sum(
        math.prod(c if wrong else 1 - c for c, wrong in zip(chances, outcome, strict=True))
        for outcome in itertools.product([False, True], repeat=len(chances))
        if any(outcome)
    )
    least, independent, most = chance_of_any(chances)
    assert independent == pytest.approx(total, abs=1e-12)
    assert least <= independent + 1e-12 <= most + 2e-12


@given(st.floats(0.001, 0.9), st.integers(1, 200))
def test_what_each_may_risk_adds_up_to_the_whole(overall: float, decisions: int) -> None:
    """Inverse and forward must agree, for both rules."""
    alone = chance_for_each(overall, decisions, independent=True)
    assert chance_of_any([alone] * decisions).independent == pytest.approx(overall, rel=1e-9)
    tied = chance_for_each(overall, decisions)
    assert chance_of_any([tied] * decisions).most == pytest.approx(overall, rel=1e-9)
    assert tied <= alone * (1 + 1e-12)


def test_ten_tests_at_a_twentieth() -> None:
    """By hand: 1 − 0.95¹⁰ = 0.4013."""
    assert chance_of_any([0.05] * 10).independent == pytest.approx(1 - 0.95**10, rel=1e-12)


def test_one_claim_for_all_keeps_alpha_however_they_are_tied() -> None:
    """Simulate 5 analytes on the same samples, one of them at its level: four standard errors.

    Independent and nearly identical analytes alike; the claim needs all five limits below.
    """
    n, decisions = 12, 5
    alpha, _ = risks_for_each(0.05, 0.2, decisions=decisions, together="all-or-nothing")
    generator = np.random.default_rng(31)
    for tie in (0.0, 0.9):
        shared = generator.normal(size=(20_000, n, 1))
        own = generator.normal(size=(20_000, n, decisions))
        results = math.sqrt(tie) * shared + math.sqrt(1 - tie) * own
        results[:, :, 1:] -= 0.8
        error = results.std(axis=1, ddof=1) / math.sqrt(n)
        below = results.mean(axis=1) + stats.t.isf(alpha, n - 1) * error < 0
        share = float(below.all(axis=1).mean())
        assert share < 0.05 + 4 * math.sqrt(0.05 * 0.95 / 20_000)


def test_each_alone_keeps_both_overall_chances() -> None:
    """Simulate 6 independent wells at the level, then at the far edge: within both chances."""
    decisions = 6
    n = n_for_many(1.0, 1.0, alpha=0.1, beta=0.2, decisions=decisions)
    alpha, beta = risks_for_each(0.1, 0.2, decisions=decisions, together="each-alone")
    generator = np.random.default_rng(32)
    for mean, bound in ((0.0, 0.1), (-1.0, 0.2)):
        results = generator.normal(mean, 1.0, (10_000, decisions, n))
        error = results.std(axis=2, ddof=1) / math.sqrt(n)
        below = results.mean(axis=2) + stats.t.isf(alpha, n - 1) * error < 0
        wrong = below.any(axis=1) if mean == 0 else ~below.all(axis=1)
        assert float(wrong.mean()) < bound + 4 * math.sqrt(bound * (1 - bound) / 10_000)
    assert one_sample_power(1.0, 1.0, n=n, alpha=alpha) >= 1 - beta


def test_one_decision_is_the_plain_question() -> None:
    """With one decision nothing is shared out."""
    for together in ("each-alone", "all-or-nothing"):
        assert n_for_many(
            0.7, 1.0, alpha=0.05, beta=0.1, decisions=1, together=together
        ) == one_sample_n(0.7, 1.0, alpha=0.05, beta=0.1)


def test_impossible_counts_and_chances_are_refused() -> None:
    """No decision, or a chance outside 0 to 1, has no answer."""
    with pytest.raises(DesignError, match="at least 1"):
        chance_for_each(0.05, 0)
    with pytest.raises(DesignError, match="between 0 and 1"):
        chance_for_each(1.0, 3)
    with pytest.raises(DesignError, match="no decision"):
        chance_of_any([])
    with pytest.raises(DesignError, match="from 0 to 1"):
        chance_of_any([0.2, 1.2])
    assert chance_of_any([0.2, 1.0]) == (1.0, 1.0, 1.0)
