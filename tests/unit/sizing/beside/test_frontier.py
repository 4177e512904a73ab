"""Precision for the money, as the finding says it."""

import math
from dataclasses import replace

import pytest

from fieldplan.sizing import size_asked
from fieldplan.sizing.frontier_composites import INCREMENTS
from fieldplan.sizing.frontier_spread import spread_out
from fieldplan.sizing.model import Finding
from fieldplan.sizing.pilot_ground import cells_of, pilot_ground
from fieldplan.stats.spatial import weigh_field
from fieldplan.stats.spread_layouts import n_for_layout
from tests.unit.sizing.askings import asked_mean
from tests.unit.sizing.beside.test_space import (
    SITE,
    asked_with,
    entry,
    field_at,
    one_frame,
    random_places,
)

PRICES = ("cost.currency=EUR", "cost.mobilisation=300", "cost.per_location=12",
          "cost.per_analysis=80")  # fmt: skip
METER = ("field_reading.name=meter", "field_reading.correlation=0.9",
         "field_reading.source=trial", "field_reading.per_reading=3")  # fmt: skip
STRATA = ("0.64,18,9", "0.22,45,9", "0.14,90,9")


def found(**typed: object) -> Finding | None:
    """The finding beside bare numbers; None where nothing is said."""
    size = size_asked(asked_mean(**typed), beside=["frontier"])
    return next((f for f in size.findings if f.topic == "frontier"), None)


def amounts(finding: Finding) -> dict[str, float]:
    """Its numbers by name."""
    return {amount.name: amount.value for amount in finding.amounts}  # type: ignore[misc]


def test_the_sentence_names_the_cheapest_kind_and_its_price() -> None:
    """Neyman 15 results and proportional 22 for SE 9 (by hand in test_allocation): 92 each."""
    finding = found(stratum=STRATA, standard_error=9.0, keys=PRICES)
    assert finding is not None
    numbers = amounts(finding)
    assert numbers["cost_strata_neyman"] == 300 + 15 * 92
    assert numbers["cost_strata_proportional"] == 300 + 22 * 92
    assert "the cheapest with a standard error of 9.00 is strata, Neyman (15 results: 5 in " in (
        finding.answer
    )
    assert f"for {300 + 15 * 92} EUR; this plan costs {300 + 22 * 92} EUR." in finding.answer
    assert "For 2324 EUR the most precise is strata, Neyman (22 results:" in finding.answer


def test_a_plan_that_none_beats_is_said_to_be_so() -> None:
    """The campaign's own allocation is the best of those there are."""
    finding = found(stratum=STRATA, standard_error=9.0, keys=PRICES, allocation="neyman")
    assert finding is not None
    assert finding.answer == (
        "None of the designs that the data allow reaches a standard error of 9.00 for less than "
        "1680 EUR. For 1680 EUR none is more precise than this plan."
    )


def test_the_table_holds_the_frontier_cheapest_first() -> None:
    """Money rises and the error falls from row to row; the plan alone may stand above."""
    finding = found(stratum=STRATA, standard_error=9.0, keys=(*PRICES, *METER))
    assert finding is not None
    rows = [row for row in finding.rows if row[0] != "this plan"]
    errors, costs = ([float(row[k]) for row in rows] for k in (3, 4))
    assert costs == sorted(costs)
    assert errors == sorted(errors, reverse=True)
    assert [row[0] for row in finding.rows].count("this plan") == 1
    assert len(finding.columns) == 5
    assert max(sum(map(len, row)) + 2 * len(row) for row in finding.rows) <= 78


def test_a_design_with_readings_joins_where_one_is_declared() -> None:
    """A close and cheap reading must win against results alone."""
    finding = found(sigma=20.0, standard_error=4.0, keys=(*PRICES, *METER))
    assert finding is not None
    assert "is results with meter (" in finding.answer
    numbers = amounts(finding)
    assert numbers["cost_results_with_meter"] < numbers["cost_simple_random"] == 300 + 25 * 92


def test_the_picture_has_a_line_for_each_kind_and_one_point_for_the_plan() -> None:
    """Rings are beaten by a dot, dots by none; the plan's own point carries its name."""
    finding = found(stratum=STRATA, standard_error=9.0, keys=(*PRICES, *METER))
    assert finding is not None
    picture = finding.picture
    assert picture is not None
    lines = [s.label for s in picture.series if s.style == "line"]
    assert lines == ["strata, proportional", "strata, Neyman", "results with meter"]
    rings, dots, plan = picture.series[-3:]
    assert (rings.style, dots.style, plan.label) == ("hollow", "points", "this plan")
    assert (plan.x, len(plan.y)) == ((300 + 22 * 92,), 1)
    best = list(zip(dots.x, dots.y, strict=True))
    inside = [(c, e) for c, e in zip(rings.x, rings.y, strict=True) if e > 9 / 1.8 * 1.06]
    assert len(inside) > 20
    for cost, error in inside:
        assert any(c <= cost and e <= error * (1 + 1e-9) for c, e in best)
    assert picture.levels == (("9.00, this plan", 9.0),)


def test_one_kind_has_a_sentence_about_money_and_no_picture() -> None:
    """25 results cost 2600; for 0.75 and 1.25 times that 17 and 32 are had (traced numbers)."""
    finding = found(sigma=20.0, standard_error=4.0, keys=PRICES)
    assert finding is not None
    assert finding.answer.startswith("This plan buys a standard error of 4.00 for 2600 EUR; ")
    assert "1864 EUR a standard error of 4.85" in finding.answer
    assert finding.picture is None


def test_whole_crew_days_are_counted_in_the_table() -> None:
    """25 places at 9 a day are 3 days."""
    keys = (*PRICES, "cost.per_crew_day=600", "cost.locations_per_day=9")
    finding = found(sigma=20.0, standard_error=4.0, keys=keys)
    assert finding is not None
    assert finding.columns[-1] == "Crew-days"
    plan = next(row for row in finding.rows if row[0] == "this plan")
    assert plan == ("this plan", "25", "25", "4.00", str(300 + 25 * 92 + 3 * 600), "3")


def test_a_half_width_is_compared_as_a_half_width() -> None:
    """Designs of other degrees of freedom have another t."""
    finding = found(stratum=STRATA, half_width=18.0, keys=PRICES)
    assert finding is not None
    assert "with a half-width of 18.0 is strata, Neyman" in finding.answer
    assert amounts(finding)["compared_half_width"] == 18.0


@pytest.mark.parametrize(
    "typed",
    [
        {"sigma": 20.0, "standard_error": 4.0},
        {"sigma": 20.0, "standard_error": 4.0, "keys": ("cost.currency=EUR",)},
        {"sigma": 20.0, "standard_error": 0.01, "population": 9, "keys": PRICES},
    ],
    ids=["no prices", "all for nothing", "every unit taken"],
)
def test_nothing_is_said_where_nothing_can_be_compared(typed: dict[str, object]) -> None:
    """No money, or no error left to buy."""
    assert found(**typed) is None


def test_a_budget_is_the_money_that_designs_are_compared_at() -> None:
    """The target is money, and the plan's own precision the goal."""
    asked = asked_mean(stratum=STRATA, standard_error=9.0, keys=PRICES)
    question = replace(asked.question, target="budget", value=1700.0)
    objective = asked.objective.model_copy(update={"standard_error": None, "budget": 1700.0})
    asked = replace(asked, question=question, objective=objective)
    finding = size_asked(asked, beside=["frontier"]).findings[-1]
    numbers = amounts(finding)
    assert numbers["budget"] == 1700.0
    assert "For 1700 EUR the most precise is strata, Neyman (15 results" in finding.answer


PARTS = ("sigma.sampling=10", "sigma.analysis=5", "cost.currency=EUR", "cost.per_increment=4",
         "cost.per_location=30", "cost.per_analysis=60")  # fmt: skip


def test_composites_join_where_the_parts_of_sigma_are_known() -> None:
    """By hand for every number of increments tried: r = ⌈(676/k + 25) / 9⌉ at 90 + 4 k each."""
    finding = found(sigma=math.hypot(24, 10, 5), standard_error=3.0, keys=PARTS)
    assert finding is not None
    numbers = amounts(finding)
    bills = {k: math.ceil((676 / k + 25) / 9) * (90 + 4 * k) for k in INCREMENTS}
    assert numbers["cost_composites"] == min(bills.values())
    assert numbers["cost_simple_random"] == 78 * 90
    best = min(bills, key=lambda k: bills[k])
    assert (
        f"composites ({bills[best] // (90 + 4 * best)} composites of {best} inc" in finding.answer
    )


def test_a_campaign_of_composites_is_set_beside_single_samples() -> None:
    """The other way round: sigma of one sample is that of its parts, √701; own k is tried too."""
    finding = found(
        sigma=math.hypot(24, 10, 5), standard_error=3.0, keys=(*PARTS, "design.increments=30")
    )
    assert finding is not None
    numbers = amounts(finding)
    assert numbers["cost_simple_random"] == 78 * 90
    bills = {k: math.ceil((676 / k + 25) / 9) * (90 + 4 * k) for k in (*INCREMENTS, 30)}
    assert numbers["cost_composites"] == min(bills.values())
    assert f"this plan costs {bills[30]} EUR" in finding.answer or "None of the" in finding.answer


def test_places_spread_out_join_where_a_pilot_predicts_what_they_save() -> None:
    """The count is that of n_for_layout for the same field; 92 EUR a place, as for random ones."""
    places = random_places(30)
    asked, _ = asked_with(one_frame(), entry(places, field_at(places)), target=2.0, keys=PRICES)
    finding = next(f for f in size_asked(asked, beside="all").findings if f.topic == "frontier")
    ground, site = pilot_ground(asked.entries, asked.frame), cells_of(SITE)
    field = weigh_field(ground.places, ground.values, extent=site.extent)
    n = n_for_layout(field, 2.0, layout="compact-strata", area=site.area)
    assert amounts(finding)["cost_places_spread_out"] == 300 + 92 * n
    assert any("--more space says how sure that is" in line for line in finding.assumptions)


def test_a_leaning_or_a_small_pilot_earns_no_credit_for_spreading() -> None:
    """The finding on space refuses them as well."""
    for count, bend in ((12, 1.0), (30, 40.0)):
        places = random_places(count)
        values = [math.exp(value / bend) if bend > 1 else value for value in field_at(places)]
        asked, _ = asked_with(one_frame(), entry(places, values), keys=PRICES)
        assert spread_out(asked, asked.question) is None
