"""How little a censored sample speaks for a population: minus the log likelihood."""

import math
from collections import Counter
from collections.abc import Callable, Sequence

from fieldplan.stats.censored_fit import Model

Loss = Callable[[float, float], float]
"""Minus the log likelihood, up to a constant, by place of the mean and log of the spread."""


def censored_loss(
    detects: Sequence[float], limits: Sequence[float], model: Model
) -> tuple[Loss, float, float]:
    """Give the loss of a model, and where to start: place of the mean and log of the spread.

    Parameters
    ----------
    detects : sequence of float
    limits : sequence of float
        One for each non-detect.
    model : str
        ``lognormal``, ``gamma`` or ``normal``.

    Returns
    -------
    loss : callable
        Of the place of the mean (its log but for the normal) and of the log of the spread (σ of
        logs, coefficient of variation, σ).
    place, log_spread : float
        With non-detects at half their limit.

    Notes
    -----
    The detects enter by sums alone and equal limits together, so that a call costs microseconds.

    Examples
    --------
    >>> loss, place, log_spread = censored_loss([6.0, 9.0, 12.0], [5.0], "normal")
    >>> place, loss(place, log_spread) < loss(place + 9, log_spread)
    (7.375, True)
    """
    start = [*detects, *(limit / 2 for limit in limits)]
    mean = math.fsum(start) / len(start)
    sd = math.sqrt(math.fsum((x - mean) ** 2 for x in start) / len(start))
    below = list(Counter(limits).items())
    if model == "gamma":
        return _gamma_loss(detects, below), math.log(mean), math.log(sd / mean)
    if model == "normal":
        return _normal_loss(detects, below), mean, math.log(sd)
    normal = _normal_loss(
        [math.log(x) for x in detects], [(math.log(x), count) for x, count in below]
    )

    def lognormal(place: float, log_spread: float) -> float:
        return normal(place - math.exp(2 * log_spread) / 2, log_spread)

    return lognormal, math.log(mean), math.log(math.sqrt(math.log1p((sd / mean) ** 2)))


def _normal_loss(values: Sequence[float], below: Sequence[tuple[float, int]]) -> Loss:
    count, centre = len(values), math.fsum(values) / len(values)
    squares = math.fsum((x - centre) ** 2 for x in values)

    def loss(place: float, log_spread: float) -> float:
        sigma = math.exp(log_spread)
        total = count * log_spread + (squares + count * (centre - place) ** 2) / (2 * sigma**2)
        for limit, number in below:
            total -= number * _log_share_below((limit - place) / sigma)
        return total

    return loss


def _log_share_below(z: float) -> float:
    """Give the log of the normal share below z; erfc is fast and right down to 30 below."""
    if z > -30:
        return math.log(math.erfc(-z / math.sqrt(2)) / 2)
    from scipy.special import log_ndtr

    return float(log_ndtr(z))


def _gamma_loss(values: Sequence[float], below: Sequence[tuple[float, int]]) -> Loss:
    from scipy.special import gammainc

    count, total = len(values), math.fsum(values)
    logs = math.fsum(map(math.log, values))

    def loss(place: float, log_spread: float) -> float:
        k = math.exp(-2 * log_spread)
        log_scale = place - math.log(k)
        scale = math.exp(log_scale)
        found = (k - 1) * logs - total / scale - count * (math.lgamma(k) + k * log_scale)
        for limit, number in below:
            found += number * math.log(max(float(gammainc(k, limit / scale)), 1e-300))
        return -found

    return loss
