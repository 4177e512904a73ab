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
with zeros allowed; in both without a separate hot part that n results may miss."""


@dataclass(frozen=True)
class Widening:
    """Constants that raise the skewness seen in few results to what a class may hide."""

    skewness: float
    linear: float
    cubic: float
    per_result: float
    per_root: float


WIDENINGS: dict[PopulationClass, Widening] = {
    "cv-up-to-1": Widening(3.74, 1.118, 0.016, 0.973, 0.342),
    "cv-up-to-2": Widening(1.85, 1.263, -0.013, 4.028, 0.39),
}
"""Fitted to simulated populations of each class; docs/evidence has the coverage on others."""

FEWEST: dict[PopulationClass, int] = {"cv-up-to-1": 8, "cv-up-to-2": 10}
"""Below so many results the promise is not kept; see the evidence."""


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
    G = max(g (1 + a₀/√n), a₁ c + a₂ c³)/√n; the upper limit is Hall's at G times
    (1 + a₃/n + a₄/√n), the lower one Hall's at g/√n. The constants are our own, fitted to simulated
    populations of the class; no distribution-free limit can exist without a class (Bahadur & Savage
    1956, Annals of Mathematical Statistics 27:1115, from memory).
    """
    import numpy as np

    if n < 3:
        message = f"{n} results have no skewness; this interval needs 3 or more."
        raise DesignError(message)
    t = t_quantile(n - 1, confidence=confidence, kind=kind)
    wide, root = WIDENINGS[population_class], math.sqrt(n)
    g, c = np.asarray(skewness, dtype=np.float64), np.asarray(variation, dtype=np.float64)
    raised = np.maximum(g * (1 + wide.skewness / root), wide.linear * c + wide.cubic * c**3)
    above = hall_factor(t, raised / root) * (1 + wide.per_result / n + wide.per_root / root)
    return hall_factor(-t, g / root), above


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
    >>> round(low, 2), round(high, 1)
    (1.98, 31.4)
    """
    import numpy as np

    n, mean = values.size, float(np.mean(values))
    if n and (float(np.min(values)) < 0 or mean <= 0):
        message = (
            f"the results go down to {float(np.min(values)):g} with a mean of {mean:g}; this "
            "interval is for results of 0 and above. Use Student's t."
        )
        raise DesignError(message)
    error = float(np.std(values, ddof=1)) / math.sqrt(n)
    centred = values - mean
    second = float(np.mean(centred**2))
    g = float(np.mean(centred**3)) / second**1.5 if second > 0 else 0.0
    below, above = skew_factors(
        n, g, error * math.sqrt(n) / mean, population_class=population_class,
        confidence=confidence, kind=kind,
    )  # fmt: skip
    low = None if kind == "upper-limit" else max(0.0, mean + float(below) * error)
    high = None if kind == "lower-limit" else mean + float(above) * error
    return low, high
