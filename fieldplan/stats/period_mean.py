"""How well evenly spaced visits know the mean of the very period in which they are made."""

import math

from fieldplan.base.errors import DesignError
from fieldplan.stats.time_series import LARGEST_RHO, effective_number


def period_variance_share(n: int, rho: float) -> float:
    """Give the variance of the visits' mean about the period's own mean, as a share of σ².

    Parameters
    ----------
    n : int
        Visits, each in the middle of one of n equal parts of the period; at least 1.
    rho : float
        Correlation of neighbouring visits, above 0 up to 0.99.

    Returns
    -------
    float
        At most 1/n, as independent visits have it, and far less where neighbours resemble each
        other: what lies between two like visits is known from them.

    Raises
    ------
    DesignError
        No visits, or a correlation that does not fade with time.

    Notes
    -----
    ΣΣ ρ^|i−j| / n² − 2 Σ ∫ C(t − tᵢ) dt / (n T) + ∫∫ C / T² with C falling by ρ in every T/n, all
    in closed form: the extension variance of a line known at even places, Matheron (1971), The
    Theory of Regionalized Variables, ch. 3. Errors of the laboratory are taken as nil beside σ.

    Examples
    --------
    >>> round(period_variance_share(12, 0.35), 4), round(1 / effective_number(12, 0.35), 4)
    (0.0143, 0.1616)
    """
    if n < 1 or not 0 < rho <= LARGEST_RHO:
        message = (
            f"{n} visits with a correlation of {rho!r} say nothing of their period's own mean; it "
            f"takes a visit and a correlation above 0, up to {LARGEST_RHO}."
        )
        raise DesignError(message)
    fade = -math.log(rho)  # in one part of the period, so that T is n parts
    whole = 2 * (fade * n + math.expm1(-fade * n)) / (fade * n) ** 2
    middles = [k + 0.5 for k in range(n)]
    seen = math.fsum(
        (2 - math.exp(-fade * at) - math.exp(-fade * (n - at))) / fade for at in middles
    )
    return max(0.0, 1 / effective_number(n, rho) - 2 * seen / n**2 + whole)
