"""The mean by Kaplan and Meier of results of which some lie below a reporting limit."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.stats.censored import CensoredMean
from fieldplan.stats.intervals import IntervalKind, t_interval


@dataclass(frozen=True)
class Jump:
    """One step of the distribution: what was detected at a value, and how many were at risk.

    ``below`` is the share of the population estimated to lie below the value.
    """

    value: float
    detects: int
    at_or_below: int
    below: float


@dataclass(frozen=True)
class KaplanMeier:
    """The distribution from the largest detect down.

    Parameters
    ----------
    jumps : tuple of Jump
        Largest value first.
    left : float
        Share left below the smallest detect; above 0 where non-detects lie below it.
    lowest_limit : float
        The lowest limit, at which that share stands; 0 where there is none.
    """

    jumps: tuple[Jump, ...]
    left: float
    lowest_limit: float

    def mean(self, left_at: float) -> float:
        """Give the mean with the share left at a value."""
        above, total = 1.0, 0.0
        for jump in self.jumps:
            total += (above - jump.below) * jump.value
            above = jump.below
        return total + self.left * left_at

    def standard_error(self, left_at: float, *, factor: bool = True) -> float:
        """Give the standard error of that mean.

        Parameters
        ----------
        left_at : float
            Where the share left stands.
        factor : bool
            Multiply the variance by d/(d − 1), d the number of detects, so that without
            non-detects it is s²/n. The survival literature prints it without.

        Notes
        -----
        Variance Σ A²·d/(r (r − d)) over the detected values, A the area under the distribution
        below the value, r the results at or below it (Kaplan & Meier 1958, Journal of the American
        Statistical Association 53:457, who name the factor too; from memory).
        """
        area, variance, low = 0.0, 0.0, left_at
        for jump in reversed(self.jumps):
            area += jump.below * (jump.value - low)
            low = jump.value
            r, d = jump.at_or_below, jump.detects
            if r > d:
                variance += area**2 * d / (r * (r - d))
        detects = sum(jump.detects for jump in self.jumps)
        return math.sqrt(variance * (detects / (detects - 1) if factor else 1.0))

    def quantile(self, share: float) -> float | None:
        """Give the smallest detected value with at least this share at or below it.

        None where the share lies among the non-detects.
        """
        if share <= self.left:
            return None
        found = [jump.value for jump in self.jumps if jump.below < share - 1e-12]
        return found[0] if found else None


def kaplan_meier(detects: Sequence[float], limits: Sequence[float]) -> KaplanMeier:
    """Estimate the distribution of a population from detects and non-detects.

    Parameters
    ----------
    detects : sequence of float
        At least 2.
    limits : sequence of float
        One for each non-detect; they may differ.

    Returns
    -------
    KaplanMeier

    Raises
    ------
    DesignError
        Fewer than 2 detects.

    Notes
    -----
    The product-limit estimate, with the order of values reversed: a non-detect counts among the
    results at or below every detect that is not below its limit.

    Examples
    --------
    >>> found = kaplan_meier([3.0, 8.0, 9.0], [5.0])
    >>> [(jump.value, jump.at_or_below, round(jump.below, 3)) for jump in found.jumps]
    [(9.0, 4, 0.75), (8.0, 3, 0.5), (3.0, 1, 0.0)]
    """
    if len(detects) < 2:
        message = f"{len(detects)} detects; the estimate by Kaplan and Meier needs 2 or more."
        raise DesignError(message)
    share, jumps = 1.0, []
    for value in sorted(set(detects), reverse=True):
        d = sum(x == value for x in detects)
        r = sum(x <= value for x in detects) + sum(limit <= value for limit in limits)
        share = share * (r - d) / r
        jumps.append(Jump(value, d, r, share))
    return KaplanMeier(tuple(jumps), share, min(limits, default=0.0) if share > 0 else 0.0)


def kaplan_meier_mean(
    detects: Sequence[float],
    limits: Sequence[float],
    *,
    confidence: float = 0.95,
    kind: IntervalKind = "two-sided",
) -> CensoredMean:
    """Estimate the mean by Kaplan and Meier, or bound it where non-detects lie below all detects.

    Parameters
    ----------
    detects, limits : sequence of float
        As in :func:`kaplan_meier`.
    confidence : float
    kind : str

    Returns
    -------
    CensoredMean
        Where a share is left below the smallest detect, as with a single limit, the mean has it at
        the lowest limit and is an upper bound. The low end of the interval then has it at 0.

    Notes
    -----
    Student's t with n − 1 degrees of freedom about the mean (no published source for the
    quantile). The end points are no closed form for skewed populations; docs/evidence has what
    they hold.

    Examples
    --------
    >>> found = kaplan_meier_mean([6.0, 7.5, 9.0, 12.0, 20.0], [5.0, 5.0])
    >>> found.upper_bound, round(found.mean, 2), round(found.numbers["mean_at_0"], 2)
    (True, 9.21, 7.79)
    """
    curve = kaplan_meier(detects, limits)
    n = len(detects) + len(limits)
    mean, at_zero = curve.mean(curve.lowest_limit), curve.mean(0.0)
    error, error_zero = curve.standard_error(curve.lowest_limit), curve.standard_error(0.0)
    bounded = curve.left > 0
    low, high = t_interval(mean, error, n - 1, confidence=confidence, kind=kind)
    if bounded and low is not None:
        low = t_interval(at_zero, error_zero, n - 1, confidence=confidence, kind=kind)[0]
    return CensoredMean(
        "kaplan-meier", mean, error, low, high, n, len(limits), upper_bound=bounded,
        numbers={
            "left": curve.left, "lowest_limit": curve.lowest_limit, "mean_at_0": at_zero,
            "error_at_0": error_zero, "error_without_factor": curve.standard_error(
                curve.lowest_limit, factor=False
            ),
        },
    )  # fmt: skip
