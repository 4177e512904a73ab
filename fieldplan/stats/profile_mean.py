"""The mean by maximum likelihood with non-detects, and its interval by profile likelihood."""

import math
from collections import Counter
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.stats.censored import CensoredMean, CensoredMethod
from fieldplan.stats.censored_fit import FEWEST_DETECTS, Model
from fieldplan.stats.censored_likelihood import Loss, censored_loss
from fieldplan.stats.intervals import IntervalKind, t_quantile

MODEL_OF: dict[CensoredMethod, Model] = {
    "lognormal-likelihood": "lognormal",
    "gamma-likelihood": "gamma",
    "normal-likelihood": "normal",
}

MOST_JACKKNIFED = 200
"""Results up to which the bias of a fit is taken off."""

_STEP = 1e-4


@dataclass(frozen=True)
class ProfileMean:
    """Fit and interval on the scale of the likelihood.

    Parameters
    ----------
    mean, spread : float
        The mean; and of the model: σ of logs (lognormal), coefficient of variation (gamma), σ.
    standard_error : float
        From the curvature of the profile at its top.
    low, high : float
        Where the log likelihood has fallen by ``drop``.
    drop : float
    t : float
        Student quantile behind it.
    """

    mean: float
    spread: float
    standard_error: float
    low: float
    high: float
    drop: float
    t: float


def profile_of_mean(
    detects: Sequence[float],
    limits: Sequence[float],
    model: Model,
    *,
    confidence: float = 0.95,
    kind: IntervalKind = "two-sided",
) -> ProfileMean:
    """Fit a population and read the interval of its mean from the profile likelihood.

    Parameters
    ----------
    detects : sequence of float
        Above 0 but for the normal, at least 3 different ones.
    limits : sequence of float
        One for each non-detect.
    model : str
        ``lognormal``, ``gamma`` or ``normal``.
    confidence : float
    kind : str

    Returns
    -------
    ProfileMean

    Raises
    ------
    DesignError
        Too few different detects, or a value that the model cannot have.

    Notes
    -----
    A detect gives its density, a non-detect the share below its limit. For each mean the spread is
    set to its best; the ends lie where the log likelihood has fallen by (n/2)·log(1 + t²/(n − 1)),
    t Student's quantile with n − 1 degrees of freedom. Of a normal without non-detects this is
    exactly Student's interval (profile likelihood: Venzon & Moolgavkar 1988, Applied Statistics
    37:87, from memory; the calibration is derived here, no published source).

    Examples
    --------
    >>> found = profile_of_mean([6.0, 7.5, 9.0, 12.0, 20.0, 31.0], [5.0, 5.0], "lognormal")
    >>> round(found.mean, 1), round(found.low, 1), round(found.high, 1)
    (11.7, 6.2, 48.5)
    """
    _check(detects, limits, model)
    loss, place, log_spread = censored_loss(detects, limits, model)
    place, log_spread = _top(loss, place, log_spread, model)

    def best(at: float, start: float) -> float:
        return _lowest(lambda spread: loss(at, spread), start)

    n = len(detects) + len(limits)
    t = t_quantile(n - 1, confidence=confidence, kind=kind)
    drop = n / 2 * math.log1p(t * t / (n - 1))
    width = math.exp(log_spread) if model == "normal" else 1.0
    error = _error(loss, best, (place, log_spread), width=width)
    low, high = (
        _end(loss, best, (place, log_spread), error=error, reach=sign * math.sqrt(2 * drop))
        for sign in (-1, 1)
    )
    if model == "normal":
        return ProfileMean(place, math.exp(log_spread), error, low, high, drop, t)
    mean = math.exp(place)
    ends = math.exp(low), math.exp(high)
    return ProfileMean(mean, math.exp(log_spread), mean * error, *ends, drop, t)


def jackknifed(
    detects: Sequence[float], limits: Sequence[float], model: Model, *, fitted: float
) -> float:
    """Take from a fitted mean the bias that leaving out each result in turn shows.

    Parameters
    ----------
    detects, limits : sequence of float
    model : str
    fitted : float
        Mean of the fit to all of them.

    Returns
    -------
    float
        n·fitted − (n − 1)·(mean of the fits to all but one).

    Notes
    -----
    Quenouille (1956), Biometrika 43:353 (from memory). By likelihood alone the mean of a lognormal
    with a coefficient of variation of 1 is 2 to 3 % too high at 20 results with 60 % non-detects.

    Examples
    --------
    >>> round(jackknifed([4.0, 5.0, 9.0], [], "normal", fitted=6.0), 9)
    6.0
    """
    n, left_out = len(detects) + len(limits), 0.0
    top, scale, bend = _full_fit(detects, limits, model)
    for part, other in ((list(detects), False), (list(limits), True)):
        for value, count in Counter(part).items():
            fewer = list(part)
            fewer.remove(value)
            loss = censored_loss(detects if other else fewer, fewer if other else limits, model)[0]
            place = _nearby_top(loss, top, scale=scale, bend=bend)
            if place is None:
                place = _top(loss, *top, model)[0]
            left_out += count * (place if model == "normal" else math.exp(place))
    return n * fitted - (n - 1) * left_out / n


def _full_fit(
    detects: Sequence[float], limits: Sequence[float], model: Model
) -> tuple[tuple[float, float], float, tuple[float, float, float]]:
    """Give the top of the likelihood, the scale of its place, and its second derivatives."""
    loss, place, log_spread = censored_loss(detects, limits, model)
    a, b = _top(loss, place, log_spread, model)
    h = 1e-3
    s = h * math.exp(b) if model == "normal" else h
    here = loss(a, b)
    aa = (loss(a + s, b) - 2 * here + loss(a - s, b)) / s**2
    bb = (loss(a, b + h) - 2 * here + loss(a, b - h)) / h**2
    corners = loss(a + s, b + h) - loss(a + s, b - h) - loss(a - s, b + h) + loss(a - s, b - h)
    return (a, b), s / h, (aa, corners / (4 * s * h), bb)


def _nearby_top(
    loss: Loss, top: tuple[float, float], *, scale: float, bend: tuple[float, float, float]
) -> float | None:
    """Find the place of a top near another one, by steps with the second derivatives there.

    None where eight steps do not settle on it: the result left out lay far from the others.
    """
    (a, b), (aa, ab, bb) = top, bend
    s, h = _STEP * scale, _STEP
    turn = aa * bb - ab**2
    for _ in range(8):
        da = (loss(a + s, b) - loss(a - s, b)) / (2 * s)
        db = (loss(a, b + h) - loss(a, b - h)) / (2 * h)
        step, wider = (bb * da - ab * db) / turn, (aa * db - ab * da) / turn
        if not (abs(step) < scale and abs(wider) < 1):
            return None
        a, b = a - step, b - wider
        if abs(step) < 1e-6 * scale and abs(wider) < 1e-6:
            return a
    return None


def profile_mean(
    detects: Sequence[float],
    limits: Sequence[float],
    method: CensoredMethod,
    *,
    confidence: float = 0.95,
    kind: IntervalKind = "two-sided",
) -> CensoredMean:
    """Give the mean and interval of :func:`profile_of_mean` in the form that all methods share.

    The mean is freed of its bias by :func:`jackknifed` up to 200 results, from which on the bias
    is nothing; the interval is that of the likelihood.

    Raises
    ------
    DesignError
        The method has no likelihood, or as there.

    Examples
    --------
    >>> detects = [6.0, 7.5, 9.0, 12.0, 20.0, 31.0]
    >>> found = profile_mean(detects, [5.0, 5.0], "gamma-likelihood")
    >>> round(found.mean, 1), round(found.numbers["fitted"], 1)
    (11.4, 11.4)
    """
    if method not in MODEL_OF:
        message = f"{method} is no method by likelihood; {', '.join(MODEL_OF)} are."
        raise DesignError(message)
    model = MODEL_OF[method]
    found = profile_of_mean(detects, limits, model, confidence=confidence, kind=kind)
    mean = found.mean
    if len(detects) + len(limits) <= MOST_JACKKNIFED:
        mean = jackknifed(detects, limits, model, fitted=found.mean)
        mean = min(max(mean, found.low), found.high)
    return CensoredMean(
        method, mean, found.standard_error,
        None if kind == "upper-limit" else found.low,
        None if kind == "lower-limit" else found.high,
        len(detects) + len(limits), len(limits),
        numbers={
            "fitted": found.mean, "spread": found.spread, "drop": found.drop, "t": found.t
        },
    )  # fmt: skip


def _check(detects: Sequence[float], limits: Sequence[float], model: Model) -> None:
    if len(set(detects)) < FEWEST_DETECTS:
        message = (
            f"{len(set(detects))} different detects cannot show the shape of a population; a fit "
            f"needs {FEWEST_DETECTS}."
        )
        raise DesignError(message)
    wrong = [x for x in (*detects, *limits) if not x > 0] if model != "normal" else []
    if wrong:
        message = f"a {model} population has no values such as {wrong[0]:g}; they must be above 0."
        raise DesignError(message)


def _top(loss: Loss, place: float, log_spread: float, model: Model) -> tuple[float, float]:
    """Find the place of the mean and the log of the spread that lose least."""

    def best(at: float) -> float:
        return _lowest(lambda spread: loss(at, spread), log_spread)

    width = math.exp(log_spread) if model == "normal" else 1.0
    place = _lowest(lambda at: loss(at, best(at)), place, width=width)
    return place, best(place)


def _lowest(function: Callable[[float], float], start: float, *, width: float = 1.0) -> float:
    """Find a minimum downhill from a start, by Newton steps of at most ``width``."""
    at, here, step = start, function(start), _STEP * width
    for _ in range(100):
        left, right = function(at - step), function(at + step)
        slope, bend = (right - left) / (2 * step), (right - 2 * here + left) / step**2
        move = -slope / bend if bend > 0 else -math.copysign(width, slope)
        move = max(-width, min(width, move))
        while abs(move) > 1e-9 * width and function(at + move) > here + 1e-12:
            move /= 2
        at += move
        here = function(at)
        if abs(move) < 1e-7 * width:
            break
    return at


def _error(
    loss: Loss,
    best: Callable[[float, float], float],
    top: tuple[float, float],
    *,
    width: float,
) -> float:
    """Give the standard error of the place from the curvature of the profile."""
    (place, log_spread), scale = top, 1e-3 * width
    sides = [place - scale, place + scale]
    least = loss(place, log_spread)
    rise = sum(loss(at, best(at, log_spread)) - least for at in sides)
    return scale / math.sqrt(max(rise, 1e-12))


def _end(
    loss: Loss,
    best: Callable[[float, float], float],
    top: tuple[float, float],
    *,
    error: float,
    reach: float,
) -> float:
    """Find where the signed root of twice the loss in likelihood comes to ``reach``.

    The root is nearly straight, so that secants find it; a bracket keeps them from going astray.
    """
    place, spread = top
    least = loss(place, spread)

    def missing(at: float) -> float:
        nonlocal spread
        spread = best(at, spread)
        return math.sqrt(max(2 * (loss(at, spread) - least), 0.0)) - abs(reach)

    sign = math.copysign(1.0, reach)
    inner, outer, lack = place, place + reach * error, -abs(reach)
    over = missing(outer)
    for _ in range(60):
        if over >= 0:
            break
        inner, lack = outer, over
        outer += sign * max(abs(reach) * error, abs(outer - place))
        over = missing(outer)
    for _ in range(100):
        share = lack / (lack - over)
        at = inner + (outer - inner) * min(max(share, 0.05), 0.95)
        found = missing(at)
        if abs(found) < 1e-8 or abs(outer - inner) < 1e-10 * error:
            return at
        inner, lack, outer, over = (
            (at, found, outer, over) if found < 0 else (inner, lack, at, found)
        )
    return at
