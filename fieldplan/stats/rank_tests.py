"""How many results the tests that need no shape ask for: sign and rank sum."""

import math

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import beta_share, normal_quantile, normal_share
from fieldplan.stats.precision import whole
from fieldplan.stats.rank_moments import chance_beyond, pair_in_order
from fieldplan.stats.risks import check_difference, check_risks, one_sided_level

_SCANNED_UP_TO, _EXACT_UP_TO = 5000, 20_000

OVERAGE = 0.2
"""Share that the guidance adds for lost and unusable results: NUREG-1575 (2000), section 5.5.2."""


def sign_share(difference: float, sigma: float) -> float:
    """Give the chance that one result lies on the right side of the level.

    Parameters
    ----------
    difference, sigma : float
        Distance of the true mean from the level and standard deviation of single results.

    Notes
    -----
    Φ(Δ/σ) for normal results: NUREG-1575 (2000), table 5.4.

    Examples
    --------
    >>> round(sign_share(1.0, 2.0), 6)
    0.691462
    """
    check_difference(difference, sigma)
    return normal_share(difference / sigma)


def rank_sum_share(difference: float, sigma: float) -> float:
    """Give the chance that a result of the one population exceeds a result of the other.

    Parameters
    ----------
    difference, sigma : float
        Distance between the two means and common standard deviation of single results.

    Notes
    -----
    Φ(Δ/(σ√2)) for normal results: NUREG-1575 (2000), table 5.1, which prints 0.707 for 1/√2.

    Examples
    --------
    >>> round(rank_sum_share(1.0, 2.0), 4)
    0.6382
    """
    check_difference(difference, sigma)
    return normal_share(difference / (sigma * math.sqrt(2)))


def sign_formula_n(share: float, *, alpha: float, beta: float) -> float:
    """Give the published number of results for the sign test, unrounded and without overage.

    Parameters
    ----------
    share : float
        Chance that one result lies on the right side of the level, above 0.5.
    alpha, beta : float
        Chances of the two wrong decisions.

    Notes
    -----
    (z_α + z_β)² / (4 (p − 0.5)²): NUREG-1575 (2000), equation 5-2.

    Examples
    --------
    >>> round(sign_formula_n(0.841345, alpha=0.05, beta=0.05), 2)
    23.22
    """
    check_risks(alpha, beta)
    _check_share(share)
    z = normal_quantile(1 - alpha) + normal_quantile(1 - beta)
    return (z / (2 * (share - 0.5))) ** 2


def sign_planned_n(share: float, *, alpha: float, beta: float, overage: float = OVERAGE) -> int:
    """Count the results to plan for the sign test, by the published rule.

    Parameters
    ----------
    share : float
        Chance that one result lies on the right side of the level, above 0.5.
    alpha, beta : float
        Chances of the two wrong decisions.
    overage : float
        Share added for lost and unusable results.

    Notes
    -----
    Rounded up before the overage is added and again after it: all of NUREG-1575 (2000), table 5.5,
    follows this rule.

    Examples
    --------
    >>> sign_planned_n(0.841345, alpha=0.05, beta=0.05)
    29
    """
    return whole((1 + overage) * whole(sign_formula_n(share, alpha=alpha, beta=beta)))


def rank_sum_formula_n(share: float, *, alpha: float, beta: float) -> float:
    """Give the published number of results per population for the rank sum test, unrounded.

    Parameters
    ----------
    share : float
        Chance that a result of the one exceeds a result of the other, above 0.5.
    alpha, beta : float
        Chances of the two wrong decisions.

    Notes
    -----
    (z_α + z_β)² / (6 (P − 0.5)²), half of N in NUREG-1575 (2000), equation 5-1.

    Examples
    --------
    >>> round(rank_sum_formula_n(0.76025, alpha=0.05, beta=0.1), 2)
    21.07
    """
    check_risks(alpha, beta)
    _check_share(share)
    z = normal_quantile(1 - alpha) + normal_quantile(1 - beta)
    return (z / (share - 0.5)) ** 2 / 6


def rank_sum_planned_n(share: float, *, alpha: float, beta: float, overage: float = OVERAGE) -> int:
    """Count the results to plan in each population for the rank sum test, by the published rule.

    Parameters
    ----------
    share : float
        Chance that a result of the one exceeds a result of the other, above 0.5.
    alpha, beta : float
        Chances of the two wrong decisions.
    overage : float
        Share added for lost and unusable results.

    Notes
    -----
    Rounded up once, after the overage is added: NUREG-1575 (2000), table 5.3. Its table for the
    sign test rounds twice.

    Examples
    --------
    >>> rank_sum_planned_n(0.76025, alpha=0.05, beta=0.1)
    26
    """
    return whole((1 + overage) * rank_sum_formula_n(share, alpha=alpha, beta=beta))


def sign_test_count(n: int, *, alpha: float) -> int:
    """Give the number of results on the right side from which the sign test decides.

    Parameters
    ----------
    n : int
        Results, none of them equal to the level.
    alpha : float
        Largest chance of the claim when half of the population lies on either side.

    Returns
    -------
    int
        The smallest count c with P(Binomial(n, ½) ≥ c) ≤ alpha; n + 1 where none is.

    Examples
    --------
    >>> sign_test_count(20, alpha=0.05)
    15
    """
    level = one_sided_level(alpha, 1)
    guess = math.floor(n / 2 + normal_quantile(1 - level) * math.sqrt(n) / 2)
    count = min(max(guess, 0), n + 1)
    while count <= n and _binomial_from(count, n, 0.5) > level:
        count += 1
    while count > 0 and _binomial_from(count - 1, n, 0.5) <= level:
        count -= 1
    return count


def sign_test_power(share: float, n: int, *, alpha: float) -> float:
    """Give the exact chance that the sign test makes the claim.

    Parameters
    ----------
    share : float
        Chance that one result lies on the right side of the level.
    n : int
        Results.
    alpha : float
        Largest chance of the claim when half of the population lies on either side.

    Notes
    -----
    Binomial: exact whatever the shape. It saws up and down with n, as the count is whole.

    Examples
    --------
    >>> round(sign_test_power(0.8, 20, alpha=0.05), 3)
    0.804
    """
    return _binomial_from(sign_test_count(n, alpha=alpha), n, share)


def sign_test_ratio(chance: float, *, n: int, alpha: float) -> float | None:
    """Give the distance from the level at which the sign test makes the claim with this chance.

    Parameters
    ----------
    chance : float
        Inside (0, 1).
    n : int
        Results.
    alpha : float
        Largest chance of the claim when half of the population lies on either side.

    Returns
    -------
    float or None
        In standard deviations of single results, normal ones; None where so few results never
        make the claim.

    Examples
    --------
    >>> round(sign_test_ratio(0.8, n=20, alpha=0.05), 3)
    0.837
    """
    if sign_test_count(n, alpha=alpha) > n:
        return None
    low, high = -8.0, 8.0
    while high - low > 1e-12:
        middle = (low + high) / 2
        if sign_test_power(normal_share(middle), n, alpha=alpha) < chance:
            low = middle
        else:
            high = middle
    return high


def sign_test_n(share: float, *, alpha: float, beta: float) -> int:
    """Count the results from which on the sign test keeps both chances, exactly.

    Parameters
    ----------
    share : float
        Chance that one result lies on the right side of the level, above 0.5.
    alpha, beta : float
        Chances of the two wrong decisions.

    Returns
    -------
    int
        The smallest n such that it and every larger number has power 1 − beta: one result more
        than planned shall not lower the chance below what was asked. Above 5000 by the normal
        curve at the foot of the saw, within 1 in 1000.

    Examples
    --------
    >>> sign_test_n(0.841345, alpha=0.05, beta=0.05)
    21
    """
    plain = whole(sign_formula_n(share, alpha=alpha, beta=beta))
    if plain > _SCANNED_UP_TO:
        return whole(_lasting_by_curve(share, alpha, beta))
    # The saw is one count high, and two counts are worth 2 / (share − ½) results.
    n = plain + math.ceil(4 / (share - 0.5)) + 16
    while sign_test_power(share, n, alpha=alpha) < 1 - beta:
        n += max(1, n // 8)
    while n > 1 and sign_test_power(share, n - 1, alpha=alpha) >= 1 - beta:
        n -= 1
    return n


def rank_sum_power(
    difference: float, sigma: float, *, first: int, second: int, alpha: float
) -> float:
    """Give the chance that the rank sum test finds a shift, for normal results.

    Parameters
    ----------
    difference, sigma : float
        Distance between the two means and common standard deviation of single results.
    first, second : int
        Results in each population.
    alpha : float
        Chance of the claim when the populations are alike.

    Notes
    -----
    Exact mean and variance of the number of pairs in order, then the normal curve with a
    continuity correction: Lehmann (1975), Nonparametrics, section 2.3. Some 0.03 off at 8 results
    in each, 0.01 at 20.

    Examples
    --------
    >>> round(rank_sum_power(1.0, 1.0, first=22, second=22, alpha=0.05), 2)
    0.94
    """
    ratio = difference / sigma
    share, both = normal_share(ratio / math.sqrt(2)), pair_in_order(ratio)
    pairs = first * second
    spread = math.sqrt(pairs * (first + second + 1) / 12)
    count = math.ceil(pairs / 2 + normal_quantile(1 - one_sided_level(alpha, 1)) * spread + 0.5)
    variance = pairs * (share * (1 - share) + (first + second - 2) * (both - share**2))
    return 0.0 if count > pairs else chance_beyond(count, pairs * share, variance)


def _lasting_by_curve(share: float, alpha: float, beta: float) -> float:
    """Solve (p − ½) n − (z_α/2 + z_β √(p q)) √n − 1 = 0: the count rounded up by a whole one."""
    edge = normal_quantile(1 - alpha) / 2
    edge += normal_quantile(1 - beta) * math.sqrt(share * (1 - share))
    over = share - 0.5
    return float(((edge + math.sqrt(edge**2 + 4 * over)) / (2 * over)) ** 2)


def _check_share(share: float) -> None:
    if not 0.5 < share <= 1:
        message = (
            f"the chance of a result on the right side is {share!r}; it must be above 0.5, or no "
            "number of results can tell."
        )
        raise DesignError(message)


def _binomial_from(count: int, n: int, share: float) -> float:
    """Give P(Binomial(n, share) ≥ count); by the normal curve where n is very large."""
    if count <= 0:
        return 1.0
    if n > _EXACT_UP_TO and 0 < share < 1:
        return chance_beyond(count, n * share, n * share * (1 - share))
    return 0.0 if count > n else beta_share(share, count, n - count + 1)
