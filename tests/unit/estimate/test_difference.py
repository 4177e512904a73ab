"""Planned against achieved: parts that multiply to the whole, and a target kept or missed."""

import re
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from fieldplan.estimate import estimate
from fieldplan.estimate.difference import split_difference
from fieldplan.estimate.planned import planned_for
from fieldplan.lab.model import StratumSpread
from fieldplan.packet.sheets.amounts import trimmed
from fieldplan.packet.sheets.results_tables import stratum_table
from tests.unit.estimate.known import WELLS, list_plan, result, returned, strata_plan

COUNTS = st.integers(2, 12)


@given(COUNTS, COUNTS, COUNTS, COUNTS, st.floats(0.05, 0.95), st.integers(0, 10**6))
def test_the_parts_multiply_to_achieved_over_planned(
    planned_a: int, planned_b: int, came_a: int, came_b: int, weight: float, seed: int
) -> None:
    """Whatever came back, number × sharing × spread × rest is the ratio, by telescoping."""
    noise = np.random.default_rng(seed)
    plan = strata_plan(
        {"a": weight, "b": 1 - weight},
        {"a": 18.0, "b": 45.0},
        {"a": planned_a, "b": planned_b},
        standard_error=7.7,
    )
    results = [
        result(f"{name}{n}", value, stratum=name)
        for name, count in (("a", came_a), ("b", came_b))
        for n, value in enumerate(noise.lognormal(3, 1, count))
    ]
    answer = estimate(plan, returned(results))
    parts = split_difference(plan, answer.mean, planned=planned_for(plan, "lead"))
    assert parts is not None
    assert parts.ratio == pytest.approx(answer.mean.standard_error / 7.7, rel=1e-9)


def test_each_part_is_what_it_is_called() -> None:
    """Half the results: √2. Twice the spread: 2. Same shares: 1. The formula holds: 1."""
    plan = strata_plan(
        {"a": 0.5, "b": 0.5}, {"a": 1.0, "b": 1.0}, {"a": 4, "b": 4}, standard_error=8**-0.5
    )
    # two results at ±√2 have s = 2
    results = [
        result(f"{s}{n}", 50 + sign * 2**0.5, stratum=s)
        for s in "ab"
        for n, sign in enumerate((-1, 1))
    ]
    mean = estimate(plan, returned(results)).mean
    parts = split_difference(plan, mean, planned=planned_for(plan, "lead"))
    assert parts is not None
    assert parts.number == pytest.approx(2**0.5)
    assert parts.sharing == pytest.approx(1.0)
    assert parts.spread == pytest.approx(2.0)
    assert parts.rest == pytest.approx(1.0)


def test_a_list_uses_its_finite_population_in_every_part() -> None:
    """Eight wells for seven: √((1 − 8/14)/8) against √((1 − 7/14)/7) is 0.866 times."""
    plan = list_plan()
    returns = returned([result(f"MW-{n}", value) for n, value in enumerate(WELLS)])
    answer = estimate(plan, returns)
    parts = split_difference(plan, answer.mean, planned=planned_for(plan, "lead"))
    assert parts is not None
    assert parts.number == pytest.approx(((6 / 14 / 8) / (7 / 14 / 7)) ** 0.5)
    assert parts.spread == pytest.approx(2.340597 / 3.1, rel=1e-6)
    text = " ".join(answer.why_different)
    assert "The target, standard error of the mean ≤ 0.9 mg/kg, was kept: it came to 0.542" in text
    assert "The standard deviation was 2.34 instead of 3.10" in text


@pytest.mark.parametrize(
    ("interval", "asked", "says"),
    [
        ("two-sided", 1.29, "was kept: it came to 1.28 mg/kg"),
        ("two-sided", 1.28, "was missed: it came to 1.281 mg/kg"),
        ("two-sided", 0.60, "was missed: it came to 1.28 mg/kg"),
        ("upper-limit", 1.03, "was kept: it came to 1.026 mg/kg"),
        ("lower-limit", 1.02, "was missed: it came to 1.03 mg/kg"),
    ],
)
def test_a_half_width_is_judged_by_the_half_width_that_came(
    interval: str, asked: float, says: str
) -> None:
    """The SE of 0.5418 is below every target here; t(0.975, 7) = 2.3646 makes it 1.2812.

    One side: t(0.95, 7) = 1.8946 makes it 1.0264 (scipy.stats.t below). A plan keeps the standard
    error that a half-width amounts to beside it; that one is no verdict.
    """
    share = 0.975 if interval == "two-sided" else 0.95
    width = float(stats.t.ppf(share, 7)) * (5.478393 / 8 * 6 / 14) ** 0.5
    assert ("kept" in says) == (width <= asked)
    plan = list_plan()
    size = replace(plan.size, target="a half-width", target_half_width=asked)
    rules = plan.campaign.rules.model_copy(update={"interval": interval})
    campaign = plan.campaign.model_copy(update={"rules": rules})
    returns = returned([result(f"MW-{n}", value) for n, value in enumerate(WELLS)])
    answer = estimate(replace(plan, campaign=campaign, size=size), returns)
    assert f"The target, a half-width, {says}." in answer.why_different


def test_a_share_of_the_mean_is_given_of_the_mean_that_was_found() -> None:
    """1.2812 of a mean of 5.4875 is 23.3 %, whatever mean was expected."""
    plan = list_plan()
    objective = plan.campaign.objective[0].model_copy(
        update={"standard_error": None, "relative_half_width": 0.2}
    )
    campaign = plan.campaign.model_copy(update={"objective": (objective,)})
    size = replace(plan.size, target="20 % of an expected mean of 6", target_half_width=1.2)
    returns = returned([result(f"MW-{n}", value) for n, value in enumerate(WELLS)])
    answer = estimate(replace(plan, campaign=campaign, size=size), returns)
    said = "was missed: it came to 1.28 mg/kg, 23.3 % of the mean found."
    assert any(line.endswith(said) for line in answer.why_different)


def test_a_missed_target_is_said_to_be_missed() -> None:
    """The plan of the factories allows 9; these results scatter far more."""
    plan = strata_plan({"site": 1.0}, {"site": 8.0}, {"site": 3})
    returns = returned([result(f"P{n}", v) for n, v in enumerate((1.0, 60.0, 140.0))])
    assert "was missed: it came to 40.3 mg/kg" in " ".join(estimate(plan, returns).why_different)


def test_one_absurd_result_fills_no_line_with_digits() -> None:
    """A result of 1e30 must be seen at a glance, on the sheet and in every sentence."""
    plan = strata_plan({"site": 1.0}, {"site": 8.0}, {"site": 3}, standard_error=4.6)
    returns = returned([result(f"P{n}", v) for n, v in enumerate((1.0, 1e30, 140.0))])
    answer = estimate(plan, returns)
    said = " ".join([*answer.sentences, *answer.why_different])
    assert trimmed(1e30) == "1E+30"
    assert re.search(r"Achieved is [0-9.]+E\+28 times planned", said)  # 1e30 / 3 / 4.6 = 7.2E+28
    assert not re.search(r"[0-9,]{16}", said)


def test_the_spread_found_is_set_against_a_pilot_with_non_detects_at_the_same_place() -> None:
    """Planning took s = 3.1 with non-detects at 0; at half the pilot had 2.3, and 2.34 came.

    A difference of convention is no difference between pilot and campaign.
    """
    plan = list_plan()
    returns = returned([result(f"MW-{n}", value) for n, value in enumerate(WELLS)])
    entry = StratumSpread("lead", "site", 3.1, 5.0, 8, "pilot.csv", sigma_at_half=2.3)
    plan = replace(plan, spread=replace(plan.spread, strata=(entry,)))
    assert "The standard deviation was" not in " ".join(estimate(plan, returns).why_different)
    entry = replace(entry, sigma_at_half=1.7)
    plan = replace(plan, spread=replace(plan.spread, strata=(entry,)))
    answer = estimate(plan, returns)
    assert (
        "The standard deviation was 2.34 instead of 1.70 (mg/kg); both with non-detects at half, "
        "where planning used the largest of the pilot's three, 3.10."
    ) in answer.why_different
    assert "where the pilot had 1.70 in site" in (stratum_table(plan, answer).caption or "")


def test_a_census_has_nothing_to_split() -> None:
    """Zero over zero is no ratio."""
    plan = list_plan(layout="census", units=8)
    returns = returned([result(f"MW-{n}", value) for n, value in enumerate(WELLS)])
    answer = estimate(plan, returns)
    assert split_difference(plan, answer.mean, planned=planned_for(plan, "lead")) is None
    assert answer.why_different
