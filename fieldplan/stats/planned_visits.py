"""What sizing takes visits for, and what their interval is worth when they are taken as random."""

import math

from fieldplan.stats.distributions import t_share
from fieldplan.stats.time_series import inflation


def planned_factor(rho: float) -> float:
    """Give the factor that sizing uses: that of a long series, and never below 1.

    Parameters
    ----------
    rho : float
        Correlation of neighbouring visits.

    Returns
    -------
    float
        Visits that alternate (ρ < 0) get no credit: the factor of a long series then promises more
        than a short one keeps.

    Examples
    --------
    >>> planned_factor(0.5), planned_factor(-0.5)
    (3.0, 1.0)
    """
    return max(1.0, inflation(rho))


def share_held_as_independent(rho: float, reach: float, degrees_of_freedom: float) -> float:
    """Give how often a t limit from correlated visits lies beyond the mean, taken as independent.

    Parameters
    ----------
    rho : float
        Correlation of neighbouring visits.
    reach : float
        Student quantile of the limit.
    degrees_of_freedom : float

    Returns
    -------
    float
        One-sided; the stated share at ρ = 0.

    Notes
    -----
    The true standard error is √((1 + ρ)/(1 − ρ)) times the one that independence gives, so the
    share is that of Student's t at the reach over that root. A long series is taken, whose s hides
    nothing; in a short one it is a little less (held to simulation).

    Examples
    --------
    >>> from fieldplan.stats.intervals import t_quantile
    >>> t = t_quantile(28, confidence=0.95, kind="upper-limit")
    >>> round(share_held_as_independent(0.5, t, 28), 2)
    0.83
    """
    return t_share(reach / math.sqrt(inflation(rho)), degrees_of_freedom)
