"""What field readings would save, as the finding says it."""

from dataclasses import replace

import numpy as np
import pytest

from fieldplan.campaign.field_reading import FieldReading
from fieldplan.lab.model import ReadingPairs
from fieldplan.sizing import size_asked
from fieldplan.sizing.model import Finding
from fieldplan.stats.two_phase import Screened, break_even_correlation
from tests.unit.sizing.askings import asked_mean

PRICES = ("cost.currency=EUR", "cost.mobilisation=400", "cost.per_location=12",
          "cost.per_analysis=90")  # fmt: skip


def meter(correlation: float = 0.85, **more: object) -> tuple[str, ...]:
    """A reading of 3 EUR, its keys as options."""
    keys = {"name": "meter", "correlation": correlation, "source": "trial", "per_reading": 3}
    return tuple(f"field_reading.{key}={value}" for key, value in (keys | more).items())


def found(*keys: str, **typed: object) -> Finding | None:
    """The finding beside bare numbers; None where nothing is said."""
    asked = asked_mean(**({"sigma": 20.0, "standard_error": 4.0} | typed), keys=keys)
    return next((f for f in size_asked(asked).findings if f.topic == "two-phase"), None)


def amounts(finding: Finding) -> dict[str, float]:
    """Its numbers by name."""
    return {amount.name: amount.value for amount in finding.amounts}  # type: ignore[misc]


def test_the_answer_gives_both_prices_and_the_border() -> None:
    """Results alone: 25 · 102 + 400. A visit and a reading cost 15, a result 90 more."""
    finding = found(*PRICES, *meter())
    assert finding is not None
    numbers = amounts(finding)
    assert numbers["plan_cost"] == 400 + 25 * 102
    assert numbers["cost"] == 400 + 15 * numbers["readings"] + 90 * numbers["results"]
    border = break_even_correlation(reading_cost=15, result_cost=90, single_cost=102)
    assert numbers["border"] == border
    assert f"stop paying below a correlation of {border:.2f}; here it is 0.85." in finding.answer
    assert finding.answer.startswith("With meter a standard error of 4.00 would cost ")


def test_the_working_gives_the_standard_error_that_is_said() -> None:
    """Cochran (1977), ch. 12, from the step's own inputs."""
    finding = found(*PRICES, *meter(), stratum=("0.6,15,9", "0.4,26,9"), sigma=None)
    assert finding is not None
    step = next(s for s in finding.steps if s.symbol == "SE")
    q = {entry.symbol: entry.value for entry in step.inputs}
    luck = (1 / q["n"] - 1 / q["n'"]) / (q["n"] - q["L"] - 2)
    about = q["σ"] ** 2 * (1 - q["ρ"] ** 2)
    square = about * (1 / q["n"] + luck) + (q["σ"] * q["ρ"]) ** 2 / q["n'"]
    assert q["L"] == 2
    assert step.unrounded == pytest.approx(square**0.5)
    assert amounts(finding)["standard_error"] == step.unrounded <= 4.0


def test_a_loose_reading_does_not_pay() -> None:
    """Below the border, and said so with the border."""
    finding = found(*PRICES, *meter(0.4))
    assert finding is not None
    assert finding.answer == (
        "Readings with meter do not pay here: results alone cost 2950 EUR. At these prices "
        "readings stop paying below a correlation of 0.53; here it is 0.40."
    )


def test_few_pairs_are_shown_for_what_they_are() -> None:
    """From 10 pairs 0.85 may be 0.474 (Fisher: tanh(1.2562 − 1.96/√7)); the error then grows."""
    finding = found(*PRICES, *meter(from_pairs=10))
    assert finding is not None
    numbers = amounts(finding)
    assert numbers["correlation_low"] == pytest.approx(0.474, abs=0.0005)
    error = Screened(20, numbers["correlation_low"]).variance(
        numbers["readings"], numbers["results"]
    )
    warning = next(line for line in finding.warnings if "From 10 pairs" in line)
    assert f"would then be {error**0.5:.2f}, not" in warning
    assert warning.endswith("and readings would not pay.")


def test_whole_days_can_make_a_loose_reading_pay_and_that_is_said() -> None:
    """At 14 places a day the third day of 29 visits has room for readings."""
    keys = ("cost.currency=EUR", "cost.per_analysis=46", "cost.per_location=28",
            "cost.per_crew_day=700", "cost.locations_per_day=14")  # fmt: skip
    finding = found(*keys, *meter(0.8), sigma=21.5)
    assert finding is not None
    numbers = amounts(finding)
    assert numbers["border"] > 0.8
    assert numbers["cost"] < numbers["plan_cost"]
    assert "That is room that whole numbers and whole days leave" in finding.answer


def test_without_prices_only_the_most_that_readings_could_do_is_said() -> None:
    """√(1 − 0.6²) = 0.8."""
    finding = found(*meter(0.6))
    assert finding is not None
    assert "down to 80 % at best" in finding.answer
    assert amounts(finding) == {"least_share_of_error": pytest.approx(0.8)}


def test_an_assumed_correlation_is_stamped() -> None:
    """As an ASSUMED sigma is."""
    finding = found(*PRICES, *meter(source="ASSUMED"))
    assert finding is not None
    assert "The correlation of meter is ASSUMED." in finding.warnings


def test_the_plan_stays_as_it_is() -> None:
    """Two phases are a finding; n is that of the campaign without readings."""
    with_readings = asked_mean(sigma=20.0, standard_error=4.0, keys=(*PRICES, *meter()))
    without = asked_mean(sigma=20.0, standard_error=4.0, keys=PRICES)
    one, other = size_asked(with_readings), size_asked(without)
    assert (one.needed, one.planned, one.cost) == (other.needed, other.planned, other.cost)
    finding = next(f for f in one.findings if f.topic == "two-phase")
    assert finding.warnings[-1].startswith("The number of this plan is not changed by it")


def test_pairs_from_a_file_give_the_correlation() -> None:
    """numpy.corrcoef on the same pairs; non-detects and rows left out are said."""
    rng = np.random.default_rng(11)
    x = rng.normal(50, 10, 16)
    y = 2 * x + rng.normal(0, 9, 16)
    pairs = ReadingPairs("meter", "analyte", tuple(x), tuple(y), "pairs.csv", 2, 1)
    asked = asked_mean(sigma=20.0, standard_error=4.0, keys=PRICES)
    told = FieldReading(name="meter", analyte="analyte", pilot="pairs.csv", per_reading=3.0)
    campaign = asked.campaign.model_copy(update={"field_reading": (told,)})
    assert asked.spread is not None
    asked = replace(asked, campaign=campaign, spread=replace(asked.spread, pairs=(pairs,)))
    finding = next(f for f in size_asked(asked).findings if f.topic == "two-phase")
    numbers = amounts(finding)
    assert numbers["correlation"] == pytest.approx(np.corrcoef(x, y)[0, 1])
    assert any("Non-detects among the results of the pairs (2)" in w for w in finding.warnings)
    assert any("left out (1)" in w for w in finding.warnings)
    assert "correlation (pairs.csv)" in {q.meaning for s in finding.steps for q in s.inputs}


def test_several_readings_stand_in_a_table_and_the_cheapest_is_told() -> None:
    """Each with its own border."""
    asked = asked_mean(sigma=20.0, standard_error=4.0, keys=(*PRICES, *meter()))
    first = asked.campaign.field_reading[0]
    kit = first.model_copy(update={"name": "kit", "correlation": 0.97, "per_reading": 8.0})
    dear = first.model_copy(update={"name": "dear", "per_reading": 95.0})
    campaign = asked.campaign.model_copy(update={"field_reading": (first, kit, dear)})
    finding = next(
        f for f in size_asked(replace(asked, campaign=campaign)).findings if f.topic == "two-phase"
    )
    assert [row[0] for row in finding.rows] == ["meter", "kit", "dear"]
    assert finding.rows[2][2] == "never"
    assert finding.answer.startswith("With kit ")


def test_readings_of_another_analyte_say_nothing() -> None:
    """They follow something else."""
    asked = asked_mean(sigma=20.0, standard_error=4.0, keys=(*PRICES, *meter()))
    other = asked.campaign.field_reading[0].model_copy(update={"analyte": "zinc"})
    campaign = asked.campaign.model_copy(update={"field_reading": (other,)})
    findings = size_asked(replace(asked, campaign=campaign)).findings
    assert "two-phase" not in {f.topic for f in findings}
