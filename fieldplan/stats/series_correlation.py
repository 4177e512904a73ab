"""How strongly the visits of a pilot resemble each other, and how well that is known."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import chi_square_quantile
from fieldplan.stats.time_series import LARGEST_RHO

FEWEST_VISITS = 8
"""With fewer visits the interval of a correlation spans nearly everything (house rule)."""
EVEN = 1 / 3
"""Visits count as evenly spaced when no gap is off the usual one by more than this share: a
monthly round that slips by a week still is one (house rule)."""
_STEPS = 199


@dataclass(frozen=True)
class SeriesCorrelation:
    """Correlation of neighbouring visits, from a pilot in which each visit has one value.

    Parameters
    ----------
    n : int
        Visits.
    spacing_days : float
        Usual distance between visits that ``rho`` belongs to; their median.
    even : bool
        Whether visits were evenly spaced.
    observed : float or None
        r1 as computed, which lies below the truth in a short series; None when visits were uneven.
    rho : float
        Corrected for that; what sizing would use.
    low, high : float
        Interval of ``rho`` at ``confidence``.
    confidence : float
    """

    n: int
    spacing_days: float
    even: bool
    observed: float | None
    rho: float
    low: float
    high: float
    confidence: float


def autocorrelation(values: Sequence[float], lag: int = 1) -> float:
    """Give the correlation r of values ``lag`` visits apart.

    Parameters
    ----------
    values : sequence of float, length n
        In order of time, equally spaced, not all the same.
    lag : int
        From 1 to n − 1.

    Returns
    -------
    float
        Σ (x[t] − m)(x[t+lag] − m) / Σ (x[t] − m)².

    Raises
    ------
    DesignError
        Too few values for this lag, or values that are all the same.

    Notes
    -----
    Box, Jenkins & Reinsel (2008), Time Series Analysis, 4th ed., sec. 2.1.5.

    Examples
    --------
    >>> autocorrelation([1, 2, 3, 4, 5])
    0.4
    """
    if not 1 <= lag < len(values):
        message = (
            f"{len(values)} values have no two that lie {lag} visits apart; the distance must be "
            f"from 1 to {max(len(values) - 1, 1)}."
        )
        raise DesignError(message)
    off = np.asarray(values, dtype=float) - math.fsum(values) / len(values)
    total = float(off @ off)
    if total <= (1e-12 * max(abs(float(value)) for value in values)) ** 2 * len(values):
        message = f"all {len(values)} values are {values[0]:g}; they show no correlation."
        raise DesignError(message)
    return float(off[lag:] @ off[:-lag]) / total


def corrected_for_length(observed: float, n: int) -> float:
    """Lift a lag-1 correlation by what a short series hides.

    Parameters
    ----------
    observed : float
        r1.
    n : int
        Visits behind it, at least 5.

    Returns
    -------
    float
        (n r1 + 1)/(n − 4), held inside −0.99 to 0.99.

    Raises
    ------
    DesignError
        Fewer than 5 visits.

    Notes
    -----
    E(r1) ≈ ρ − (1 + 4ρ)/n: Marriott & Pope (1954), Biometrika 41:390.

    Examples
    --------
    >>> round(corrected_for_length(0.30, 36), 4)
    0.3687
    """
    if n < 5:
        message = f"a correlation of visits needs 5 of them or more, not {n}."
        raise DesignError(message)
    return min(max((n * observed + 1) / (n - 4), -LARGEST_RHO), LARGEST_RHO)


def correlation_of_visits(
    days: Sequence[float], values: Sequence[float], *, confidence: float = 0.80
) -> SeriesCorrelation:
    """Estimate the correlation of neighbouring visits of one place.

    Parameters
    ----------
    days : sequence of float, length n
        Any order; no two the same.
    values : sequence of float, length n
    confidence : float
        Of the interval, inside (0, 1).

    Returns
    -------
    SeriesCorrelation

    Raises
    ------
    DesignError
        Fewer than 8 visits, two on one day, or values that are all the same.

    Notes
    -----
    Evenly spaced visits: r1 corrected by Marriott & Pope (1954). Uneven ones: the ρ that makes
    the values most likely, ρ^(days/spacing) between any two visits, mean unknown. The interval
    holds every ρ whose restricted likelihood is within the χ² bound of the best one. Season and
    trend are not taken out; both look like correlation.

    Examples
    --------
    >>> nitrate = [2.1, 2.6, 2.4, 1.9, 2.2, 3.1, 2.8, 2.0, 1.7, 2.3, 2.5, 2.2]
    >>> found = correlation_of_visits(range(0, 360, 30), nitrate)
    >>> round(found.observed, 2), round(found.rho, 2), round(found.low, 2), round(found.high, 2)
    (0.17, 0.38, -0.13, 0.7)
    """
    order = np.argsort(np.asarray(days, dtype=float), kind="stable")
    when = np.asarray(days, dtype=float)[order]
    what = np.asarray(values, dtype=float)[order]
    gaps = np.diff(when)
    _check_series(when, gaps)
    spacing = float(np.median(gaps))
    even = bool(np.all(np.abs(gaps - spacing) <= EVEN * spacing))
    observed = autocorrelation(what.tolist()) if even else None
    if observed is None:
        autocorrelation(what.tolist())
    steps = np.linspace(-LARGEST_RHO if even else 0.0, LARGEST_RHO, _STEPS)
    heights = _likelihoods(what, np.ones_like(gaps) if even else gaps / spacing, steps)
    best = int(heights.argmax())
    rho = float(steps[best]) if observed is None else corrected_for_length(observed, len(what))
    bound = heights[best] - chi_square_quantile(confidence, 1) / 2
    inside = steps[heights >= bound]
    return SeriesCorrelation(
        n=len(what),
        spacing_days=spacing,
        even=even,
        observed=observed,
        rho=rho,
        low=min(float(inside[0]), rho),
        high=max(float(inside[-1]), rho),
        confidence=confidence,
    )


def _check_series(when: NDArray[np.float64], gaps: NDArray[np.float64]) -> None:
    if len(when) < FEWEST_VISITS:
        message = (
            f"{len(when)} visits cannot show how far they resemble each other; it takes "
            f"{FEWEST_VISITS} or more."
        )
        raise DesignError(message)
    if not bool(np.all(gaps > 0)):
        message = "two visits have one date; bring a day down to one value first."
        raise DesignError(message)


def _likelihoods(
    values: NDArray[np.float64], gaps: NDArray[np.float64], steps: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Give the log of the restricted likelihood at each ρ, level and sigma integrated out.

    Every value is compared with what the one before predicts, as correlations ρ^gap allow.
    """
    size = np.abs(steps)[:, None] ** gaps[None, :]
    near = np.where(steps[:, None] < 0, -size, size)
    left = np.sqrt(1 - near**2)
    first = np.ones((len(steps), 1))
    x = np.hstack([first * values[0], (values[1:] - near * values[:-1]) / left])
    one = np.hstack([first, (1 - near) / left])
    ones = (one**2).sum(axis=1)
    rest = (x**2).sum(axis=1) - (x * one).sum(axis=1) ** 2 / ones
    spread = 2 * np.log(left).sum(axis=1) + np.log(ones)
    return np.asarray(-0.5 * (spread + (len(values) - 1) * np.log(np.maximum(rest, 1e-300))))
