"""Looking once on the way: Stein's two stages, and one re-size with an interim variance."""

import math
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import chi_square_quantile, chi_square_share, f_share
from fieldplan.stats.intervals import IntervalKind, t_quantile
from fieldplan.stats.precision import MOST, smallest, whole

POINTS = 100
"""Quantiles of the interim variance over which an outlook is averaged."""


@dataclass(frozen=True)
class Outlook:
    """What a rule costs and keeps, before anything is sampled.

    Parameters
    ----------
    results : float
        Total to expect, both stages.
    chance : float
        Share of campaigns whose interval is no wider than the target.
    """

    results: float
    chance: float


def stein_total(
    deviation: float,
    half_width: float,
    *,
    first: int,
    confidence: float,
    kind: IntervalKind = "two-sided",
) -> int:
    """Count all results, both stages, that Stein's rule asks for after the first.

    Parameters
    ----------
    deviation : float
        Standard deviation of the first stage.
    half_width : float
        Tolerated, above 0.
    first : int
        Results of the first stage, at least 2.
    confidence : float
        Inside (0, 1).
    kind : str

    Returns
    -------
    int
        At least ``first``.

    Raises
    ------
    DesignError
        Fewer than 2 first results, or a half-width that is not above 0.

    Notes
    -----
    N = max(n₁, ⌈(t s₁ / h)²⌉), t with n₁ − 1 degrees of freedom; mean ± h over all N then has the
    stated confidence exactly for normal results, since s₁ is independent of the mean (Stein 1945,
    Annals of Mathematical Statistics 16:243). The interval keeps s₁ and its degrees of freedom.

    Examples
    --------
    >>> stein_total(10.0, 2.0, first=20, confidence=0.95)
    110
    """
    _check(half_width, first)
    t = t_quantile(first - 1, confidence=confidence, kind=kind)
    return max(first, whole((t * deviation / half_width) ** 2))


def stein_outlook(
    sigma: float,
    half_width: float,
    *,
    first: int,
    confidence: float,
    kind: IntervalKind = "two-sided",
) -> Outlook:
    """Say how many results Stein's rule takes on average, were sigma the true one.

    Parameters
    ----------
    sigma, half_width : float
    first : int
    confidence : float
    kind : str

    Notes
    -----
    E N = n₁ + Σ P(N > k) over k from n₁ on, with N ≤ k when (t s₁ / h)² ≤ k and s₁² from its
    χ². The half-width is kept by construction.

    Examples
    --------
    >>> round(stein_outlook(10.0, 2.0, first=20, confidence=0.95).results)
    110
    """
    _check(half_width, first)
    known = first - 1
    t = t_quantile(known, confidence=confidence, kind=kind)
    scale = (t * sigma / half_width) ** 2 / known
    above, k, step = 0.0, float(first), 1.0
    while True:
        tail = 1 - chi_square_share((k + (step - 1) / 2) / scale, known)
        if tail < 1e-10:
            return Outlook(first + above, 1.0)
        above += tail * step
        k += step
        step = max(1.0, k // 400)


def chance_after_interim(
    deviation: float,
    half_width: float,
    total: int,
    *,
    first: int,
    confidence: float,
    kind: IntervalKind = "two-sided",
) -> float:
    """Give the chance that all results together keep the half-width, given the interim's spread.

    Parameters
    ----------
    deviation : float
        Standard deviation of the interim's results.
    half_width : float
    total : int
        Results of both stages, at least ``first``.
    first : int
        Results at the interim.
    confidence : float
    kind : str

    Notes
    -----
    The sum of squares of all N results is (n₁ − 1) s₁² + σ² χ² with N − n₁ degrees of freedom, and
    σ² is known from s₁ as in the predictive F; so P(F ≤ (h² N (N − 1) / (t² s₁²) − (n₁ − 1)) /
    (N − n₁)), F with N − n₁ and n₁ − 1. Derived here; the tests hold it to simulation.

    Examples
    --------
    >>> round(chance_after_interim(10.0, 2.0, 105, first=60, confidence=0.95), 2)
    0.7
    """
    _check(half_width, first)
    t = t_quantile(total - 1, confidence=confidence, kind=kind)
    room = (half_width / t) ** 2 * total * (total - 1) / deviation**2 - (first - 1)
    if total == first:
        return float(room >= 0)
    return f_share(room / (total - first), total - first, first - 1) if room > 0 else 0.0


def resized_total(
    deviation: float,
    half_width: float,
    *,
    first: int,
    assurance: float,
    confidence: float,
    kind: IntervalKind = "two-sided",
) -> int:
    """Count all results that one re-size asks for, given the interim's spread.

    Parameters
    ----------
    deviation, half_width : float
    first : int
    assurance : float
        Chance, given the interim, that the half-width is kept.
    confidence : float
    kind : str

    Returns
    -------
    int
        At least ``first``.

    Examples
    --------
    >>> resized_total(10.0, 2.0, first=60, assurance=0.8, confidence=0.95)
    110
    """
    _check(half_width, first)

    def fits(total: int) -> bool:
        chance = chance_after_interim(
            deviation, half_width, total, first=first, confidence=confidence, kind=kind
        )
        return chance >= assurance

    total = smallest(fits, first, MOST + 1)
    return whole(total)


def resize_outlook(
    sigma: float,
    half_width: float,
    *,
    first: int,
    assurance: float,
    confidence: float,
    kind: IntervalKind = "two-sided",
) -> Outlook:
    """Say what one re-size costs and keeps, were sigma the true one.

    Parameters
    ----------
    sigma, half_width : float
    first : int
    assurance : float
    confidence : float
    kind : str

    Notes
    -----
    Averaged over the interim's s₁², from its χ² at the middle of 100 equal shares; for each the
    rest is exact. The t interval of all results is taken as usual.
    """
    known = first - 1
    results = chances = 0.0
    for k in range(POINTS):
        quantile = chi_square_quantile((k + 0.5) / POINTS, known)
        deviation = sigma * math.sqrt(quantile / known)
        total = resized_total(
            deviation, half_width, first=first, assurance=assurance, confidence=confidence,
            kind=kind,
        )  # fmt: skip
        t = t_quantile(total - 1, confidence=confidence, kind=kind)
        room = (half_width / t / sigma) ** 2 * total * (total - 1) - quantile
        rest = total - first
        kept = float(room >= 0) if rest == 0 else chi_square_share(max(room, 0.0), rest)
        results += total / POINTS
        chances += kept / POINTS
    return Outlook(results, chances)


def _check(half_width: float, first: int) -> None:
    if not half_width > 0:
        message = f"the half-width is {half_width!r}; it must be above 0."
        raise DesignError(message)
    if first < 2:
        message = f"a first stage of {first} results has no spread; it must have 2 or more."
        raise DesignError(message)
