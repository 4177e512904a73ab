"""A share of places or units: how many results pin it down, and the interval that comes back."""

import math
from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.lots import MOST_UNITS, most_hidden
from fieldplan.stats.precision import (
    MOST,
    meets,
    unrounded_for_half_width,
    whole,
)
from fieldplan.stats.tolerance import check_share, first_that_fits

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

_SPREADS = 8.0
"""Standard deviations of a count beyond which less than 1e-14 of it lies."""

_COUNTS = 120
"""A mean over more counts than this skips some: neighbours then differ too little to matter."""


def unrounded_for_margin(
    share: float, margin: float, *, confidence: float, kind: IntervalKind = "two-sided"
) -> float:
    """Give the normal formula's number of results for a margin about a share, unrounded.

    Parameters
    ----------
    share : float
        Expected; 0.5 asks for the most.
    margin : float
        Tolerated distance from the share to the end of its interval, inside (0, 1).
    confidence : float
    kind : str
        Two-sided interval, or a limit on one side.

    Notes
    -----
    z² p (1 − p) / d²: Cochran (1977), Sampling Techniques, 3rd ed., sec. 4.4.

    Examples
    --------
    >>> round(unrounded_for_margin(0.5, 0.05, confidence=0.95), 1)
    384.1
    """
    check_share(share, "the expected share")
    check_share(margin, "the margin")
    check_share(confidence, "confidence")
    spread = math.sqrt(share * (1 - share))
    return unrounded_for_half_width(spread, margin, confidence=confidence, kind=kind)


def unrounded_for_listed_share(endless: float, units: int) -> float:
    """Correct a number of results about a share for a list: n0 / (1 + (n0 − 1)/N), unrounded.

    Notes
    -----
    Cochran (1977), Sampling Techniques, 3rd ed., sec. 4.4.

    Examples
    --------
    >>> round(unrounded_for_listed_share(400, 3200), 2)
    355.65
    """
    if not 1 <= units <= MOST_UNITS:
        message = f"a list of {units} units; it must have 1 to {MOST_UNITS}."
        raise DesignError(message)
    return endless / (1 + max(endless - 1, 0.0) / units)


def n_for_margin(
    share: float,
    margin: float,
    *,
    confidence: float,
    kind: IntervalKind = "two-sided",
    units: int | None = None,
) -> int:
    """Count the results for a margin about a share by the normal formula.

    Parameters
    ----------
    share, margin, confidence, kind
        As in ``unrounded_for_margin``.
    units : int, optional
        Length of a list.

    Examples
    --------
    >>> n_for_margin(0.5, 0.05, confidence=0.95)
    385
    >>> n_for_margin(0.5, 0.05, confidence=0.95, units=200)
    132
    """
    first = unrounded_for_margin(share, margin, confidence=confidence, kind=kind)
    if units is None:
        if first > MOST:
            message = (
                f"a margin of {margin:g} about a share of {share:g} asks for more than {MOST} "
                "results; allow a wider margin."
            )
            raise DesignError(message)
        return whole(first)
    return min(whole(unrounded_for_listed_share(first, units)), units)


def exact_interval(
    count: int, n: int, *, confidence: float, kind: IntervalKind = "two-sided"
) -> tuple[float, float]:
    """Set the exact interval or limit about a share: count of n results.

    Parameters
    ----------
    count, n : int
    confidence : float
    kind : str
        Two-sided interval, or a limit on one side; the other end is then 0 or 1.

    Notes
    -----
    Clopper & Pearson (1934), Biometrika 26:404: holds the share at least as often as stated,
    usually more often.

    Examples
    --------
    >>> low, high = exact_interval(3, 20, confidence=0.95)
    >>> round(low, 3), round(high, 3)
    (0.032, 0.379)
    """
    import numpy as np

    _check_count(count, n)
    low, high = _exact_ends(np.array([count]), n, confidence, kind)
    return float(low[0]), float(high[0])


def wilson_interval(
    count: int, n: int, *, confidence: float, kind: IntervalKind = "two-sided"
) -> tuple[float, float]:
    """Set Wilson's interval or limit about a share, near the stated confidence on average.

    Parameters
    ----------
    count, n, confidence, kind
        As in ``exact_interval``.

    Notes
    -----
    Wilson (1927), Journal of the American Statistical Association 22:209.

    Examples
    --------
    >>> low, high = wilson_interval(3, 20, confidence=0.95)
    >>> round(low, 3), round(high, 3)
    (0.052, 0.36)
    """
    _check_count(count, n)
    check_share(confidence, "confidence")
    z2 = unrounded_for_half_width(1.0, 1.0, confidence=confidence, kind=kind)
    middle = (count + z2 / 2) / (n + z2)
    reach = math.sqrt(z2 * (count * (n - count) / n + z2 / 4)) / (n + z2)
    low = 0.0 if kind == "upper-limit" or count == 0 else max(middle - reach, 0.0)
    high = 1.0 if kind == "lower-limit" or count == n else min(middle + reach, 1.0)
    return low, high


def listed_interval(
    count: int, n: int, *, units: int, confidence: float, kind: IntervalKind = "two-sided"
) -> tuple[int, int]:
    """Set the exact interval or limit for how many units of a list have what ``count`` of n have.

    Parameters
    ----------
    count, n : int
        Units with it, of those drawn at random without replacement.
    units : int
        Length of the list.
    confidence, kind
        As in ``exact_interval``.

    Returns
    -------
    tuple of int
        Fewest and most units; every unit not drawn is open on an open side.

    Notes
    -----
    Hypergeometric tails inverted: Cochran (1977), Sampling Techniques, 3rd ed., sec. 3.5.

    Examples
    --------
    >>> listed_interval(3, 20, units=60, confidence=0.95)
    (3, 20)
    """
    _check_count(count, n)
    check_share(confidence, "confidence")
    level = (1 + confidence) / 2 if kind == "two-sided" else confidence
    low, high = count, units - (n - count)
    if kind != "upper-limit":
        low = units - most_hidden(n, level, units=units, found=n - count)
    if kind != "lower-limit":
        high = most_hidden(n, level, units=units, found=count)
    return low, high


def expected_reach(
    share: float,
    n: int,
    *,
    confidence: float,
    kind: IntervalKind = "two-sided",
    units: int | None = None,
) -> float:
    """Give the width to expect of the exact interval about a share.

    Parameters
    ----------
    share : float
        True share; of a list the nearest whole number of units.
    n : int
        Results.
    confidence, kind
        As in ``exact_interval``.
    units : int, optional
        Length of a list, with the hypergeometric in place of the binomial.

    Returns
    -------
    float
        Half the mean width of a two-sided interval; the mean distance from the share to a limit.

    Notes
    -----
    Mean over all counts that n results can give, each with its chance.

    Examples
    --------
    >>> round(expected_reach(0.2, 100, confidence=0.95), 3)
    0.082
    """
    check_share(share, "the expected share")
    check_share(confidence, "confidence")
    if units is not None:
        share = round(share * units) / units
    counts = _likely(share, n)
    if units is None:
        chances = _binomial(counts, n, share)
        low, high = _exact_ends(counts, n, confidence, kind)
    else:
        chances = _hypergeometric(counts, n, round(share * units), units)
        low, high = _listed_ends(counts, n, units, confidence, kind)
    chances = chances / chances.sum()
    if kind == "two-sided":
        return float(chances @ (high - low)) / 2
    return float(chances @ (high - share if kind == "upper-limit" else share - low))


def n_for_expected_reach(
    share: float,
    margin: float,
    *,
    confidence: float,
    kind: IntervalKind = "two-sided",
    units: int | None = None,
) -> int:
    """Count the results whose exact interval about a share is expected within a margin.

    Parameters
    ----------
    share, margin, confidence, kind
        As in ``unrounded_for_margin``.
    units : int, optional
        Length of a list.

    Returns
    -------
    int
        The smallest n whose mean half-width (or distance to the limit) is within the margin;
        larger than the normal formula's, which forgets that counts are whole.

    Examples
    --------
    >>> n_for_expected_reach(0.2, 0.08, confidence=0.95)
    105
    """
    first = n_for_margin(share, margin, confidence=confidence, kind=kind, units=units)

    def keeps(n: int) -> bool:
        reach = expected_reach(share, n, confidence=confidence, kind=kind, units=units)
        return meets(reach, margin)

    return first_that_fits(
        keeps,
        1,
        f"a margin of {margin:g} about a share of {share:g}",
        near=first,
        most=MOST if units is None else units,
    )


def _likely(share: float, n: int) -> "Floats":
    """Give the counts of n results that are not all but impossible; of very many, every few."""
    import numpy as np

    reach = _SPREADS * math.sqrt(n * share * (1 - share)) + 20
    low, high = max(math.floor(n * share - reach), 0), min(math.ceil(n * share + reach), n)
    return np.arange(low, high + 1, max(1, (high - low) // _COUNTS), dtype=float)


def _binomial(counts: "Floats", n: int, share: float) -> "Floats":
    import numpy as np
    from scipy.special import gammaln, xlog1py, xlogy

    choose = gammaln(n + 1) - gammaln(counts + 1) - gammaln(n - counts + 1)
    return np.exp(choose + xlogy(counts, share) + xlog1py(n - counts, -share))


def _hypergeometric(counts: "Floats", n: int, having: "Floats | int", units: int) -> "Floats":
    """Give the chance of each count; broadcast, and 0 where a count cannot be."""
    import numpy as np
    from scipy.special import gammaln

    others = units - having
    can = (counts >= 0) & (counts <= having) & (n - counts <= others)
    k = np.where(can, counts, np.maximum(0, n - others))
    logs = gammaln(having + 1.0) - gammaln(k + 1) - gammaln(having - k + 1)
    logs += gammaln(others + 1.0) - gammaln(n - k + 1) - gammaln(others - n + k + 1)
    logs -= gammaln(units + 1) - gammaln(n + 1) - gammaln(units - n + 1)
    return np.where(can, np.exp(logs), 0.0)


def _exact_ends(
    counts: "Floats", n: int, confidence: float, kind: IntervalKind
) -> "tuple[Floats, Floats]":
    import numpy as np
    from scipy.special import betaincinv

    check_share(confidence, "confidence")
    level = (1 + confidence) / 2 if kind == "two-sided" else confidence
    low, high = np.zeros(len(counts)), np.ones(len(counts))
    some, spare = counts > 0, counts < n
    if kind != "upper-limit":
        low[some] = betaincinv(counts[some], n - counts[some] + 1, 1 - level)
    if kind != "lower-limit":
        high[spare] = betaincinv(counts[spare] + 1, n - counts[spare], level)
    return low, high


def _listed_ends(
    counts: "Floats", n: int, units: int, confidence: float, kind: IntervalKind
) -> "tuple[Floats, Floats]":
    """Give both ends as shares of the list; on an open side what is certain."""
    level = (1 + confidence) / 2 if kind == "two-sided" else confidence
    low, high = counts, units - (n - counts)
    if kind != "upper-limit":
        low = units - _most(n - counts, n, units, level)
    if kind != "lower-limit":
        high = _most(counts, n, units, level)
    return low / units, high / units


def _most(counts: "Floats", n: int, units: int, level: float) -> "Floats":
    """Give ``lots.most_hidden`` for many counts at once, by halving between bounds."""
    import numpy as np

    spread = _SPREADS * math.sqrt(n * max(1 - n / units, 0.0)) + 20
    below = counts[:, None] - np.arange(math.ceil(min(spread, n)))
    # At the estimate itself the tail is far above 1 − level; one past the most it is 0.
    low = np.maximum(counts, np.floor(counts * units / n))
    high = units - (n - counts) + 1
    while np.any(high - low > 1):
        middle = np.floor((low + high) / 2)
        having = middle[:, None]
        # From each count down: the chance of k − 1 over the chance of k.
        falls = below * (units - having - n + below) / ((having - below + 1) * (n - below + 1))
        tail = 1 + np.cumprod(np.maximum(falls, 0.0), axis=1).sum(axis=1)
        held = _hypergeometric(counts, n, middle, units) * tail > 1 - level + 1e-12
        low, high = np.where(held, middle, low), np.where(held, high, middle)
    return low


def _check_count(count: int, n: int) -> None:
    if not 0 <= count <= n or n < 1:
        message = f"{count} of {n} results; the count must be 0 to n, and n at least 1."
        raise DesignError(message)
