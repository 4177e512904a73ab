"""Every analyte gets its own mean, level, promise and rows; none passes in silence."""

import csv
import io
import json
import math
from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from fieldplan.base.errors import DesignError, LabError
from fieldplan.estimate import estimate, estimate_all
from fieldplan.estimate.difference import split_difference
from fieldplan.estimate.export import answers_csv, answers_json
from fieldplan.estimate.model import Answers
from fieldplan.estimate.planned import planned_for
from fieldplan.returns.model import LocationResult, Returns
from fieldplan.returns.several import Received
from tests.factories import make_plan, make_returns
from tests.several_analytes import ZINC_SIGMAS, plan_with_zinc
from tests.unit.estimate.known import WELLS, list_plan, result, returned
from tests.unit.estimate.test_answer import wells

ZINC = {"meadow": (88.0, 121.0, 104.0, 76.0), "yard": (142.0, 238.0, 190.0, 266.0)}
WEIGHTS = {"meadow": 16800 / 23600, "yard": 6800 / 23600}


def zinc_results() -> list[LocationResult]:
    """Four results a stratum at the first locations of Quarry Field."""
    return [
        result(f"QF-{letter}-{n:02d}", value, stratum=name)
        for letter, (name, values) in zip("AB", ZINC.items(), strict=True)
        for n, value in enumerate(values, start=1)
    ]


def zinc() -> Returns:
    """Zinc as reconciled."""
    return returned(zinc_results(), analyte="zinc")


def by_hand() -> tuple[float, float, float]:
    """Mean, standard error and Satterthwaite's freedom with numpy alone (Cochran 1977, ch. 5)."""
    mean = sum(WEIGHTS[name] * np.mean(values) for name, values in ZINC.items())
    terms = [WEIGHTS[name] ** 2 * np.var(values, ddof=1) / 4 for name, values in ZINC.items()]
    known = sum(terms) ** 2 / sum(term**2 / 3 for term in terms)
    return float(mean), math.sqrt(sum(terms)), float(known)


def test_another_analyte_gets_the_textbook_mean_and_interval() -> None:
    """Strata by numpy, t by scipy; its own unit, not lead's."""
    answer = estimate(plan_with_zinc(), zinc())
    mean, error, known = by_hand()
    assert answer.mean.mean == pytest.approx(mean, rel=1e-12)
    assert answer.achieved_standard_error == pytest.approx(error, rel=1e-12)
    reach = float(stats.t.ppf(0.975, known)) * error
    assert answer.interval.low == pytest.approx(mean - reach, rel=1e-6)
    assert answer.interval.high == pytest.approx(mean + reach, rel=1e-6)
    assert answer.unit == "µg/g"
    assert answer.sentences[0].startswith("The mean of Zinc over Quarry Field is ")
    assert not [line for line in answer.sentences if "mg/kg" in line]
    assert not [step for step in answer.steps if "mg/kg" in step.unit]


def test_the_worked_wells_come_out_the_same_under_either_analyte() -> None:
    """Eight of fourteen wells: 5.49, 0.54, 4.21 to 6.77, whoever decided n."""
    plan = list_plan()
    both = replace(plan, campaign=plan_with_zinc().campaign.model_copy(
        update={"design": plan.campaign.design}))  # fmt: skip
    values = [result(f"MW-{n}", value) for n, value in enumerate(WELLS, start=1)]
    answer = estimate(both, returned(values, analyte="zinc"))
    assert answer.interval == estimate(plan, wells()).interval
    assert (round(answer.mean.mean, 2), round(answer.mean.standard_error, 2)) == (5.49, 0.54)


def test_the_level_is_the_analytes_own() -> None:
    """Lead's is 150, zinc's 300; the interval of zinc lies between them."""
    answer = estimate(plan_with_zinc(), zinc())
    assert answer.interval.high is not None
    assert 150 < answer.interval.high < 300
    assert "lies below the action level of 300 µg/g" in answer.level_sentence


def test_its_promise_is_set_against_what_came() -> None:
    """Planned 13.61 from sigmas of 30 and 40; the parts multiply to the ratio."""
    plan = plan_with_zinc()
    answer = estimate(plan, zinc())
    assert answer.planned_standard_error == 13.61
    text = " ".join(answer.why_different)
    assert (
        "Planned: a standard error of 13.6 µg/g from 7 results, a number chosen for Lead." in text
    )
    assert "The target, standard error of the mean ≤ 15 µg/g, was kept" in text
    planned = planned_for(plan, "zinc")
    assert (planned.sigmas, planned.decides) == (ZINC_SIGMAS, False)
    parts = split_difference(plan, answer.mean, planned=planned)
    assert parts is not None
    assert parts.ratio == pytest.approx(by_hand()[1] / 13.61, rel=1e-9)
    assert f"instead of {ZINC_SIGMAS['yard']:.1f} in yard" in text


def test_without_a_sigma_no_precision_was_planned_and_that_is_said() -> None:
    """An old record, or an analyte without [[sigma]]: no ratio is made up."""
    for plan in (plan_with_zinc(known=False), replace(plan_with_zinc(), size=make_plan().size)):
        answer = estimate(plan, zinc())
        assert answer.planned_standard_error is None
        assert "No precision was planned for it" in answer.why_different[0]
        assert "times planned" not in " ".join(answer.why_different)
        assert answers_json(Answers(answer))["planned_standard_error"] is None


def test_each_other_analyte_gets_one_sentence_with_its_level() -> None:
    """The reader sees whether a sheet has to be opened; 0.7119 · 97.25 + 0.2881 · 209 = 129.4."""
    answers = estimate_all(plan_with_zinc(), Received(make_returns(), (zinc(),)))
    assert answers.main.analyte == "lead"
    (sentence,) = answers.sentences
    assert sentence.startswith("The mean of Zinc over Quarry Field is 129 µg/g, 95 % interval ")
    assert sentence.endswith("; the interval lies below the action level of 300 µg/g.")


def test_non_detects_of_another_analyte_are_counted_in_its_sentence() -> None:
    """At half the limit is a convention, so it is said; the widest interval meets the level."""
    results = zinc_results()
    results[0] = replace(results[0], low=0.0, half=5.0, high=10.0, detected=False)
    received = Received(make_returns(), (returned(results, analyte="zinc"),))
    (sentence,) = estimate_all(plan_with_zinc(), received).sentences
    assert "; with 1 non-detect at half the limit; the interval, widest over the non-" in sentence


def test_rules_changed_after_results_are_said_for_every_analyte() -> None:
    """Nobody may read a changed number as the recorded one."""
    answers = estimate_all(
        plan_with_zinc(), Received(make_returns(), (zinc(),)), overrides={"confidence": 0.9}
    )
    assert "90 % interval" in answers.sentences[0]
    assert answers.sentences[1].startswith("CHANGED AFTER RESULTS, Zinc: confidence was 0.95")


def test_an_analyte_that_is_missing_or_gets_no_mean_is_said_and_stops_nothing() -> None:
    """A stratum with one result is refused by the recorded rule, for zinc alone."""
    plan = plan_with_zinc()
    (missing,) = estimate_all(plan, Received(make_returns(), (), ("zinc",))).sentences
    assert missing == "No mean of Zinc is given: results.csv has no result of it that counts."
    few = returned(zinc_results()[:5], analyte="zinc")
    answers = estimate_all(plan, Received(make_returns(), (few,)))
    assert answers.others == ()
    assert answers.sentences[0].startswith("No mean of Zinc is given: ")
    assert "yard" in answers.sentences[0]
    unused = [replace(r, used=False, why_not="targeted") for r in zinc_results()]
    answers = estimate_all(plan, Received(make_returns(), (returned(unused, analyte="zinc"),)))
    assert "no result belongs to the mean" in answers.sentences[0]


def test_the_main_analyte_without_a_mean_is_refused() -> None:
    """A sentence is enough for the others, not for what was asked."""
    few = returned(zinc_results()[:5], analyte="zinc")
    with pytest.raises(DesignError):
        estimate_all(plan_with_zinc(), Received(few))
    with pytest.raises(LabError, match="no result belongs to the mean"):
        estimate_all(plan_with_zinc(), Received(returned([], analyte="zinc")))


def test_table_and_json_hold_every_analyte() -> None:
    """One row a location and analyte, those of a refused analyte too."""
    plan = plan_with_zinc()
    answers = estimate_all(plan, Received(make_returns(), (zinc(),)))
    rows = list(csv.DictReader(io.StringIO(answers_csv(answers, plan))))
    keys = [(row["location_id"], row["analyte"]) for row in rows]
    assert len(set(keys)) == len(keys)
    assert {row["unit"] for row in rows if row["analyte"] == "zinc"} == {"µg/g"}
    assert sum(row["analyte"] == "zinc" for row in rows) == 8
    content = json.loads(json.dumps(answers_json(answers), allow_nan=False))
    assert content["analyte"] == "lead"
    assert [other["analyte"] for other in content["others"]] == ["zinc"]
    assert content["others"][0]["mean"] == pytest.approx(by_hand()[0])
    few = returned(zinc_results()[:5], analyte="zinc")
    refused = estimate_all(plan, Received(make_returns(), (few,)))
    table = csv.DictReader(io.StringIO(answers_csv(refused, plan)))
    assert sum(row["analyte"] == "zinc" for row in table) == 5
    assert answers_json(refused)["without_mean"][0]["analyte"] == "zinc"
