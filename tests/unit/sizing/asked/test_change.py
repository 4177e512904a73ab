"""Change between rounds at the same places."""

import math

import numpy as np
import pytest
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.sizing.asked.change import bought, count
from fieldplan.sizing.asked.paired_rounds import PairedRounds
from fieldplan.sizing.question import Part
from fieldplan.stats.precision import half_width, n_for_half_width
from tests.unit.sizing.asked.asked_for import amount, asked_for, listed
from tests.unit.stats.published import row

RISKS = {"alpha": 0.05, "beta": 0.2}
STRATA = (Part("a", 0.7, 20.0, results=6), Part("b", 0.3, 50.0, results=6))


def paired_power(difference: float, sigma: float, n: int, *, sides: int = 2) -> float:
    """Give the power of a paired t test by scipy's noncentral t."""
    limit, shift = stats.t.ppf(1 - 0.05 / sides, n - 1), difference * math.sqrt(n) / sigma
    power = stats.nct.sf(limit, n - 1, shift)
    return float(power + (stats.nct.cdf(-limit, n - 1, shift) if sides == 2 else 0.0))


@pytest.mark.parametrize("row_id", ["A03-011", "A03-014", "A03-015", "A03-017", "A03-018"])
def test_numbers_of_the_tables_hold_for_differences(row_id: str) -> None:
    """Source: Univ. of Nebraska hand-out, table 1 (values.csv): a pair is one difference."""
    inputs = row(row_id).inputs
    asked = asked_for(
        "change",
        difference=inputs["delta_over_sigma"],
        sigma_of_differences=1.0,
        direction="either-way" if inputs["sides"] == 2 else "fall",
        alpha=inputs["alpha"],
        beta=1 - inputs["power"],
    )
    assert sum(count(asked).needed) == row(row_id).exact


@pytest.mark.parametrize(("direction", "sides"), [("either-way", 2), ("rise", 1), ("fall", 1)])
def test_number_from_the_correlation_equals_a_walk(direction: str, sides: int) -> None:
    """Brute force with scipy: s_d = 20 √(2 − 2 · 0.6) = 17.89."""
    asked = asked_for("change", difference=8.0, correlation=0.6, direction=direction, **RISKS)
    spread = 20 * math.sqrt(0.8)
    n = 2
    while paired_power(8.0, spread, n, sides=sides) < 0.8:
        n += 1
    found = count(asked)
    assert found.needed == (n,)
    assert amount(found, "power") == pytest.approx(paired_power(8.0, spread, n, sides=sides))


def test_spreads_of_the_two_rounds_may_differ() -> None:
    """Variance of a difference: 20² + 30² − 2 · 0.5 · 20 · 30 = 700."""
    asked = asked_for("change", half_width=6.0, correlation=0.5, next_sigma=30.0)
    n = n_for_half_width(math.sqrt(700), 6.0, confidence=0.95)
    found = count(asked)
    assert found.needed == (n,)
    assert amount(found, "half_width") == pytest.approx(
        half_width(math.sqrt(700), n, confidence=0.95)
    )


def test_strata_keep_the_power_of_their_weighted_change() -> None:
    """Simulation of pairs in two strata; tolerance of 4 standard errors."""
    asked = asked_for("change", parts=STRATA, difference=9.0, correlation=0.6, **RISKS)
    counts = count(asked).needed
    generator = np.random.default_rng(8)
    times, mean, variance, below = 8000, 0.0, 0.0, 0.0
    for n, part in zip(counts, STRATA, strict=True):
        change = generator.normal(9.0, part.sigma * math.sqrt(0.8), (times, n))
        own = part.weight**2 * change.var(1, ddof=1) / n
        mean = mean + part.weight * change.mean(1)
        variance, below = variance + own, below + own**2 / (n - 1)
    shown = np.mean(np.abs(mean) / np.sqrt(variance) > stats.t.ppf(0.975, variance**2 / below))
    expected = amount(bought(asked, counts), "power")
    # The degrees of freedom are those expected; each campaign has its own, a little off.
    assert abs(shown - expected) <= 4 * math.sqrt(expected * (1 - expected) / times) + 0.01


def test_list_taken_whole_leaves_no_error() -> None:
    """All 10 wells in both rounds: the change of their mean is known."""
    asked = asked_for("change", parts=listed(10), half_width=0.001, sigma_of_differences=12.0)
    assert count(asked).needed == (10,)
    assert "the change of their mean is known" in count(asked).finding.answer


def test_what_hangs_on_the_correlation_is_told() -> None:
    """Uncorrelated pairs need 1/(1 − 0.6) times as many, less the t's part."""
    found = count(asked_for("change", difference=8.0, correlation=0.6, **RISKS)).finding
    assert "were it 0, as with new places in the second round, about 101" in " ".join(
        found.warnings
    )
    table = dict(found.rows)
    assert table["0"] == "101"
    assert int(table["0.9"]) < int(table["0.6"]) < int(table["0.3"])
    wrong = count(asked_for("change", difference=8.0, correlation=-0.3, **RISKS)).finding
    assert any("new places would do better" in line for line in wrong.warnings)


def test_smallest_change_is_shown_with_the_chance_wanted() -> None:
    """Inverse, by scipy's noncentral t."""
    asked = asked_for("change", difference=8.0, sigma_of_differences=12.0, **RISKS)
    found = bought(asked, (15,))
    least = amount(found, "smallest_change")
    assert paired_power(least, 12.0, 15) == pytest.approx(0.8, abs=1e-6)
    assert "The smallest change shown with 80 % is" in found.answer


def test_half_width_has_its_own_words_and_picture() -> None:
    """Nothing is said of chances that nobody asked about."""
    found = count(asked_for("change", half_width=5.0, sigma_of_differences=12.0)).finding
    assert found.answer.startswith("25 locations visited in both rounds pin down the change")
    assert found.picture is not None
    assert found.picture.levels == (("target 5 mg/kg", 5.0),)
    assert {entry.name for entry in found.amounts} == {
        "n", "standard_error", "chance_enough", "half_width"
    }  # fmt: skip


def test_chance_that_a_number_is_enough_is_the_pilots_chi_square() -> None:
    """Closed form by scipy: P(χ²₇ ≥ 7 (change shown / change asked)²), sigma from 8 results."""
    asked = asked_for("change", difference=8.0, correlation=0.6, **RISKS)
    found = bought(asked, (42,))
    least = amount(found, "smallest_change")
    expected = stats.chi2.sf(7 * (least / 8.0) ** 2, 7)
    assert amount(found, "chance_enough") == pytest.approx(expected, abs=1e-9)
    said = count(asked).finding.warnings[0]
    assert f"The chance that these are enough is {100 * expected:.0f} %" in said
    assert "for a chance of 80 % and 90 % it takes 74 and 99" in said


@pytest.mark.parametrize("target", [{"difference": 8.0, **RISKS}, {"half_width": 6.0}])
def test_stated_assurance_is_kept_over_many_pilots(target: dict[str, float]) -> None:
    """Simulation: pilots of 8, sized at 80 %; true sigma 20; tolerance of 4 standard errors."""
    generator = np.random.default_rng(4)
    times, kept = 200, 0
    truth = asked_for("change", correlation=0.5, **target)
    pairs = PairedRounds(truth, truth.objective.change)
    for s in 20.0 * np.sqrt(generator.chisquare(7, times) / 7):
        parts = (Part("site", 1.0, float(s), results=8),)
        sized = asked_for("change", parts=parts, correlation=0.5, assurance=0.8, **target)
        counts = PairedRounds(sized, sized.objective.change).assured(0.8)
        if "difference" in target:
            kept += pairs.power(counts) >= 0.8
        else:
            # The width itself varies from campaign to campaign; its chance is averaged.
            t = stats.t.ppf(0.975, counts[0] - 1)
            ratio = (6.0 / t) ** 2 * counts[0] / 400
            kept += stats.chi2.cdf(ratio * (counts[0] - 1), counts[0] - 1)
    error = math.sqrt(0.8 * 0.2 / times)
    assert 0.8 - 4 * error <= kept / times <= 0.83 + 4 * error


def test_spread_of_differences_that_is_typed_gives_no_chance() -> None:
    """Nobody said how many differences stand behind it."""
    found = count(asked_for("change", difference=8.0, sigma_of_differences=12.0, **RISKS))
    assert amount(found, "chance_enough") is None
    assert "Nobody said how many results stand behind sigma" in found.finding.warnings[0]


def test_working_repeats_its_own_arithmetic() -> None:
    """The step's formula with the step's inputs."""
    first, last = count(asked_for("change", difference=8.0, correlation=0.6, **RISKS)).finding.steps
    s = {entry.symbol: entry.value for entry in first.inputs}
    spread = s["s1"] ** 2 + s["s2"] ** 2 - 2 * s["r"] * s["s1"] * s["s2"]
    assert first.unrounded == pytest.approx(math.sqrt(spread))
    value = {entry.symbol: entry.value for entry in last.inputs}
    shift = value["Δ"] / value["SE"]
    power = stats.nct.sf(value["t"], value["df"], shift)
    power += stats.nct.cdf(-value["t"], value["df"], shift)
    assert last.unrounded == pytest.approx(power)


def test_what_cannot_be_sized_is_refused() -> None:
    """No sigma behind a correlation; a change out of reach."""
    with pytest.raises(DesignError, match="without the sigma of one of them"):
        count(asked_for("change", difference=8.0, correlation=0.6, known=False, **RISKS))
    with pytest.raises(DesignError, match="more than 10000000;"):
        count(asked_for("change", difference=1e-5, sigma_of_differences=12.0, **RISKS))
