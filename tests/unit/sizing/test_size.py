"""From campaign, spread and frame to the question and its answer."""

from dataclasses import replace

import pytest

from fieldplan.base.errors import CampaignError, DesignError
from fieldplan.campaign.model import Cost, DesignTable, Loss, Objective, Rules
from fieldplan.lab.model import Spread, StratumSpread
from fieldplan.sizing import question_of, size
from tests.factories import make_campaign, make_frame, make_list_frame, make_spread


def objective(**target: object) -> tuple[Objective, ...]:
    """One objective for the mean of lead."""
    changed: dict[str, object] = {
        "design": "main",
        "analyte": "lead",
        "question": "mean",
        "assurance": "plain",
        "assurance_chosen_by": "L. Fenn",
        **target,
    }
    return (Objective(**changed),)  # type: ignore[arg-type]


def measured(results: int | None = 8) -> Spread:
    """Two strata with pilots of their own."""
    return Spread(
        "lead",
        "mg/kg",
        (
            StratumSpread("lead", "meadow", 18.0, 60.0, results, "pilot.csv", values=(1.0, 2.0)),
            StratumSpread("lead", "yard", 45.0, 150.0, results, "pilot.csv", values=(3.0, 4.0)),
        ),
    )


def test_soil_campaign_gets_its_locations() -> None:
    """By hand: (Σ W s)² = (0.7119·18 + 0.2881·45)² = 664.6; / 81 = 8.205, so 9, as 4 and 5."""
    result = size(make_campaign(), make_spread(), make_frame())
    assert [entry.stratum for entry in result.strata] == ["meadow", "yard"]
    assert result.unrounded == pytest.approx(8.205, abs=0.001)
    assert [entry.needed for entry in result.strata] == [4, 5]
    assert [entry.planned for entry in result.strata] == [5, 6]
    assert [entry.alternates for entry in result.strata] == [2, 2]
    assert [entry.count for entry in result.qc] == [2]
    assert result.cost == 400 + (11 + 1) * 75 + 2 * 45  # one targeted place besides
    assert result.assurance_chosen_by == "L. Fenn"
    assert result.target == "standard error of the mean ≤ 9 mg/kg"
    assert any("was ASSUMED, so no chance can be given" in line for line in result.conditions)


def test_first_sentence_is_the_answer() -> None:
    """It says how many, where, for what, and what is added for losses."""
    result = size(make_campaign(), make_spread(), make_frame())
    assert result.sentences[0] == (
        "Visit 11 locations: 5 in meadow and 6 in yard. 9 results are needed for a standard error "
        "of the mean ≤ 9 mg/kg; 2 more allow for losses."
    )


def test_list_has_its_correction() -> None:
    """Fourteen wells: 11.86 becomes 7."""
    spread = Spread("lead", "mg/kg", (StratumSpread("lead", "site", 3.1, 5.5, 8, "pilot.csv"),))
    campaign = make_campaign(
        design=(DesignTable(layout="simple-random", alternates=9),),
        objective=objective(standard_error=0.9),
        loss=Loss(),
    )
    result = size(campaign, spread, make_list_frame())
    assert (result.needed, result.strata[0].population) == (7, 14)
    assert result.strata[0].alternates == 7


def test_mean_of_a_relative_target_is_weighted_by_strata() -> None:
    """By hand: 16800/23600 · 60 + 6800/23600 · 150 = 85.93; 20 % of it is 17.19."""
    campaign = make_campaign(objective=objective(relative_half_width=0.2))
    result = size(campaign, measured(), make_frame())
    assert result.target_half_width == pytest.approx(0.2 * (16800 * 60 + 6800 * 150) / 23600)


def test_the_working_of_a_relative_target_prints_every_mean_behind_it() -> None:
    """A stranger gets the expected mean, and the half-width, from the printed inputs alone."""
    spread = measured()
    meadow = replace(spread.strata[0], detected=(True, False))
    campaign = make_campaign(objective=objective(relative_half_width=0.2))
    result = size(campaign, replace(spread, strata=(meadow, *spread.strata[1:])), make_frame())
    mean, reach = result.steps[:2]
    given = {entry.symbol: entry for entry in mean.inputs}
    expected = sum(
        given[f"W({name})"].value * given[f"mean({name})"].value for name in ("meadow", "yard")
    )
    assert mean.unrounded == pytest.approx(expected) == pytest.approx(reach.inputs[1].value)
    assert reach.unrounded == pytest.approx(0.2 * expected)
    assert given["mean(meadow)"].meaning == "pilot.csv, non-detects at half their limit"
    assert given["mean(yard)"].meaning == "pilot.csv"


def test_site_mean_stands_in_where_a_stratum_has_none() -> None:
    """The whole pilot's mean is better than none."""
    spread = measured()
    bare = tuple(replace(entry, mean=None) for entry in spread.strata)
    site = StratumSpread("lead", "site", 40.0, 90.0, 16, "pilot.csv")
    campaign = make_campaign(objective=objective(relative_half_width=0.2))
    result = size(campaign, replace(spread, strata=bare, site=site), make_frame())
    assert result.target_half_width == pytest.approx(18.0)


@pytest.mark.parametrize(
    ("target", "changes", "said"),
    [
        ({"relative_half_width": 0.2}, {}, "write expected_mean in every"),
        ({"budget": 4000.0}, {"cost": None}, r"budget = 4000 needs prices; add a \[cost\] table"),
        ({}, {}, "has none of them; it needs exactly one of standard_error"),
        ({"standard_error": 1.0, "half_width": 2.0}, {}, "has standard_error and half_width"),
        (
            {"standard_error": 9.0},
            {"loss": Loss(by_stratum={"medow": 0.2})},
            "'medow', which is no stratum of the frame .*did you mean 'meadow'",
        ),
    ],
)
def test_what_the_file_lacks_is_said(
    target: dict[str, object], changes: dict[str, object], said: str
) -> None:
    """Which key, its value, what to write."""
    spread = measured()
    bare = replace(spread, strata=tuple(replace(entry, mean=None) for entry in spread.strata))
    with pytest.raises(CampaignError, match=said):
        size(make_campaign(objective=objective(**target), **changes), bare, make_frame())


def test_mean_of_zero_has_no_share() -> None:
    """A share of nothing is nothing."""
    spread = measured()
    flat = replace(spread, strata=tuple(replace(entry, mean=0.0) for entry in spread.strata))
    with pytest.raises(CampaignError, match="expected mean of 0; use half_width instead"):
        size(make_campaign(objective=objective(relative_half_width=0.2)), flat, make_frame())


def test_stratum_without_sigma_is_refused() -> None:
    """Each stratum needs one."""
    spread = replace(measured(), strata=measured().strata[:1])
    with pytest.raises(DesignError, match="stratum yard has no sigma"):
        size(make_campaign(), spread, make_frame())


def test_strata_of_one_pooled_pilot_share_its_error() -> None:
    """The same values from one file behind two strata are one pilot."""
    spread = measured()
    pooled = tuple(
        replace(entry, sigma=30.0, values=(1.0, 2.0, 3.0), results=3) for entry in spread.strata
    )
    own = question_of(make_campaign(), spread, make_frame()).pilots
    common = question_of(make_campaign(), replace(spread, strata=pooled), make_frame()).pilots
    assert own == ((0,), (1,))
    assert common == ((0, 1),)


def test_stratum_losses_override_the_common_one() -> None:
    """10 % everywhere, 50 % in the yard."""
    campaign = make_campaign(loss=Loss(share=0.1, by_stratum={"yard": 0.5}))
    question = question_of(campaign, make_spread(), make_frame())
    assert [part.loss for part in question.parts] == [0.1, 0.5]


def test_rules_decide_the_interval() -> None:
    """Confidence and side come from what was fixed before results."""
    campaign = make_campaign(rules=Rules(interval="upper-limit", confidence=0.9))
    result = size(campaign, make_spread(), make_frame())
    assert (result.interval, result.confidence) == ("upper-limit", 0.9)
    assert "a 90 % upper limit" in " ".join(result.sentences)


def test_typed_locations_with_a_budget_are_compared_with_it() -> None:
    """12 locations and the targeted place cost 400 + 13·75 + 2·45 = 1465."""
    for budget, side in ((1500.0, "within"), (1200.0, "above")):
        campaign = make_campaign(
            design=(DesignTable(layout="stratified", locations=12),),
            objective=objective(budget=budget),
            cost=Cost(currency="EUR", mobilisation=400.0, per_location=30.0, per_analysis=45.0),
        )
        result = size(campaign, make_spread(), make_frame())
        assert result.planned == 12
        said = f"1465 EUR, control samples and 1 targeted place included. That is {side} the budget"
        assert said in " ".join(result.sentences)


def test_targeted_places_are_paid_like_locations_and_count_as_no_n() -> None:
    """By the prices alone: the tank costs a visit and an analysis, 30 + 45; n stays."""
    frame = make_frame()
    without = size(make_campaign(), make_spread(), replace(frame, targeted=()))
    result = size(make_campaign(), make_spread(), frame)
    assert result.cost == (without.cost or 0) + 75
    assert (result.needed, result.planned) == (without.needed, without.planned)
    at_n = {point.n: point.cost for point in result.curve}
    assert at_n[result.needed] == result.cost
    paid = next(step for step in result.steps if step.symbol == "cost")
    given = {entry.symbol: entry.value for entry in paid.inputs}
    assert paid.unrounded == given["mobilisation"] + given["controls"] * given["analysis"] + (
        given["locations"] + given["targeted"]
    ) * (given["visit"] + given["analysis"])


@pytest.mark.parametrize("targeted", [0, 1, 4])
def test_a_budget_leaves_room_for_targeted_places(targeted: int) -> None:
    """By the prices alone: all fit into the money, and one location more would not."""
    frame = make_frame()
    frame = replace(frame, targeted=frame.targeted * targeted)
    campaign = make_campaign(objective=objective(budget=2000.0), loss=Loss(), qc=())
    result = size(campaign, make_spread(), frame)
    spent = 400 + (result.planned + targeted) * 75
    assert result.cost == spent
    assert spent <= 2000 < spent + 75


def test_a_budget_spent_on_targeted_places_is_refused_with_its_reason() -> None:
    """Twenty places cost 1500 of 2000, the fare 400; four results more would not fit."""
    frame = make_frame()
    frame = replace(frame, targeted=frame.targeted * 20)
    campaign = make_campaign(objective=objective(budget=2000.0), loss=Loss(), qc=())
    with pytest.raises(DesignError, match=r"\(6 results, 20 targeted places\) costs 2350 EUR"):
        size(campaign, make_spread(), frame)
