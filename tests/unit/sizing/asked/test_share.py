"""A share: to within a margin, and told from a stated one."""

import math

import pytest
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.sizing.asked.share import bought, count
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
