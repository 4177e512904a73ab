"""Student's interval or limit for a mean, and the quantiles it stands on."""

from typing import Literal

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import student_quantile

IntervalKind = Literal["two-sided", "upper-limit", "lower-limit"]
"""An interval with two ends, or a limit on one side that leaves the other end open."""


def t_quantile(degrees_of_freedom: float, *, confidence: float, kind: IntervalKind) -> float:
    """Give the multiplier of the standard error for this confidence and kind of interval.

    Parameters
    ----------
    degrees_of_freedom : float
        Above 0; need not be whole (Satterthwaite); infinite gives the normal quantile.
    confidence : float
        Inside (0, 1).
    kind : str
        ``two-sided``, ``upper-limit`` or ``lower-limit``.

    Returns
    -------
    float
        t at (1 + confidence) / 2 for two sides, at confidence for one.

    Raises
    ------
    DesignError
        The confidence lies outside (0, 1), or there are no degrees of freedom.

    Examples
    --------
    >>> round(t_quantile(9, confidence=0.95, kind="two-sided"), 4)
    2.2622
    >>> from math import inf
    >>> round(t_quantile(inf, confidence=0.95, kind="upper-limit"), 4)
    1.6449
    """
    if not 0 < confidence < 1:
        message = f"confidence is {confidence!r}; it must lie between 0 and 1, e.g. 0.95."
        raise DesignError(message)
    if not degrees_of_freedom > 0:
        message = (
            f"an interval needs degrees of freedom above 0, not {degrees_of_freedom!r}; "
            "at least 2 results in one stratum give one."
        )
        raise DesignError(message)
    level = (1 + confidence) / 2 if kind == "two-sided" else confidence
    return student_quantile(level, float(degrees_of_freedom))


def t_interval(
    mean: float,
    standard_error: float,
    degrees_of_freedom: float,
    *,
    confidence: float,
    kind: IntervalKind,
) -> tuple[float | None, float | None]:
    """Set Student's interval or limit about a mean.

    Parameters
    ----------
    mean, standard_error : float
        In the laboratory's unit. A standard error of 0 (a census) gives the mean itself.
    degrees_of_freedom : float
        Above 0, may be infinite.
    confidence : float
        Inside (0, 1).
    kind : str
        ``two-sided``, ``upper-limit`` (no low end) or ``lower-limit`` (no high end).

    Returns
    -------
    tuple of (float or None)
        Low and high end; None where the interval is open.

    Examples
    --------
    >>> low, high = t_interval(5.4875, 0.5383, 7, confidence=0.95, kind="two-sided")
    >>> round(low, 2), round(high, 2)
    (4.21, 6.76)
    >>> from math import inf
    >>> t_interval(10.0, 0.0, inf, confidence=0.95, kind="upper-limit")
    (None, 10.0)
    """
    reach = t_quantile(degrees_of_freedom, confidence=confidence, kind=kind) * standard_error
    low = None if kind == "upper-limit" else mean - reach
    high = None if kind == "lower-limit" else mean + reach
    return low, high
