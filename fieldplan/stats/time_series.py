"""What visits in a row are worth when each resembles the one before it."""

import math
from collections.abc import Sequence

from fieldplan.base.errors import DesignError
from fieldplan.stats.precision import MOST, smallest, whole

LARGEST_RHO = 0.99
"""Above this a series moves so slowly that its visits count as one."""


def check_rho(rho: float) -> None:
    """Refuse a correlation that no series of visits can have.

    Parameters
    ----------
    rho : float

    Raises
    ------
    DesignError
        Not a number from -0.99 to 0.99.
    """
    if not -LARGEST_RHO <= rho <= LARGEST_RHO:
        message = (
            f"the correlation between visits is {rho!r}; it must be from -{LARGEST_RHO} to "
            f"{LARGEST_RHO}, e.g. 0.35."
        )
        raise DesignError(message)


def inflation(rho: float) -> float:
    """Give how many correlated visits are worth one independent visit, in a long series.

    Parameters
    ----------
    rho : float
        Correlation of neighbouring visits.

    Returns
    -------
    float

    Notes
    -----
    (1 + ρ)/(1 − ρ) for correlations ρ, ρ², ρ³ … at 1, 2, 3 … visits apart: Bayley & Hammersley
    (1946), Supplement to the JRSS 8:184. It neglects the two ends of the series, so it asks for a
    visit or two more than :func:`visits_needed`.

    Examples
    --------
    >>> round(inflation(0.35), 4)
    2.0769
    """
    check_rho(rho)
    return (1 + rho) / (1 - rho)


def effective_number(n: float, rho: float) -> float:
    """Give the number of independent visits that know the long-run mean as well as n visits.

    Parameters
    ----------
    n : float
        Equally spaced visits, at least 1.
    rho : float
        Correlation of neighbouring visits.

    Returns
    -------
    float
        The variance of their mean is σ² over this number; n itself when rho is 0.

    Raises
    ------
    DesignError
        n below 1, or no possible rho.

    Notes
    -----
    n / (1 + 2 Σ (1 − k/n) ρᵏ), k = 1 … n − 1, with the sum in closed form: Bayley & Hammersley
    (1946). Exact for correlations ρᵏ.

    Examples
    --------
    >>> round(effective_number(74, 0.35), 2), effective_number(2, 0.5)
    (36.02, 1.3333333333333333)
    """
    check_rho(rho)
    if not n >= 1:
        message = f"an effective number needs 1 visit or more, not {n!r}."
        raise DesignError(message)
    faded = abs(rho) ** n * (-1 if rho < 0 and n % 2 == 1 else 1)
    ends = 2 * rho * (1 - faded) / (n * (1 - rho) * (1 - rho))
    return float(n / ((1 + rho) / (1 - rho) - ends))


def effective_number_of_lags(n: int, correlations: Sequence[float]) -> float:
    """Give the effective number of n visits from a correlation for each distance in visits.

    Parameters
    ----------
    n : int
        Equally spaced visits, at least 1.
    correlations : sequence of float
        At 1, 2, 3 … visits apart; 0 beyond its end.

    Returns
    -------
    float

    Raises
    ------
    DesignError
        Correlations that no series can have: the variance of its mean would not be above 0.

    Examples
    --------
    >>> round(effective_number_of_lags(12, [0.5, 0.25]), 3)
    5.143
    """
    total = 1 + 2 * math.fsum(
        (1 - k / n) * rho for k, rho in enumerate(correlations[: max(n - 1, 0)], start=1)
    )
    if n < 1 or total <= 0 or any(abs(rho) > 1 for rho in correlations):
        message = (
            f"{n} visits with the correlations {', '.join(f'{rho:g}' for rho in correlations)} "
            "cannot be: their mean would have no variance left. Check the correlations."
        )
        raise DesignError(message)
    return n / total


def effective_number_at(days: Sequence[float], rho: float, *, spacing_days: float) -> float:
    """Give the effective number of visits on given days, evenly spaced or not.

    Parameters
    ----------
    days : sequence of float
        When visits were, or will be, made; any order.
    rho : float
        Correlation of two visits ``spacing_days`` apart, from 0 up to 0.99.
    spacing_days : float
        Above 0.

    Returns
    -------
    float
        n² / ΣΣ ρ^(distance in days / spacing); visits of one day count once.

    Examples
    --------
    >>> year = [0, 30, 60, 365, 395, 425]
    >>> round(effective_number_at(year, 0.5, spacing_days=30), 3)
    3.271
    >>> effective_number_at([5, 5], 0.5, spacing_days=30)
    1.0
    """
    if not days:
        message = "an effective number needs 1 visit or more, not 0."
        raise DesignError(message)
    total = mean_correlation(days, days, rho, spacing_days=spacing_days)
    return 1 / total


def mean_correlation(
    first: Sequence[float], second: Sequence[float], rho: float, *, spacing_days: float
) -> float:
    """Average the correlation over all pairs of a visit of one group and a visit of another.

    Parameters
    ----------
    first, second : sequence of float
        Days, at least one each.
    rho : float
        Correlation of two visits ``spacing_days`` apart, from 0 up to 0.99.
    spacing_days : float
        Above 0.

    Returns
    -------
    float

    Examples
    --------
    >>> mean_correlation([0.0], [30.0, 60.0], 0.5, spacing_days=30)
    0.375
    """
    pairs = [rho_at(rho, from_days=spacing_days, to_days=abs(a - b)) for a in first for b in second]
    return math.fsum(pairs) / len(pairs)


def rho_at(rho: float, *, from_days: float, to_days: float) -> float:
    """Carry a correlation over to visits closer together or farther apart.

    Parameters
    ----------
    rho : float
        Correlation of two visits ``from_days`` apart, from 0 up to 0.99.
    from_days : float
        Above 0.
    to_days : float
        0 or more.

    Returns
    -------
    float
        ρ^(to/from): the correlation fades by the same share every day.

    Raises
    ------
    DesignError
        A negative rho at another spacing, or a spacing that is none.

    Examples
    --------
    >>> round(rho_at(0.35, from_days=30, to_days=90), 4), rho_at(0.35, from_days=30, to_days=0)
    (0.0429, 1.0)
    """
    check_rho(rho)
    if not (0 < from_days < math.inf and 0 <= to_days < math.inf):
        message = (
            f"visits {from_days!r} and {to_days!r} days apart cannot be compared; days between "
            "visits must be above 0."
        )
        raise DesignError(message)
    if from_days == to_days:
        return rho
    if rho < 0:
        message = (
            f"a correlation of {rho:g} between visits {from_days:g} days apart says nothing about "
            f"visits {to_days:g} days apart; only 0 or a positive one can be carried over."
        )
        raise DesignError(message)
    return math.pow(rho, to_days / from_days)


def visits_needed(independent: float, rho: float) -> int:
    """Count the equally spaced visits that are worth so many independent ones.

    Parameters
    ----------
    independent : float
        Number of independent visits that the target needs; need not be whole. Above 0.
    rho : float
        Correlation of neighbouring visits.

    Returns
    -------
    int
        The smallest n with an effective number of at least ``independent``.

    Raises
    ------
    DesignError
        No independent visits asked for, or more visits than can be sized.

    Examples
    --------
    >>> visits_needed(36, 0.35), visits_needed(36, 0.0), visits_needed(36, -0.2)
    (74, 36, 25)
    """
    _check_independent(independent)
    check_rho(rho)
    n = smallest(lambda k: effective_number(k, rho) >= independent * (1 - 1e-9), 1, MOST + 1)
    if n > MOST:
        message = (
            f"{independent:g} independent visits at a correlation of {rho:g} are more than "
            f"{MOST:,} visits; space the visits farther apart."
        )
        raise DesignError(message)
    return n


def visits_by_inflation(independent: float, rho: float) -> int:
    """Count visits by the usual factor (1 + ρ)/(1 − ρ), ends of the series neglected.

    Parameters
    ----------
    independent : float
        Number of independent visits that the target needs. Above 0.
    rho : float
        Correlation of neighbouring visits.

    Returns
    -------
    int
        The smallest whole number not below ``independent`` times the factor.

    Examples
    --------
    >>> visits_by_inflation(36, 0.35)
    75
    """
    _check_independent(independent)
    return whole(independent * inflation(rho))


def _check_independent(independent: float) -> None:
    if not 0 < independent < math.inf:
        message = f"visits cannot be worth {independent!r} independent ones; ask for 1 or more."
        raise DesignError(message)


def sigma_of_series(sd: float, n: int, rho: float) -> float:
    """Give sigma from the s of visits in a row, which shows too little of it.

    Parameters
    ----------
    sd : float
        s of n equally spaced visits, divisor n − 1.
    n : int
        At least 2.
    rho : float
        Correlation of neighbouring visits.

    Returns
    -------
    float

    Notes
    -----
    E(s²) = σ² n (1 − 1/n') / (n − 1) with n' the effective number: visits that resemble each
    other share part of their distance to the long-run mean.

    Examples
    --------
    >>> round(sigma_of_series(10.0, 12, 0.35), 3)
    10.456
    """
    kept = n * (1 - 1 / effective_number(n, rho)) / (n - 1)
    return sd / math.sqrt(kept)


def results_behind_sigma(n: int, rho: float) -> float:
    """Give how many independent visits know sigma as well as n visits in a row.

    Parameters
    ----------
    n : int
        Equally spaced visits.
    rho : float
        Correlation of neighbouring visits.

    Returns
    -------
    float
        Never above n.

    Notes
    -----
    n (1 − ρ²)/(1 + ρ²), a long series of normal values: Bayley & Hammersley (1946). The squares
    of correlated values are correlated by ρ² only, so sigma suffers less than the mean.

    Examples
    --------
    >>> round(results_behind_sigma(36, 0.35), 1)
    28.1
    """
    check_rho(rho)
    return n * (1 - rho * rho) / (1 + rho * rho)
