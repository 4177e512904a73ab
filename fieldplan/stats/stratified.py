"""The mean of a population in parts: its variance before and after the results."""

import math
from collections.abc import Iterable, Sequence

from fieldplan.base.errors import DesignError


def sampled_shares(
    counts: Iterable[float], populations: Sequence[int | None] | None = None
) -> list[float]:
    """Give n/N for every stratum, 0 where the population is endless.

    Parameters
    ----------
    counts : iterable of float, length h
        Results per stratum.
    populations : sequence of (int or None), length h, optional
        N of a list; None for an area.

    Raises
    ------
    DesignError
        More results than the list has units.

    Examples
    --------
    >>> [round(share, 3) for share in sampled_shares([8, 5], [14, None])]
    [0.571, 0.0]
    """
    numbers = [float(count) for count in counts]
    sizes = populations if populations is not None else [None] * len(numbers)
    shares = []
    for number, size in zip(numbers, sizes, strict=True):
        if size is not None and number > size:
            message = f"{number:g} results cannot come from a list of {size}."
            raise DesignError(message)
        shares.append(0.0 if size is None else number / size)
    return shares


def variance_factors(
    weights: Iterable[float],
    counts: Iterable[float],
    populations: Sequence[int | None] | None = None,
) -> list[float]:
    """Give what each stratum's variance is multiplied by in the variance of the mean.

    Parameters
    ----------
    weights : iterable of float, length h
        Shares of the population (sum 1).
    counts : iterable of float, length h
        Results per stratum, each above 0; need not be whole.
    populations : sequence of (int or None), length h, optional
        N of a list; None for an area.

    Notes
    -----
    W² (1 − n/N) / n: Cochran (1977), Sampling Techniques, 3rd ed., theorem 5.3.

    Examples
    --------
    >>> variance_factors([0.5, 0.5], [5, 10], [None, 20])
    [0.05, 0.0125]
    """
    numbers = [float(count) for count in counts]
    shares = sampled_shares(numbers, populations)
    return [
        weight**2 * (1 - share) / number
        for weight, share, number in zip(weights, shares, numbers, strict=True)
    ]


def predicted_variance(
    weights: Iterable[float],
    sigmas: Iterable[float],
    counts: Iterable[float],
    populations: Sequence[int | None] | None = None,
) -> float:
    """Predict the variance of a stratified mean before any result.

    Parameters
    ----------
    weights, sigmas : iterable of float, length h
        Shares of the population (sum 1) and standard deviations of single results.
    counts : iterable of float, length h
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
    factors = variance_factors(weights, counts, populations)
    return math.fsum(
        factor * float(sigma) ** 2 for factor, sigma in zip(factors, sigmas, strict=True)
    )


def satterthwaite(parts: Iterable[float], degrees_of_freedom: Iterable[float]) -> float:
    """Give the effective degrees of freedom of a sum of independent estimated variances.

    Parameters
    ----------
    parts : iterable of float, length h
        The terms of the sum.
    degrees_of_freedom : iterable of float, length h
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
    pairs = zip(parts, degrees_of_freedom, strict=True)
    counted = [(float(part), float(known)) for part, known in pairs if part > 0]
    if not counted:
        return math.inf
    largest = max(part for part, _ in counted)
    total = math.fsum(part / largest for part, _ in counted)
    return total**2 / math.fsum((part / largest) ** 2 / known for part, known in counted)


def pooled_variance(variances: Iterable[float], counts: Iterable[float]) -> float:
    """Pool the variances of the strata that have at least 2 results.

    Parameters
    ----------
    variances : iterable of float, length h
        s² per stratum; ignored where the count is below 2.
    counts : iterable of float, length h

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
    usable = [
        (float(variance), float(count) - 1)
        for variance, count in zip(variances, counts, strict=True)
        if count > 1
    ]
    if not usable:
        message = "no stratum has 2 results, so no variance can be had from them; collect more."
        raise DesignError(message)
    return math.fsum(v * known for v, known in usable) / math.fsum(known for _, known in usable)


def stratified_mean(
    means: Iterable[float],
    variances: Iterable[float],
    counts: Iterable[float],
    weights: Iterable[float],
    populations: Sequence[int | None],
) -> tuple[float, float, float]:
    """Weigh the stratum means into one, with its standard error and degrees of freedom.

    Parameters
    ----------
    means, variances : iterable of float, length h
        Mean and s² of each stratum. The variance of a stratum with one result is not read:
        that stratum borrows the pooled variance of the others (unless its list has one unit).
    counts : iterable of int, length h
        Results per stratum, at least 1.
    weights : iterable of float, length h
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
    numbers, shares = [float(n) for n in counts], [float(w) for w in weights]
    spread = [float(variance) for variance in variances]
    for position, number in enumerate(numbers, start=1):
        if number < 1:
            message = f"stratum {position} of {len(numbers)} has no result, so no mean."
            raise DesignError(message)
    mean = math.fsum(w * float(m) for w, m in zip(shares, means, strict=True))
    parts = variance_parts(spread, numbers, shares, populations)
    error = math.sqrt(math.fsum(parts))
    return mean, error, satterthwaite(parts, [max(number - 1, 1.0) for number in numbers])


def variance_parts(
    variances: Iterable[float],
    counts: Iterable[float],
    weights: Iterable[float],
    populations: Sequence[int | None],
) -> list[float]:
    """Split the variance of a stratified mean among the strata whose results it rests on.

    Parameters
    ----------
    variances : iterable of float, length h
        s² of each stratum; not read where there is one result.
    counts, weights : iterable of float, length h
    populations : sequence of (int or None), length h

    Returns
    -------
    list of float
        0 for a stratum with one result, which borrows; the others hold what they lend.

    Raises
    ------
    DesignError
        A stratum must borrow, and none has 2 results.

    Notes
    -----
    s² (W² (1 − n/N) / n + B (n − 1) / Σ (n − 1)), where B sums W² (1 − n/N) / n over the strata
    that borrow and Σ runs over those that have 2 results or more.

    Examples
    --------
    >>> variance_parts([4.0, 0.0], [5, 1], [0.5, 0.5], [None, None])
    [1.2, 0.0]
    """
    numbers = [float(count) for count in counts]
    spread = [float(variance) for variance in variances]
    factors = variance_factors(weights, numbers, populations)
    known = [number - 1 for number in numbers]
    borrowed = math.fsum(f for f, free in zip(factors, known, strict=True) if free == 0)
    if borrowed > 0:
        pooled_variance(spread, numbers)  # refuses when there is nothing to borrow from
        total = math.fsum(known)
        factors = [f + borrowed * free / total for f, free in zip(factors, known, strict=True)]
    return [
        factor * variance if free > 0 else 0.0
        for factor, variance, free in zip(factors, spread, known, strict=True)
    ]
