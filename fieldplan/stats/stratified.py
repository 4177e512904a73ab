"""The mean of a population in parts: its variance before and after the results."""

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray

from fieldplan.base.errors import DesignError

Numbers = NDArray[np.float64]


def sampled_shares(counts: ArrayLike, populations: Sequence[int | None]) -> Numbers:
    """Give n/N for every stratum, 0 where the population is endless.

    Parameters
    ----------
    counts : array_like, shape (h,)
        Results per stratum.
    populations : sequence of (int or None), length h
        N of a list; None for an area.

    Returns
    -------
    ndarray, shape (h,)

    Examples
    --------
    >>> sampled_shares([8, 5], [14, None]).round(3).tolist()
    [0.571, 0.0]
    """
    numbers = np.asarray(counts, dtype=float)
    sizes = np.array([math.inf if size is None else float(size) for size in populations])
    if (numbers > sizes).any():
        at = int(np.argmax(numbers > sizes))
        message = f"{numbers[at]:g} results cannot come from a list of {sizes[at]:g}."
        raise DesignError(message)
    return numbers / sizes


def predicted_variance(
    weights: ArrayLike,
    sigmas: ArrayLike,
    counts: ArrayLike,
    populations: Sequence[int | None] | None = None,
) -> float:
    """Predict the variance of a stratified mean before any result.

    Parameters
    ----------
    weights, sigmas : array_like, shape (h,)
        Shares of the population (sum 1) and standard deviations of single results.
    counts : array_like, shape (h,)
        Results per stratum, each above 0; need not be whole.
    populations : sequence of (int or None), length h, optional
        N of a list; None for an area.

    Returns
    -------
    float
        In the unit squared.

    Notes
    -----
    Σ W² σ² (1 − n/N) / n: Cochran (1977), Sampling Techniques, 3rd ed., theorem 5.3.

    Examples
    --------
    >>> round(predicted_variance([0.64, 0.22, 0.14], [18, 45, 90], [5, 4, 6]) ** 0.5, 2)
    8.8
    """
    numbers = np.asarray(counts, dtype=float)
    shares = sampled_shares(numbers, populations or [None] * numbers.size)
    spread = np.asarray(weights, dtype=float) * np.asarray(sigmas, dtype=float)
    return float(np.sum(spread**2 * (1 - shares) / numbers))


def satterthwaite(parts: ArrayLike, degrees_of_freedom: ArrayLike) -> float:
    """Give the effective degrees of freedom of a sum of independent estimated variances.

    Parameters
    ----------
    parts : array_like, shape (h,)
        The terms of the sum.
    degrees_of_freedom : array_like, shape (h,)
        Of each term; a term of 0 does not count.

    Returns
    -------
    float
        (Σ part)² / Σ (part² / df); infinite when every part is 0.

    Notes
    -----
    Satterthwaite (1946), Biometrics Bulletin 2:110; for strata Cochran (1977), eq. 5.16.

    Examples
    --------
    >>> satterthwaite([1.0, 1.0], [4, 4])
    8.0
    """
    terms, known = np.asarray(parts, dtype=float), np.asarray(degrees_of_freedom, dtype=float)
    counted = terms > 0
    if not counted.any():
        return math.inf
    terms = terms[counted] / terms[counted].max()
    return float(np.sum(terms) ** 2 / np.sum(terms**2 / known[counted]))


def pooled_variance(variances: ArrayLike, counts: ArrayLike) -> float:
    """Pool the variances of the strata that have at least 2 results.

    Parameters
    ----------
    variances : array_like, shape (h,)
        s² per stratum; ignored where the count is below 2.
    counts : array_like, shape (h,)

    Returns
    -------
    float
        Σ (n − 1) s² / Σ (n − 1).

    Raises
    ------
    DesignError
        No stratum has 2 results.

    Examples
    --------
    >>> pooled_variance([4.0, float("nan"), 10.0], [5, 1, 3])
    6.0
    """
    known = np.asarray(counts, dtype=float) - 1
    usable = known > 0
    if not usable.any():
        message = "no stratum has 2 results, so no variance can be had from them; collect more."
        raise DesignError(message)
    spread = np.asarray(variances, dtype=float)
    return float(np.sum(known[usable] * spread[usable]) / np.sum(known[usable]))


def stratified_mean(
    means: ArrayLike,
    variances: ArrayLike,
    counts: ArrayLike,
    weights: ArrayLike,
    populations: Sequence[int | None],
) -> tuple[float, float, float]:
    """Weigh the stratum means into one, with its standard error and degrees of freedom.

    Parameters
    ----------
    means, variances : array_like, shape (h,)
        Mean and s² of each stratum. The variance of a stratum with one result is not read:
        that stratum borrows the pooled variance of the others (unless its list has one unit).
    counts : array_like of int, shape (h,)
        Results per stratum, at least 1.
    weights : array_like, shape (h,)
        Shares of the population, sum 1.
    populations : sequence of (int or None), length h
        N of a list; None for an area.

    Returns
    -------
    mean, standard_error, degrees_of_freedom : float
        Degrees of freedom by Satterthwaite; infinite when the standard error is 0.

    Raises
    ------
    DesignError
        A stratum has no result, or more than its list holds, or none has 2.

    Notes
    -----
    Mean Σ W x̄, variance Σ W² s² (1 − n/N) / n: Cochran (1977), ch. 5. What is borrowed counts
    toward the parts it is borrowed from, so that the degrees of freedom are not overstated.

    Examples
    --------
    >>> mean, error, known = stratified_mean([30, 60, 100], [35.4, 180, 12], [20, 8, 12],
    ...                                      [0.5, 0.25, 0.25], [None, None, None])
    >>> mean, round(error**2, 5)
    (55.0, 1.91125)
    """
    numbers, shares = np.asarray(counts, dtype=float), np.asarray(weights, dtype=float)
    if (numbers < 1).any():
        message = f"stratum {int(np.argmax(numbers < 1)) + 1} has no result, so no mean."
        raise DesignError(message)
    mean = float(np.sum(shares * np.asarray(means, dtype=float)))
    factors = shares**2 * (1 - sampled_shares(numbers, populations)) / numbers
    known = numbers - 1
    borrowed = float(np.sum(factors[known == 0]))
    if borrowed > 0:
        pooled_variance(variances, counts)  # refuses when there is nothing to borrow from
        factors = factors + borrowed * known / np.sum(known)
    spread = np.where(known > 0, np.asarray(variances, dtype=float), 0.0)
    parts = factors * spread
    error = math.sqrt(float(np.sum(parts)))
    return mean, error, satterthwaite(parts, np.maximum(known, 1))
