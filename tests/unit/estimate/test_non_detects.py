"""A mean by the method that the rules fix for non-detects, and what stands beside it."""

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.campaign.model import Analyte, DesignTable, Rules
from fieldplan.campaign.non_detect_checks import MODELLED
from fieldplan.estimate import estimate
from fieldplan.estimate.export import estimate_json
from fieldplan.estimate.model import Estimate
from fieldplan.estimate.several import brief_sentences
from fieldplan.estimate.text import results_paragraph
from fieldplan.packet.charts import interval_figure
from fieldplan.plan.model import Plan
from fieldplan.returns.model import LocationResult, Returns
from fieldplan.stats.censored import bounds_of_mean, censored_mean
from tests.unit.estimate.known import list_plan, non_detect, result, returned, strata_plan

DETECTS = tuple(round(14 * 1.06**k, 1) for k in range(1, 25))
LIMITS = (14.0,) * 12
FORBIDDEN = ("follow", "safe", "clean", "compliant", "approved")


def plan_with(rules: Rules, plan: Plan | None = None, **tables: object) -> Plan:
    """Put rules, and other tables, into a plan of one stratum with 36 places."""
    plan = plan or strata_plan({"site": 1.0}, {"site": 3.0}, {"site": 36})
    return replace(plan, campaign=plan.campaign.model_copy(update={"rules": rules, **tables}))


def results_of(
    detects: Sequence[float] = DETECTS, limits: Sequence[float] = LIMITS, *, stratum: str = "site"
) -> list[LocationResult]:
    """Make results of detects and non-detects, at places of the plan."""
    found = [result(f"{stratum}-{k}", x, stratum=stratum) for k, x in enumerate(detects, 1)]
    start = len(found) + 1
    found += [non_detect(f"{stratum}-{k}", x, stratum=stratum) for k, x in enumerate(limits, start)]
    return found


def answered(method: str, returns: Returns | None = None, **rules: object) -> Estimate:
    """Estimate by a recorded method."""
    plan = plan_with(Rules(non_detects=method, **rules))  # type: ignore[arg-type]
    return estimate(plan, returns or returned(results_of()))


@pytest.mark.parametrize("method", MODELLED)
def test_the_answer_is_that_of_the_method(method):
    """The plan adds design and words; mean, error and ends are those of stats.censored."""
    expected, answer = censored_mean(DETECTS, LIMITS, method), answered(method)
    assert answer.mean.mean == expected.mean
    assert answer.mean.standard_error == expected.standard_error
    assert (answer.interval.low, answer.interval.high) == (expected.low, expected.high)
    assert answer.mean.strata[0].mean == expected.mean
    upper = censored_mean(DETECTS, LIMITS, method, kind="upper-limit")
    assert (answer.other_interval.low, answer.other_interval.high) == (None, upper.high)


@pytest.mark.parametrize("method", [*MODELLED, "substitute-half", "by-share"])
def test_the_bounds_stay_beside_every_answer(method):
    """Means at 0 and at the limit are in the sentences, the figure, the JSON and the report."""
    answer = answered(method)
    low, high = bounds_of_mean(DETECTS, LIMITS)
    assert answer.bracket is not None
    assert (answer.bracket.mean_low, answer.bracket.mean_high) == pytest.approx((low, high))
    (said,) = [line for line in answer.sentences if line.startswith("Whatever the method")]
    assert f"at 0 the mean is {low:.1f} mg/kg" in said
    assert f"at the limit {high:.1f} mg/kg" in said
    words = interval_figure(answer).alternative
    assert "non-detects at 0:" in words
    assert "non-detects at half" not in words
    exported = estimate_json(answer)
    assert exported["bracket"]["mean_low"] == pytest.approx(low)
    assert exported["non_detects_as_bounds"] is False
    assert answer.non_detect_sentence in exported["non_detects"]
    assert f"With them at 0 the mean is {low:.1f}" in results_paragraph(plan_with(Rules()), answer)


@pytest.mark.parametrize("method", [*MODELLED, "substitute-half", "by-share", "bounds"])
def test_no_sentence_says_what_results_cannot_show(method):
    """No shape is claimed of the data, and no verdict is given."""
    answer = answered(method)
    text = " ".join([*answer.sentences, answer.coverage_sentence, answer.non_detect_sentence])
    words = text.lower().replace("what follows", "")
    assert not [word for word in FORBIDDEN if word in words]


def test_bounds_are_what_they_were():
    """The rule that holds unless another is written has half in the middle."""
    answer = answered("bounds")
    assert answer.as_bounds
    assert answer.non_detect_sentence == ""
    assert answer.mean.mean == pytest.approx(np.mean([*DETECTS, *(x / 2 for x in LIMITS)]))
    assert any("put at half the limit above" in line for line in answer.sentences)


def test_with_one_limit_kaplan_and_meier_say_at_most():
    """An upper bound is not printed as an estimate."""
    answer = answered("kaplan-meier")
    assert " is at most " in answer.sentences[0]
    assert "no estimate" in answer.non_detect_sentence
    assert "mean, at most: " in interval_figure(answer).alternative
    assert estimate_json(answer)["mean_is_upper_bound"] is True
    assert "The mean is at most " in results_paragraph(plan_with(Rules()), answer)
    open_below = returned(results_of((3.0, *DETECTS), LIMITS[1:]))
    assert " is at most " not in answered("kaplan-meier", open_below).sentences[0]


def test_half_by_declaration_has_its_own_interval_against_the_level():
    """Declared, half is the answer; under bounds the widest of three is set against the level."""
    level = 24.0
    analyte = Analyte(id="lead", name="Lead", unit="mg/kg", action_level=level)
    said = {}
    for method in ("bounds", "substitute-half"):
        plan = plan_with(Rules(non_detects=method), analyte=(analyte,))
        answer = estimate(plan, returned(results_of()))
        said[method] = answer.level_sentence
        assert answer.bracket is not None
    assert "widest over non-detects" in said["bounds"]
    assert "widest" not in said["substitute-half"]


def test_where_the_bounds_lie_on_another_side_of_the_level_it_is_said():
    """A method must not hide that the non-detects decide."""
    answer = answered("order-statistics")
    assert answer.bracket is not None
    ends = [answer.interval.low, answer.bracket.interval_low.low]
    level = (answer.interval.high + answer.bracket.interval_high.high) / 2  # type: ignore[operator]
    assert ends[0] is not None
    assert answer.interval.high < level < answer.bracket.interval_high.high  # type: ignore[operator]
    analyte = Analyte(id="lead", name="Lead", unit="mg/kg", action_level=level)
    plan = plan_with(Rules(non_detects="order-statistics"), analyte=(analyte,))
    said = estimate(plan, returned(results_of())).level_sentence
    assert "lies below the action level" in said
    assert "; with non-detects at their limit it spans it" in said


@pytest.mark.parametrize(
    ("missing", "shape", "method", "words"),
    [
        (12, None, "order statistics", "12 of 36 results are non-detects (33%) and no shape was"),
        (18, None, "", "18 of 36 results are non-detects (50%) and no shape was"),
        (18, "gamma", "a gamma shape", "and a gamma shape was declared before results"),
    ],
)
def test_the_choice_by_share_prints_its_reason(missing, shape, method, words):
    """The reason has share, number and shape; without evidence the bounds are left."""
    detects = [round(14 * 1.06**k, 1) for k in range(1, 37 - missing)]
    returns = returned(results_of(detects, (14.0,) * missing))
    answer = answered("by-share", returns, declared_shape=shape)
    assert words in answer.non_detect_sentence
    assert answer.as_bounds is (method == "")
    assert method in answer.non_detect_sentence
    if not method:
        assert answer.non_detect_sentence.startswith("Non-detects stand as bounds: ")


@pytest.mark.parametrize("method", [*MODELLED, "by-share", "substitute-half"])
@pytest.mark.parametrize(
    ("detects", "missing"), [((15.0, 16.0), 1), ((15.0, 16.0, 19.0), 13), ((15.0, 15.0, 15.0), 2)]
)
def test_a_mean_is_refused_where_only_bounds_are_left(method, detects, missing):
    """Fewer than 3 different detects, or more than 80 % below; the remedy shows the bounds."""
    returns = returned(results_of(detects, (14.0,) * missing))
    with pytest.raises(DesignError, match="--non-detects bounds"):
        answered(method, returns)
    assert answered("bounds", returns).bracket is not None


@pytest.mark.parametrize("method", MODELLED)
def test_without_non_detects_every_rule_gives_the_same(method):
    """There is nothing to model: mean, interval and words are those of bounds."""
    whole = returned(results_of(DETECTS, ()))
    one, other = answered(method, whole), answered("bounds", whole)
    assert (one.mean, one.interval, one.bracket) == (other.mean, other.interval, None)
    assert one.sentences == other.sentences


def test_a_value_that_averages_both_stands_among_the_detects():
    """Its bounds are close; it is named."""
    mixed = result("site-36", 12.0, low=8.5, high=15.5, detected=False)
    returns = returned([*results_of(DETECTS, LIMITS[1:]), mixed])
    answer = answered("order-statistics", returns)
    assert answer.mean.mean == censored_mean((*DETECTS, 12.0), LIMITS[1:], "order-statistics").mean
    assert "1 value that averages a detect with a non-detect" in answer.non_detect_sentence


def test_a_change_after_results_keeps_both_answers():
    """As every rule: recorded and used, with both means."""
    plan = plan_with(Rules(non_detects="order-statistics"))
    answer = estimate(plan, returned(results_of()), overrides={"non_detects": "kaplan-meier"})
    (change,) = answer.changes
    assert (change.rule, change.recorded, change.used) == (
        "non_detects", "order-statistics", "kaplan-meier",
    )  # fmt: skip
    assert change.mean_recorded == censored_mean(DETECTS, LIMITS, "order-statistics").mean
    assert answer.sentences[1].startswith("CHANGED AFTER RESULTS: non_detects was order-statistics")


def test_a_value_that_is_no_method_is_refused_with_those_that_are():
    """One clear line."""
    with pytest.raises(DesignError, match=r"non_detects is bounds, substitute-half, kaplan-meier"):
        estimate(plan_with(Rules()), returned(results_of()), overrides={"non_detects": "guess"})


def test_planned_and_achieved_are_compared_like_with_like():
    """Planning has non-detects at half; the sheet says that the answer does not."""
    answer = answered("order-statistics")
    assert answer.achieved_standard_error == answered("bounds").achieved_standard_error
    assert "with non-detects at half their limit, as planning has them" in answer.why_different[-1]
    assert "as planning has them" not in " ".join(answered("bounds").why_different)


# --- designs --------------------------------------------------------------------------------------


@pytest.mark.parametrize("method", ["order-statistics", "by-share"])
@pytest.mark.parametrize(
    ("design", "why"),
    [
        (DesignTable(layout="compact-strata"), "layout compact-strata does not draw"),
        (DesignTable(layout="simple-random", increments=10), "not of single random places"),
        (DesignTable(layout="simple-random", ranking_set_size=3), "not of single random places"),
    ],
)
def test_a_design_without_evidence_is_refused(method, design, why):
    """Also where the method comes as a change after results, which no check of the file sees."""
    plan = plan_with(Rules(), design=(design,))
    if design.layout == "simple-random":
        with pytest.raises(DesignError, match=why):
            estimate(plan, returned(results_of()), overrides={"non_detects": method})
        return
    from fieldplan.estimate.modelled import modelled

    with pytest.raises(DesignError, match=why):
        modelled(plan, returned(results_of()), Rules(non_detects=method))


def test_a_short_list_is_refused_and_a_long_one_is_not():
    """The simulations are of large populations; eight of fourteen wells are more than a tenth."""
    wells = [*(result(f"MW-{k}", 5.0 + k) for k in range(1, 6)), non_detect("MW-6", 5.0)]
    rules = Rules(non_detects="kaplan-meier")
    with pytest.raises(DesignError, match="6 of 14 units of site were measured"):
        estimate(plan_with(rules, list_plan()), returned(wells))
    long = plan_with(rules, list_plan(units=60, planned=8))
    assert estimate(long, returned(wells)).mean.n == 6


def test_strata_are_estimated_one_by_one_and_weighed():
    """Worked from the parts: Σ W·mean, √Σ W²·SE², and ends by the recovered distances."""
    weights, counts = {"a": 0.7, "b": 0.3}, {"a": 12, "b": 12}
    plan = strata_plan(weights, {"a": 3, "b": 3}, counts)
    low = [round(14 * 1.06**k, 1) for k in range(1, 9)]
    high = [3 * x for x in low]
    results = [
        *results_of(low, (14.0,) * 4, stratum="a"), *results_of(high, (42.0,) * 4, stratum="b"),
    ]  # fmt: skip
    answer = estimate(plan_with(Rules(non_detects="order-statistics"), plan), returned(results))
    a = censored_mean(low, (14.0,) * 4, "order-statistics")
    b = censored_mean(high, (42.0,) * 4, "order-statistics")
    assert answer.mean.mean == pytest.approx(0.7 * a.mean + 0.3 * b.mean)
    error = math.hypot(0.7 * a.standard_error, 0.3 * b.standard_error)
    assert answer.mean.standard_error == pytest.approx(error)
    lows = []
    for centre, low_end in (("mean_logs", "low_logs"), ("mean_values", "low_values")):
        means = [part.numbers.get(centre, part.mean) for part in (a, b)]
        off = [m - part.numbers[low_end] for m, part in zip(means, (a, b), strict=True)]
        lows.append(0.7 * means[0] + 0.3 * means[1] - math.hypot(0.7 * off[0], 0.3 * off[1]))
    assert answer.interval.low == pytest.approx(min(lows))
    above = math.hypot(0.7 * (a.high - a.mean), 0.3 * (b.high - b.mean))  # type: ignore[operator]
    assert answer.interval.high == pytest.approx(answer.mean.mean + above)
    assert [entry.mean for entry in answer.mean.strata] == [a.mean, b.mean]
    assert [s.symbol for s in answer.steps][-4:] == ["mean", "SE", "low", "high"]


def test_a_stratum_with_too_few_detects_is_named():
    """A mean of the others would leave out a part of the population."""
    plan = strata_plan({"a": 0.7, "b": 0.3}, {"a": 3, "b": 3}, {"a": 12, "b": 4})
    results = [*results_of(DETECTS[:8], (14.0,) * 4, stratum="a"),
               *results_of((15.0, 16.0), (14.0,) * 2, stratum="b")]  # fmt: skip
    with pytest.raises(DesignError, match="stratum b: 2 different detects among 4 results"):
        estimate(plan_with(Rules(non_detects="gamma-likelihood"), plan), returned(results))


# --- working and words ----------------------------------------------------------------------------


@pytest.mark.parametrize("method", MODELLED)
def test_the_working_ends_at_the_numbers_of_the_answer(method):
    """Every step has inputs and a source; mean, SE and ends are the reported ones."""
    answer = answered(method)
    steps = {step.symbol: step for step in answer.steps}
    assert steps["mean"].unrounded == answer.mean.mean
    assert steps["SE"].unrounded == answer.mean.standard_error
    assert steps["low"].unrounded == answer.interval.low
    assert steps["high"].unrounded == answer.interval.high
    assert all(step.inputs and step.source for step in answer.steps)


def test_the_working_of_order_statistics_can_be_followed():
    """The end is mean + k·SE and the mean is that of the sums, by the printed inputs alone."""
    steps = {step.symbol: step for step in answered("order-statistics").steps}
    given = {q.symbol: float(q.value) for q in steps["mean"].inputs}
    mean = (given["Σ detects"] + given["Σ filled"]) / given["n"]
    assert steps["mean"].unrounded == pytest.approx(mean)
    given = {q.symbol: float(q.value) for q in steps["high"].inputs}
    assert steps["high"].unrounded == pytest.approx(given["mean"] + given["k"] * given["SE"])
    given = {q.symbol: float(q.value) for q in steps["low"].inputs}
    ends = [given["mean"] + given["k"] * given["SE"],
            given["mean by values"] + given["k by values"] * given["SE by values"]]  # fmt: skip
    assert steps["low"].unrounded == pytest.approx(min(ends))


@pytest.mark.parametrize(
    ("detects", "missing", "words"),
    [
        (DETECTS, 12, ""),
        (DETECTS[:10], 20, "NOT KEPT: that is for up to 40 % non-detects"),
        (DETECTS[:10], 2, "there are 12 results"),
    ],
)
def test_results_outside_the_evidence_are_told(detects, missing, words):
    """A method fixed before results is used all the same, and the sheet says so."""
    said = answered(
        "order-statistics", returned(results_of(detects, (14.0,) * missing))
    ).coverage_sentence
    assert (words in said) if words else ("NOT KEPT" not in said)


def test_an_analyte_beside_says_its_non_detects_in_one_sentence():
    """The brief sentence does not say half where a method stands."""
    plan = plan_with(Rules(non_detects="order-statistics"))
    (line,) = brief_sentences(plan, estimate(plan, returned(results_of())))
    assert "with 12 non-detects, of which its own sheet tells" in line
    assert "widest" not in line


def test_bounds_of_very_few_detects_claim_no_mean():
    """Bounds are shown by that rule whatever was detected; that they are no mean is said."""
    few = answered("bounds", returned(results_of((15.0, 16.0), (14.0,) * 10)))
    assert "2 of 12 values. No mean can be claimed" in few.non_detect_sentence
    assert few.non_detect_sentence in few.sentences
    assert answered("bounds").non_detect_sentence == ""


@pytest.mark.parametrize(
    ("rules", "words"),
    [
        ({"interval": "upper-limit"}, "A 95 % upper limit held it in 89 to 96 %"),
        ({"interval": "lower-limit"}, "Lower limits were not simulated by themselves."),
        ({"confidence": 0.9}, "No other confidence was simulated."),
    ],
)
def test_limits_and_confidences_are_told_what_was_simulated(rules, words):
    """A limit meets the skewness alone; what was not simulated is not promised."""
    assert words in answered("order-statistics", **rules).coverage_sentence
    assert words not in answered("order-statistics").coverage_sentence


def test_by_share_looks_at_the_stratum_with_most_non_detects():
    """One stratum at 50 % leaves the bounds for all, and is named."""
    plan = strata_plan({"a": 0.7, "b": 0.3}, {"a": 3, "b": 3}, {"a": 20, "b": 20})
    results = [*results_of(DETECTS[:18], (14.0,) * 2, stratum="a"),
               *results_of(DETECTS[:10], (14.0,) * 10, stratum="b")]  # fmt: skip
    answer = estimate(plan_with(Rules(non_detects="by-share"), plan), returned(results))
    assert answer.as_bounds
    assert answer.non_detect_sentence.startswith("Non-detects stand as bounds: in b 10 of 20")
    fewer = [*results_of(DETECTS[:18], (14.0,) * 2, stratum="a"),
             *results_of(DETECTS[:16], (14.0,) * 4, stratum="b")]  # fmt: skip
    other = estimate(plan_with(Rules(non_detects="by-share"), plan), returned(fewer))
    assert "by regression on order statistics" in other.non_detect_sentence
