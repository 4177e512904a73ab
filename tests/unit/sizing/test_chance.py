"""The chance that strata keep their target, against simulated pilots and campaigns."""

import math

import numpy as np
import pytest
from numpy.random import Generator
from scipy import stats

from fieldplan.sizing.counting import assured_counts
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Part, Question
from tests.unit.sizing.asking import SIGMAS, WEIGHTS, ask, three, whole


def _after_pilot(
    pilot_n: tuple[int, ...], generator: Generator, value: float, **more: object
) -> Question:
    """Ask with sigmas that normal pilots of these sizes would have shown."""
    parts = tuple(
        Part(name, weight, sigma * math.sqrt(generator.chisquare(n - 1) / (n - 1)), results=n)
        for name, weight, sigma, n in zip("abc", WEIGHTS, SIGMAS, pilot_n, strict=True)
    )
    return ask(parts, value, **more)


def _true_standard_error(counts: list[int]) -> float:
    terms = zip(WEIGHTS, SIGMAS, counts, strict=True)
    return math.sqrt(sum((w * s) ** 2 / n for w, s, n in terms))


def _realised_half_width(counts: list[int], generator: Generator) -> float:
    """Draw a normal campaign and set its Satterthwaite interval."""
    terms = [
        (w * s) ** 2 / n * generator.chisquare(n - 1) / (n - 1)
        for w, s, n in zip(WEIGHTS, SIGMAS, counts, strict=True)
    ]
    known = sum(terms) ** 2 / sum(t * t / (n - 1) for t, n in zip(terms, counts, strict=True))
    return float(stats.t.ppf(0.975, known)) * math.sqrt(sum(terms))


@pytest.mark.slow
@pytest.mark.parametrize("allocation", ["proportional", "neyman", "equal-precision"])
@pytest.mark.parametrize("pilot_n", [(6, 6, 6), (12, 8, 5)])
@pytest.mark.parametrize(("target", "value"), [("standard_error", 4.5), ("half_width", 10.0)])
def test_stated_chance_is_kept_for_strata(
    allocation: str, pilot_n: tuple[int, ...], target: str, value: float
) -> None:
    """Simulation: the share of campaigns on target lies at the stated 80 %.

    Satterthwaite's degrees of freedom and the factor for Neyman are approximations; 3 points are
    allowed for them beside 4 standard errors of the simulation.
    """
    generator, assurance, campaigns = np.random.default_rng(23), 0.8, 300
    kept = 0
    for _ in range(campaigns):
        question = _after_pilot(
            pilot_n, generator, value, target=target, allocation=allocation, assurance=assurance
        )
        counts = assured_counts(question, assurance)
        assert counts is not None
        if target == "standard_error":
            kept += _true_standard_error(counts) <= value
        else:
            kept += _realised_half_width(counts, generator) <= value
    room = 4 * math.sqrt(assurance * (1 - assurance) / campaigns) + 0.03
    assert kept / campaigns == pytest.approx(assurance, abs=room)


def test_neyman_follows_the_luck_of_the_pilot() -> None:
    """Simulation of the ratio itself: mean log of true over predicted variance, to first order."""
    generator, replicates, known = np.random.default_rng(3), 200_000, 11
    spread = np.array(WEIGHTS) * np.array(SIGMAS)
    luck = np.sqrt(generator.chisquare(known, (replicates, 3)) / known)
    ratio = (spread / luck).sum(axis=1) / (spread * luck).sum(axis=1)
    shares = spread / spread.sum()
    effective = known / (shares**2).sum()
    # The logarithm of df/χ² itself lies 1/df above zero, to first order.
    excess = np.log(ratio).mean() - 1 / effective
    counts = [int(1000 * share) for share in shares]
    question = ask(three(results=known + 1), 1.0, allocation="neyman")
    factor = Precision(question).luck_of_allocation(counts)
    noise = 4 * np.log(ratio).std() / math.sqrt(replicates)
    assert math.log(factor) == pytest.approx(excess, abs=noise + 2 / known**2)


def test_a_stratum_at_its_floor_counts_in_the_variance_alone() -> None:
    """The same simulation with the third stratum held at 6 results, whatever its pilot says."""
    generator, replicates, known, shared, held = np.random.default_rng(5), 200_000, 11, 14, 6
    spread = np.array(WEIGHTS) * np.array(SIGMAS)
    luck = np.sqrt(generator.chisquare(known, (replicates, 3)) / known)
    seen = spread * luck
    free = seen[:, :2].sum(axis=1)
    predicted = free**2 / shared + seen[:, 2] ** 2 / held
    true = (spread[:2] / luck[:, :2]).sum(axis=1) * free / shared + spread[2] ** 2 / held
    counts = [shared * share / spread[:2].sum() for share in spread[:2]] + [held]
    parts = spread**2 / counts
    shares = parts / parts.sum()
    excess = np.log(true / predicted).mean() - (shares**2).sum() / known
    question = ask(three(results=known + 1), 1.0, allocation="neyman", floor=held)
    factor = Precision(question).luck_of_allocation(counts)
    noise = 4 * np.log(true / predicted).std() / math.sqrt(replicates)
    assert factor > 1.01
    assert math.log(factor) == pytest.approx(excess, abs=noise + 2 / known**2)


def test_luck_needs_strata_that_follow_their_own_pilot() -> None:
    """One stratum, proportional counts, a common pilot, or floors: nothing to correct."""
    counts = [30, 30, 30]
    own = ask(three(results=8), 5.0, allocation="neyman")
    assert Precision(own).luck_of_allocation(counts) > 1.05
    proportional = ask(three(results=8), 5.0)
    common = ask(three(results=8, pilot="one pilot"), 5.0, allocation="neyman")
    floored = ask(three(results=8), 5.0, allocation="neyman", floor=30)
    single = ask(whole(results=8), 5.0, allocation="neyman")
    for question in (proportional, common, floored):
        assert Precision(question).luck_of_allocation(counts) == 1.0
    assert Precision(single).luck_of_allocation([30]) == 1.0


def test_common_pilot_is_right_or_wrong_for_all_strata_together() -> None:
    """One pilot of 8 gives 7 degrees of freedom however often it is used; three give more."""
    counts = [10, 10, 10]
    common = Precision(ask(three(results=8, pilot="one pilot"), 9.0))
    own = Precision(ask(three(results=8), 9.0))
    assert common.pilot_degrees_of_freedom(counts) == pytest.approx(7)
    known = own.pilot_degrees_of_freedom(counts)
    assert known is not None
    assert 7 < known <= 21


@pytest.mark.parametrize("allocation", ["proportional", "neyman"])
@pytest.mark.parametrize("target", ["standard_error", "half_width"])
@pytest.mark.parametrize("assurance", [0.67, 0.9])
def test_search_for_an_assurance_equals_a_walk(
    allocation: str, target: str, assurance: float
) -> None:
    """Brute force: the first total from the plain one up whose chance is high enough."""
    from fieldplan.sizing.counting import plain_counts
    from fieldplan.stats.allocation import share_total

    question = ask(three(results=7), 8.0, target=target, allocation=allocation)
    total = sum(plain_counts(question))
    precision = Precision(question)
    while True:
        counts = share_total(question.strata, total, allocation=question.allocation)
        if (precision.chance(counts) or 0) >= assurance:
            break
        total += 1
    found = assured_counts(question, assurance)
    assert found is not None
    assert sum(found) == total
