"""How many results tell a mean from a level: exact t, its power and its inverses.

A change between two rounds at the same places is the same question about the differences.
"""

import math

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import invert, normal_quantile, student_quantile
from fieldplan.stats.noncentral_t import noncentral_t_beyond
from fieldplan.stats.precision import MOST, smallest, standard_error, whole
from fieldplan.stats.risks import check_difference, check_risks, one_sided_level


def guidance_n(
    difference: float, sigma: float, *, alpha: float, beta: float, sides: int = 1
) -> float:
    """Give the guidance formula's number of results, unrounded.

    Parameters
    ----------
    difference, sigma : float
        Width of the gray region and standard deviation of single results, same unit, above 0.
    alpha, beta : float
        Chances of the two wrong decisions.
    sides : int
        1, or 2 where a departure either way counts.

    Notes
    -----
    (z_α + z_β)² σ² / Δ² + z_α² / 2: EPA QA/G-9 (2000), section 3.2.1. The last term stands in for
    Student's t and brings the number within one of the exact one for one side.

    Examples
    --------
    >>> round(guidance_n(10.0, 10.41, alpha=0.1, beta=0.2), 1)
    5.7
    """
    z = normal_quantile(1 - one_sided_level(alpha, sides))
    return normal_n(difference, sigma, alpha=alpha, beta=beta, sides=sides) + z * z / 2


def normal_n(
    difference: float, sigma: float, *, alpha: float, beta: float, sides: int = 1
) -> float:
    """Give (z_α + z_β)² σ² / Δ², unrounded: the number if sigma were known without error.

    Parameters
    ----------
    difference, sigma : float
        Width of the gray region and standard deviation of single results, same unit, above 0.
    alpha, beta : float
        Chances of the two wrong decisions.
    sides : int
        1, or 2 where a departure either way counts.

    Examples
    --------
    >>> round(normal_n(1.0, 1.0, alpha=0.05, beta=0.1), 2)
    8.56
    """
    check_risks(alpha, beta)
    check_difference(difference, sigma)
    z = normal_quantile(1 - one_sided_level(alpha, sides)) + normal_quantile(1 - beta)
    return (z * sigma / difference) ** 2


def power_at(shift: float, degrees_of_freedom: float, *, alpha: float, sides: int = 1) -> float:
    """Give the chance that a t test rejects, at a true distance in standard errors.

    Parameters
    ----------
    shift : float
        True distance from the level over the true standard error; negative on the side that
        the starting assumption allows.
    degrees_of_freedom : float
        At least 1; Satterthwaite's for strata.
    alpha : float
        Chance of rejecting at a distance of 0.
    sides : int
        1, or 2 where a departure either way counts.

    Examples
    --------
    >>> round(power_at(0.0, 9, alpha=0.05), 3), round(power_at(3.0, 9, alpha=0.05), 3)
    (0.05, 0.868)
    """
    limit = student_quantile(1 - one_sided_level(alpha, sides), degrees_of_freedom)
    power = noncentral_t_beyond(limit, degrees_of_freedom, shift)
    return power + noncentral_t_beyond(limit, degrees_of_freedom, -shift) if sides == 2 else power


def one_sample_power(
    difference: float,
    sigma: float,
    *,
    n: int,
    alpha: float,
    sides: int = 1,
    population: int | None = None,
) -> float:
    """Give the chance that n results show a mean to lie off a level.

    Parameters
    ----------
    difference, sigma : float
        True distance from the level and standard deviation of single results, same unit.
    n : int
        Results, at least 2.
    alpha : float
        Chance of the claim when the mean lies at the level.
    sides : int
        1: only this direction counts. 2: either way.
    population : int, optional
        N of a list.

    Notes
    -----
    Noncentral t with n − 1 degrees of freedom: exact for independent normal results.

    Examples
    --------
    >>> round(one_sample_power(0.2, 1.0, n=60, alpha=0.1, sides=2), 7)
    0.4555818
    """
    error = standard_error(sigma, n, population=population)
    if error == 0:
        reached = difference > 0 or (sides == 2 and difference != 0)
        return 1.0 if reached else 0.0
    return power_at(difference / error, n - 1, alpha=alpha, sides=sides)


def one_sample_n(
    difference: float,
    sigma: float,
    *,
    alpha: float,
    beta: float,
    sides: int = 1,
    population: int | None = None,
) -> int:
    """Count the results that keep both chances of a wrong decision.

    Parameters
    ----------
    difference, sigma : float
        Width of the gray region and standard deviation of single results, same unit, above 0.
        For a change at the same places: of the differences.
    alpha : float
        Chance of the claim when the mean lies at the level.
    beta : float
        Chance of missing it when the mean lies at the far edge of the gray region.
    sides : int
        1: only this direction counts. 2: either way.
    population : int, optional
        N of a list.

    Returns
    -------
    int
        The smallest n whose exact power is at least 1 − beta.

    Raises
    ------
    DesignError
        The chances, the difference or sigma cannot be had, or n is out of reach.

    Examples
    --------
    >>> one_sample_n(1.0, 1.0, alpha=0.05, beta=0.1)
    11
    >>> one_sample_n(1.0, 1.0, alpha=0.05, beta=0.1, population=12)
    6
    """
    plain = whole(normal_n(difference, sigma, alpha=alpha, beta=beta, sides=sides))

    def fits(n: int) -> bool:
        power = one_sample_power(
            difference, sigma, n=n, alpha=alpha, sides=sides, population=population
        )
        return power >= 1 - beta

    top = MOST if population is None else population
    low = 2 if population is not None else max(2, plain)
    return smallest(fits, min(low, top), top)


def smallest_shift(
    degrees_of_freedom: float, *, alpha: float, beta: float, sides: int = 1
) -> float:
    """Give the distance in standard errors that a t test shows with chance 1 − beta.

    Parameters
    ----------
    degrees_of_freedom : float
        At least 1; Satterthwaite's for strata.
    alpha, beta : float
        Chances of the two wrong decisions.
    sides : int
        1, or 2 where a departure either way counts.

    Examples
    --------
    >>> round(smallest_shift(9, alpha=0.05, beta=0.2), 3)
    2.697
    """
    check_risks(alpha, beta)
    level = one_sided_level(alpha, sides)
    near = student_quantile(1 - level, degrees_of_freedom) + normal_quantile(1 - beta)
    return invert(
        lambda shift: power_at(shift, degrees_of_freedom, alpha=alpha, sides=sides),
        1 - beta,
        0.0,
        max(near, 1.0),
    )


def shift_for_chance(chance: float, degrees_of_freedom: float, *, alpha: float) -> float:
    """Give the distance in standard errors at which a one-sided t test rejects so often.

    Parameters
    ----------
    chance : float
        Inside (0, 1); below alpha the distance is negative.
    degrees_of_freedom : float
        At least 1.
    alpha : float
        Chance of rejecting at a distance of 0.

    Examples
    --------
    >>> round(shift_for_chance(0.8, 9, alpha=0.05), 3)
    2.697
    >>> round(shift_for_chance(0.01, 9, alpha=0.05), 3)
    -0.733
    """
    if chance > alpha:
        return smallest_shift(degrees_of_freedom, alpha=alpha, beta=1 - chance)
    low = -1.0
    while power_at(low, degrees_of_freedom, alpha=alpha) >= chance:
        low *= 2
    return invert(lambda shift: power_at(shift, degrees_of_freedom, alpha=alpha), chance, low, 1.0)


def smallest_difference(
    sigma: float,
    n: int,
    *,
    alpha: float,
    beta: float,
    sides: int = 1,
    population: int | None = None,
) -> float:
    """Give the smallest distance from a level that n results show with chance 1 − beta.

    Parameters
    ----------
    sigma : float
        Standard deviation of single results, above 0.
    n : int
        Results, at least 2.
    alpha, beta : float
        Chances of the two wrong decisions.
    sides : int
        1, or 2 where a departure either way counts.
    population : int, optional
        N of a list.

    Returns
    -------
    float
        In the unit of sigma. A level minus it is the mean at which a campaign that starts from
        "above the level" comes out below it with chance 1 − beta.

    Examples
    --------
    >>> round(100 - smallest_difference(30.0, 20, alpha=0.05, beta=0.2), 1)  # 8 of 10 campaigns
    82.7
    """
    if n < 2:
        message = f"n is {n}; a t test needs at least 2 results."
        raise DesignError(message)
    error = standard_error(sigma, n, population=population)
    return error * smallest_shift(n - 1, alpha=alpha, beta=beta, sides=sides)


def mean_of_s(degrees_of_freedom: float) -> float:
    """Give c₄, the mean of a sample's standard deviation as a share of the true one.

    Notes
    -----
    √(2/ν) Γ((ν + 1)/2) / Γ(ν/2): exact for normal results; tables of control-chart factors print
    it as c₄.

    Examples
    --------
    >>> round(mean_of_s(9), 4)
    0.9727
    """
    known = degrees_of_freedom
    if math.isinf(known):
        return 1.0
    log = math.lgamma((known + 1) / 2) - math.lgamma(known / 2)
    return math.sqrt(2 / known) * math.exp(log)


def expected_margin(standard_error: float, degrees_of_freedom: float, *, alpha: float) -> float:
    """Give the distance from mean to one-sided limit that is expected, in the unit of the error.

    Parameters
    ----------
    standard_error : float
        True standard error of the mean.
    degrees_of_freedom : float
        That the campaign's own variance will have.
    alpha : float
        1 − confidence of the limit.

    Notes
    -----
    E[t s / √n] = t c₄ σ / √n.

    Examples
    --------
    >>> round(expected_margin(30.0 / 20**0.5, 19, alpha=0.05), 2)
    11.45
    """
    limit = student_quantile(1 - one_sided_level(alpha, 1), degrees_of_freedom)
    return limit * mean_of_s(degrees_of_freedom) * standard_error


def sigma_of_change(first: float, second: float, *, correlation: float) -> float:
    """Give the standard deviation of differences between two rounds at the same places.

    Parameters
    ----------
    first, second : float
        Standard deviations of single results in each round, above 0.
    correlation : float
        Between the two results of a place, inside [-1, 1].

    Notes
    -----
    √(σ₁² + σ₂² − 2 ρ σ₁ σ₂).

    Examples
    --------
    >>> round(sigma_of_change(10.0, 8.0, correlation=0.6), 2)
    8.25
    """
    if not -1 <= correlation <= 1:
        message = f"the correlation between rounds is {correlation!r}; it lies from -1 to 1."
        raise DesignError(message)
    return math.sqrt(first**2 + second**2 - 2 * correlation * first * second)
