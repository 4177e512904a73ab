"""An interval for the mean of skewed results: Hall's, widened for what few results cannot show."""

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import IntervalKind, t_quantile

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

PopulationClass = Literal["cv-up-to-1", "cv-up-to-2"]
"""What the interval is promised for: a coefficient of variation up to 1 without zeros, or up to 2
with at most half zeros; in both without a separate hot part that n results may miss."""


@dataclass(frozen=True)
class Widening:
    """Constants that raise the skewness seen in few results to what a class may hide."""

    skewness: float
    linear: float
    cubic: float
    per_result: float
    per_root: float

    def raised(self, n: int, skewness: Any, variation: Any) -> Any:
        """Give the skewness that the upper end is set with, before it is divided by √n."""
        import numpy as np

        by_skewness = skewness * (1 + self.skewness / math.sqrt(n))
        return np.maximum(by_skewness, self.linear * variation + self.cubic * variation**3)

    def stretched(self, n: int) -> float:
        """Give the factor on the distance of the upper end."""
        return 1 + self.per_result / n + self.per_root / math.sqrt(n)


LONG_LOW_TAIL = 2.0
"""A skewness below 0 is raised by this over √n for the lower end."""

WIDENINGS: dict[PopulationClass, tuple[Widening, Widening]] = {
    "cv-up-to-1": (
        Widening(3.74, 1.118, 0.016, 0.973, 0.342),
        Widening(3.74, 1.118, 0.016, 0.973, 0.342),
    ),
    "cv-up-to-2": (
        Widening(2.6, 1.4, -0.013, 2.0, 0.78),
        Widening(1.869, 0.563, -0.013, 2.337, 1.589),
    ),
}
"""For an interval with two ends, and for a limit: fitted to simulated populations of each class
(tests/evidence/interval_fit.py); docs/evidence/intervals.md has the coverage on others."""

FEWEST: dict[PopulationClass, int] = {"cv-up-to-1": 8, "cv-up-to-2": 10}
"""Below so many results the promise is not kept; see the evidence."""

MOST_VARIATION: dict[PopulationClass, float] = {"cv-up-to-1": 1.0, "cv-up-to-2": 2.0}
"""Coefficient of variation at which a class ends."""


def widening(population_class: PopulationClass, kind: IntervalKind) -> Widening:
    """Give the constants of a class for an interval or a limit.

    Examples
    --------
    >>> widening("cv-up-to-1", "two-sided").linear > 1
    True
    """
    return WIDENINGS[population_class][0 if kind == "two-sided" else 1]


def hall_factor(t: "float | NDArray[np.float64]", skewness: Any) -> Any:
    """Give the multiple of the standard error at which Hall's closed-form limit lies.

    Parameters
    ----------
    t : float or array
        Student quantile; negative for a lower limit.
    skewness : float or array
        Of the mean: sample skewness over √n.

    Notes
    -----
    k = (3/γ) (1 − ∛(1 − γ (t + γ/6))), γ the skewness of the mean: the inverse of Hall's cubic
    (Hall 1992, Journal of the Royal Statistical Society B 54:221, from memory). It tends to
    t as γ tends to 0.

    Examples
    --------
    >>> round(float(hall_factor(1.833, 0.316)), 2), round(float(hall_factor(-1.833, 0.316)), 2)
    (2.47, -1.52)
    >>> float(hall_factor(1.833, 0.0))
    1.833
    """
    import numpy as np

    gamma = np.asarray(skewness, dtype=np.float64)
    small = np.abs(gamma) < 1e-6
    safe = np.where(small, 1.0, gamma)
    factor = 3 / safe * (1 - np.cbrt(1 - safe * (t + safe / 6)))
    return np.where(small, t, factor)


def low_skewness(n: int, skewness: Any) -> Any:
    """Give the skewness that the lower end is set with: a long tail below is raised.

    Examples
    --------
    >>> float(low_skewness(16, 1.0)), float(low_skewness(16, -1.0))
    (1.0, -1.5)
    """
    import numpy as np

    return np.minimum(skewness, skewness * (1 + LONG_LOW_TAIL / math.sqrt(n)))


def skew_factors(
    n: int,
    skewness: Any,
    variation: Any,
    *,
    population_class: PopulationClass,
    confidence: float = 0.95,
    kind: IntervalKind = "two-sided",
) -> tuple[Any, Any]:
    """Give how many standard errors below and above the mean the widened limits lie.

    Parameters
    ----------
    n : int
        Results, at least 3.
    skewness : float or array
        Sample skewness g1 of the results (moments of divisor n).
    variation : float or array
        Sample coefficient of variation s / mean; above 0.
    population_class : str
        Declared before the results.
    confidence : float
    kind : str

    Returns
    -------
    tuple of (float or array)
        Multiples of s/√n; the lower one is negative. Both are given; a limit uses one.

    Raises
    ------
    DesignError
        Fewer than 3 results.

    Notes
    -----
    With g the sample skewness and c the sample coefficient of variation the skewness is raised to
    G = max(g (1 + a₀/√n), a₁ c + a₂ c³); the upper limit is Hall's at G/√n times
    (1 + a₃/n + a₄/√n), the lower one Hall's at min(g, g (1 + 2/√n))/√n. The constants are
    our own, fitted to simulated populations of the class; no distribution-free limit can exist
    without a class (Bahadur & Savage 1956, Annals of Mathematical Statistics 27:1115, from memory).

    Examples
    --------
    >>> below, above = skew_factors(20, 1.5, 0.8, population_class="cv-up-to-1")
    >>> round(float(below), 2), float(above) > 2.09
    (-1.7, True)
    """
    import numpy as np

    if n < 3:
        message = f"{n} results have no skewness; this interval needs 3 or more."
        raise DesignError(message)
    t = t_quantile(n - 1, confidence=confidence, kind=kind)
    wide, root = widening(population_class, kind), math.sqrt(n)
    g, c = np.asarray(skewness, dtype=np.float64), np.asarray(variation, dtype=np.float64)
    above = hall_factor(t, wide.raised(n, g, c) / root) * wide.stretched(n)
    return hall_factor(-t, low_skewness(n, g) / root), above


def sample_shape(values: "NDArray[np.float64]") -> tuple[float, float]:
    """Give skewness g1 (moments of divisor n) and coefficient of variation of results.

    Parameters
    ----------
    values : array of float, shape (n,)
        At least 2.

    Returns
    -------
    skewness, variation : float
        Skewness 0 where all results are the same.

    Raises
    ------
    DesignError
        A result below 0, or a mean of 0.

    Examples
    --------
    >>> import numpy as np
    >>> tuple(round(found, 3) for found in sample_shape(np.array([1.0, 2, 2, 3, 7])))
    (1.17, 0.782)
    """
    import numpy as np

    mean = float(np.mean(values)) if values.size else 0.0
    if values.size and (float(np.min(values)) < 0 or mean <= 0):
        message = (
            f"the results go down to {float(np.min(values)):g} with a mean of {mean:g}; the "
            "skew-widened interval is for results of 0 and above. Use Student's t."
        )
        raise DesignError(message)
    centred = values - mean
    second = float(np.mean(centred**2))
    g = float(np.mean(centred**3)) / second**1.5 if second > 0 else 0.0
    return g, float(np.std(values, ddof=1)) / mean


def skew_interval(
    values: "NDArray[np.float64]",
    *,
    population_class: PopulationClass,
    confidence: float = 0.95,
    kind: IntervalKind = "two-sided",
) -> tuple[float | None, float | None]:
    """Set the widened interval or limit about the mean of a simple random sample.

    Parameters
    ----------
    values : array of float, shape (n,)
        Results, none below 0, not all the same.
    population_class : str
        Declared before the results.
    confidence : float
    kind : str

    Returns
    -------
    tuple of (float or None)
        Low and high end; None where the interval is open.

    Raises
    ------
    DesignError
        Fewer than 3 results, a result below 0, or a mean of 0.

    Examples
    --------
    >>> import numpy as np
    >>> low, high = skew_interval(np.array([1.0, 2, 2, 3, 4, 5, 9, 22]),
    ...                           population_class="cv-up-to-2")
    >>> round(low, 2)
    1.98
    """
    import numpy as np

    n = values.size
    g, c = sample_shape(values)
    mean, error = float(np.mean(values)), float(np.std(values, ddof=1)) / math.sqrt(n)
    below, above = skew_factors(
        n, g, c, population_class=population_class, confidence=confidence, kind=kind
    )
    low = None if kind == "upper-limit" else max(0.0, mean + float(below) * error)
    high = None if kind == "lower-limit" else mean + float(above) * error
    return low, high
