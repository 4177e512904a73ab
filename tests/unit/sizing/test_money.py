"""What a round costs, by hand; campaigns without the newer prices keep their numbers."""

import pytest

from fieldplan.sizing.answer import answer
from fieldplan.sizing.counting import total_cost
from fieldplan.sizing.money import Prices
from fieldplan.sizing.question import ControlRate
from tests.unit.sizing.asking import ask, whole

OLD = Prices("EUR", mobilisation=400.0, per_location=30.0, per_analysis=45.0)
NEW = Prices(
    "EUR", mobilisation=400.0, per_location=30.0, per_analysis=45.0, per_sample=4.0,
    per_crew_day=900.0, locations_per_day=12,
)  # fmt: skip


def test_a_bill_adds_up_by_hand() -> None:
    """25 places in 3 days of 12, 28 jars: 400 + 750 + 112 + 1260 + 2700."""
    assert NEW.crew_days(25) == 3
    assert NEW.crew_days(24) == 2
    assert NEW.bill(visits=25, jars=28) == 400 + 750 + 112 + 1260 + 2700
    assert NEW.bill(visits=25, jars=28, analyses=3) == 400 + 750 + 112 + 135 + 2700


def test_without_the_newer_prices_nothing_changes() -> None:
    """22 results cost 400 + 22 · 75 + 3 controls · 45, as before there were crew-days."""
    controls = (ControlRate("field duplicate", 0.1, None, "campaign choice"),)
    question = ask(whole(results=8), 6.0, prices=OLD, controls=controls)
    assert total_cost(question, (22,)) == 400 + 22 * 75 + 3 * 45
    assert OLD.crew_days(100) == 0


def test_crew_days_and_jars_stand_in_the_working_and_the_sentence() -> None:
    """The step must give the sum that the sentence says."""
    size = answer(ask(whole(results=8), 6.0, prices=NEW, targeted=3))
    step = next(s for s in size.steps if s.symbol == "cost")
    known = {q.symbol: q.value for q in step.inputs}
    places = known["locations"] + known["targeted"]
    by_hand = known["mobilisation"] + places * (known["visit"] + known["jar"] + known["analysis"])
    by_hand += known["controls"] * (known["jar"] + known["analysis"])
    by_hand += known["days"] * known["crew-day"]
    assert (known["days"], places) == (3, 25)
    assert step.unrounded == by_hand == size.cost
    assert any("3 crew-days" in line for line in size.sentences)


def test_a_budget_counts_whole_crew_days() -> None:
    """A day more must not be bought for one location too many."""
    one_day = NEW.bill(visits=12, jars=12)
    size = answer(ask(whole(results=8), one_day + 900, target="budget", prices=NEW))
    assert size.planned == 12
    assert size.cost == one_day
    day_more = NEW.bill(visits=13, jars=13)
    assert answer(ask(whole(), day_more, target="budget", prices=NEW)).planned == 13


def test_averages_for_one_more_place() -> None:
    """A visit is 30 + 900/12, what is taken there 4 + 45."""
    assert NEW.of_a_visit == pytest.approx(105)
    assert NEW.of_a_result == 49
