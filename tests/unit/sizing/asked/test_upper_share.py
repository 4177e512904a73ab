"""A share at or below the level: by counting and by a normal bound."""

import math
import re

import numpy as np
import pytest
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.sizing.asked.counting_claims import chance_noticed
from fieldplan.sizing.asked.upper_share import bought, count
from fieldplan.sizing.question import Part
from tests.unit.sizing.asked.asked_for import amount, asked_for, listed
from tests.unit.stats.published import row

HALVES = (Part("a", 0.5, 20.0), Part("b", 0.5, 20.0))


@pytest.mark.parametrize(("allowed", "row_id"), [(0, 26), (1, 30), (2, 31), (3, 32)])
def test_numbers_of_the_table_by_results_allowed(allowed: int, row_id: int) -> None:
    """Source: Wilks 1941; Natrella 1963: 59, 93, 124, 153 (values.csv, from memory)."""
    found = count(asked_for("upper-share", share=0.95, allowed=allowed))
    assert sum(found.needed) == row(f"A04-0{row_id}").exact


def test_claim_says_no_more_than_was_shown() -> None:
    """Confidence, share and population; not the mean, and not every place."""
    finding = count(asked_for("upper-share", share=0.95)).finding
    assert finding.answer == (
        "59 results, none of them above 150 mg/kg, would show with 95 % confidence that at least "
        "95 % of the site's possible samples do not exceed it."
    )
    said = " ".join(finding.warnings)
    assert "nothing about the mean, nor that no place exceeds 150 mg/kg: up to 5 % may" in said
    assert "Even where only 1 % exceed, the claim fails in 45 % of such campaigns" in said


def test_expected_share_above_takes_more_results_and_allows_some() -> None:
    """Closed form with scipy: n = 124 and 2 allowed; P(X ≤ 2 | 1 %) = 0.87."""
    found = count(asked_for("upper-share", share=0.95, expected_above=0.01, power=0.8))
    assert (sum(found.needed), amount(found, "allowed")) == (124, 2)
    assert amount(found, "confidence") == pytest.approx(stats.binom.sf(2, 124, 0.05))
    chance = stats.binom.cdf(2, 124, 0.01)
    assert chance >= 0.8
    assert f"in {100 * chance:.0f} % of such campaigns" in found.finding.answer


def test_list_may_have_just_the_rest_above() -> None:
    """90 % of 60 units leave 6: 7 spoil the claim, and n is the first that finds one of them."""
    found = count(asked_for("upper-share", parts=listed(60), share=0.9))
    (n,) = found.needed
    assert stats.hypergeom.pmf(0, 60, 7, n) <= 0.05 < stats.hypergeom.pmf(0, 60, 7, n - 1)
    assert "no more than 6 of the 60 units of the list exceed it" in found.finding.answer


def test_list_with_an_expected_share_above() -> None:
    """Brute force with scipy: 20 of 200 spoil … the claim that no more than 20 exceed."""
    found = count(
        asked_for("upper-share", parts=listed(200), share=0.9, expected_above=0.02, power=0.8)
    )
    (n,), allowed = found.needed, amount(found, "allowed")
    assert stats.hypergeom.cdf(allowed, 200, 21, n) <= 0.05
    assert stats.hypergeom.cdf(allowed, 200, 4, n) >= 0.8


@pytest.mark.parametrize("confidence", [0.51, 0.55, 0.7])
def test_low_confidence_is_kept_in_strata_too(confidence: float) -> None:
    """Brute force: the bound alone would not do where few exceedances are expected."""
    words = {"share": 0.7, "allowed": 2, "confidence": confidence}
    first, second = count(asked_for("upper-share", parts=HALVES, **words)).needed
    for k in range(101):
        above = (0.6 * k / 100, 0.6 - 0.6 * k / 100)
        few = math.fsum(
            stats.binom.pmf(i, first, above[0]) * stats.binom.cdf(2 - i, second, above[1])
            for i in range(3)
        )
        assert 1 - few >= confidence - 1e-12


@pytest.mark.parametrize("allowed", [0, 1, 3])
def test_strata_keep_the_confidence_wherever_the_share_lies(allowed: int) -> None:
    """Brute force: two binomials added, for every split of 5 % over two halves."""
    asked = asked_for("upper-share", parts=HALVES, share=0.95, allowed=allowed)
    first, second = needed = count(asked).needed
    promised = chance_noticed(asked, needed, 0.05, allowed=allowed)
    for k in range(101):
        above = (0.1 * k / 100, 0.1 - 0.1 * k / 100)
        few = math.fsum(
            stats.binom.pmf(i, first, above[0]) * stats.binom.cdf(allowed - i, second, above[1])
            for i in range(allowed + 1)
        )
        assert 1 - few >= promised - 1e-12 >= 0.95 - 2e-12


def test_given_counts_say_how_many_may_exceed() -> None:
    """Inverse: 93 results allow 1; 58 are too few for none and show 0.05^(1/58)."""
    found = bought(asked_for("upper-share", share=0.95), (93,))
    assert amount(found, "allowed") == 1
    assert "no more than 1 of them above 150 mg/kg" in found.answer
    few = bought(asked_for("upper-share", share=0.95), (40,))
    assert "40 results are too few for the claim" in few.answer
    shown = math.floor(1000 * 0.05 ** (1 / 40)) / 10
    assert f"at least {shown:.1f} %" in few.answer


def test_whole_list_needs_no_confidence() -> None:
    """With every unit looked at the claim is true or it is not."""
    found = bought(asked_for("upper-share", parts=listed(22), share=0.9), (22,))
    assert found.answer.startswith("All 22 units of the list are looked at: no more than 2 of")


def test_table_lists_numbers_allowed_and_how_often_the_claim_comes_out() -> None:
    """Source of the numbers: Wilks 1941; chances by scipy at 1 % above."""
    rows = count(asked_for("upper-share", share=0.95)).finding.rows
    assert [(r[0], r[1]) for r in rows[:4]] == [
        ("0", "59"),
        ("1", "93"),
        ("2", "124"),
        ("3", "153"),
    ]
    assert [r[2] for r in rows[:3]] == [
        f"{100 * stats.binom.cdf(c, n, 0.01):.0f} %" for c, n in ((0, 59), (1, 93), (2, 124))
    ]


NORMAL = {"share": 0.95, "method": "normal", "power": 0.8}


def test_normal_bound_takes_the_first_n_that_is_often_enough_below() -> None:
    """Brute force with scipy's noncentral t: mean 90, sigma 20, level 150."""
    found = count(asked_for("upper-share", mean=90.0, **NORMAL))
    (n,) = found.needed

    def chance(m: int) -> float:
        root = math.sqrt(m)
        critical = stats.nct.ppf(0.95, m - 1, stats.norm.ppf(0.95) * root)
        return float(stats.nct.sf(critical, m - 1, 3.0 * root))

    assert chance(n) >= 0.8 > chance(n - 1)
    assert amount(found, "chance") == pytest.approx(chance(n), abs=1e-9)
    assert amount(found, "n_by_counting") == 59
    root = math.sqrt(n)
    critical = stats.nct.ppf(0.95, n - 1, stats.norm.ppf(0.95) * root)
    larger = stats.nct.sf(critical, n - 1, 60 / 25 * root)  # sigma 25 in place of 20
    assert amount(found, "chance_at_larger_sigma") == pytest.approx(larger, abs=1e-9)
    assert "mean + 2.566 s" in found.finding.answer  # Natrella 1963: k = 2.566 at n = 15
    inverse = bought(asked_for("upper-share", mean=90.0, **NORMAL), (n,))
    assert amount(inverse, "chance") == amount(found, "chance")


def test_skewed_pilot_is_warned_against_a_normal_bound() -> None:
    """The bound leans on a shape that the results at hand do not have."""
    parts = (Part("site", 1.0, 20.0, results=15, skewness=1.8),)
    warnings = count(asked_for("upper-share", parts=parts, mean=90.0, **NORMAL)).finding.warnings
    assert "skewness of 1.80" in warnings[0]
    assert any("Counting needs no shape: 59 results" in line for line in warnings)


def test_normal_working_repeats_its_own_arithmetic() -> None:
    """M = (150 − 90)/20 = 3."""
    first, *_ = count(asked_for("upper-share", mean=90.0, **NORMAL)).finding.steps
    assert first.unrounded == 3.0


def test_what_a_normal_bound_cannot_do_is_refused() -> None:
    """No mean, several strata, no sigma, or a level within the quantile."""
    with pytest.raises(DesignError, match="needs the mean and the standard deviation"):
        count(asked_for("upper-share", **NORMAL))
    with pytest.raises(DesignError, match="this one has 2 strata"):
        count(asked_for("upper-share", parts=HALVES, mean=90.0, **NORMAL))
    with pytest.raises(DesignError, match="no number of results can show it"):
        count(asked_for("upper-share", mean=130.0, **NORMAL))


def test_more_allowed_than_a_list_could_hold_is_refused() -> None:
    """With 3 of 50 units spoiling the claim, 60 allowed ones would show nothing."""
    with pytest.raises(DesignError, match="looking at all of them would show nothing"):
        count(asked_for("upper-share", parts=listed(50), share=0.95, allowed=60))


@pytest.mark.parametrize("n", [2, 20, 30, 34, 35, 45, 58])
def test_claim_that_is_left_has_the_confidence_it_states(n: int) -> None:
    """Closed form: n results below the level show a share p with confidence 1 − pⁿ."""
    found = bought(asked_for("upper-share", share=0.95), (n,))
    words = re.search(r"at least ([\d.]+) % of", found.answer)
    assert words is not None
    share = float(words[1]) / 100
    assert 1 - share**n >= 0.95
    assert 1 - (share + 0.0015) ** n < 0.95  # and no more is given away than the digit
    assert amount(found, "confidence") == pytest.approx(1 - share**n)
    assert f"up to {100 * (1 - share):.3g} % may, by any amount" in " ".join(found.warnings)


def test_list_names_units_where_a_share_of_it_would_be_half_a_unit() -> None:
    """Hypergeometric of scipy: 31 of 50 hold the one unit that exceeds with chance 31/50."""
    answered = count(asked_for("upper-share", parts=listed(50), share=0.95))
    unseen = stats.hypergeom.cdf(0, 50, 1, sum(answered.needed))
    assert answered.finding.columns[-1] == "comes out if 1 of 50 exceed"
    assert answered.finding.rows[0][-1] == f"{100 * unseen:.0f} %"
    said = " ".join(answered.finding.warnings)
    assert f"Even where only 1 of 50 exceed, the claim fails in {100 - 100 * unseen:.0f} %" in said
    assert "up to 2 of 50 may" in said
    assert answered.finding.picture is not None
    assert all(x / 2 == round(x / 2) for x in answered.finding.picture.series[0].x)  # 2 % a unit


def test_normal_bound_says_how_likely_its_number_is_enough() -> None:
    """Simulation: true sigmas given a pilot of 6; the power of each by scipy's noncentral t."""
    part = Part("site", 1.0, 20.0, results=6)
    words = {"share": 0.95, "method": "normal", "power": 0.8, "mean": 90.0}
    found = count(asked_for("upper-share", parts=(part,), **words))
    (n,) = found.needed
    tries = 2_000
    sigmas = 20.0 / np.sqrt(stats.chi2.rvs(5, size=tries, random_state=11) / 5)
    root = math.sqrt(n)
    factor = stats.nct.ppf(0.95, n - 1, stats.norm.ppf(0.95) * root) / root
    powers = stats.nct.sf(factor * root, n - 1, (150.0 - 90.0) / sigmas * root)
    enough = float(np.mean(powers >= 0.8))
    stated = amount(found, "chance_enough")
    assert stated == pytest.approx(enough, abs=4 * math.sqrt(enough * (1 - enough) / tries))
    said = found.finding.warnings[0]
    assert f"The chance that these are enough is {100 * stated:.0f} %" in said
    assert "the mean is taken as known" in said


def test_number_for_a_chance_of_eighty_percent_keeps_it() -> None:
    """Inverse: what the sentence names for 80 % has a chance of 80 %, one fewer has less."""
    part = Part("site", 1.0, 20.0, results=12)
    words = {"share": 0.95, "method": "normal", "power": 0.8, "mean": 60.0}
    asked = asked_for("upper-share", parts=(part,), **words)
    named = re.search(r"80 % and 90 % it takes (\d+) and (\d+)", count(asked).finding.warnings[0])
    assert named is not None
    for n, assurance in zip(map(int, named.groups()), (0.8, 0.9), strict=True):
        assert amount(bought(asked, (n,)), "chance_enough") >= assurance - 1e-6
        assert amount(bought(asked, (n - 1,)), "chance_enough") < assurance


def test_normal_bound_of_a_typed_sigma_gives_no_chance() -> None:
    """Nobody said how many results stand behind it."""
    part = Part("site", 1.0, 20.0)
    words = {"share": 0.95, "method": "normal", "power": 0.8, "mean": 90.0}
    found = count(asked_for("upper-share", parts=(part,), **words))
    assert amount(found, "chance_enough") is None
    assert "Nobody said how many results stand behind sigma" in found.finding.warnings[0]
