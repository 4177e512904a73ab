"""Campaigns drawn from a shape: how often the interval holds the mean, and where the mean falls.

Only for what no table answers: zeros, strata of unlike shape, the band of the mean. Nothing drawn
here is ever issued to a crew.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import IntervalKind, t_quantile
from fieldplan.stats.mean_shape import Shape

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    Numbers = NDArray[np.float64]

SEED = 1942
DRAWS = 2_000_000
"""Values drawn at most for one answer, unless that left fewer than ``FEWEST`` campaigns."""

FEWEST, MOST = 2_000, 40_000
"""Campaigns drawn at least and at most."""

BLOCK = 250_000
"""Values held in memory at once."""

BAND = 0.90
"""Share of campaigns whose mean lies within the band."""

TOO_MANY = 2_000
"""Above so many results the expansions of the mean serve, and drawing takes too long."""


@dataclass(frozen=True)
class Sampled:
    """One stratum as sampled: its weight, its spread, its results and the shape they come from.

    Parameters
    ----------
    weight : float
        Share of the population.
    sd : float
        Of single results, in any unit common to the strata.
    results : int
        At least 2.
    shape : Shape
    population : int or None
        N of a list, from which results are drawn without replacement; None for a large one.
    """

    weight: float
    sd: float
    results: int
    shape: Shape
    population: int | None = None

    @property
    def drawn(self) -> int:
        """Values drawn for one campaign: the whole list where there is one."""
        return self.results if self.population is None else self.population


@dataclass(frozen=True)
class SimulatedCoverage:
    """What simulated campaigns of one size came to.

    Parameters
    ----------
    results : int
        In all strata together.
    held : float
        Share of campaigns whose t interval holds the true mean.
    too_low, too_high : float
        Share in which the true mean lies above all of the interval, and below it.
    held_by_hall : float
        The same share as ``held`` for the closed-form interval corrected for skewness.
    band : tuple of float
        Error of the mean, in the unit of ``sd``, exceeded by 95 % and by 5 % of campaigns.
    campaigns : int
        How many were drawn.
    """

    results: int
    held: float
    too_low: float
    too_high: float
    held_by_hall: float
    band: tuple[float, float]
    campaigns: int

    @property
    def standard_error(self) -> float:
        """Of ``held``, from the number of campaigns drawn."""
        return math.sqrt(self.held * (1 - self.held) / self.campaigns)


@lru_cache(maxsize=256)
def simulate_coverage(
    parts: tuple[Sampled, ...],
    *,
    confidence: float,
    kind: IntervalKind,
    campaigns: int | None = None,
    seed: int = SEED,
) -> SimulatedCoverage:
    """Draw campaigns from a shape and count how often their interval holds the true mean.

    Parameters
    ----------
    parts : tuple of Sampled
        One for a site without strata; weights sum to 1.
    confidence : float
        Nominal.
    kind : str
        Two-sided, upper or lower limit; Student's, with Satterthwaite's degrees of freedom.
    campaigns : int, optional
        As many as two million values allow, from 2,000 to 40,000, unless given.
    seed : int

    Returns
    -------
    SimulatedCoverage

    Raises
    ------
    DesignError
        A stratum has fewer than 2 results, or more than its list has units.

    Notes
    -----
    A list is drawn anew from the shape for each campaign; its own mean is the true one, and the
    standard error has the factor √(1 − n/N).

    The corrected interval inverts g(W) = W + γW²/3 + γ²W³/27 + γ/(6n) for W = (mean − μ)/s (Hall
    1992, Journal of the Royal Statistical Society B 54:221), with γ/√n the estimated skewness of
    the mean, of a list times (1 − 2n/N)/√(1 − n/N). Results alike to the last digit make an
    interval of no width, which holds nothing but a mean equal to them.

    Examples
    --------
    >>> part = Sampled(1.0, 1.0, 10, Shape("gamma", 1.0))
    >>> found = simulate_coverage((part,), confidence=0.95, kind="two-sided")
    >>> abs(found.held - 0.899) < 4 * found.standard_error
    True
    """
    import numpy as np

    for part in parts:
        if not 2 <= part.results <= part.drawn:
            message = (
                f"an interval needs 2 results in every stratum, and no more than its list has; "
                f"not {part.results} of {part.population or 'many'}."
            )
            raise DesignError(message)
    total = sum(part.drawn for part in parts)
    wanted = campaigns or max(FEWEST, min(MOST, DRAWS // total))
    generator = np.random.Generator(np.random.PCG64(seed))
    size = max(1, min(wanted, BLOCK // total))
    blocks = [size] * (wanted // size) + ([wanted % size] if wanted % size else [])
    missed = np.zeros(4)
    errors = []
    for rows in blocks:
        error, counts = _block(parts, rows, generator, confidence=confidence, kind=kind)
        errors.append(error)
        missed += counts
    low, high, hall_low, hall_high = (float(share) for share in missed / wanted)
    ends = np.quantile(np.concatenate(errors), [(1 - BAND) / 2, (1 + BAND) / 2])
    return SimulatedCoverage(
        results=sum(part.results for part in parts),
        held=1 - low - high,
        too_low=low,
        too_high=high,
        held_by_hall=1 - hall_low - hall_high,
        band=(float(ends[0]), float(ends[1])),
        campaigns=wanted,
    )


def _block(
    parts: Sequence[Sampled],
    rows: int,
    generator: "np.random.Generator",
    *,
    confidence: float,
    kind: IntervalKind,
) -> tuple["Numbers", "Numbers"]:
    """Draw some campaigns: errors of their means, and counts of misses by t and by Hall."""
    import numpy as np

    error, variance, third, spread = (np.zeros(rows) for _ in range(4))
    for part in parts:
        n, reach = part.results, part.weight * part.sd
        values = draw_standardised(part.shape, (rows, part.drawn), generator)
        truth = 0.0 if part.population is None else values.mean(axis=1)
        taken = 0.0 if part.population is None else n / part.population
        values = values[:, :n]
        mean = values.mean(axis=1)
        values = values - mean[:, None]
        squares = values * values
        term = reach**2 * (1 - taken) * squares.sum(axis=1) / (n - 1) / n
        error += reach * (mean - truth)
        variance += term
        spread += term**2 / (n - 1)
        bend = (1 - taken) * (1 - 2 * taken)
        third += reach**3 * bend * (squares * values).sum(axis=1) / n**3
    with np.errstate(divide="ignore", invalid="ignore"):
        t = np.where(variance > 0, error / np.sqrt(variance), np.sign(error) * np.inf)
        lean = np.where(variance > 0, third / variance**1.5, 0.0)
        known = np.where(spread > 0, variance**2 / spread, sum(p.results - 1 for p in parts))
    q = _quantiles(known, confidence=confidence, kind=kind, alone=len(parts) == 1)
    to_low, to_high = hall_reaches(lean, q)
    below, above = kind != "lower-limit", kind != "upper-limit"
    counts = [
        below * np.count_nonzero(t < -q),
        above * np.count_nonzero(t > q),
        below * np.count_nonzero(t < -to_high),
        above * np.count_nonzero(t > to_low),
    ]
    return error, np.array(counts, dtype=np.float64)


def draw_standardised(
    shape: Shape, size: tuple[int, ...], generator: "np.random.Generator"
) -> "Numbers":
    """Draw values of a shape, shifted and scaled to mean 0 and standard deviation 1."""
    if shape.family == "gamma":
        k = 1 / shape.cv**2
        values = generator.standard_gamma(k, size) / k
    else:
        import numpy as np

        logs = math.log1p(shape.cv**2)
        values = np.exp(math.sqrt(logs) * generator.standard_normal(size) - logs / 2)
    if shape.zeros:
        values *= generator.random(size) >= shape.zeros
    values -= shape.mean
    values /= -shape.sd if shape.mirrored else shape.sd
    return values


def hall_reaches(lean: "Numbers", quantile: "Numbers | float") -> tuple["Numbers", "Numbers"]:
    """Give how many standard errors below and above the mean the corrected interval reaches.

    Parameters
    ----------
    lean : array
        Estimated skewness of the mean, γ/√n.
    quantile : array or float
        Student's, above 0.

    Returns
    -------
    below, above : array
        Both equal ``quantile`` at no skewness.

    Examples
    --------
    >>> import numpy as np
    >>> [round(float(reach[0]), 3) for reach in hall_reaches(np.array([0.3]), 1.7)]
    [1.434, 2.198]
    """
    import numpy as np

    flat = np.abs(lean) < 1e-8
    g = np.where(flat, 1.0, lean)
    above = 3 / g * (1 - np.cbrt(1 - g * (quantile + g / 6)))
    below = 3 / g * (np.cbrt(1 + g * (quantile - g / 6)) - 1)
    return np.where(flat, quantile, below), np.where(flat, quantile, above)


def _quantiles(
    known: "Numbers", *, confidence: float, kind: IntervalKind, alone: bool
) -> "Numbers | float":
    """Give Student's quantile for each campaign; one number where there are no strata."""
    if alone:
        return t_quantile(float(known[0]), confidence=confidence, kind=kind)
    from scipy.special import stdtrit

    level = (1 + confidence) / 2 if kind == "two-sided" else confidence
    import numpy as np

    return np.asarray(stdtrit(known, level), dtype=np.float64)
