"""What is said about the level, the population and the coverage, and what is never said."""

import csv
import io
import json
import math
import unicodedata
from dataclasses import replace

import numpy as np
import pytest

from fieldplan.estimate import estimate
from fieldplan.estimate.coverage import equivalent_sample
from fieldplan.estimate.export import RESULT_COLUMNS, answers_csv, estimate_json
from fieldplan.estimate.level import envelope, side_of
from fieldplan.estimate.means import means_by
from fieldplan.estimate.model import Answers, Interval
from fieldplan.estimate.population import share_not_reached
from fieldplan.estimate.text import results_paragraph
from fieldplan.frame.model import Stratum
from fieldplan.plan.model import Plan
from fieldplan.returns.model import LostLocation, Returns
from fieldplan.stats.shape import t_coverage
from fieldplan.stats.summary import sample_skewness
from tests.factories import make_estimate, make_list_frame, make_plan, make_returns
from tests.unit.estimate.known import WELLS, list_plan, non_detect, result, returned, strata_plan

VERDICTS = ("safe", "clean", "pass", "compliant", "approved", "fail")


def wells() -> Returns:
    """Eight wells returned."""
    return returned([result(f"MW-{n}", value) for n, value in enumerate(WELLS, start=1)])


def with_level(plan: Plan, level: float | None) -> Plan:
    """Give the analyte an action level."""
    analyte = plan.campaign.analyte[0].model_copy(update={"action_level": level})
    return replace(plan, campaign=plan.campaign.model_copy(update={"analyte": (analyte,)}))


@pytest.mark.parametrize(
    ("level", "words"), [(6.8, "lies below"), (6.0, "spans"), (4.0, "lies above")]
)
def test_the_interval_is_set_against_the_level_in_three_words(level: float, words: str) -> None:
    """4.21 to 6.77 lies below 6.8, spans 6.0 and lies above 4.0."""
    sentence = estimate(with_level(list_plan(), level), wells()).level_sentence
    assert f"The 95 % interval {words} the action level" in sentence
    assert "L. Fenn decides what follows" in sentence
    assert "invented local guideline" in sentence


def test_a_limit_says_only_what_one_side_can_say() -> None:
    """An upper limit of 6.51 does not lie below 6.0; that does not put the mean above."""
    plan = with_level(list_plan(), 6.0)
    answer = estimate(plan, wells(), overrides={"interval": "upper-limit"})
    assert "upper limit does not lie below the action level" in answer.level_sentence
    answer = estimate(with_level(plan, 6.6), wells(), overrides={"interval": "upper-limit"})
    assert "upper limit lies below the action level" in answer.level_sentence
    answer = estimate(with_level(plan, 9.0), wells(), overrides={"interval": "lower-limit"})
    assert "lower limit does not lie above the action level" in answer.level_sentence


def test_without_a_level_nothing_is_compared() -> None:
    """No level was given, so there is no sentence."""
    assert estimate(with_level(list_plan(), None), wells()).level_sentence == ""


def test_with_non_detects_the_widest_of_three_intervals_is_compared() -> None:
    """A level between the upper ends at 0 and at the limit: where the non-detects go decides."""
    values = [12.0, 20.0, 9.0, 31.0, 14.0, 17.0]
    results = [result(f"P{n}", value) for n, value in enumerate(values)]
    returns = returned([*results, non_detect("P6", 8.0), non_detect("P7", 8.0)])
    plan = strata_plan({"site": 1.0}, {"site": 8.0}, {"site": 8})
    means = means_by(plan, returns, plan.campaign.rules)
    outer = envelope(means.interval, means.bracket)
    bracket = means.bracket
    assert bracket is not None
    ends = [i.high for i in (bracket.interval_low, bracket.interval_half, bracket.interval_high)]
    assert outer.high == max(end for end in ends if end is not None)
    lows = [i.low for i in (bracket.interval_low, bracket.interval_half, bracket.interval_high)]
    assert outer.low == min(end for end in lows if end is not None)
    between = sum(sorted(end for end in ends if end is not None)[-2:]) / 2
    sentence = estimate(with_level(plan, between), returns).level_sentence
    assert "widest over non-detects at 0, half and the limit, spans" in sentence
    assert "where the non-detects are put decides this" in sentence


def test_touching_the_level_counts_as_spanning() -> None:
    """Exactly at the level is neither below nor above."""
    assert side_of(5.0, Interval("two-sided", 0.95, 1.0, 5.0)) == "spans"
    assert side_of(1.0, Interval("two-sided", 0.95, 1.0, 5.0)) == "spans"


def test_ground_that_could_not_be_reached_is_given_as_a_share() -> None:
    """One of four meadow places without access: 0.711864 / 4 = 17.8 % of the population."""
    plan = make_plan()
    lost = (LostLocation("QF-A-04", "meadow", "no-access", "QF-A-05"),)
    assert share_not_reached(plan, lost) == pytest.approx(16800 / 23600 / 4)
    broken = (LostLocation("QF-A-04", "meadow", "broken", ""),)
    assert share_not_reached(plan, broken) == 0.0
    sentence = estimate(plan, make_returns()).population_sentence
    assert "1 of 9 random locations gave no result: QF-A-04 (no-access)" in sentence
    assert "about 18 % of the population" in sentence


def test_losses_in_one_stratum_are_pointed_out() -> None:
    """Two of two in the yard: its missing corner may differ."""
    lost = [LostLocation(f"QF-B-0{n}", "yard", "obstructed", "") for n in (1, 2)]
    kept = [r for r in make_returns().results if r.location_id not in {"QF-B-01", "QF-B-02"}]
    returns = replace(make_returns(), results=tuple(kept), lost=tuple(lost))
    sentence = estimate(make_plan(), returns).population_sentence
    assert "All 2 lie in stratum yard" in sentence


def test_a_campaign_without_losses_says_so() -> None:
    """All eight came."""
    assert (
        "All 8 random locations gave a result" in estimate(list_plan(), wells()).population_sentence
    )


def test_one_stratum_leans_as_its_sample() -> None:
    """For a single stratum the equivalent sample is the sample itself."""
    plan = strata_plan({"site": 1.0}, {"site": 3.0}, {"site": 8})
    n, skewness = equivalent_sample(means_by(plan, wells(), plan.campaign.rules))
    assert n == 8
    assert skewness == pytest.approx(sample_skewness(WELLS), rel=1e-12)


def test_the_skewness_of_a_stratified_mean_agrees_with_simulation() -> None:
    """Resampling each stratum gives means whose skewness is that of the equivalent sample, √n up.

    200000 bootstrap means, seed 7; tolerance four standard errors of a skewness, 4·√(6/N).
    """
    noise = np.random.default_rng(7)
    values = {"a": noise.lognormal(2, 1, 9), "b": noise.lognormal(3, 0.8, 7)}
    weights = {"a": 0.6, "b": 0.4}
    plan = strata_plan(weights, {"a": 5, "b": 9}, {"a": 9, "b": 7})
    results = [
        result(f"{name}{n}", float(v), stratum=name)
        for name, array in values.items()
        for n, v in enumerate(array)
    ]
    n, skewness = equivalent_sample(means_by(plan, returned(results), plan.campaign.rules))
    drawn = sum(
        weights[name] * noise.choice(array, (200_000, array.size)).mean(axis=1)
        for name, array in values.items()
    )
    off = np.asarray(drawn) - np.mean(drawn)
    simulated = np.mean(off**3) / np.mean(off**2) ** 1.5
    assert skewness / math.sqrt(n) == pytest.approx(simulated, abs=4 * math.sqrt(6 / 200_000))


def test_coverage_is_that_of_the_table_and_modest_about_small_samples() -> None:
    """The share printed is t_coverage at this n and skewness, beside what n can show."""
    plan = strata_plan({"site": 1.0}, {"site": 3.0}, {"site": 8})
    sentence = estimate(plan, wells()).coverage_sentence
    lean = sample_skewness(WELLS)
    share = 100 * t_coverage(8, lean, confidence=0.95, kind="two-sided")
    assert f"in about {share:.0f} % of campaigns" in sentence
    assert "8 results can show no skewness above 2.3" in sentence
    high = estimate(plan, wells(), overrides={"confidence": 0.995}).coverage_sentence
    assert "not tabled" in high


def test_no_verdict_is_printed() -> None:
    """The tool says where the interval lies; whether that is good is for the one who decides."""
    answer = estimate(make_plan(), make_returns())
    text = " ".join(
        [*answer.sentences, *answer.why_different, answer.coverage_sentence, answer.level_sentence,
         answer.population_sentence, results_paragraph(make_plan(), answer)]
    ).lower()  # fmt: skip
    words = set(text.replace(",", " ").replace(".", " ").replace(";", " ").split())
    assert words.isdisjoint(VERDICTS)


def test_the_working_ends_in_the_printed_numbers() -> None:
    """Each step's result is an input further down; the last two are the interval."""
    answer = estimate(make_plan(), make_returns())
    by_symbol = {step.symbol: step for step in answer.steps}
    assert by_symbol["mean"].unrounded == answer.mean.mean
    assert by_symbol["SE"].unrounded == answer.mean.standard_error
    assert by_symbol["low"].unrounded == answer.interval.low
    assert by_symbol["high"].unrounded == answer.interval.high
    inputs = {q.symbol: q.value for q in by_symbol["mean"].inputs}
    total = sum(inputs[f"W {s}"] * inputs[f"mean {s}"] for s in ("meadow", "yard"))
    assert total == pytest.approx(answer.mean.mean, rel=1e-12)
    parts = {q.symbol: q.value for q in by_symbol["df"].inputs}
    shares = [parts["part meadow"], parts["part yard"]]
    known = sum(shares) ** 2 / sum(p * p / 3 for p in shares)
    assert known == pytest.approx(answer.mean.degrees_of_freedom, rel=1e-9)
    assert sum(shares) ** 0.5 == pytest.approx(answer.mean.standard_error, rel=1e-9)
    census = estimate(list_plan(layout="census", units=8), wells())
    assert [step.symbol for step in census.steps] == ["mean", "s", "SE"]


@pytest.mark.parametrize("population", [None, 30])
def test_degrees_of_freedom_with_a_borrowed_spread_follow_from_what_is_printed(
    population: int | None,
) -> None:
    """A stranger recomputes df, SE and the borrowed s from the printed inputs alone.

    By hand, from the raw values: B of the stratum with one result is shared out to the others as
    (n - 1) / Σ (n - 1), since the pooled variance is Σ (n - 1) s² / Σ (n - 1).
    """
    values = {"a": (10.0, 12.0, 17.0, 30.0), "b": (40.0, 44.0, 61.0), "c": (90.0,)}
    weights = {"a": 0.5, "b": 0.3, "c": 0.2}
    plan = strata_plan(weights, dict.fromkeys(weights, 9.0), {"a": 4, "b": 3, "c": 2})
    strata = plan.frame.strata
    if population is not None:
        unit = make_list_frame().strata[0].units[0]
        strata = tuple(
            Stratum(s.name, population, s.weight, None, (unit,) * population) for s in strata
        )
    plan = replace(plan, frame=replace(plan.frame, strata=strata))
    results = [
        result(f"{name}{n}", v, stratum=name)
        for name, numbers in values.items()
        for n, v in enumerate(numbers)
    ]
    answer = estimate(plan, returned(results), overrides={"single_result": "borrow-spread"})
    steps = {step.symbol: step for step in answer.steps}
    printed = {q.symbol: q.value for q in steps["df"].inputs}
    assert printed.keys() == {"part a", "n a", "part b", "n b"}
    parts = [(printed[f"part {name}"], printed[f"n {name}"]) for name in "ab"]
    known = sum(p for p, _ in parts) ** 2 / sum(p * p / (n - 1) for p, n in parts)
    assert answer.mean.degrees_of_freedom == pytest.approx(known, rel=1e-12)
    assert sum(p for p, _ in parts) ** 0.5 == pytest.approx(answer.mean.standard_error, rel=1e-12)
    left = {name: 1 - len(v) / population if population else 1 for name, v in values.items()}
    lent = 0.2**2 * left["c"]
    for name, share in (("a", 3 / 5), ("b", 2 / 5)):
        n, spread = len(values[name]), float(np.var(values[name], ddof=1))
        own = weights[name] ** 2 * left[name] / n
        assert printed[f"part {name}"] == pytest.approx(spread * (own + lent * share), rel=1e-12)
    pooled = {q.symbol: q.value for q in steps["s c"].inputs}
    total = sum((pooled[f"n {k}"] - 1) * pooled[f"s {k}"] ** 2 for k in "ab")
    assert steps["s c"].unrounded == pytest.approx((total / 5) ** 0.5, rel=1e-12)
    assert "B·(n − 1)/Σ(n − 1)" in steps["df"].meaning
    assert "no published source" in steps["df"].source


def test_formulas_hold_no_marks_that_readers_of_a_pdf_double() -> None:
    """A letter with a combining bar comes out of a PDF as two; Unicode says which marks combine."""
    returns = replace(make_returns(), lost=())
    steps = estimate(make_plan(), returns).steps
    words = "".join(
        text
        for step in steps
        for text in (step.symbol, step.meaning, step.formula, *(q.symbol for q in step.inputs))
    )
    assert len(words) > 300
    assert not [mark for mark in words if unicodedata.combining(mark)]


def test_the_json_is_plain_and_whole() -> None:
    """A census has infinite degrees of freedom, which JSON cannot say; it becomes null."""
    content = estimate_json(estimate(list_plan(layout="census", units=8), wells()))
    again = json.loads(json.dumps(content, allow_nan=False))
    assert again["degrees_of_freedom"] is None
    assert again["n"] == 8
    whole = estimate_json(estimate(make_plan(), make_returns()))
    text = json.dumps(whole, allow_nan=False)
    assert json.loads(text)["interval"]["kind"] == "two-sided"
    assert json.loads(text)["returns"]["lost"][0]["replaced_by"] == "QF-A-05"


def test_the_table_has_a_row_for_every_place_with_news() -> None:
    """Ten results and one lost place; numbers stay numbers, texts cannot run."""
    returns = make_returns()
    evil = replace(returns.results[0], as_reported=("=2+2",), why_not="+SUM(A1)")
    returns = replace(returns, results=(evil, *returns.results[1:]))
    estimate_ = replace(make_estimate(), returns=returns)
    rows = list(csv.DictReader(io.StringIO(answers_csv(Answers(estimate_), make_plan()))))
    assert list(rows[0]) == list(RESULT_COLUMNS)
    assert len(rows) == 11
    assert rows[0]["as_reported"] == "'=2+2"
    assert rows[0]["why_not"] == "'+SUM(A1)"
    assert rows[0]["longitude"].startswith("-1.")
    lost = next(row for row in rows if row["location_id"] == "QF-A-04")
    assert lost["why_not"] == "lost: no-access; replaced by QF-A-05"


def test_the_paragraph_holds_what_a_report_must_say() -> None:
    """Plan, counts, mean, interval, strata, non-detects, method, population, changes."""
    text = results_paragraph(make_plan(), estimate(make_plan(), make_returns()))
    for part in ("QF-r01", "8 results", "62.5 mg/kg", "n = 4", "Non-detects stand at half",
                 "Satterthwaite", "98.3 %", "No recorded rule was changed"):  # fmt: skip
        assert part in text
    changed = estimate(make_plan(), make_returns(), overrides={"confidence": 0.9})
    assert "Changed after results: confidence from 0.95 to 0.9." in results_paragraph(
        make_plan(), changed
    )
