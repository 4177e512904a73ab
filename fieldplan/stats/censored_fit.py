"""A population fitted to results of which some lie below their reporting limit."""

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import normal_quantile

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

Model = Literal["lognormal", "gamma", "normal"]
MODELS: tuple[Model, ...] = ("lognormal", "gamma", "normal")

FEWEST_DETECTS = 3
"""A fit needs so many that differ, and a mean so many at all."""

_DROP = 0.5 * normal_quantile(0.90) ** 2
"""Of the log likelihood at a one-sided 90 % limit."""


@dataclass(frozen=True)
class CensoredFit:
    """A population fitted to results of which some are non-detects.

    Parameters
    ----------
    model : str
        ``lognormal``, ``gamma`` or ``normal``.
    mean, cv : float
        Of the population: mean in the laboratory's unit, and coefficient of variation.
    cv_high : float
        Upper 90 % limit of the coefficient of variation, by profile likelihood.
    log_likelihood : float
        At the fit; comparable between models.
    """

    model: Model
    mean: float
    cv: float
    cv_high: float
    log_likelihood: float


def fit_censored(detects: Sequence[float], limits: Sequence[float], model: Model) -> CensoredFit:
    """Fit a population to detects and to non-detects that lie below their limits.

    Parameters
    ----------
    detects : sequence of float
        In the laboratory's unit; above 0 but for the normal.
    limits : sequence of float
        One for each non-detect, above 0.
    model : str
        ``lognormal``, ``gamma`` or ``normal``.

    Returns
    -------
    CensoredFit

    Raises
    ------
    DesignError
        Fewer than 3 different detects, or a value that the model cannot have.

    Notes
    -----
    Maximum likelihood: a detect gives its density, a non-detect the share below its limit
    (Cohen 1959, Technometrics 1:217, for the normal). Profile limits: the coefficient of
    variation at which the log likelihood has fallen by z²/2.

    Examples
    --------
    >>> fit = fit_censored([6.0, 7.5, 9.0, 12.0, 20.0, 31.0], [5.0, 5.0], "lognormal")
    >>> round(fit.mean, 1), round(fit.cv, 2)
    (11.7, 0.93)
    """
    import numpy as np
    from scipy.optimize import minimize

    _check_fit(detects, limits, model)
    start = _start(detects, limits)

    def loss(log_mean: float, log_cv: float) -> float:
        mean, cv = math.exp(log_mean), math.exp(log_cv)
        return -_log_likelihood(detects, limits, model, mean=mean, cv=cv)

    def loss_at(place: "NDArray[np.float64]") -> float:
        return loss(float(place[0]), float(place[1]))

    options: Any = {"xatol": 1e-7, "fatol": 1e-9, "maxiter": 2000}
    best = minimize(loss_at, np.array(start), method="Nelder-Mead", options=options)
    log_mean, log_cv = float(best.x[0]), float(best.x[1])
    high = _profile_limit(loss, log_mean, log_cv, allowed=float(best.fun) + _DROP)
    return CensoredFit(
        model, math.exp(log_mean), math.exp(log_cv), math.exp(high), -float(best.fun)
    )


def _start(detects: Sequence[float], limits: Sequence[float]) -> tuple[float, float]:
    """Give logs of mean and coefficient of variation with non-detects at half their limit."""
    everything = [*detects, *(limit / 2 for limit in limits)]
    middle = math.fsum(everything) / len(everything)
    if not middle > 0:
        message = (
            f"the mean of the results is {middle:g}; a coefficient of variation needs one > 0."
        )
        raise DesignError(message)
    spread = math.sqrt(math.fsum((v - middle) ** 2 for v in everything) / len(everything))
    return math.log(middle), math.log(max(spread / middle, 0.01))


def _profile_limit(
    loss: Callable[[float, float], float], log_mean: float, log_cv: float, *, allowed: float
) -> float:
    """Find the larger coefficient of variation at which the best mean loses what is allowed."""
    from scipy.optimize import minimize_scalar

    def falls_short(log_wider: float) -> bool:
        reach = 6 + 2 * math.exp(2 * min(log_wider, 1.0))
        inner = minimize_scalar(
            lambda at: loss(at, log_wider),
            bounds=(log_mean - 3, log_mean + reach),
            method="bounded",
        )
        return float(inner.fun) > allowed

    low, high = log_cv, log_cv + 4
    for _ in range(16):
        between = (low + high) / 2
        low, high = (low, between) if falls_short(between) else (between, high)
    return high


def _check_fit(detects: Sequence[float], limits: Sequence[float], model: Model) -> None:
    if len(set(detects)) < FEWEST_DETECTS:
        message = (
            f"{len(set(detects))} different detects cannot show the shape of a population; a fit "
            f"needs {FEWEST_DETECTS}."
        )
        raise DesignError(message)
    wrong = [limit for limit in limits if not limit > 0]
    if model != "normal":
        wrong += [value for value in detects if not value > 0]
    if wrong:
        message = f"a {model} population has no values such as {wrong[0]:g}; they must be above 0."
        raise DesignError(message)


def _log_likelihood(
    detects: Sequence[float], limits: Sequence[float], model: Model, *, mean: float, cv: float
) -> float:
    import numpy as np
    from scipy.special import gammainc, gammaln, log_ndtr

    y, c = np.asarray(detects, dtype=float), np.asarray(limits, dtype=float)
    if model == "gamma":
        k, scale = 1 / cv**2, mean * cv**2
        density = (k - 1) * np.log(y) - y / scale - gammaln(k) - k * math.log(scale)
        below = np.log(np.maximum(gammainc(k, c / scale), 1e-300))
        return float(density.sum() + below.sum())
    sigma, centre, log_scale = mean * cv, mean, np.zeros_like(y)
    if model == "lognormal":
        sigma = math.sqrt(math.log1p(cv**2))
        centre, log_scale = math.log(mean) - sigma**2 / 2, np.log(y)
        y, c = log_scale, np.log(c)
    z = (y - centre) / sigma
    density = -0.5 * z**2 - math.log(sigma * math.sqrt(2 * math.pi)) - log_scale
    return float(density.sum() + log_ndtr((c - centre) / sigma).sum())
