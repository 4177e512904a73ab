"""Skewness is judged where the interval stands: at the weighted mean, and by its direction."""

import math
from itertools import combinations, product

import numpy as np
import pytest
from scipy import stats

from fieldplan.sizing.answer import answer
from fieldplan.sizing.lean import equivalent_sample, lean_sentences
from fieldplan.sizing.question import Part, Question
from fieldplan.sizing.words import percent
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.shape import skewness_of_mean, t_coverage
from tests.unit.sizing.asking import SIGMAS, WEIGHTS, ask, three, whole

CAMPAIGNS = 60_000


def leaning(*skewnesses: float) -> tuple[Part, ...]:
    """Three strata of these skewnesses."""
    rows = zip("abc", WEIGHTS, SIGMAS, skewnesses, strict=True)
    return tuple(
        Part(name, weight, sigma, results=8, skewness=g) for name, weight, sigma, g in rows
    )


def test_skewness_of_a_weighted_mean_is_that_of_all_its_samples() -> None:
    """Brute force: every sample with replacement of 3 from one list and 2 from another."""
    lists, weights, counts = ((0.0, 1.0, 5.0), (2.0, 3.0, 3.0, 9.0)), (0.7, 0.3), (3, 2)
    means = [
        weights[0] * math.fsum(one) / 3 + weights[1] * math.fsum(other) / 2
        for one in product(lists[0], repeat=3)
        for other in product(lists[1], repeat=2)
    ]
    found = skewness_of_mean(
        weights,
        [float(np.std(values)) for values in lists],
        [float(stats.skew(values)) for values in lists],
        counts=counts,
    )
    assert found == pytest.approx(float(stats.skew(means)), rel=1e-12)


def coverage(parts: tuple[Part, ...], counts: tuple[int, ...], kind: IntervalKind) -> float:
    """Simulate stratified campaigns of gamma results with Satterthwaite's t interval."""
    generator = np.random.default_rng(1908)
    mean, variance, below = (np.zeros(CAMPAIGNS) for _ in range(3))
    for part, count in zip(parts, counts, strict=True):
        lean = part.skewness or 0.0
        shape = 4 / lean**2
        raw = generator.gamma(shape, 1.0, (CAMPAIGNS, count)) - shape
        results = raw * math.copysign(part.sigma / math.sqrt(shape), lean)
        term = part.weight**2 * results.var(axis=1, ddof=1) / count
        mean += part.weight * results.mean(axis=1)
        variance += term
        below += term**2 / (count - 1)
    t = stats.t.ppf(0.975 if kind == "two-sided" else 0.95, variance**2 / below)
    reach = t * np.sqrt(variance)
    held = {"two-sided": abs(mean) <= reach, "upper-limit": mean + reach >= 0}
    return float(held.get(kind, mean - reach <= 0).mean())


@pytest.mark.parametrize("kind", ["two-sided", "upper-limit", "lower-limit"])
@pytest.mark.parametrize("leans", [(2.0, 2.0, 2.0), (-2.0, -2.0, -2.0), (1.0, 2.0, 3.0)])
@pytest.mark.parametrize("counts", [(9, 8, 12), (14, 4, 4)])
def test_the_equivalent_sample_covers_as_the_strata_do(
    leans: tuple[float, ...], counts: tuple[int, ...], kind: IntervalKind
) -> None:
    """Simulation: within 2.5 points (an approximation) and 4 standard errors, and careful."""
    parts = leaning(*leans)
    n, lean = equivalent_sample(Question(parts, "standard_error", 9.0), counts)
    assert lean is not None
    stated = t_coverage(n, lean, confidence=0.95, kind=kind, family="gamma")
    true = coverage(parts, counts, kind)
    noise = 4 * math.sqrt(true * (1 - true) / CAMPAIGNS)
    assert -0.025 - noise <= stated - true <= 0.002 + noise


def test_the_limit_on_the_side_of_the_long_tail_is_the_one_that_falls_short() -> None:
    """Simulation: with a long tail below, lower limits miss too often and upper ones rarely."""
    parts = leaning(-2.0, -2.0, -2.0)
    assert coverage(parts, (9, 8, 12), "lower-limit") < 0.92
    assert coverage(parts, (9, 8, 12), "upper-limit") > 0.97
    text = " ".join(answer(ask(parts, 9.0)).conditions)
    assert "a lower limit alone needs several times that" in text
    assert "while an upper limit errs on the careful side" in text


def test_strata_are_judged_by_their_weighted_mean_and_not_by_the_worst() -> None:
    """By hand: one stratum that leans far but counts for little leaves the mean near symmetric."""
    parts = (
        Part("field", 0.98, 20.0, results=8, skewness=0.0, pilot="a"),
        Part("ditch", 0.02, 20.0, results=8, skewness=3.0, pilot="b"),
    )
    counts = tuple(entry.needed for entry in answer(ask(parts, 6.0)).strata)
    third = (0.02 * 20) ** 3 * 3 / counts[1] ** 2
    second = math.fsum((p.weight * p.sigma) ** 2 / n for p, n in zip(parts, counts, strict=True))
    n, lean = equivalent_sample(ask(parts, 6.0), counts)
    assert lean == pytest.approx(third / second**1.5 * math.sqrt(n))
    text = " ".join(answer(ask(parts, 6.0)).conditions)
    assert "0 in field and 3.0 in ditch" in text
    assert "show little skewness" in text
    assert "needs about" not in text


def test_a_stratum_of_unknown_skewness_leaves_the_mean_unknown() -> None:
    """The rule is all that can be said; which strata are known is said too."""
    parts = (*leaning(1.0, 2.0, 3.0)[:2], three(results=8)[2])
    text = " ".join(answer(ask(parts, 9.0)).conditions)
    assert "Skewness is known in a and b only. For skewed data" in text


@pytest.mark.parametrize("drawn", [3, 5, 7])
def test_a_list_with_one_far_unit_is_held_only_if_that_unit_is_drawn(drawn: int) -> None:
    """Brute force: every sample of a list of 8 alike units but one, with t and the correction."""
    units = [1.0] * 7 + [100.0]
    held = []
    for sample in combinations(units, drawn):
        error = np.std(sample, ddof=1) * math.sqrt((1 - drawn / 8) / drawn)
        reach = stats.t.ppf(0.975, drawn - 1) * error
        held.append(abs(np.mean(sample) - np.mean(units)) <= reach + 1e-9)
    assert np.mean(held) == pytest.approx(drawn / 8)
    sentences = lean_sentences(ask(whole(3.1, population=8), 0.5), (drawn,))
    assert f"in {percent(drawn / 8)} of campaigns ({drawn} of 8 units)" in sentences[-1]


def test_a_list_taken_whole_or_an_area_has_no_such_unit() -> None:
    """Every unit is drawn, or the population has no units."""
    assert "A list can" not in " ".join(lean_sentences(ask(whole(population=8), 0.5), (8,)))
    assert "A list can" not in " ".join(lean_sentences(ask(whole(), 6.0), (8,)))
    assert "A list can" not in " ".join(lean_sentences(ask(whole(population=900), 6.0), (8,)))


def test_a_coverage_for_a_list_is_said_to_be_of_a_large_population() -> None:
    """The table was simulated without lists: of a short one, coverage can be lower."""
    listed = " ".join(answer(ask(whole(3.1, population=22, skewness=1.6), 0.5)).conditions)
    assert "results of a large population holds the true mean" in listed
    assert "large population" not in " ".join(answer(ask(whole(skewness=1.6), 6.0)).conditions)
