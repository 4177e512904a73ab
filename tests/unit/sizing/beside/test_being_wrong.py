"""What a wrong decision would cost, as the finding says it."""

from dataclasses import replace

import pytest
from scipy import stats

from fieldplan.sizing import size_asked
from fieldplan.sizing.model import Finding
from tests.unit.sizing.askings import asked_mean

STAKES = ("cost.currency=EUR", "cost.per_location=12", "cost.per_analysis=90",
          "cost.wrongly_acted=40000", "cost.wrongly_left=250000")  # fmt: skip
BELIEVED = ("objective.mean_from=90", "objective.mean_to=160")


def found(*keys: str, **typed: object) -> Finding | None:
    """The finding beside bare numbers; None where nothing is said."""
    asked = asked_mean(
        **({"sigma": 20.0, "standard_error": 4.0, "level": 150.0} | typed), keys=keys
    )
    return next((f for f in size_asked(asked).findings if f.topic == "being-wrong"), None)


def amounts(finding: Finding) -> dict[str, float]:
    """Its numbers by name."""
    return {amount.name: amount.value for amount in finding.amounts}  # type: ignore[misc]


def expected(n: int) -> float:
    """Expected loss of n results by scipy's bivariate normal: the mean itself is compared."""
    mean, spread = 125.0, 35 / stats.norm.ppf(0.95)
    both = stats.multivariate_normal(
        [mean, mean], [[spread**2, spread**2], [spread**2, spread**2 + 400 / n]]
    )
    below = stats.norm.cdf(150, mean, spread)
    together = both.cdf([150, 150])
    left = stats.norm.cdf(150, mean, (spread**2 + 400 / n) ** 0.5) - together
    return 40000 * float(below - together) + 250000 * float(left)


def test_loss_and_the_cheapest_number_are_those_of_another_library() -> None:
    """scipy.stats.multivariate_normal at every n from 2 to 60, sampling at 102 each."""
    finding = found(*STAKES, *BELIEVED)
    assert finding is not None
    numbers = amounts(finding)
    assert numbers["expected_loss"] == pytest.approx(expected(25), rel=1e-4)
    totals = {n: 102 * n + expected(n) for n in range(2, 61)}
    best = min(totals, key=lambda n: totals[n])
    assert numbers["cheapest_n"] == best
    assert numbers["cheapest_total"] == pytest.approx(totals[best], rel=1e-4)
    above = stats.norm.sf(150, 125, 35 / stats.norm.ppf(0.95))
    assert numbers["chance_above"] == pytest.approx(above)
    assert numbers["loss_without"] == pytest.approx(min(250000 * above, 40000 * (1 - above)))


def test_the_sentence_holds_n_and_changes_nothing() -> None:
    """It stands beside the number and says that the plan does not follow it."""
    finding = found(*STAKES, *BELIEVED)
    assert finding is not None
    assert finding.answer.startswith(
        "With the 25 results of this plan a wrong decision would lose "
    )
    assert "on average, beside 2550 EUR for sampling" in finding.answer
    assert "which the plan does not follow" in finding.answer
    plain = size_asked(asked_mean(sigma=20.0, standard_error=4.0, level=150.0, keys=STAKES[:3]))
    assert plain.needed == 25


def test_an_upper_limit_acts_more_often() -> None:
    """With the limit compared, leaving wrongly is rarer and acting wrongly more frequent."""
    mean, limit = found(*STAKES, *BELIEVED), found(*STAKES, *BELIEVED, one_sided=True)
    assert mean is not None
    assert limit is not None
    one, other = amounts(mean), amounts(limit)
    assert other["chance_wrongly_left"] < one["chance_wrongly_left"]
    assert other["chance_wrongly_acted"] > one["chance_wrongly_acted"]
    assert "the 95 % upper limit of the mean comes out above" in " ".join(limit.assumptions)


def test_the_working_multiplies_what_it_shows() -> None:
    """P(act wrongly) · A + P(leave wrongly) · B."""
    finding = found(*STAKES, *BELIEVED)
    assert finding is not None
    (step,) = finding.steps
    acted, cost_a, left, cost_b = (q.value for q in step.inputs)
    assert step.unrounded == acted * cost_a + left * cost_b


def test_the_table_adds_up_and_holds_the_plan_and_the_best() -> None:
    """Rows of money; rounding of each cell allowed for."""
    finding = found(*STAKES, *BELIEVED)
    assert finding is not None
    rows = {int(row[0]): [float(cell) for cell in row[1:]] for row in finding.rows}
    assert {0, 25, int(amounts(finding)["cheapest_n"])} <= set(rows)
    assert all(abs(paid + lost - both) <= 1 for paid, lost, both in rows.values())
    assert rows[0][0] == 0


def test_a_single_expected_mean_leaves_nothing_to_weigh() -> None:
    """Were it certain, no sample would pay; so the range has to be said."""
    finding = found(*STAKES, mean=140.0, one_sided=True)
    assert finding is not None
    assert finding.answer.endswith("Write mean_from and mean_to below [[objective]].")
    assert finding.amounts == ()


def test_a_pilot_says_where_the_mean_may_lie() -> None:
    """Mean of eight values, give or take s/√8."""
    asked = asked_mean(sigma=20.0, standard_error=4.0, level=150.0, results=8, mean=140.0,
                       keys=STAKES)  # fmt: skip
    assert asked.spread is not None
    measured = replace(asked.spread.strata[0], values=(140.0,) * 8)
    asked = replace(asked, spread=replace(asked.spread, strata=(measured,)))
    finding = next(f for f in size_asked(asked).findings if f.topic == "being-wrong")
    above = stats.norm.sf(150, 140, 20 / 8**0.5)
    assert amounts(finding)["chance_above"] == pytest.approx(above)
    assert "give or take 7.07 (the pilot)" in finding.assumptions[0]


def test_without_a_belief_the_remedy_is_said() -> None:
    """Silence would look like an answer of nothing to lose."""
    finding = found(*STAKES)
    assert finding is not None
    assert "nobody said where the true mean may lie" in finding.answer
    assert finding.amounts == ()


@pytest.mark.parametrize(
    ("keys", "typed"), [(STAKES[:3], {}), ((), {})], ids=["no stakes", "no cost table"]
)
def test_nothing_is_said_where_nobody_gave_the_stakes(
    keys: tuple[str, ...], typed: dict[str, object]
) -> None:
    """Two numbers of the user are what it rests on."""
    assert found(*keys, *BELIEVED, **typed) is None


def test_harm_is_not_priced() -> None:
    """Whoever decides must weigh it apart."""
    finding = found(*STAKES, *BELIEVED)
    assert finding is not None
    assert any("Harm to people is no sum of money" in line for line in finding.assumptions)


@pytest.mark.parametrize(("assume", "sign"), [("above-level", 1), ("below-level", -1)])
def test_a_test_against_the_level_decides_as_it_says(assume: str, sign: int) -> None:
    """Chances at a mean of all but 140 by scipy's noncentral t, with the test's own alpha."""
    edge = 135 if assume == "above-level" else 165
    keys = (*STAKES, f"mean_and_level.assume={assume}", f"mean_and_level.gray_edge={edge}",
            "mean_and_level.alpha=0.1", "mean_and_level.beta=0.2",
            "objective.mean_from=139.999", "objective.mean_to=140.001")  # fmt: skip
    finding = found(*keys, question="mean-and-level", standard_error=None)
    assert finding is not None
    n = int(finding.answer.split("With the ")[1].split()[0])
    t = stats.t.ppf(0.9, n - 1)
    chance = stats.nct.sf(-sign * t, n - 1, -10 / (20 / n**0.5))
    assert amounts(finding)["chance_wrongly_acted"] == pytest.approx(chance, abs=1e-6)
    name = "upper" if sign > 0 else "lower"
    assert f"the 90 % {name} limit of the mean" in " ".join(finding.assumptions)
