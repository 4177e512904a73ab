"""Student's t when the mean is not where the test supposes it: noncentral t by quadrature."""

import math
from functools import lru_cache
from itertools import pairwise

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import normal_share

_REACH = 9.0
"""Normal standard deviations beyond which nothing is left to the sixteenth digit."""

_NODES = 24

_SOFT = 3.5
"""Up to this value the normal share turns so slowly that the density alone sets the pieces."""

_ROOT = math.sqrt(2)


@lru_cache(maxsize=1)
def gauss_legendre() -> tuple[tuple[float, float], ...]:
    """Give nodes and weights of the Gauss-Legendre rule on [-1, 1]."""
    from numpy.polynomial.legendre import leggauss

    nodes, weights = leggauss(_NODES)
    return tuple((float(x), float(w)) for x, w in zip(nodes, weights, strict=True))


@lru_cache(maxsize=4096)
def noncentral_t_beyond(value: float, degrees_of_freedom: float, shift: float) -> float:
    r"""Give the chance that a noncentral Student variate lies above ``value``.

    Parameters
    ----------
    value : float
        Where the test rejects, in standard errors.
    degrees_of_freedom : float
        At least 1; need not be whole; infinite gives the normal.
    shift : float
        True distance in true standard errors, the noncentrality.

    Returns
    -------
    float
        Inside [0, 1], to at least 10 digits after the point.

    Raises
    ------
    DesignError
        Degrees of freedom below 1.

    Notes
    -----
    :math:`P(T > v) = \int \Phi(\delta - v s)\, f(s)\, ds` with f the density of the ratio of an
    estimated to the true standard deviation, by Gauss-Legendre quadrature piece by piece;
    Johnson, Kotz & Balakrishnan (1995), Continuous Univariate Distributions 2, ch. 31.

    Examples
    --------
    >>> round(noncentral_t_beyond(1.8331, 9, 0.0), 4)
    0.05
    >>> round(noncentral_t_beyond(1.8331, 9, 3.0), 3)
    0.868
    """
    if math.isinf(degrees_of_freedom):
        return normal_share(shift - value)
    if not degrees_of_freedom >= 1:
        message = f"a t test needs 1 degree of freedom or more, not {degrees_of_freedom!r}."
        raise DesignError(message)
    points = _spread_points(degrees_of_freedom)
    if abs(value) > _SOFT:
        turns = tuple((shift + k * _REACH) / value for k in (-1, -0.5, 0, 0.5, 1))
        points = _points(degrees_of_freedom, turns)
    total = math.fsum(weight * math.erfc((value * s - shift) / _ROOT) for s, weight in points)
    return min(max(total / 2, 0.0), 1.0)


@lru_cache(maxsize=1024)
def _spread_points(degrees_of_freedom: float) -> tuple[tuple[float, float], ...]:
    return _points(degrees_of_freedom, ())


def _points(degrees_of_freedom: float, turns: tuple[float, ...]) -> tuple[tuple[float, float], ...]:
    """Give values of s/σ with weights that sum to 1, cut where the density sits and at the turns.

    The density is s^(ν − 1) exp(−ν s²/2) but for a constant, which the sum of the weights stands
    in for: its logarithm would lose the last digits of large ν.

    The cuts are fourth roots of s/σ: the density starts as s^(ν − 1), which no polynomial
    follows when ν is a fraction near 1, but one in the fourth root does.
    """
    reach = _REACH / math.sqrt(degrees_of_freedom)
    low, high = max(0.0, 1 - reach), 1 + reach
    cuts = {low, high, (low + 1) / 2, 1.0, (high + 1) / 2}
    cuts |= {turn for turn in turns if low < turn < high}
    found = []
    for left, right in pairwise(sorted(cut**0.25 for cut in cuts)):
        half, middle = (right - left) / 2, (right + left) / 2
        for node, weight in gauss_legendre():
            root = middle + half * node
            s = root**4
            log = math.log(s)
            # s² − 1 as it stands loses its digits near 1, where all of the density sits.
            exponent = degrees_of_freedom * (log - math.expm1(2 * log) / 2)
            found.append((s, half * weight * root**3 * math.exp(exponent - log)))
    total = math.fsum(weight for _, weight in found)
    return tuple((s, weight / total) for s, weight in found)
