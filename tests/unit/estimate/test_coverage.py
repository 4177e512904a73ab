"""How often the interval holds: on short lists, with a borrowed spread, for a declared class."""

import itertools
import math
from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from fieldplan.estimate import estimate
from fieldplan.estimate.coverage import equivalent_sample, share_with_other_spread
from fieldplan.estimate.means import Means, means_by
from fieldplan.estimate.text import results_paragraph
from fieldplan.packet.sheets.returned import location_table
from fieldplan.plan.model import Plan
from fieldplan.returns.model import LostLocation
from fieldplan.stats.shape import t_coverage
from tests.unit.estimate.known import WELLS, list_plan, result, returned, strata_plan


def wells_of(units: int, values: tuple[float, ...] = WELLS) -> str:
    """Say what the interval of these wells of so many delivers."""
    returns = returned([result(f"MW-{n}", value) for n, value in enumerate(values, start=1)])
    return estimate(list_plan(units=units, planned=len(values)), returns).coverage_sentence


@pytest.mark.parametrize("kind", ["two-sided", "upper-limit"])
def test_on_a_short_list_one_unit_far_off_holds_the_interval_to_n_of_n(kind: str) -> None:
    """Brute force: of all 84 samples of 6 wells out of 9, 56 draw the far one and hold the mean.

    56/84 is 6/9, whatever the 95 % claims.
    """
    population = np.array([2.0] * 8 + [90.0])
    plan = list_plan(units=9, planned=6)
    rules = plan.campaign.rules.model_copy(update={"interval": kind})
    plan = replace(plan, campaign=plan.campaign.model_copy(update={"rules": rules}))
    held = 0
    for chosen in itertools.combinations(range(9), 6):
        answer = estimate(plan, returned([result(f"MW-{n}", population[n]) for n in chosen]))
        low = -math.inf if answer.interval.low is None else answer.interval.low
        assert answer.interval.high is not None
        held += low <= population.mean() <= answer.interval.high
    assert held == 84 * 6 // 9
    said = estimate(
        plan, returned([result(f"MW-{n}", v) for n, v in enumerate(WELLS[:6], start=1)])
    ).coverage_sentence
    assert "a chance of 33 % (1 − 6/9) not to be drawn" in said
    assert "in no more than 67 % of campaigns" in said
    assert ("far above all" in said) == (kind == "upper-limit")


def test_a_list_is_not_said_to_be_like_a_large_population_unless_it_is_one() -> None:
    """8 of 14: the shares at a skewness of 2 and 4 are left out, they may be far too high."""
    short, long = wells_of(14), wells_of(400)
    assert "a large population" in short
    assert "at a skewness of 2" not in short
    assert "not to be drawn" not in long
    assert "at a skewness of 2 in" in long
    plan = strata_plan({"site": 1.0}, {"site": 3.0}, {"site": 8})
    returns = returned([result(f"site-{n}", value) for n, value in enumerate(WELLS, start=1)])
    assert "list" not in estimate(plan, returns).coverage_sentence


def test_nobody_draws_what_a_census_loses() -> None:
    """7 of 8 came; which one is missing was no chance of a draw, so no share can be promised."""
    plan = list_plan(layout="census", units=8)
    results = [result(f"site-{n}", value) for n, value in enumerate(WELLS[:7], start=1)]
    answer = estimate(plan, returned(results, [LostLocation("site-8", "site", "dry", "")]))
    assert "Nobody drew which units are missing" in answer.coverage_sentence
    assert "%" not in answer.coverage_sentence
    assert "no draw decided which" in answer.mean.caution
    assert "had they been drawn at random" in answer.mean.caution
    assert "1 of 8 units gave no result: site-8 (dry)." in answer.population_sentence
    paragraph = results_paragraph(plan, answer)
    assert "random location" not in paragraph
    assert "alternate" not in paragraph
    assert answer.mean.caution in paragraph
    assert {row[1] for row in location_table(plan, answer.returns).rows} == {"unit"}
    assert not any(step.symbol == "held" for step in answer.steps)


WEIGHTS, COUNTS, SIGMAS = (0.654, 0.164, 0.182), (13, 12, 1), (34.0, 83.0)


def lone() -> tuple[Plan, Means]:
    """Three strata, the last with one result; the first two have exactly the s of SIGMAS."""
    names = "abc"
    plan = strata_plan(
        dict(zip(names, WEIGHTS, strict=True)),
        dict.fromkeys(names, 50.0),
        dict(zip(names, COUNTS, strict=True)),
    )
    results = []
    for name, count, sigma in zip(names, COUNTS, (*SIGMAS, 1.0), strict=True):
        shape = np.arange(count, dtype=float) - (count - 1) / 2
        scale = sigma / shape.std(ddof=1) if count > 1 else 0.0
        results += [
            result(f"{name}{n}", 300 + value * scale, stratum=name) for n, value in enumerate(shape)
        ]
    rules = plan.campaign.rules.model_copy(update={"single_result": "borrow-spread"})
    plan = replace(plan, campaign=plan.campaign.model_copy(update={"rules": rules}))
    return plan, means_by(plan, returned(results), rules)


@pytest.mark.parametrize("times", [0.5, 1.0, 2.0, 4.0])
def test_a_borrowed_spread_that_is_not_the_true_one_changes_the_coverage(times: float) -> None:
    """Simulation: 20000 normal campaigns, the lone stratum with another spread than it borrows.

    Intervals are computed here from the raw values. Tolerance: four standard errors of a share
    and 0.02 for the scatter of the estimated variance, which the formula leaves out.
    """
    noise, campaigns = np.random.default_rng(66), 20_000
    pooled = math.sqrt(sum((n - 1) * s * s for n, s in zip(COUNTS, SIGMAS, strict=False)) / 23)
    spreads = (*SIGMAS, times * pooled)
    draws = [
        sigma * noise.standard_normal((campaigns, n))
        for sigma, n in zip(spreads, COUNTS, strict=True)
    ]
    mean = sum(w * d.mean(axis=1) for w, d in zip(WEIGHTS, draws, strict=True))
    squares = [d.var(axis=1, ddof=1) for d in draws[:2]]
    lent = WEIGHTS[2] ** 2
    parts = [
        v * (w * w / n + lent * (n - 1) / 23)
        for v, w, n in zip(squares, WEIGHTS, COUNTS, strict=False)
    ]
    known = (parts[0] + parts[1]) ** 2 / (parts[0] ** 2 / 12 + parts[1] ** 2 / 11)
    reach = stats.t.ppf(0.975, known) * np.sqrt(parts[0] + parts[1])
    held = float(np.mean(np.abs(mean) <= reach))
    _, means = lone()
    tolerance = 4 * math.sqrt(held * (1 - held) / campaigns) + 0.02
    assert share_with_other_spread(means, times) == pytest.approx(held, abs=tolerance)


def test_a_borrowed_spread_is_said_to_be_what_the_interval_rests_on() -> None:
    """Beside the answer and beside the coverage, with what it would come to otherwise."""
    plan, means = lone()
    results = [
        result(f"{v.stratum}{n}", x, stratum=v.stratum)
        for v in means.values
        for n, x in enumerate(v.values)
    ]
    answer = estimate(plan, returned(results))
    assert "the interval holds only if it spreads as they do" in answer.mean.caution
    assert answer.mean.caution in answer.sentences
    assert answer.mean.caution in results_paragraph(plan, answer)
    twice = 100 * share_with_other_spread(means, 2.0)
    assert f"{twice:.0f} % if it is twice" in answer.coverage_sentence
    assert twice < 80


def declared(text: str, values: tuple[float, ...] = WELLS) -> str:
    """Say what the interval of eight wells of an area delivers under a declared class."""
    plan = strata_plan({"site": 1.0}, {"site": 3.0}, {"site": len(values)})
    rules = plan.campaign.rules.model_copy(update={"promised_for": text})
    plan = replace(plan, campaign=plan.campaign.model_copy(update={"rules": rules}))
    returns = returned([result(f"site-{n}", v) for n, v in enumerate(values, start=1)])
    return estimate(plan, returns).coverage_sentence


def test_a_declared_class_is_quoted_with_what_t_holds_at_its_end() -> None:
    """At a skewness of 1 Student's t holds less than 95 %; the share is that of the table."""
    held = t_coverage(8, 1.0, confidence=0.95, kind="two-sided")
    said = declared("wells whose skewness is no larger than 1")
    assert "The plan declares its 95 % for wells whose skewness is no larger than 1" in said
    assert f"t from 8 results holds the true mean in about {100 * held:.0f} %" in said
    assert "lies inside it, which does not prove" in said
    assert "promise" not in said


def test_results_more_skewed_than_the_declared_class_are_said_to_lie_outside() -> None:
    """1, 1, 1, 1, 1, 9 have a skewness of 1.79 = (n - 2)/√(n - 1), the most that six can show."""
    said = declared("a skewness no larger than 1.5", (1.0, 1.0, 1.0, 1.0, 1.0, 9.0))
    assert "The results' own skewness, 1.8, lies outside that class." in said
    plain = declared("soils like those of 2019")
    assert "these results cannot prove" in plain
    assert "skewness of 2019" not in plain


def test_a_stratum_that_borrows_adds_variance_and_no_lean() -> None:
    """By hand: 1, 1, 4 have m2 = 2, m3 = 2 and s² = 3, which the single result of b borrows."""
    plan = strata_plan({"a": 0.6, "b": 0.4}, {"a": 2.0, "b": 2.0}, {"a": 3, "b": 2})
    rules = plan.campaign.rules.model_copy(update={"single_result": "borrow-spread"})
    results = [result(f"a{n}", v, stratum="a") for n, v in enumerate((1.0, 1.0, 4.0))]
    means = means_by(plan, returned([*results, result("b0", 9.0, stratum="b")]), rules)
    n, skewness = equivalent_sample(means)
    third, second = 0.6**3 * 2 / 9, 0.36 * 2 / 3 + 0.16 * 3
    assert n == 3
    assert skewness / math.sqrt(n) == pytest.approx(third / second**1.5, rel=1e-12)


def test_the_share_of_page_one_follows_from_the_printed_steps() -> None:
    """A stranger gets G from W, n, m2 and m3, n* from df, and the share from the table."""
    plan = strata_plan({"a": 0.6, "b": 0.4}, {"a": 5.0, "b": 9.0}, {"a": 5, "b": 4})
    values = {"a": (3.0, 4.0, 4.5, 6.0, 19.0), "b": (20.0, 22.0, 30.0, 71.0)}
    results = [
        result(f"{name}{n}", v, stratum=name)
        for name, vs in values.items()
        for n, v in enumerate(vs)
    ]
    answer = estimate(plan, returned(results))
    steps = {step.symbol: step for step in answer.steps}
    inputs = {q.symbol: q.value for q in steps["G"].inputs}
    for name, numbers in values.items():
        assert inputs[f"m2 {name}"] == pytest.approx(stats.moment(numbers, 2), rel=1e-12)
        assert inputs[f"m3 {name}"] == pytest.approx(stats.moment(numbers, 3), rel=1e-12)
    third = sum(inputs[f"W {k}"] ** 3 * inputs[f"m3 {k}"] / inputs[f"n {k}"] ** 2 for k in "ab")
    second = sum(inputs[f"W {k}"] ** 2 * inputs[f"m2 {k}"] / inputs[f"n {k}"] for k in "ab")
    lean = inputs["n*"] ** 0.5 * third / second**1.5
    assert steps["G"].unrounded == pytest.approx(lean, rel=1e-12)
    assert inputs["n*"] == steps["n*"].rounded == round(steps["df"].unrounded + 1)
    share = t_coverage(int(inputs["n*"]), lean, confidence=0.95, kind="two-sided")
    assert steps["held"].unrounded == pytest.approx(share)
    assert f"in about {100 * share:.0f} % of campaigns" in answer.coverage_sentence
    assert "make_t_coverage.py" in steps["held"].source


def test_one_sample_shows_its_own_skewness() -> None:
    """scipy.stats.skew gives the same g1."""
    plan = strata_plan({"site": 1.0}, {"site": 3.0}, {"site": 8})
    returns = returned([result(f"site-{n}", v) for n, v in enumerate(WELLS, start=1)])
    steps = {step.symbol: step for step in estimate(plan, returns).steps}
    assert steps["G"].unrounded == pytest.approx(stats.skew(WELLS), rel=1e-9)
    assert [q.symbol for q in steps["held"].inputs] == ["n", "G"]
