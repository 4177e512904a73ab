"""What the plan sheet says of its number, whatever decided it."""

import math

import pytest
from scipy import stats

from fieldplan.campaign.model import Cost, DesignTable, Loss, Objective
from fieldplan.lab.model import Spread, StratumSpread
from fieldplan.packet.charts import precision_curve
from fieldplan.packet.sheets.answer import answer_words
from fieldplan.packet.sheets.methods import number_sentence
from fieldplan.packet.sheets.number_section import assurance_table, number_blocks, promise_rows
from fieldplan.plan.model import Plan
from fieldplan.sizing import size
from tests.factories import make_campaign, make_frame, make_list_frame, make_plan
from tests.unit.packet.sheet_text import text_of

WEIGHTS, SIGMAS, PILOT = (16800 / 23600, 6800 / 23600), (18.0, 45.0), 8


def planned(*, locations: int | None = None, **target: object) -> Plan:
    """Plan Quarry Field with a pilot of eight in each of its strata."""
    asked = {"assurance": None if "budget" in target else 0.8, "assurance_chosen_by": "L. Fenn"}
    campaign = make_campaign(
        design=(DesignTable(layout="stratified", locations=locations),),
        objective=(Objective(analyte="lead", question="mean", **{**asked, **target}),),
        cost=Cost(currency="EUR", mobilisation=400.0, per_location=30.0, per_analysis=45.0),
    )
    spread = Spread(
        "lead",
        "mg/kg",
        tuple(
            StratumSpread("lead", name, sigma, 80.0, PILOT, f"{name}.csv")
            for name, sigma in zip(("meadow", "yard"), SIGMAS, strict=True)
        ),
    )
    frame = make_frame()
    return make_plan(
        campaign=campaign, frame=frame, spread=spread, size=size(campaign, spread, frame)
    )


def wells(**changes: object) -> Plan:
    """Plan fourteen wells with a pilot of eight."""
    campaign = make_campaign(
        objective=(
            Objective(analyte="lead", question="mean", **{"half_width": 2.0, "assurance": 0.8}),
        ),
        loss=Loss(),
        **{"design": (DesignTable(layout="simple-random"),), **changes},
    )
    spread = Spread("lead", "mg/kg", (StratumSpread("lead", "site", 3.1, 5.5, 8, "pilot.csv"),))
    frame = make_list_frame()
    return make_plan(
        campaign=campaign, frame=frame, spread=spread, size=size(campaign, spread, frame)
    )


def chance_of(counts: list[int], target: float) -> float:
    """Give P(χ² ≥ df·V/SE²) by scipy, df by Satterthwaite, for proportional counts."""
    terms = [(w * s) ** 2 / n for w, s, n in zip(WEIGHTS, SIGMAS, counts, strict=True)]
    df = math.fsum(terms) ** 2 / math.fsum(term**2 / (PILOT - 1) for term in terms)
    return float(stats.chi2.sf(df * math.fsum(terms) / target**2, df))


@pytest.mark.parametrize("locations", [None, 9, 30])
def test_the_report_gives_the_chance_that_the_number_has(locations):
    """Not the one that was asked for, which a typed number of locations need not have."""
    plan = planned(locations=locations, standard_error=9.0)
    true = chance_of([entry.needed for entry in plan.size.strata], 9.0)
    said = number_sentence(plan)
    assert f"met with a chance of {100 * true:.3g} % (80 % was asked for)" in said
    assert "if single results are near normal" in said
    assert ("was fixed beforehand" in said) == (locations is not None)


def test_a_budget_promises_no_chance():
    """It sets no precision, so neither a target nor an assurance may be reported as met."""
    plan = planned(budget=2000.0)
    said = number_sentence(plan)
    assert said.startswith("The number was the largest that a budget of 2000 EUR buys; no precis")
    everywhere = " ".join(map(text_of, [*answer_words(plan), *number_blocks(plan)]))
    for text in (said, everywhere):
        assert "80 %" not in text
        assert "ssurance" not in text
    assert "The budget decides the number." in everywhere


def test_a_typed_number_with_a_budget_promises_no_chance():
    """The money is compared elsewhere; no precision was asked for."""
    assert "chance" not in number_sentence(planned(locations=12, budget=2000.0))


def test_a_census_has_no_sentence_on_its_number():
    """That every unit is sampled says it all; nothing was chosen for a target."""
    plan = wells(design=(DesignTable(layout="census"),))
    assert number_sentence(plan) == ""
    assert "Assurance" not in dict(promise_rows(plan))


def test_an_unknown_chance_is_said_to_be_unknown():
    """Nobody said how many results stand behind sigma."""
    plan = make_plan()
    assert "No chance that it is met can be given" in number_sentence(plan)
    assert number_sentence(plan).startswith(
        f"The number was chosen for a target of {plan.size.target}, taking the spread at face value"
    )


def test_the_table_of_assurances_gives_the_chances_that_whole_numbers_have():
    """By scipy: P(F ≤ h² / (t²·s²·(1 − n/N)/n)) on n − 1 and n0 − 1 degrees of freedom."""
    rows = assurance_table(wells()).rows
    assert [why for _, _, why in rows] == [
        "the plain formula",
        "fewest for 67 %",
        "fewest for 80 %, the chosen assurance",
        "fewest for 90 %",
    ]
    for count, said, _ in rows:
        n = int(count)
        t = stats.t.ppf(0.975, n - 1)
        true = stats.f.cdf(4.0 / (t**2 * 3.1**2 * (1 - n / 14) / n), n - 1, 7)
        assert said == f"{100 * true:.3g} %"


def test_a_typed_number_is_not_called_needed():
    """Nothing needs it; losses leave it. The assurance names the number that it would take."""
    plan = planned(locations=9, standard_error=9.0)
    rows = dict(promise_rows(plan))
    at_80 = next(entry.n for entry in plan.size.assured if entry.assurance == 0.8)
    assert "Results needed" not in rows
    assert rows["Locations, fixed beforehand"] == "9"
    assert rows["Results expected, after losses"] == str(plan.size.needed)
    assert rows["Results that the target would take"] == (
        f"{plan.size.plain_n} by the plain formula, {at_80} at the assurance of 80 %, chosen by "
        "L. Fenn"
    )
    said = " ".join(plan.size.sentences)
    assert f"{plan.size.plain_n} results by the plain formula, and {at_80} at the assurance" in said
    words = " ".join(map(text_of, answer_words(plan)))
    assert "Results expected" in words
    assert "needed" not in words + precision_curve(plan.size).alternative


def test_a_sheet_that_takes_the_whole_list_speaks_of_no_chance() -> None:
    """Chances of 100 % and widths of ±0 leave a reader asking; that all are taken does not."""
    plan = wells()
    asked = plan.campaign.objective[0].model_copy(update={"half_width": 0.05})
    campaign = plan.campaign.model_copy(update={"objective": (asked,)})
    plan = make_plan(
        campaign=campaign,
        frame=plan.frame,
        spread=plan.spread,
        size=size(campaign, plan.spread, plan.frame),
    )
    one = "\n".join(text_of(block) for block in answer_words(plan))
    assert "All 14 units of the list are visited" in one
    assert "With every unit taken, the mean of the list has no error from choosing units." in one
    assert "chance" not in one
    assert "assurance" not in one
    assert "±0" not in one
    assert number_sentence(plan).endswith("takes every unit of the list.")
    assert "Chance that they meet" not in "\n".join(text_of(b) for b in number_blocks(plan))
