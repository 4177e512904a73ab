"""Power of t tests against statsmodels, which reckons them by another library's noncentral t."""

import pytest

from fieldplan.stats.power import one_sample_n, one_sample_power
from fieldplan.stats.two_sample_power import n_for_pooled, pooled_power

pytestmark = pytest.mark.oracle

SIDES = [(1, "larger"), (2, "two-sided")]


@pytest.mark.parametrize(("sides", "alternative"), SIDES)
@pytest.mark.parametrize("ratio", [0.2, 0.5, 1.0])
@pytest.mark.parametrize("n", [2, 5, 12, 80])
def test_power_of_one_mean(n: int, ratio: float, sides: int, alternative: str) -> None:
    """Source: statsmodels.stats.power.TTestPower."""
    from statsmodels.stats.power import TTestPower

    expected = TTestPower().power(ratio, n, 0.05, alternative=alternative)
    ours = one_sample_power(ratio, 1.0, n=n, alpha=0.05, sides=sides)
    assert ours == pytest.approx(float(expected), abs=1e-8)


@pytest.mark.parametrize(("sides", "alternative"), SIDES)
@pytest.mark.parametrize("ratio", [0.2, 0.5, 1.0])
@pytest.mark.parametrize("groups", [(3, 3), (8, 20), (40, 25)])
def test_power_of_two_means(
    groups: tuple[int, int], ratio: float, sides: int, alternative: str
) -> None:
    """Source: statsmodels.stats.power.TTestIndPower, groups of unequal size among them."""
    from statsmodels.stats.power import TTestIndPower

    expected = TTestIndPower().power(
        ratio, groups[0], 0.05, ratio=groups[1] / groups[0], alternative=alternative
    )
    ours = pooled_power(ratio, 1.0, first=groups[0], second=groups[1], alpha=0.05, sides=sides)
    assert ours == pytest.approx(float(expected), abs=1e-8)


@pytest.mark.parametrize("beta", [0.05, 0.2])
@pytest.mark.parametrize("alpha", [0.01, 0.1])
@pytest.mark.parametrize("ratio", [0.3, 0.8, 1.5])
def test_numbers_are_the_first_that_statsmodels_lets_pass(
    ratio: float, alpha: float, beta: float
) -> None:
    """Source: the same; n has the power and n − 1 has not."""
    from statsmodels.stats.power import TTestIndPower, TTestPower

    n = one_sample_n(ratio, 1.0, alpha=alpha, beta=beta)
    one = [float(TTestPower().power(ratio, k, alpha, alternative="larger")) for k in (n - 1, n)]
    assert one[0] < 1 - beta <= one[1]
    first, second = n_for_pooled(ratio, 1.0, alpha=alpha, beta=beta)
    assert first == second
    two = [
        float(TTestIndPower().power(ratio, k, alpha, alternative="larger"))
        for k in (first - 1, first)
    ]
    assert two[0] < 1 - beta <= two[1]
