"""Site and background: t by Welch and pooled, the rank sum, a background already there."""

import math

import numpy as np
import pytest
from scipy import optimize, stats

from fieldplan.base.errors import DesignError
from fieldplan.sizing.asked.mean_and_background import bought, count
from fieldplan.sizing.asked.two_populations import TwoPopulations
from fieldplan.sizing.question import Part
from fieldplan.stats.rank_tests import rank_sum_power
from fieldplan.stats.two_sample_power import n_for_pooled, n_for_welch, welch_power
from tests.unit.sizing.asked.asked_for import amount, asked_for, listed
from tests.unit.stats.published import row

RISKS = {"alpha": 0.05, "beta": 0.2, "assume": "at-background"}
UNIT = (Part("site", 1.0, 1.0, results=8),)
STRATA = (Part("a", 0.7, 20.0, results=6), Part("b", 0.3, 50.0, results=6))


def both(**more):
    """Ask with the usual chances."""
    return asked_for("mean-and-background", **(RISKS | more))


@pytest.mark.parametrize("row_id", ["A03-024", "A03-025", "A03-026", "A03-027"])
def test_pooled_two_sided_numbers_of_the_tables(row_id: str) -> None:
    """Source: Univ. of Nebraska hand-out; Cohen 1988, table 2.4.1 (values.csv), exact values."""
    inputs = row(row_id).inputs
    asked = both(
        parts=UNIT,
        difference=inputs["delta_over_sigma"],
        alpha=inputs["alpha"],
        beta=1 - inputs["power"],
        assume="no-difference",
        variances="alike",
    )
    found = count(asked)
    assert sum(found.needed) == row(row_id).exact
    assert amount(found, "background_results") == row(row_id).exact


def test_power_at_given_counts() -> None:
    """Source: power.t.test example of R: 0.8689528 at 20 in each (values.csv A03-029)."""
    words = {"assume": "no-difference", "variances": "alike", "background_results": 20}
    found = bought(both(parts=UNIT, difference=1.0, **words), (20,))
    assert amount(found, "power") == pytest.approx(row("A03-029").exact, abs=2e-7)


def test_number_beside_the_printed_real_one() -> None:
    """Source: power.t.test example of R: 22.02 per group (values.csv A03-028) is 23 in whole."""
    asked = both(parts=UNIT, difference=1.0, beta=0.1, assume="no-difference", variances="alike")
    assert sum(count(asked).needed) == math.ceil(row("A03-028").exact)


def test_guidance_example_of_two_groups() -> None:
    """Source: EPA QA/G-9, two-sample box: 4.94 per group (values.csv A03-008); exact is near."""
    inputs = row("A03-008").inputs
    spread = (6 * inputs["v1"] + 7 * inputs["v2"]) / 13
    parts = (Part("site", 1.0, math.sqrt(spread), results=7),)
    words = {"difference": inputs["delta"], "beta": inputs["beta"], "variances": "alike"}
    (n,) = count(both(parts=parts, **words)).needed
    assert n - row("A03-008").exact == pytest.approx(0, abs=1.1)


def test_pooled_statistic_of_the_guidance_example() -> None:
    """Source: EPA QA/G-9: t = 1.5798 (values.csv A03-007), the statistic that power is about."""
    i = row("A03-007").inputs
    pooled = ((i["n1"] - 1) * i["v1"] + (i["n2"] - 1) * i["v2"]) / (i["n1"] + i["n2"] - 2)
    t = (i["m1"] - i["m2"]) / math.sqrt(pooled * (1 / i["n1"] + 1 / i["n2"]))
    found = stats.ttest_ind_from_stats(
        i["m1"], math.sqrt(i["v1"]), i["n1"], i["m2"], math.sqrt(i["v2"]), i["n2"]
    )
    assert t == pytest.approx(row("A03-007").exact) == pytest.approx(found.statistic)


@pytest.mark.parametrize("sigma", [None, 8.0])
@pytest.mark.parametrize("assume", ["at-background", "above-background", "no-difference"])
def test_one_population_takes_welchs_numbers(sigma: float | None, assume: str) -> None:
    """Second source: n_for_welch and n_for_pooled, which count by themselves."""
    sides = 2 if assume == "no-difference" else 1
    found = count(both(difference=15.0, assume=assume, background_sigma=sigma))
    expected = n_for_welch(15.0, (20.0, sigma or 20.0), alpha=0.05, beta=0.2, sides=sides)
    assert (sum(found.needed), amount(found, "background_results")) == expected
    if sigma is None:
        pooled = count(both(difference=15.0, assume=assume, variances="alike"))
        expected = n_for_pooled(15.0, 20.0, alpha=0.05, beta=0.2, sides=sides)
        assert (sum(pooled.needed), amount(pooled, "background_results")) == expected


def test_background_there_fixes_its_number() -> None:
    """Brute force: site results upward from 2 with 15 in the background."""
    words = {"difference": 25.0, "background_sigma": 12.0, "background_results": 15}
    parts = (Part("site", 1.0, 30.0, results=8),)
    n = 2
    while welch_power(25.0, (30.0, 12.0), first=n, second=15, alpha=0.05) < 0.8:
        n += 1
    assert count(both(parts=parts, **words)).needed == (n,)


def test_background_too_thin_for_the_difference_is_refused() -> None:
    """With the site known exactly, 10 results of sigma 20 show 17: a t test of their own."""
    with pytest.raises(DesignError, match=r"cannot tell a difference below 17\.1"):
        count(both(difference=10.0, background_results=10))
    least = 20 / math.sqrt(10)
    chance = stats.nct.sf(stats.t.ppf(0.95, 9), 9, 17.06 / least)
    assert chance == pytest.approx(0.8, abs=2e-3)


def test_background_just_enough_takes_many_site_results() -> None:
    """Near the limit the number runs up but is found."""
    asked = both(difference=17.3, background_results=10)
    (n,) = count(asked).needed
    assert n > 100
    assert TwoPopulations(asked, asked.objective.mean_and_background).power((n,)) >= 0.8


def test_ranks_take_the_printed_rule() -> None:
    """Source: NUREG-1575, table 5.3, Δ/σ = 1, α 0.05, β 0.1: 26 in each (values.csv A03-060)."""
    inputs = row("A03-060").inputs
    asked = both(parts=UNIT, difference=1.0, beta=inputs["beta"], test="ranks")
    found = count(asked)
    assert sum(found.needed) == row("A03-060").exact
    assert amount(found, "background_results") == row("A03-060").exact
    assert any("20 % for lost results is in the rule" in w for w in found.finding.warnings)
    bare = count(both(parts=UNIT, difference=1.0, beta=0.1, test="ranks", overage=0.0))
    assert sum(bare.needed) == 22


def test_ranks_against_a_background_that_is_there() -> None:
    """Brute force over the site's number."""
    words = {"difference": 1.0, "test": "ranks", "background_results": 30}
    (n,) = count(both(parts=UNIT, **words)).needed
    powers = [rank_sum_power(1.0, 1.0, first=m, second=30, alpha=0.05) for m in (n, n - 1)]
    assert powers[0] >= 0.8 > powers[1]


def test_strata_keep_their_power_in_simulated_campaigns() -> None:
    """Simulation: weighted site mean with Satterthwaite against the background, as one would."""
    asked = both(parts=STRATA, difference=25.0, background_sigma=15.0, background_results=12)
    counts = count(asked).needed
    generator = np.random.default_rng(3)
    times, weights = 20_000, np.array([0.7, 0.3])
    means, variances = [], []
    for n, sigma in zip(counts, (20.0, 50.0), strict=True):
        draws = generator.normal(0.0, sigma, (times, n))
        means.append(draws.mean(1))
        variances.append(draws.var(1, ddof=1) / n)
    site = weights @ np.array(means) + 25.0
    parts = weights[:, None] ** 2 * np.array(variances)
    background = generator.normal(0.0, 15.0, (times, 12))
    own = background.var(1, ddof=1) / 12
    whole = parts.sum(0) + own
    below = (parts**2 / (np.array(counts)[:, None] - 1)).sum(0) + own**2 / 11
    t = (site - background.mean(1)) / np.sqrt(whole)
    shown = np.mean(t > stats.t.ppf(0.95, whole**2 / below))
    # The strata stand for one sample of as many whole degrees of freedom, which is a little off.
    assert abs(shown - amount(bought(asked, counts), "power")) <= 4 * 0.4 / math.sqrt(times) + 0.01
    assert shown >= 0.79


def test_list_taken_whole_has_no_error_of_its_own() -> None:
    """All 14 wells known: what is left is a t test of the background's 30 results."""
    asked = both(parts=listed(14), difference=10.0, background_results=30)
    found = bought(asked, (14,))
    expected = stats.nct.sf(stats.t.ppf(0.95, 29), 29, 10 / (20 / math.sqrt(30)))
    assert amount(found, "power") == pytest.approx(expected, abs=1e-6)


def test_smallest_difference_is_told_with_the_chance_wanted() -> None:
    """Inverse of the power at given counts."""
    asked = both(difference=15.0, background_sigma=8.0)
    counts = count(asked).needed
    found = bought(asked, counts)
    least = amount(found, "smallest_difference")
    table = asked.objective.mean_and_background
    assert TwoPopulations(asked, table).power(counts, least) == pytest.approx(0.8, abs=1e-5)
    assert least <= 15.0
    assert "The smallest difference told with 80 % is" in found.answer


def test_chance_that_a_number_is_enough_is_the_pilots_chi_square() -> None:
    """Brute force: the largest site sigma that keeps the power, then scipy's χ² with 7 df."""
    asked = both(difference=15.0, background_sigma=8.0)
    counts = count(asked).needed
    m = amount(count(asked), "background_results")
    largest = optimize.brentq(
        lambda s: welch_power(15.0, (s, 8.0), first=counts[0], second=m, alpha=0.05) - 0.8, 1, 90
    )
    expected = stats.chi2.sf(7 * (20.0 / largest) ** 2, 7)
    assert amount(bought(asked, counts), "chance_enough") == pytest.approx(expected, abs=1e-5)
    said = count(asked).finding.warnings[0]
    assert f"The chance that these are enough is {100 * expected:.0f} %" in said


@pytest.mark.parametrize("more", [{}, {"background_sigma": 8.0}, {"test": "ranks"}])
def test_assurance_is_the_first_number_that_has_it(more: dict[str, object]) -> None:
    """Definition: the chance at n is at least 80 %, at one less it is not."""
    asked = both(difference=25.0, assurance=0.8, **more)
    table = asked.objective.mean_and_background
    (n,) = count(asked).needed
    pair = TwoPopulations(asked, table)
    assert (pair.chance_enough((n,)) or 0) >= 0.8 - 1e-6
    if "test" not in more:
        assert (pair.chance_enough((n - 1,)) or 0) < 0.8
    plain = count(both(difference=25.0, **more)).needed
    assert n > plain[0]
    assert f"sigma at face value asks for {plain[0]}" in count(asked).finding.warnings[0]


def test_background_that_cannot_carry_an_assurance_is_told() -> None:
    """12 results of the same uncertain spread: the plain number is there, 90 % is not."""
    found = count(both(difference=17.3, background_results=10))
    assert "more than can be had" in found.finding.warnings[0]


def test_each_assumption_is_put_in_words() -> None:
    """Who carries the doubt must be plain to a reader."""
    at = count(both(difference=15.0)).finding.answer
    assert "if the site mean lies 15 mg/kg above the background mean, " in at
    assert "show it to lie above; if the two are alike, 5 % do so wrongly" in at
    above = count(both(difference=15.0, assume="above-background")).finding.answer
    assert "show the site to lie less than 15 mg/kg above the background" in above
    assert "if it lies 15 mg/kg above, 5 % do so wrongly" in above
    either = count(both(difference=15.0, assume="no-difference")).finding.answer
    assert "if the two means lie 15 mg/kg apart" in either


def test_what_cannot_be_compared_is_refused() -> None:
    """No sigma; ranks with strata; more than the list has."""
    with pytest.raises(DesignError, match="without a sigma"):
        count(both(difference=15.0, known=False))
    with pytest.raises(DesignError, match="the site has 2 strata"):
        count(both(parts=STRATA, difference=15.0, test="ranks"))
    with pytest.raises(DesignError, match="more than all 14 units of the site"):
        count(both(parts=listed(14), difference=1.0))
    with pytest.raises(DesignError, match="more than 10000000 results"):
        count(both(difference=1e-4))


def test_chances_by_true_difference_fall_where_the_site_is_taken_to_lie_above() -> None:
    """Closed form: noncentral t of scipy, shifted by the true difference less the stated one."""
    asked = both(parts=UNIT, difference=1.0, assume="above-background", variances="alike")
    needed = count(asked).needed
    n = sum(needed)
    found = bought(asked, needed)
    point = stats.t.ppf(0.05, 2 * n - 2)
    for cells, times in zip(found.rows, (0, 0.25, 0.5, 0.75, 1, 1.25, 1.5), strict=True):
        exact = stats.nct.cdf(point, 2 * n - 2, (times - 1.0) / math.sqrt(2 / n))
        assert float(cells[1].removesuffix(" %")) == pytest.approx(100 * exact, abs=0.51)
    assert found.picture is not None
    alike, apart = found.picture.series
    assert alike.y[0] == pytest.approx(100 * stats.nct.sf(point, 2 * n - 2, -1 / math.sqrt(2 / n)))
    assert apart.y[0] == pytest.approx(5.0)  # at the stated difference: alpha
    for wing in (alike, apart):
        assert list(wing.y) == sorted(wing.y, reverse=True)
    assert "less than 1 mg/kg above" in found.columns[1]


@pytest.mark.parametrize("assume", ["at-background", "no-difference"])
def test_the_picture_shows_wrong_calls_on_either_side_of_the_gray_region(assume: str) -> None:
    """Alpha where the means are alike, beta at most at the difference, fewer beyond it."""
    asked = both(parts=UNIT, difference=1.0, assume=assume, variances="alike")
    picture = bought(asked, count(asked).needed).picture
    assert picture is not None
    alike, apart = picture.series
    assert alike.y[0] == pytest.approx(5.0, abs=0.01)
    assert max(alike.x) == 0.0
    assert apart.y[0] <= picture.levels[1][1]
    assert list(apart.y) == sorted(apart.y, reverse=True)


@pytest.mark.parametrize("words", [{"test": "ranks"}, {"background_sigma": 2.0}])
def test_site_at_the_stated_difference_is_shown_below_it_with_alpha(words) -> None:
    """Invariant: at the edge of the assumption the chance to leave it is alpha."""
    asked = both(parts=UNIT, difference=1.0, assume="above-background", **words)
    answered = count(asked)
    chances = [cells[1] for cells in answered.finding.rows]
    assert chances[4] == "5 %"
    assert float(chances[0].removesuffix(" %")) >= 80
