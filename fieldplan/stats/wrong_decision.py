"""What a wrong decision costs on average, and the number of results at which the whole is least.

A campaign acts when its mean, with a margin for its error, comes out above a level. It is wrong
when it acts on a place whose true mean is not above the level, or leaves one whose mean is.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING, NamedTuple

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import normal_share

if TYPE_CHECKING:
    import numpy as np

NEAR = 200
"""So many numbers of results are tried one by one; farther up, steps of 2 %."""

_REACH = 8.5
"""Normal standard deviations beyond which nothing is left to the fifteenth digit."""


@dataclass(frozen=True)
class Belief:
    """Where the true mean may lie before the campaign.

    Parameters
    ----------
    mean : float
    spread : float
        Standard deviation of a normal distribution about ``mean``; 0 for a stated true mean.

    Raises
    ------
    DesignError
        The spread is below 0, or one of the two is no number.
    """

    mean: float
    spread: float = 0.0

    def __post_init__(self) -> None:
        """Refuse what no belief has."""
        if not (math.isfinite(self.mean) and 0 <= self.spread < math.inf):
            message = (
                f"a belief of {self.mean!r} give or take {self.spread!r} cannot be reckoned with; "
                "both must be numbers, the second not below 0."
            )
            raise DesignError(message)

    def above(self, level: float) -> float:
        """Give the chance that the true mean lies above a level.

        Examples
        --------
        >>> Belief(120, 30).above(150) < 0.16, Belief(120).above(150), Belief(151).above(150)
        (True, 0.0, 1.0)
        """
        if self.spread == 0:
            return float(self.mean > level)
        return normal_share((self.mean - level) / self.spread)


def belief_between(low: float, high: float, *, chance: float = 0.9) -> Belief:
    """Turn two values between which the true mean lies with a chance into a belief.

    Parameters
    ----------
    low, high : float
        ``low`` below ``high``.
    chance : float
        Inside (0, 1); as much is left below ``low`` as above ``high``.

    Raises
    ------
    DesignError
        The two values are not in order.

    Examples
    --------
    >>> found = belief_between(90, 180)
    >>> found.mean, round(found.spread, 2)
    (135.0, 27.36)
    """
    from fieldplan.stats.distributions import normal_quantile

    if not low < high:
        message = f"the true mean cannot lie between {low:g} and {high:g}; the lower comes first."
        raise DesignError(message)
    return Belief((low + high) / 2, (high - low) / 2 / normal_quantile((1 + chance) / 2))


class Wrong(NamedTuple):
    """Chances of the two wrong decisions before the true mean is known: together at most 1."""

    acted: float
    left: float

    def loss(self, *, wrongly_acted: float, wrongly_left: float) -> float:
        """Give the expected loss when each wrong decision costs a fixed amount.

        Examples
        --------
        >>> Wrong(0.1, 0.02).loss(wrongly_acted=40000, wrongly_left=300000)
        10000.0
        """
        return self.acted * wrongly_acted + self.left * wrongly_left


def wrong_without_results(belief: Belief, level: float, *, act: bool) -> Wrong:
    """Give the chances of a wrong decision where nobody samples.

    Parameters
    ----------
    belief : Belief
    level : float
    act : bool
        Act without results, or leave without.

    Examples
    --------
    >>> wrong_without_results(Belief(150, 30), 150, act=True)
    Wrong(acted=0.5, left=0.0)
    """
    above = belief.above(level)
    return Wrong(1 - above, 0.0) if act else Wrong(0.0, above)


def wrong_decisions(
    belief: Belief,
    level: float,
    *,
    standard_error: float,
    degrees_of_freedom: float = math.inf,
    multiplier: float = 0.0,
) -> Wrong:
    r"""Give the chances of the two wrong decisions of a coming campaign.

    Parameters
    ----------
    belief : Belief
    level : float
        In the unit of the mean.
    standard_error : float
        True standard error of the campaign's mean, not below 0.
    degrees_of_freedom : float
        Of the standard error that the campaign will estimate; infinite where sigma is known.
    multiplier : float
        The campaign acts when mean + multiplier · estimated standard error is above the level:
        Student's t where an upper limit is compared, −t for a lower limit, 0 for the mean itself.

    Raises
    ------
    DesignError
        The standard error is below 0 or no number, or degrees of freedom are below 1.

    Notes
    -----
    Given the true mean μ the chance to act is :math:`\int \Phi((\mu-L)/SE + k s) f(s)\,ds` with f
    the density of an estimated over the true standard deviation (noncentral t; results normal).
    A belief is integrated over by Gauss-Legendre pieces on either side of the level.

    Examples
    --------
    >>> wrong_decisions(Belief(150), 150, standard_error=10)
    Wrong(acted=0.5, left=0.0)
    >>> found = wrong_decisions(Belief(135, 27), 150, standard_error=10)
    >>> round(found.acted, 3), round(found.left, 3)
    (0.055, 0.043)
    """
    _check(standard_error, degrees_of_freedom)
    if standard_error == 0:
        return Wrong(0.0, 0.0)
    import numpy as np

    ratios, shares = _estimated_over_true(degrees_of_freedom if multiplier else math.inf)

    def act(means: "np.ndarray") -> "np.ndarray":
        from scipy.special import ndtr

        shift = (means[:, np.newaxis] - level) / standard_error
        return np.asarray(ndtr(shift + multiplier * ratios) @ shares)

    if belief.spread == 0:
        acts = float(act(np.array([belief.mean]))[0])
        return Wrong(0.0, 1 - acts) if belief.mean > level else Wrong(acts, 0.0)
    # beyond the zone in which the campaign can go either way no decision is wrong
    zone = standard_error * (_REACH + abs(multiplier) * float(ratios.max()))
    bounds = (belief.mean - _REACH * belief.spread, belief.mean + _REACH * belief.spread)
    acted = left = 0.0
    low, high = max(bounds[0], level - zone), min(bounds[1], level)
    if low < high:
        means, weights = _pieces(low, high)
        acted = float((weights * _density(belief, means)) @ act(means))
    low, high = max(bounds[0], level), min(bounds[1], level + zone)
    if low < high:
        means, weights = _pieces(low, high)
        left = float((weights * _density(belief, means)) @ (1 - act(means)))
    return Wrong(acted, left)


def _check(standard_error: float, degrees_of_freedom: float) -> None:
    if not 0 <= standard_error < math.inf:
        message = f"the standard error is {standard_error!r}; it must be a number not below 0."
        raise DesignError(message)
    if not degrees_of_freedom >= 1:
        message = f"a limit needs 1 degree of freedom or more, not {degrees_of_freedom!r}."
        raise DesignError(message)


def _density(belief: Belief, means: "np.ndarray") -> "np.ndarray":
    import numpy as np

    off = (means - belief.mean) / belief.spread
    return np.asarray(np.exp(-off * off / 2) / (belief.spread * math.sqrt(2 * math.pi)))


@lru_cache(maxsize=1)
def _rule() -> tuple["np.ndarray", "np.ndarray"]:
    """Give the Gauss-Legendre rule of 20 points on [-1, 1]."""
    from numpy.polynomial.legendre import leggauss

    nodes, weights = leggauss(20)
    return nodes, weights


def _pieces(low: float, high: float, *, pieces: int = 8) -> tuple["np.ndarray", "np.ndarray"]:
    """Give nodes and weights of Gauss-Legendre rules of 20 points, laid end to end."""
    import numpy as np

    nodes, weights = _rule()
    edges = np.linspace(low, high, pieces + 1)
    half = np.diff(edges)[:, np.newaxis] / 2
    middle = (edges[:-1] + edges[1:])[:, np.newaxis] / 2
    return (middle + half * nodes).ravel(), (half * weights).ravel()


def _estimated_over_true(degrees_of_freedom: float) -> tuple["np.ndarray", "np.ndarray"]:
    """Give values of s/σ with their shares; the single value 1 where sigma is known."""
    import numpy as np

    if math.isinf(degrees_of_freedom):
        return np.ones(1), np.ones(1)
    half = degrees_of_freedom / 2
    reach = _REACH / math.sqrt(2 * degrees_of_freedom)
    values, weights = _pieces(max(0.0, 1 - 1.5 * reach), 1 + 1.5 * reach, pieces=4)
    front = math.log(2) + half * math.log(half) - math.lgamma(half)
    density = np.exp(front + (degrees_of_freedom - 1) * np.log(values) - half * values**2)
    shares = weights * density
    return values, shares / shares.sum()


def cheapest_number(
    cost: Callable[[int], float], loss: Callable[[int], float], *, least: int, most: int
) -> int:
    """Find the number of results at which sampling and expected loss together cost least.

    Parameters
    ----------
    cost, loss : callable
        Take a number of results, give money; ``cost`` must not fall.
    least, most : int
        Where to look, ends included.

    Returns
    -------
    int
        The smallest of equals. Up to ``NEAR`` above ``least`` every number is tried; beyond that
        steps of 2 %, and then every number within a step of the best.

    Examples
    --------
    >>> cheapest_number(lambda n: 75 * n, lambda n: 40000 / n, least=2, most=1000)
    23
    """
    totals: dict[int, float] = {}
    number = least
    while number <= most:
        bill = cost(number)
        if totals and bill > min(totals.values()):
            break
        totals[number] = bill + loss(number)
        number += 1 if number < least + NEAR else max(1, number // 50)
    best = min(totals, key=lambda n: (totals[n], n))
    step = 0 if best < least + NEAR else best // 49 + 1
    for near in range(max(least, best - step), min(most, best + step) + 1):
        if near not in totals:
            totals[near] = cost(near) + loss(near)
    return min(totals, key=lambda n: (totals[n], n))
