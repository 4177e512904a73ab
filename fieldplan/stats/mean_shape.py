"""Shapes a population may have, and what they do to the interval of a mean.

A pilot tells a coefficient of variation and a share of zeros, hardly a tail. Several shapes fit the
same pilot; what they promise differs, and that difference is the honest answer.
"""

import math
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.shape import Family, t_coverage

FURTHEST = 100_000
"""Numbers of results are looked for up to here."""

POINT = 0.01
"""One point of coverage."""

LITTLE = 0.5
"""Below this a skewness to the low side is taken for none."""


@dataclass(frozen=True)
class Shape:
    """A population's shape, free of its scale.

    Parameters
    ----------
    family : str
        ``gamma`` or ``lognormal``, of the values above zero.
    cv : float
        Coefficient of variation of the values above zero, above 0.
    zeros : float
        Share of values that are exactly 0, in [0, 1).
    mirrored : bool
        The long tail lies on the low side.

    Notes
    -----
    With mean 1, E X^k of a gamma is Π (1 + j·cv²) over j < k; of a lognormal
    (1 + cv²)^(k(k − 1)/2) (Johnson, Kotz & Balakrishnan 1994, Continuous Univariate
    Distributions 1, ch. 14 and 17). Zeros multiply every moment about 0 by their complement.

    Examples
    --------
    >>> Shape("gamma", 1.0).skewness, Shape("lognormal", 1.0).skewness
    (2.0, 4.0)
    >>> round(Shape("gamma", 1.0, zeros=0.5).whole_cv, 3)
    1.732
    """

    family: Family
    cv: float
    zeros: float = 0.0
    mirrored: bool = False

    def __post_init__(self) -> None:
        """Refuse a shape that no population has."""
        if not 0 < self.cv < math.inf or not 0 <= self.zeros < 1:
            message = (
                f"a shape needs a coefficient of variation above 0 and a share of zeros from 0 "
                f"to below 1, not {self.cv!r} and {self.zeros!r}."
            )
            raise DesignError(message)

    def _raw(self, power: int) -> float:
        square = self.cv**2
        if self.family == "gamma":
            moment = math.prod(1 + j * square for j in range(power))
        else:
            moment = (1 + square) ** (power * (power - 1) / 2)
        return (1 - self.zeros) * moment

    @property
    def mean(self) -> float:
        """Mean of all values, where those above zero have mean 1."""
        return 1 - self.zeros

    @property
    def sd(self) -> float:
        """Standard deviation of all values, where those above zero have mean 1."""
        return math.sqrt(self._raw(2) - self.mean**2)

    @property
    def whole_cv(self) -> float:
        """Coefficient of variation with the zeros in."""
        return self.sd / self.mean

    @property
    def skewness(self) -> float:
        """Skewness of the population; negative where the shape is mirrored."""
        m = self.mean
        third = self._raw(3) - 3 * m * self._raw(2) + 2 * m**3
        return (-1 if self.mirrored else 1) * round(third / self.sd**3, 12)

    @property
    def excess_kurtosis(self) -> float:
        """Fourth central moment over the variance squared, less 3."""
        m = self.mean
        fourth = self._raw(4) - 4 * m * self._raw(3) + 6 * m**2 * self._raw(2) - 3 * m**4
        return fourth / self.sd**4 - 3

    @property
    def name(self) -> str:
        """In words, e.g. ``lognormal with 20 % zeros, CV 1.2 above them``."""
        tail = ", its tail on the low side" if self.mirrored else ""
        if not self.zeros:
            return f"{self.family}, CV {self.cv:.2g}{tail}"
        return f"{self.family} with {100 * self.zeros:.0f} % zeros, CV {self.cv:.2g} above them"


def cv_of_skewness(family: Family, skewness: float) -> float:
    """Give the coefficient of variation of the family's member with this skewness.

    Notes
    -----
    Gamma: G1 = 2·cv. Lognormal: G1 = cv³ + 3·cv, solved by cv = 2·sinh(asinh(G1/2)/3).

    Examples
    --------
    >>> cv_of_skewness("gamma", 2.0), round(cv_of_skewness("lognormal", 4.0), 12)
    (1.0, 1.0)
    """
    lean = abs(skewness)
    return lean / 2 if family == "gamma" else 2 * math.sinh(math.asinh(lean / 2) / 3)


def fitting_shapes(
    cv: float, *, zeros: float = 0.0, skewness: float | None = None
) -> tuple[Shape, ...]:
    """List shapes that have this coefficient of variation and share of zeros.

    Parameters
    ----------
    cv : float
        Of all values, zeros included; above 0.
    zeros : float
        Share of zeros or of non-detects counted as zeros.
    skewness : float, optional
        Seen or declared. Shapes that lean as much are added where it exceeds those by CV, or lies
        below −0.5; shifted along the axis they can have any CV, and a shift moves no t statistic.

    Returns
    -------
    tuple of Shape
        Gamma and lognormal; with zeros also both above a lump at 0, unless the zeros alone
        spread more than the coefficient of variation allows.

    Examples
    --------
    >>> [shape.name for shape in fitting_shapes(1.0)]
    ['gamma, CV 1', 'lognormal, CV 1']
    >>> [round(shape.whole_cv, 6) for shape in fitting_shapes(1.5, zeros=0.3)]
    [1.5, 1.5, 1.5, 1.5]
    """
    families: tuple[Family, ...] = ("gamma", "lognormal")
    shapes = [Shape(family, cv) for family in families]
    above = (1 + cv**2) * (1 - zeros) - 1
    if zeros > 0 and above > 1e-4:
        shapes += [Shape(family, math.sqrt(above), zeros=zeros) for family in families]
    if skewness is not None:
        lean, most = skewness, max(shape.skewness for shape in shapes)
        if lean < -LITTLE or lean > most:
            shapes += [
                Shape(family, cv_of_skewness(family, lean), mirrored=lean < 0)
                for family in families
            ]
    return tuple(shapes)


def n_by_skewness(
    skewness: float, *, confidence: float, kind: IntervalKind, family: Family, within: float = POINT
) -> int | None:
    """Count the results from which on a t interval misses its confidence by so little.

    Parameters
    ----------
    skewness : float
        Of the population.
    confidence : float
        Nominal, from 0.5 to 0.99.
    kind : str
        Two-sided, upper or lower limit.
    family : str
        ``gamma`` or ``lognormal``.
    within : float
        Largest shortfall, one point unless told otherwise.

    Returns
    -------
    int or None
        None where more than 100,000 are needed; 2 where any number does.

    Notes
    -----
    Read from the table of simulated t statistics, which is smooth in n between its nodes; the
    last crossing counts, as coverage may fall before it rises.

    Examples
    --------
    >>> n_by_skewness(2.0, confidence=0.95, kind="two-sided", family="gamma")
    81
    """

    def short(n: int) -> bool:
        held = t_coverage(n, skewness, confidence=confidence, kind=kind, family=family)
        return held < confidence - within

    ladder = [2]
    while ladder[-1] < FURTHEST:
        ladder.append(max(ladder[-1] + 1, math.ceil(ladder[-1] * 1.1)))
    if short(ladder[-1]):
        return None
    for low, high in zip(reversed(ladder[:-1]), reversed(ladder), strict=False):
        if short(low):
            while high - low > 1:
                middle = (low + high) // 2
                low, high = (middle, high) if short(middle) else (low, middle)
            return high
    return 2
