"""The mean after non-detects were filled in from a line through the ordered detects."""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from fieldplan.base.errors import DesignError
from fieldplan.stats.censored import CensoredMean
from fieldplan.stats.distributions import normal_quantile
from fieldplan.stats.intervals import IntervalKind, t_quantile
from fieldplan.stats.skew_interval import hall_factor

Line = Literal["logs", "values"]
"""What the line is drawn through: the logarithms of the detects, or the detects themselves."""


@dataclass(frozen=True)
class FilledIn:
    """Non-detects with a number from the line ``log x`` or ``x = intercept + slope·z``.

    Parameters
    ----------
    detects : tuple of float
        In rising order.
    filled : tuple of float
        One for each non-detect, limits in rising order; from 0 to its limit.
    intercept, slope : float
        Of the line.
    capped : int
        How many of the filled numbers the line would put above their limit.
    """

    detects: tuple[float, ...]
    filled: tuple[float, ...]
    intercept: float
    slope: float
    capped: int


def plotting_positions(
    detects: Sequence[float], limits: Sequence[float]
) -> tuple[list[tuple[float, float]], list[tuple[float, float]]]:
    """Give the share of the population below each result, for several limits.

    Parameters
    ----------
    detects : sequence of float
    limits : sequence of float
        One for each non-detect.

    Returns
    -------
    detected, censored : list of (float, float)
        Pairs of value (or limit) and plotting position, in rising order.

    Notes
    -----
    With the limits sorted, the chance to exceed limit j is
    pe(j) = pe(j + 1) + A/(A + B)·(1 − pe(j + 1)), A the detects from limit j up to the next and
    B all results below limit j. The A detects lie evenly between 1 − pe(j) and 1 − pe(j + 1), the
    non-detects of limit j evenly below 1 − pe(j), Weibull positions in both (Hirsch & Stedinger
    1987, Water Resources Research 23:715; Helsel & Cohn 1988, same journal 24:1997; from memory).

    Examples
    --------
    >>> detected, censored = plotting_positions([6.0, 8.0, 9.0], [5.0])
    >>> [round(p, 4) for _, p in detected], [round(p, 4) for _, p in censored]
    ([0.4375, 0.625, 0.8125], [0.125])
    """
    ordered, steps = sorted(detects), sorted(set(limits))
    exceed = [0.0] * (len(steps) + 1)
    for j in range(len(steps) - 1, -1, -1):
        top = steps[j + 1] if j + 1 < len(steps) else math.inf
        a = sum(steps[j] <= x < top for x in ordered)
        b = sum(x < steps[j] for x in ordered) + sum(limit <= steps[j] for limit in limits)
        exceed[j] = exceed[j + 1] + a / (a + b) * (1 - exceed[j + 1])
    detected: list[tuple[float, float]] = []
    censored: list[tuple[float, float]] = []
    for j in range(-1, len(steps)):
        bottom = steps[j] if j >= 0 else -math.inf
        top = steps[j + 1] if j + 1 < len(steps) else math.inf
        start, end = (1 - exceed[j] if j >= 0 else 0.0), 1 - exceed[j + 1]
        here = [x for x in ordered if bottom <= x < top]
        detected += [
            (x, start + i / (len(here) + 1) * (end - start)) for i, x in enumerate(here, start=1)
        ]
        if j >= 0:
            c = sum(limit == bottom for limit in limits)
            censored += [(bottom, i / (c + 1) * start) for i in range(1, c + 1)]
    return detected, censored


def fill_in(detects: Sequence[float], limits: Sequence[float], *, line: Line = "logs") -> FilledIn:
    """Put a number in place of every non-detect, from the line through the detects.

    Parameters
    ----------
    detects : sequence of float
        Above 0, at least 3 different ones.
    limits : sequence of float
        One for each non-detect, above 0.
    line : str
        ``logs`` as published, or ``values``, which then are never below 0.

    Returns
    -------
    FilledIn

    Raises
    ------
    DesignError
        A value of 0 or below, or too few different detects for a line.

    Notes
    -----
    Least squares of log x on the normal quantile of the plotting position; only non-detects are
    read from the line, detects stay as they are ("robust": Helsel & Cohn 1988, Water Resources
    Research 24:1997, from memory). A number above its limit is set to the limit (our own rule).

    Examples
    --------
    >>> done = fill_in([6.0, 7.5, 9.0, 12.0], [5.0, 5.0])
    >>> [round(x, 2) for x in done.filled]
    [3.17, 4.11]
    """
    wrong = [value for value in (*detects, *limits) if not value > 0]
    if wrong:
        message = (
            f"a result or limit of {wrong[0]:g} has no logarithm; regression on order statistics "
            "needs values above 0."
        )
        raise DesignError(message)
    if len(set(detects)) < 3:
        message = (
            f"{len(set(detects))} different detects draw no line; regression on order statistics "
            "needs 3."
        )
        raise DesignError(message)
    detected, censored = plotting_positions(detects, limits)
    z = [normal_quantile(p) for _, p in detected]
    y = [math.log(x) if line == "logs" else x for x, _ in detected]
    z_mean, y_mean = math.fsum(z) / len(z), math.fsum(y) / len(y)
    across = math.fsum((a - z_mean) ** 2 for a in z)
    slope = math.fsum((a - z_mean) * (b - y_mean) for a, b in zip(z, y, strict=True)) / across
    intercept = y_mean - slope * z_mean
    on_line = [(limit, intercept + slope * normal_quantile(p)) for limit, p in censored]
    if line == "logs":
        on_line = [(limit, math.exp(x)) for limit, x in on_line]
    return FilledIn(
        tuple(x for x, _ in detected),
        tuple(max(0.0, min(limit, x)) for limit, x in on_line),
        intercept,
        slope,
        sum(x > limit for limit, x in on_line),
    )


@dataclass(frozen=True)
class Completed:
    """A sample with its gaps filled in: moments, and Hall's factors at a Student quantile."""

    n: int
    mean: float
    standard_error: float
    skewness: float
    below: float
    above: float


def completed(values: Sequence[float], t: float) -> Completed:
    """Give the moments of a completed sample, and Hall's factors about its mean.

    Parameters
    ----------
    values : sequence of float
        At least 2.
    t : float
        Student quantile, above 0.

    Notes
    -----
    Ends at mean + k·s/√n, k Hall's factor at ∓t and g1/√n (Hall 1992, Journal of the Royal
    Statistical Society B 54:221, from memory).

    Examples
    --------
    >>> found = completed([4.0, 5.0, 6.0], 4.303)
    >>> found.mean, round(found.below, 3), round(found.above, 3)
    (5.0, -4.303, 4.303)
    """
    n = len(values)
    mean = math.fsum(values) / n
    second = math.fsum((x - mean) ** 2 for x in values) / n
    third = math.fsum((x - mean) ** 3 for x in values) / n
    g = third / second**1.5 if second > 0 else 0.0
    below, above = (float(hall_factor(q, g / math.sqrt(n))) for q in (-t, t))
    return Completed(n, mean, math.sqrt(second / (n - 1)), g, below, above)


def order_statistics_mean(
    detects: Sequence[float],
    limits: Sequence[float],
    *,
    confidence: float = 0.95,
    kind: IntervalKind = "two-sided",
) -> CensoredMean:
    """Estimate the mean by regression on order statistics, with Hall's closed-form interval.

    Parameters
    ----------
    detects, limits : sequence of float
        As in :func:`fill_in`; without non-detects nothing is filled in.
    confidence : float
    kind : str

    Returns
    -------
    CensoredMean

    Notes
    -----
    Mean, s and skewness are those of the sample completed by the line through the logs, and so is
    the high end. The low end is the lower of two: with the numbers of that line, and with those of
    a line through the values. Logs have the shorter tail below, so that their line alone is too
    high for populations of even shape (our own rule, no published source). The interval does not
    know that numbers were filled in: docs/evidence/non-detects.md has what it holds.

    Examples
    --------
    >>> found = order_statistics_mean([6.0, 7.5, 9.0, 12.0, 20.0], [5.0, 5.0])
    >>> round(found.mean, 2), found.low < found.mean < found.high
    (8.61, True)
    """
    n = len(detects) + len(limits)
    t = t_quantile(n - 1, confidence=confidence, kind=kind)
    done = fill_in(detects, limits) if limits else FilledIn(tuple(detects), (), 0.0, 0.0, 0)
    found = completed([*done.detects, *done.filled], t)
    low = found.mean + found.below * found.standard_error
    straight = fill_in(detects, limits, line="values") if limits else done
    other = completed([*straight.detects, *straight.filled], t)
    low_other = other.mean + other.below * other.standard_error
    return CensoredMean(
        "order-statistics", found.mean, found.standard_error,
        None if kind == "upper-limit" else min(low, low_other),
        None if kind == "lower-limit" else found.mean + found.above * found.standard_error,
        n, len(limits),
        numbers={
            "intercept": done.intercept, "slope": done.slope, "sum_filled": math.fsum(done.filled),
            "sum_detects": math.fsum(done.detects), "sd": found.standard_error * math.sqrt(n),
            "skewness": found.skewness, "t": t, "k_low": found.below, "k_high": found.above,
            "capped": done.capped, "low_logs": low, "mean_values": other.mean,
            "error_values": other.standard_error, "k_low_values": other.below,
            "low_values": low_other,
        },
    )  # fmt: skip
