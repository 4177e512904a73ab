"""A mean of results of which some are non-detects: what a method answers, and when none does."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Literal

from fieldplan.base.errors import DesignError
from fieldplan.stats.censored_fit import FEWEST_DETECTS
from fieldplan.stats.censoring_forecast import MOST_CENSORED
from fieldplan.stats.intervals import IntervalKind

CensoredMethod = Literal[
    "kaplan-meier",
    "order-statistics",
    "lognormal-likelihood",
    "gamma-likelihood",
    "normal-likelihood",
]


@dataclass(frozen=True)
class CensoredMean:
    """A mean and its interval by one method for non-detects.

    Parameters
    ----------
    method : str
    mean : float
        In the laboratory's unit.
    standard_error : float
        Of the mean, without the finite population correction.
    low, high : float or None
        Ends of the interval; None where it is open.
    n, non_detects : int
        Results, and how many of them are non-detects.
    upper_bound : bool
        The mean is no estimate but the largest that it may be: non-detects lie below every detect.
    numbers : dict of str to float
        What the arithmetic passed through, by name, for the working.
    """

    method: CensoredMethod
    mean: float
    standard_error: float
    low: float | None
    high: float | None
    n: int
    non_detects: int
    upper_bound: bool = False
    numbers: dict[str, float] = field(default_factory=dict)


def refuse_too_few(detects: Sequence[float], limits: Sequence[float]) -> None:
    """Refuse a mean where the results can only bound it.

    Parameters
    ----------
    detects : sequence of float
    limits : sequence of float
        One for each non-detect. Without any, nothing is refused but fewer than 2 results.

    Raises
    ------
    DesignError
        Fewer than 3 different detects, or more than 80 % non-detects.

    Examples
    --------
    >>> refuse_too_few([6.0, 7.0, 9.0], [5.0])
    >>> refuse_too_few([6.0, 7.0], [5.0])  # doctest: +ELLIPSIS
    Traceback (most recent call last):
    ...
    fieldplan.base.errors.DesignError: 2 different detects among 3 results; a mean with ...
    """
    total = len(detects) + len(limits)
    if not limits:
        if total < 2:
            message = f"{total} results give no interval; 2 or more do."
            raise DesignError(message)
        return
    low, high = bounds_of_mean(detects, limits)
    left = f"All that is left are its bounds, {low:.3g} to {high:.3g}."
    different = len(set(detects))
    if different < FEWEST_DETECTS:
        message = (
            f"{different} different detects among {total} results; a mean with non-detects needs "
            f"{FEWEST_DETECTS}. {left}"
        )
        raise DesignError(message)
    share = len(limits) / total
    if share > MOST_CENSORED:
        message = (
            f"{len(limits)} of {total} results are non-detects, more than {MOST_CENSORED:.0%}; no "
            f"method for a mean was found to hold there. {left}"
        )
        raise DesignError(message)


def bounds_of_mean(detects: Sequence[float], limits: Sequence[float]) -> tuple[float, float]:
    """Give the mean with every non-detect at 0 and at its limit.

    Examples
    --------
    >>> bounds_of_mean([6.0, 9.0], [5.0])
    (5.0, 6.666666666666667)
    """
    total = len(detects) + len(limits)
    if total == 0:
        message = "no results; a mean needs some."
        raise DesignError(message)
    low = math.fsum(detects) / total
    return low, low + math.fsum(limits) / total


def censored_mean(
    detects: Sequence[float],
    limits: Sequence[float],
    method: CensoredMethod,
    *,
    confidence: float = 0.95,
    kind: IntervalKind = "two-sided",
) -> CensoredMean:
    """Estimate the mean of a simple random sample with non-detects, and its interval.

    Parameters
    ----------
    detects : sequence of float
        In the laboratory's unit.
    limits : sequence of float
        One for each non-detect, above 0; they may differ.
    method : str
        See :func:`~fieldplan.stats.kaplan_meier.kaplan_meier_mean`,
        :func:`~fieldplan.stats.order_statistics.order_statistics_mean` and
        :func:`~fieldplan.stats.profile_mean.profile_mean`.
    confidence : float
        Inside (0, 1).
    kind : str
        ``two-sided``, ``upper-limit`` or ``lower-limit``.

    Returns
    -------
    CensoredMean

    Raises
    ------
    DesignError
        Fewer than 3 different detects, more than 80 % non-detects, or a value that the method
        cannot take.

    Examples
    --------
    >>> detects, limits = [5.5, 6.0, 7.5, 9.0, 12.0, 20.0, 31.0], [5.0, 5.0, 5.0]
    >>> found = censored_mean(detects, limits, "order-statistics")
    >>> round(found.mean, 1), round(found.low, 1), round(found.high, 1)
    (9.7, 3.5, 26.8)
    """
    from fieldplan.stats.kaplan_meier import kaplan_meier_mean
    from fieldplan.stats.order_statistics import order_statistics_mean
    from fieldplan.stats.profile_mean import profile_mean

    refuse_too_few(detects, limits)
    if method == "kaplan-meier":
        return kaplan_meier_mean(detects, limits, confidence=confidence, kind=kind)
    if method == "order-statistics":
        return order_statistics_mean(detects, limits, confidence=confidence, kind=kind)
    return profile_mean(detects, limits, method, confidence=confidence, kind=kind)


def weighted_mean(
    parts: Sequence[CensoredMean], weights: Sequence[float], *, kind: IntervalKind = "two-sided"
) -> CensoredMean:
    """Combine the means of strata, and their intervals, into those of the population.

    Parameters
    ----------
    parts : sequence of CensoredMean
        One a stratum, all by one method, each with the interval of the same confidence.
    weights : sequence of float
        Shares of the population; they sum to 1.
    kind : str
        As the parts have it.

    Returns
    -------
    CensoredMean
        Mean Σ W·mean, standard error √Σ W²·SE², and ends by the distances recovered from the
        parts: low = mean − √Σ W²·(mean − low)², high likewise. By order statistics the low end is
        the lower of two, by the lines through logs and through values in all strata.

    Raises
    ------
    DesignError
        No parts, or not one weight for each.

    Notes
    -----
    The method of variance estimates recovery keeps the lean of each interval (Zou & Donner 2008,
    Statistics in Medicine 27:1693; Zou, Taleban & Huo 2009, Computational Statistics & Data
    Analysis 53:3755, for lognormal means; both from memory). It errs to the wide side, since each
    part brings the Student quantile of its own few results.

    Examples
    --------
    >>> one = CensoredMean("kaplan-meier", 10.0, 1.0, 7.0, 14.0, 9, 2)
    >>> two = CensoredMean("kaplan-meier", 20.0, 2.0, 17.0, 26.0, 9, 0)
    >>> both = weighted_mean([one, two], [0.5, 0.5])
    >>> both.mean, round(both.low, 2), round(both.high, 2)
    (15.0, 12.88, 18.61)
    """
    if not parts or len(parts) != len(weights):
        message = f"{len(parts)} parts and {len(weights)} weights; give one weight for each part."
        raise DesignError(message)
    pairs = list(zip(parts, weights, strict=True))
    mean = math.fsum(w * part.mean for part, w in pairs)
    lows = [_low_end(pairs, "low_logs"), _low_end(pairs, "low_values", about="mean_values")]
    above = [w * (part.high - part.mean) for part, w in pairs if part.high is not None]
    return CensoredMean(
        parts[0].method,
        mean,
        math.hypot(*(w * part.standard_error for part, w in pairs)),
        None if kind == "upper-limit" else min(lows),
        None if kind == "lower-limit" else mean + math.hypot(*above),
        sum(part.n for part in parts),
        sum(part.non_detects for part in parts),
        upper_bound=any(part.upper_bound for part in parts),
    )


def _low_end(
    pairs: Sequence[tuple[CensoredMean, float]], low: str, *, about: str = "mean"
) -> float:
    """Recover the low end from those of the parts, by one of the lines where there are two.

    What the choice of a line shifts, it shifts in every stratum: such shifts add, so that each line
    is taken through all strata before the lower end is.
    """
    centres = [(w, part.numbers.get(about, part.mean)) for part, w in pairs]
    ends = [part.numbers.get(low, part.low or 0.0) for part, _ in pairs]
    reach = math.hypot(
        *(w * (centre - end) for (w, centre), end in zip(centres, ends, strict=True))
    )
    return math.fsum(w * centre for w, centre in centres) - reach
