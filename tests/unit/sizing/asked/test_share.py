"""A share: to within a margin, and told from a stated one."""

import math

import numpy as np
import pytest
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.sizing.asked.share import bought, count
from fieldplan.sizing.asked.weighted_share import worth
from fieldplan.sizing.question import Part
from fieldplan.stats.proportions import expected_reach
from tests.unit.sizing.asked.asked_for import amount, asked_for, listed
from tests.unit.stats.published import row


@pytest.mark.parametrize("row_id", [f"A01-0{k}" for k in range(18, 25)])
def test_normal_formula_gives_the_printed_table_rounded_up(row_id: str) -> None:
    """Source: Krejcie & Morgan 1970 (values.csv): χ²(1) = 3.841 as z², up where they round."""
    units = row(row_id).inputs["N"]
    confidence = float(stats.chi2.cdf(3.841, 1))
    found = count(
        asked_for("share", parts=listed(units), margin=0.05, method="normal", confidence=confidence)
    )
    assert sum(found.needed) == math.ceil(row(row_id).exact)


def test_normal_formula_gives_cochrans_example() -> None:
    """Source: Cochran 1977, sec. 4.4: 400, and 356 of 3200 (values.csv A01-003, A01-004)."""
    words = {"margin": 0.05, "method": "normal", "confidence": math.erf(math.sqrt(2))}
    assert sum(count(asked_for("share", **words)).needed) == row("A01-003").exact
    listed_one = asked_for("share", parts=listed(3200), **words)
    assert sum(count(listed_one).needed) == row("A01-004").exact


@pytest.mark.parametrize("interval", ["two-sided", "upper-limit"])
def test_exact_interval_keeps_its_margin_and_needs_more_than_the_formula(interval: str) -> None:
    """Definition of the smallest n; the exact interval is the wider one."""
    asked = asked_for("share", expected=0.2, margin=0.08, interval=interval)
    (n,) = count(asked).needed
    reach = [expected_reach(0.2, m, confidence=0.95, kind=interval) for m in (n, n - 1)]
    assert reach[0] <= 0.08 < reach[1]
    assert n > amount(count(asked), "n_normal")
    assert amount(bought(asked, (n,)), "expected_reach") == reach[0]


def test_normal_reach_is_the_formula_the_other_way_round() -> None:
    """Closed form: z √(p q (N − n)/((N − 1) n))."""
    asked = asked_for("share", parts=listed(500), expected=0.3, margin=0.05, method="normal")
    expected = 1.959964 * math.sqrt(0.3 * 0.7 * 300 / (499 * 200))
    assert amount(bought(asked, (200,)), "expected_reach") == pytest.approx(expected, rel=1e-6)


def test_unstated_share_is_taken_as_one_half_and_said() -> None:
    """One half asks for the most, and nobody chose it."""
    found = count(asked_for("share", margin=0.1))
    assert any("50 % was taken" in line for line in found.finding.warnings)
    given = count(asked_for("share", margin=0.1, expected=0.5))
    assert found.needed == given.needed
    assert not given.finding.warnings


def test_margin_wider_than_the_share_is_told() -> None:
    """An interval of 5 ± 10 points is no use as such."""
    found = count(asked_for("share", margin=0.1, expected=0.05))
    assert any("wider than the share expected" in line for line in found.finding.warnings)


@pytest.mark.parametrize(
    ("stated", "expected", "alternative"), [(0.3, 0.15, "less"), (0.1, 0.25, "greater")]
)
def test_comparison_takes_the_first_n_whose_exact_test_is_strong_enough(
    stated: float, expected: float, alternative: str
) -> None:
    """Brute force: scipy.stats.binomtest for every count at n, and no smaller n will do."""

    def power(n: int) -> float:
        counts = [
            k
            for k in range(n + 1)
            if stats.binomtest(k, n, stated, alternative=alternative).pvalue <= 0.05
        ]
        return float(stats.binom.pmf(counts, n, expected).sum())

    asked = asked_for("share", compare_with=stated, expected=expected, alpha=0.05, beta=0.2)
    (n,) = count(asked).needed
    assert power(n) >= 0.8
    assert all(power(m) < 0.8 for m in range(2, n))
    assert amount(count(asked), "power") == pytest.approx(power(n))
    assert amount(count(asked), "alpha") <= 0.05
    side = "below 30 %" if alternative == "less" else "above 10 %"
    assert side in count(asked).finding.answer


def test_comparison_on_a_list_is_hypergeometric() -> None:
    """Definition with scipy: 12 of 40 spoil, 4 expected."""
    asked = asked_for(
        "share", parts=listed(40), compare_with=0.3, expected=0.1, alpha=0.05, beta=0.2
    )
    found = count(asked)
    (n,), decides = found.needed, amount(found, "decides_at")
    assert stats.hypergeom.cdf(decides, 40, 12, n) <= 0.05
    assert stats.hypergeom.cdf(decides, 40, 4, n) >= 0.8


def test_too_few_results_cannot_show_it_however_they_fall() -> None:
    """0 of 5 has a chance of 0.7⁵ = 17 % where 30 % have it."""
    asked = asked_for("share", compare_with=0.3, expected=0.1, alpha=0.05, beta=0.2)
    found = bought(asked, (5,))
    assert "5 results cannot show the share above 150 mg/kg to be below 30 %" in found.answer
    assert amount(found, "power") == 0.0


def test_whole_list_is_known() -> None:
    """No interval about a share that was counted."""
    found = bought(asked_for("share", parts=listed(22), margin=0.1), (22,))
    assert "All 22 units of the list are looked at" in found.answer
    assert amount(found, "expected_reach") == 0.0


def test_strata_are_told_how_they_were_counted() -> None:
    """A formula for one sample is not silent about strata."""
    parts = (Part("a", 0.5, 20.0), Part("b", 0.5, 20.0))
    found = count(asked_for("share", parts=parts, margin=0.1, expected=0.5))
    assert any("one simple random sample" in line for line in found.finding.assumptions)


def test_margins_out_of_reach_are_refused() -> None:
    """One line, with the margin."""
    with pytest.raises(DesignError, match=r"about a share of .* asks for more"):
        count(asked_for("share", margin=0.0001))
    near = asked_for(
        "share", parts=listed(10), compare_with=0.3, expected=0.29, alpha=0.05, beta=0.2
    )
    with pytest.raises(DesignError, match="cannot be told from one with 3"):
        count(near)


UNEVEN = (Part("plain", 0.9, 1.0), Part("dump", 0.1, 1.0))


def test_strata_out_of_proportion_keep_the_margin_once_weighted() -> None:
    """Brute force: the weighted share of 40 000 made campaigns scatters as its margin says."""
    even = asked_for("share", expected=0.2, margin=0.08, method="normal")
    asked = asked_for("share", parts=UNEVEN, expected=0.2, margin=0.08, method="normal",
                      allocation="equal-precision")  # fmt: skip
    found = count(asked)
    assert sum(found.needed) > 1.5 * sum(count(even).needed)
    campaigns = 40_000
    rng = np.random.default_rng(71)
    weighted = sum(
        part.weight * rng.binomial(n, 0.2, campaigns) / n
        for part, n in zip(UNEVEN, found.needed, strict=True)
    )
    half_width = 1.959964 * float(np.std(weighted))
    assert half_width == pytest.approx(
        amount(found, "expected_reach"), rel=4 / math.sqrt(2 * campaigns) + 0.005
    )
    assert half_width <= 0.08 * (1 + 4 / math.sqrt(2 * campaigns))
    assert f"counted together these {sum(found.needed)} mislead" in found.finding.warnings[0]


def test_strata_in_proportion_are_worth_their_number_and_a_whole_list_all_of_it() -> None:
    """Invariants: nothing is lost in proportion, and a list that is looked at is known."""
    asked = asked_for("share", parts=UNEVEN, expected=0.2, margin=0.08)
    assert sum(count(asked).needed) == 105
    assert worth(asked, (90, 10)) == 100
    strata = asked_for("share", parts=listed(60, 40), expected=0.2, margin=0.08)
    assert worth(strata, (60, 40)) == 100
    assert worth(strata, (30, 20)) == 50


@pytest.mark.parametrize(
    ("words", "reach"),
    [
        ({"expected": 0.2, "margin": 0.25}, 24.2),
        ({"expected": 0.02, "margin": 0.03, "confidence": 0.9, "interval": "upper-limit"}, 2.98),
    ],
)
def test_reach_that_is_expected_is_the_one_that_the_number_buys(words, reach) -> None:
    """Sum over all counts of the exact limits by scipy's beta quantiles, not the margin asked."""
    found = count(asked_for("share", **words))
    (n,) = found.needed
    tail = (1 - words.get("confidence", 0.95)) / (2 if "interval" not in words else 1)
    k = np.arange(n + 1)
    upper = np.where(k == n, 1.0, stats.beta.ppf(1 - tail, k + 1, np.maximum(n - k, 1)))
    lower = np.where(k == 0, 0.0, stats.beta.ppf(tail, np.maximum(k, 1), n - k + 1))
    chances = stats.binom.pmf(k, n, words["expected"])
    width = (upper - lower) / 2 if "interval" not in words else upper - words["expected"]
    assert 100 * float(chances @ width) == pytest.approx(reach, abs=0.05 if reach > 10 else 0.005)
    assert f"{reach} points" in found.finding.answer


def test_upper_limit_that_stays_between_the_ends_is_not_warned_about() -> None:
    """An upper limit expected at 5 % runs into neither 0 nor 100 %; a lower one there would."""
    words = {"expected": 0.02, "margin": 0.03, "confidence": 0.9}
    said = count(asked_for("share", interval="upper-limit", **words)).finding.warnings
    assert not any("run into" in line for line in said)
    said = count(asked_for("share", expected=0.98, margin=0.03, interval="upper-limit")).finding
    assert any("run into it" in line for line in said.warnings)


@pytest.mark.parametrize(
    ("stated", "expected", "units", "edge", "words"),
    [
        (0.02, 0.10, 90, 1, "above 2 %, that is more than 1 of 90; if 9 of 90 exceed it"),
        (0.12, 0.02, 90, 11, "below 12 %, that is fewer than 11 of 90; if 2 of 90 exceed it"),
    ],
)
def test_comparison_on_a_list_keeps_alpha_at_the_whole_unit_next_to_the_stated_share(
    stated, expected, units, edge, words
) -> None:
    """Hypergeometric of scipy, where as many units have it as the stated share still allows."""
    found = count(
        asked_for("share", parts=listed(units), compare_with=stated, expected=expected,
                  alpha=0.05, beta=0.1)
    )  # fmt: skip
    (n,) = found.needed
    decides = amount(found, "decides_at")
    if expected > stated:
        wrong = stats.hypergeom.sf(decides - 1, units, edge, n)
        right = stats.hypergeom.sf(decides - 1, units, round(expected * units), n)
    else:
        wrong = stats.hypergeom.cdf(decides, units, edge, n)
        right = stats.hypergeom.cdf(decides, units, round(expected * units), n)
    assert amount(found, "alpha") == pytest.approx(wrong, abs=1e-12)
    assert amount(found, "alpha") <= 0.05
    assert amount(found, "power") == pytest.approx(right)
    assert words in found.finding.answer
    assert found.finding.picture is not None
    for x in found.finding.picture.series[0].x:
        assert x * units / 100 == pytest.approx(round(x * units / 100))


def test_comparison_with_strata_out_of_proportion_is_refused() -> None:
    """A count of results says nothing of a share that has to be weighted."""
    words = {"compare_with": 0.3, "expected": 0.15, "alpha": 0.05, "beta": 0.2}
    asked = asked_for("share", parts=UNEVEN, allocation="equal-precision", **words)
    with pytest.raises(DesignError, match='write allocation = "proportional"'):
        count(asked)
