"""The interval for skewed results: its ends by hand, its words, its refusals, its change."""

import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.estimate import estimate
from fieldplan.estimate.means import means_by
from fieldplan.estimate.model import Estimate
from fieldplan.estimate.widened import recorded_reach
from fieldplan.plan.model import Plan
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.skew_interval import Widening, widening
from tests.unit.estimate.known import WELLS, list_plan, result, returned, strata_plan

SKEWED = (3.0, 5.0, 6.0, 7.0, 9.0, 12.0, 15.0, 21.0, 34.0, 60.0)
"""Ten invented results; sum 172, mean 17.2."""


def ruled(plan: Plan, **rules: Any) -> Plan:
    """Fix other rules."""
    fixed = {"mean_interval": "skew-widened", "promised_class": "cv-up-to-2", **rules}
    changed = plan.campaign.rules.model_copy(update=fixed)
    return replace(plan, campaign=plan.campaign.model_copy(update={"rules": changed}))


def area_plan(n: int, **rules: Any) -> Plan:
    """A plan of random places in one population."""
    plan = strata_plan({"site": 1.0}, {"site": 3.0}, {"site": n})
    design = plan.campaign.design[0].model_copy(update={"layout": "simple-random"})
    return ruled(
        replace(plan, campaign=plan.campaign.model_copy(update={"design": (design,)})), **rules
    )


def answer(values: tuple[float, ...] = SKEWED, **rules: Any) -> Estimate:
    """Estimate from these results."""
    found = returned([result(f"MW-{n}", value) for n, value in enumerate(values, start=1)])
    return estimate(area_plan(len(values), **rules), found)


def by_hand(values: tuple[float, ...], wide: Widening, *, t: float) -> tuple[float, float]:
    """Write out the formula with the standard library alone."""
    n, mean = len(values), math.fsum(values) / len(values)
    second = math.fsum((v - mean) ** 2 for v in values) / n
    third = math.fsum((v - mean) ** 3 for v in values) / n
    s = math.sqrt(second * n / (n - 1))
    g, c, root = third / second**1.5, s / mean, math.sqrt(n)

    def hall(quantile: float, gamma: float) -> float:
        inner = 1 - gamma * (quantile + gamma / 6)
        return 3 / gamma * (1 - math.copysign(abs(inner) ** (1 / 3), inner))

    raised = max(g * (1 + wide.skewness / root), wide.linear * c + wide.cubic * c**3)
    factor = 1 + wide.per_result / n + wide.per_root / root
    low = g if g >= 0 else g * (1 + 2 / root)
    return (
        mean + hall(-t, low / root) * s / root,
        mean + hall(t, raised / root) * factor * s / root,
    )


@pytest.mark.parametrize("name", ["cv-up-to-1", "cv-up-to-2"])
@pytest.mark.parametrize("kind", ["two-sided", "upper-limit", "lower-limit"])
def test_the_ends_are_those_of_the_formula_by_hand(name: str, kind: str) -> None:
    """Oracle: the formula once more, in plain arithmetic; the constants are the tool's own."""
    found = answer(promised_class=name, interval=kind).interval
    wide = widening(name, kind)  # type: ignore[arg-type]
    t = t_quantile(9, confidence=0.95, kind=kind)  # type: ignore[arg-type]
    low, high = by_hand(SKEWED, wide, t=t)
    assert found.low == (None if kind == "upper-limit" else pytest.approx(low, rel=1e-12))
    assert found.high == (None if kind == "lower-limit" else pytest.approx(high, rel=1e-12))


def test_the_high_end_lies_farther_out_than_students() -> None:
    """What few skewed results cannot show lies above."""
    wide, student = answer(), answer(mean_interval="student-t", promised_class=None)
    assert wide.mean == student.mean
    assert wide.interval.high is not None
    assert student.interval.high is not None
    assert wide.interval.high > student.interval.high


def test_a_large_list_keeps_its_factor() -> None:
    """√(1 − n/N) of the standard error stays in both ends."""
    values = returned([result(f"MW-{n}", value) for n, value in enumerate(SKEWED, start=1)])
    listed = estimate(ruled(list_plan(units=200, planned=10)), values)
    whole = answer()
    assert listed.interval.high is not None
    assert whole.interval.high is not None
    ratio = (listed.interval.high - 17.2) / (whole.interval.high - 17.2)
    assert ratio == pytest.approx(math.sqrt(1 - 10 / 200), rel=1e-12)


def test_the_steps_lead_to_the_ends() -> None:
    """Each step can be followed with its inputs: mean + k·SE is the end that is printed."""
    found = answer()
    steps = {step.symbol: step for step in found.steps}
    for end, factor, value in (
        ("low", "k1", found.interval.low),
        ("high", "k2", found.interval.high),
    ):
        inputs = {entry.symbol: entry.value for entry in steps[end].inputs}
        assert inputs[factor] == steps[factor].unrounded
        assert inputs["mean"] + inputs[factor] * inputs["SE"] == pytest.approx(value, rel=1e-12)
    assert steps["c"].unrounded == pytest.approx(np.std(SKEWED, ddof=1) / 17.2, rel=1e-12)
    assert "held" in steps


def test_the_sentences_name_class_and_coverage_at_this_n() -> None:
    """A promise is for a class; what it keeps is from the evidence table."""
    found = answer()
    assert "promised for cv-up-to-2" in found.interval_sentence
    assert found.interval_sentence in found.sentences
    assert "of campaigns in the worst of them" in found.coverage_sentence
    assert "no interval keeps" in found.coverage_sentence
    assert "NOT KEPT" not in found.coverage_sentence


def test_too_few_results_are_said_not_to_keep_the_promise() -> None:
    """Below 10 results the class up to CV 2 is not kept, by the evidence table."""
    found = answer(WELLS)
    assert "NOT KEPT: the promise for cv-up-to-2 needs 10 results, and there are 8." in (
        found.interval_sentence
    )
    assert "not kept" in found.coverage_sentence


def test_results_that_contradict_the_class_are_warned_of() -> None:
    """CV above the class by a quarter, or zeros where the class has none."""
    spread = (1.0, 1, 1, 2, 1, 1, 3, 1, 90, 1)
    assert "class ends at 1" in answer(spread, promised_class="cv-up-to-1").interval_sentence
    zeros = (0.0, *SKEWED[1:])
    said = answer(zeros, promised_class="cv-up-to-1")
    assert "1 of 10 results at 0, and the class has no zeros" in said.interval_sentence
    assert "lies outside that class" in said.coverage_sentence
    assert "lies outside" not in answer(zeros).interval_sentence
    many = (0.0,) * 6 + (4.0, 5.0, 6.0, 7.0)
    assert "6 of 10 may be 0" in answer(many).interval_sentence


def test_a_change_to_students_t_is_recorded_with_both_answers() -> None:
    """Changed rules never hide what the recorded ones say."""
    values = returned([result(f"MW-{n}", value) for n, value in enumerate(SKEWED, start=1)])
    plan = area_plan(10)
    before, after = (
        estimate(plan, values, overrides=o) for o in ({}, {"mean_interval": "student-t"})
    )
    (change,) = after.changes
    assert (change.rule, change.recorded, change.used) == (
        "mean_interval", "skew-widened", "student-t"
    )  # fmt: skip
    assert change.interval_recorded == before.interval
    assert "CHANGED AFTER RESULTS: mean_interval was skew-widened" in after.sentences[1]


def test_a_change_to_skew_widened_asks_for_its_class() -> None:
    """No class was fixed before, so one must be named, and is recorded as changed too."""
    values = returned([result(f"MW-{n}", value) for n, value in enumerate(SKEWED, start=1)])
    plan = area_plan(10, mean_interval="student-t", promised_class=None)
    with pytest.raises(DesignError, match="needs promised_class"):
        estimate(plan, values, overrides={"mean_interval": "skew-widened"})
    both = {"mean_interval": "skew-widened", "promised_class": "cv-up-to-1"}
    found = estimate(plan, values, overrides=both)
    assert {(c.rule, c.recorded) for c in found.changes} == {
        ("mean_interval", "student-t"), ("promised_class", "not set")
    }  # fmt: skip


def test_designs_without_evidence_are_refused() -> None:
    """Strata, short lists and results below 0 were not simulated."""
    values = returned([result(f"MW-{n}", value) for n, value in enumerate(WELLS, start=1)])
    with pytest.raises(DesignError, match="8 of 14 units is more than a tenth"):
        estimate(ruled(list_plan()), values)
    with pytest.raises(DesignError, match="stratified there is no evidence"):
        estimate(ruled(strata_plan({"site": 1.0}, {"site": 3.0}, {"site": 8})), values)
    with pytest.raises(DesignError, match=r"this one is 0\.999"):
        estimate(area_plan(8, confidence=0.999), values)
    with pytest.raises(DesignError, match="results of 0 and above"):
        answer((-1.0, *SKEWED))


def test_a_half_width_is_judged_by_the_recorded_interval() -> None:
    """Kept or missed is said of the interval that was fixed, not of Student's t."""
    values = returned([result(f"MW-{n}", value) for n, value in enumerate(SKEWED, start=1)])
    plan = area_plan(10, interval="upper-limit")
    means = means_by(plan, values, plan.campaign.rules)
    assert means.interval.high is not None
    assert recorded_reach(plan, means) == pytest.approx(means.interval.high - 17.2, rel=1e-12)
