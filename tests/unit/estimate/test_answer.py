"""The mean and its interval, against worked examples from elsewhere."""

import itertools
import math

import numpy as np
import pytest
from scipy import stats

from fieldplan.base.errors import DesignError, LabError
from fieldplan.estimate import estimate
from fieldplan.estimate.answer import CHANGEABLE
from fieldplan.plan.model import Plan
from fieldplan.returns.model import NearMatch, Returns
from tests.unit.estimate.known import (
    WELLS,
    list_plan,
    non_detect,
    result,
    returned,
    strata_plan,
)


def wells() -> Returns:
    """Eight wells returned."""
    return returned([result(f"MW-{n}", value) for n, value in enumerate(WELLS, start=1)])


def test_eight_wells_of_fourteen_give_the_worked_example() -> None:
    """By hand: 43.9/8 = 5.4875, √(5.4784/8 · 6/14) = 0.5418, ± 2.3646 · 0.5418."""
    answer = estimate(list_plan(), wells())
    assert answer.mean.n == 8
    assert round(answer.mean.mean, 2) == 5.49
    assert round(answer.mean.standard_error, 2) == 0.54
    assert answer.mean.degrees_of_freedom == 7
    assert answer.interval.low is not None
    assert answer.interval.high is not None
    assert round(answer.interval.low, 2) == 4.21
    assert round(answer.interval.high, 2) == 6.77


def test_an_endless_population_agrees_with_scipy() -> None:
    """Without the list the interval is that of scipy.stats.ttest_1samp."""
    plan = strata_plan({"site": 1.0}, {"site": 3.0}, {"site": 8})
    answer = estimate(plan, wells())
    expected = stats.ttest_1samp(WELLS, 0.0).confidence_interval(0.95)
    assert answer.interval.low == pytest.approx(expected.low, rel=1e-12)
    assert answer.interval.high == pytest.approx(expected.high, rel=1e-12)


def test_strata_are_weighed_and_not_pooled() -> None:
    """Weights 0.64, 0.22, 0.14 give 62.5 where the plain mean of all 15 results is 106.9.

    Invented results. Their stratum means solve 0.64 a + 0.22 b + 0.14 c = 62.5 and
    (5 a + 4 b + 6 c) / 15 = 106.9 with a = 20, so both means are known by construction.
    """
    weights, counts = {"a": 0.64, "b": 0.22, "c": 0.14}, {"a": 5, "b": 4, "c": 6}
    c = (0.22 * 375.875 - 49.7) / 0.19
    means = {"a": 20.0, "b": 375.875 - 1.5 * c, "c": c}
    results = [
        result(f"{name}{n}", means[name] + step, stratum=name)
        for name, count in counts.items()
        for n, step in enumerate(np.linspace(-9, 9, count))
    ]
    answer = estimate(strata_plan(weights, {"a": 18, "b": 45, "c": 90}, counts), returned(results))
    assert answer.mean.mean == pytest.approx(62.5, abs=1e-9)
    assert float(np.mean([entry.half for entry in results])) == pytest.approx(106.9, abs=1e-9)


def test_a_textbook_stratified_example_is_met() -> None:
    """Berthouex & Brown 2002, example 23.9: V = 1.91125, half-width 2.7 with z (A06-016, -017).

    Results are built to have exactly the book's s² of 35.4, 180 and 12 and n of 20, 8 and 12;
    its half-width uses z = 1.96.
    """
    weights = {"a": 0.5, "b": 0.25, "c": 0.25}
    variances = {"a": 35.4, "b": 180.0, "c": 12.0}
    counts = {"a": 20, "b": 8, "c": 12}
    means = {"a": 30.0, "b": 60.0, "c": 100.0}
    results = []
    for name, count in counts.items():
        shape = np.arange(count, dtype=float)
        shape = (shape - shape.mean()) / shape.std(ddof=1)
        values = means[name] + shape * math.sqrt(variances[name])
        results += [result(f"{name}{n}", v, stratum=name) for n, v in enumerate(values)]
    sigmas = {name: math.sqrt(v) for name, v in variances.items()}
    answer = estimate(strata_plan(weights, sigmas, counts), returned(results))
    assert answer.mean.standard_error**2 == pytest.approx(1.91125, rel=1e-9)
    assert 1.96 * answer.mean.standard_error == pytest.approx(2.7096601262889, rel=1e-9)
    parts = [0.25 * 35.4 / 20, 0.0625 * 180 / 8, 0.0625 * 12 / 12]
    known = sum(parts) ** 2 / sum(p * p / (n - 1) for p, n in zip(parts, (20, 8, 12), strict=True))
    assert answer.mean.degrees_of_freedom == pytest.approx(known, rel=1e-9)


def test_over_all_samples_of_a_tiny_list_mean_and_variance_are_unbiased() -> None:
    """All 20 samples of 3 out of 6 wells: the average mean is the list's, the average SE² true."""
    population = np.array([2.0, 3.5, 5.0, 7.0, 11.0, 4.0])
    answers = [
        estimate(
            list_plan(units=6, planned=3),
            returned([result(f"MW-{n}", population[n]) for n in chosen]),
        )
        for chosen in itertools.combinations(range(6), 3)
    ]
    means = np.array([answer.mean.mean for answer in answers])
    assert means.mean() == pytest.approx(population.mean(), rel=1e-12)
    claimed = np.mean([answer.mean.standard_error**2 for answer in answers])
    assert claimed == pytest.approx(means.var(), rel=1e-12)


def test_a_census_leaves_no_error_from_choosing_places() -> None:
    """All 8 of 8: the standard error is 0 and the caution says which errors remain."""
    answer = estimate(list_plan(layout="census", units=8), wells())
    assert answer.mean.standard_error == 0
    assert (answer.interval.low, answer.interval.high) == (answer.mean.mean, answer.mean.mean)
    assert any("laboratory remains" in line for line in answer.sentences)
    assert "Coverage cannot be judged" in answer.coverage_sentence
    assert not any("no width" in line for line in answer.sentences)


def censored() -> tuple[Plan, Returns]:
    """Eight places of an area, two of them <5."""
    values = [12.0, 20.0, 9.0, 31.0, 14.0, 17.0]
    results = [result(f"P{n}", value) for n, value in enumerate(values)]
    results += [non_detect("P6", 5.0), non_detect("P7", 5.0)]
    return strata_plan({"site": 1.0}, {"site": 8.0}, {"site": 8}), returned(results)


def test_non_detects_are_bracketed_and_the_half_is_reported() -> None:
    """Σ of the detected is 103: the mean is 103/8, 108/8 and 113/8 at 0, half and the limit."""
    plan, returns = censored()
    answer = estimate(plan, returns)
    bracket = answer.bracket
    assert bracket is not None
    assert (bracket.mean_low, bracket.mean_half, bracket.mean_high) == (12.875, 13.5, 14.125)
    assert answer.mean.mean == 13.5
    assert answer.interval == bracket.interval_half
    detected = [12.0, 20.0, 9.0, 31.0, 14.0, 17.0]
    for bound, interval in ((0.0, bracket.interval_low), (5.0, bracket.interval_high)):
        expected = stats.ttest_1samp([*detected, bound, bound], 0.0).confidence_interval(0.95)
        assert interval.low == pytest.approx(expected.low, rel=1e-12)
        assert interval.high == pytest.approx(expected.high, rel=1e-12)
    assert any("2 of 8 values hold non-detects" in line for line in answer.sentences)


def test_without_non_detects_there_is_no_bracket() -> None:
    """Three equal answers would only be noise."""
    assert estimate(list_plan(), wells()).bracket is None


def test_the_other_kind_of_interval_is_at_hand() -> None:
    """A two-sided interval was declared; the upper limit is shown on request."""
    answer = estimate(list_plan(), wells())
    t = stats.t.ppf(0.95, 7)
    assert answer.other_interval.kind == "upper-limit"
    assert answer.other_interval.high == pytest.approx(
        answer.mean.mean + t * answer.mean.standard_error, rel=1e-9
    )


def test_a_rule_changed_after_results_shows_both_answers() -> None:
    """The recorded interval stays beside the changed one, under a name nobody overlooks."""
    plan = list_plan()
    recorded = estimate(plan, wells())
    answer = estimate(plan, wells(), overrides={"confidence": 0.9, "interval": "upper-limit"})
    assert [(c.rule, c.recorded, c.used) for c in answer.changes] == [
        ("confidence", "0.95", "0.9"),
        ("interval", "two-sided", "upper-limit"),
    ]
    assert {c.interval_recorded for c in answer.changes} == {recorded.interval}
    assert answer.interval.kind == "upper-limit"
    assert answer.sentences[1].startswith("CHANGED AFTER RESULTS: confidence was 0.95, is 0.9;")
    assert "95 % interval 4.21 to 6.77" in answer.sentences[1]


def test_an_override_equal_to_the_record_changes_nothing() -> None:
    """Typing the recorded rule again is no change."""
    answer = estimate(list_plan(), wells(), overrides={"confidence": 0.95})
    assert answer.changes == ()


@pytest.mark.parametrize(
    ("overrides", "says"),
    [
        ({"alpha": 0.1}, "'alpha' cannot be changed"),
        ({"confidence": 1.5}, "confidence = 1.5"),
        ({"interval": "wide"}, "interval = wide"),
        ({"duplicates": "first"}, "reconcile the results by it first"),
    ],
)
def test_an_override_that_is_none_is_refused(overrides: dict[str, str | float], says: str) -> None:
    """A rule nobody wrote down cannot stand in place of one."""
    assert set(CHANGEABLE) == {
        "interval", "confidence", "mean_interval", "promised_class", "single_result", "duplicates",
        "non_detects", "declared_shape",
    }  # fmt: skip
    with pytest.raises(DesignError, match=says):
        estimate(list_plan(), wells(), overrides=overrides)


def test_a_changed_rule_for_duplicates_uses_its_own_returns() -> None:
    """The values themselves change, so both sets are needed."""
    changed = returned([result(f"MW-{n}", value + 1) for n, value in enumerate(WELLS, start=1)])
    answer = estimate(
        list_plan(), wells(), overrides={"duplicates": "first"}, returns_changed=changed
    )
    assert answer.mean.mean == pytest.approx(6.4875)
    assert answer.changes[0].mean_recorded == pytest.approx(5.4875)


def two_strata(*values: float) -> tuple[Plan, Returns]:
    """A stratum of three results and one of ``values``."""
    counts = {"a": 3, "b": max(len(values), 2)}
    results = [result(f"a{n}", v, stratum="a") for n, v in enumerate((10.0, 12.0, 17.0))]
    results += [result(f"b{n}", v, stratum="b") for n, v in enumerate(values)]
    return strata_plan({"a": 0.7, "b": 0.3}, {"a": 3, "b": 5}, counts), returned(results)


def test_a_stratum_left_with_one_result_follows_the_recorded_rule() -> None:
    """'refuse' refuses with a remedy; 'borrow-spread' borrows and says so."""
    plan, returns = two_strata(30.0)
    with pytest.raises(DesignError, match=r"stratum 'b' has 1 result"):
        estimate(plan, returns)
    answer = estimate(
        plan,
        returns,
        overrides={"single_result": "borrow-spread"},
    )
    assert answer.mean.strata[1].variance_borrowed
    assert any("borrowed" in line for line in answer.sentences)
    assert answer.changes[0].mean_recorded is None
    assert "By the recorded rules: no mean, since stratum 'b' has 1 result" in answer.sentences[1]


def test_a_stratum_without_results_is_refused() -> None:
    """No rule can stand in for a part of the population nobody saw."""
    with pytest.raises(DesignError, match="stratum 'b' has no result"):
        estimate(*two_strata())


def test_nothing_is_estimated_while_a_match_waits() -> None:
    """An answer that changes tomorrow is no answer."""
    near = NearMatch(7, "mw 1", "MW-1", "case")
    with pytest.raises(LabError, match=r"1 rows wait for your answer in matches\.csv"):
        estimate(list_plan(), returned(wells().results, needs_you=(near,)))
    unused = [result("TANK", 9.0, used=False, why_not="targeted")]
    with pytest.raises(LabError, match="no result belongs to the mean"):
        estimate(list_plan(), returned(unused))


def test_values_that_are_not_used_change_nothing() -> None:
    """A targeted 910 beside the wells."""
    tank = result("TANK", 910.0, location_class="targeted", used=False, why_not="targeted")
    with_tank = returned([*wells().results, tank])
    assert estimate(list_plan(), with_tank).mean == estimate(list_plan(), wells()).mean


def test_signs_of_a_bad_fit_are_said() -> None:
    """A low end below 0, and results that do not differ at all."""
    plan = strata_plan({"site": 1.0}, {"site": 8.0}, {"site": 3})
    skewed = returned([result(f"P{n}", v) for n, v in enumerate((1.0, 1.0, 40.0))])
    assert any("low end is below 0" in line for line in estimate(plan, skewed).sentences)
    same = returned([result(f"P{n}", 4.0) for n in range(3)])
    assert any("no width" in line for line in estimate(plan, same).sentences)
