"""How many results an interval wants, and how wide a population a pilot leaves possible."""

import math
from collections.abc import Callable
from functools import lru_cache

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.mean_expansion import edgeworth_misses
from fieldplan.stats.mean_shape import FURTHEST, POINT, Shape
from fieldplan.stats.mean_simulation import SEED, Sampled, draw_standardised, simulate_coverage
from fieldplan.stats.shape import Family


@lru_cache(maxsize=64)
def n_within_a_point(
    shape: Shape, *, confidence: float, kind: IntervalKind, within: float = POINT
) -> int | None:
    """Count the results from which on a t interval misses by no more than a point too much.

    Parameters
    ----------
    shape : Shape
    confidence : float
        Nominal.
    kind : str
        Two-sided, upper or lower limit.
    within : float
        Largest shortfall.

    Returns
    -------
    int or None
        None where more than 100,000 are needed.

    Notes
    -----
    Misses follow the Edgeworth expansion to its second term; what simulated misses leave over is
    taken as its next term, c/n^1.5 for a limit and c/n² for an interval, with c fitted by
    weighted least squares at a quarter, a half and the whole of the n that the expansion alone
    asks for. Good to about a seventh; without zeros ``mean_shape.n_by_skewness`` is closer.
    """
    power = 2.0 if kind == "two-sided" else 1.5
    lean, tail, allowed = shape.skewness, shape.excess_kurtosis, 1 - confidence + within

    def expected(n: float) -> float:
        return edgeworth_misses(n, lean, tail, confidence=confidence, kind=kind)

    first = _last_crossing(expected, allowed) or FURTHEST
    top = bottom = 0.0
    for share in (4, 2, 1):
        part = Sampled(1.0, 1.0, min(max(8, first // share), 500), shape)
        many = max(4_000, min(40_000, 1_000_000 // part.results))
        found = simulate_coverage((part,), confidence=confidence, kind=kind, campaigns=many)
        term = part.results**-power
        weight = term / max(found.standard_error, 1e-4) ** 2
        top += weight * (1 - found.held - expected(part.results))
        bottom += weight * term
    return _last_crossing(lambda n: expected(n) + top / bottom * n**-power, allowed)


@lru_cache(maxsize=64)
def largest_cv(family: Family, seen: float, *, results: int, chance: float = 0.10) -> float:
    """Give the largest coefficient of variation that a pilot does not rule out.

    A population that spreads wider would show as little as this pilot less often than ``chance``.

    Parameters
    ----------
    family : str
        ``gamma`` or ``lognormal``.
    seen : float
        Coefficient of variation of the pilot's results, above 0.
    results : int
        n0, at least 2.
    chance : float
        Share of pilots of that population whose coefficient of variation is ``seen`` or less.

    Returns
    -------
    float
        At least ``seen``, at most ten times that.

    Notes
    -----
    An upper confidence limit by inverting the test: bisection over populations, with the same
    random numbers for each, 60,000 results or 200 pilots. It knows the coefficient of variation
    alone; where single results are at hand their likelihood says more, see
    ``censored_fit.fit_censored``.

    Examples
    --------
    >>> round(largest_cv("gamma", 0.6, results=8), 1)
    1.0
    """
    import numpy as np

    if results < 2 or not seen > 0:
        message = f"a pilot needs 2 results and some spread, not {results} and a CV of {seen!r}."
        raise DesignError(message)
    pilots = max(200, 60_000 // results)

    def hides(cv: float) -> float:
        shape = Shape(family, cv)
        generator = np.random.Generator(np.random.PCG64(SEED))
        values = shape.mean + shape.sd * draw_standardised(shape, (pilots, results), generator)
        shown = values.std(axis=1, ddof=1) <= seen * values.mean(axis=1)
        return float(shown.mean())

    low, high = seen, 10 * seen
    if hides(low) < chance:
        return low
    for _ in range(10):
        middle = math.sqrt(low * high)
        low, high = (middle, high) if hides(middle) > chance else (low, middle)
    return math.sqrt(low * high)


def _last_crossing(misses: Callable[[float], float], allowed: float) -> int | None:
    """Find the n from which on the misses stay allowed; 2 where they always are."""
    high = FURTHEST
    if misses(high) > allowed:
        return None
    while high > 2:
        low = max(2, min(high - 1, int(high / 1.05)))
        if misses(low) > allowed:
            break
        high = low
    else:
        return 2
    while high - low > 1:
        middle = (low + high) // 2
        low, high = (middle, high) if misses(middle) > allowed else (low, middle)
    return high
