"""Shapes a population may have, and what they do to the interval of a mean.

A pilot tells a coefficient of variation and a share of zeros, hardly a tail. Several shapes fit the
same pilot; what they promise differs, and that difference is the honest answer.
"""

import math
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import normal_quantile
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.precision import whole
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


def edgeworth_misses(
    n: float, skewness: float, excess_kurtosis: float, *, confidence: float, kind: IntervalKind
) -> float:
    """Give the share of campaigns in which a t interval misses, to the second Edgeworth term.

    Parameters
    ----------
    n : float
        Results.
    skewness, excess_kurtosis : float
        Of the population.
    confidence : float
        Nominal.
    kind : str
        Two-sided, upper or lower limit.

    Returns
    -------
    float
        Nominal share of misses plus the terms; may leave [0, 1] where n is far too small.

    Notes
    -----
    P(T ≤ x) = Φ(x) + γ(2x² + 1)φ(x)/(6√n) + q(x)φ(x)/n with
    q = x[κ(x² − 3)/12 − γ²(x⁴ + 2x² − 3)/18 − (x² + 3)/4] (Hall 1992, The Bootstrap and Edgeworth
    Expansion, sec. 2.6). Student's quantile takes up the last part of q. The first term is odd:
    of two sides one gains what the other loses, which leaves 1/n; a limit alone keeps 1/√n. Set
    to a hundredth it gives n = 25·γ² (Cochran's, rounded up from experience) for two sides at
    most and 121·γ² for one.

    Examples
    --------
    >>> round(edgeworth_misses(484, 2.0, 0.0, confidence=0.95, kind="upper-limit"), 3)
    0.061
    >>> round(edgeworth_misses(100, 2.0, 6.0, confidence=0.95, kind="two-sided"), 3)
    0.059
    """
    level = (1 + confidence) / 2 if kind == "two-sided" else confidence
    z = normal_quantile(level)
    density = math.exp(-z * z / 2) / math.sqrt(2 * math.pi)
    first = skewness * (2 * z * z + 1) * density / (6 * math.sqrt(n))
    bend = excess_kurtosis * (z * z - 3) / 12 - skewness**2 * (z**4 + 2 * z * z - 3) / 18
    second = z * bend * density / n
    if kind == "two-sided":
        return 1 - confidence - 2 * second
    # q is odd in x: at −z the second term is −second, and 1 − P(T ≤ z) loses the same.
    return 1 - confidence - second + (first if kind == "upper-limit" else -first)


def expanded_misses(
    n: float, skewness: float, excess_kurtosis: float, *, confidence: float, kind: IntervalKind
) -> tuple[float, float]:
    """Give the two sides of :func:`edgeworth_misses`, each held in [0, 1]: too low, too high.

    Examples
    --------
    >>> low, high = expanded_misses(2000, 4.0, 38.0, confidence=0.95, kind="two-sided")
    >>> round(low, 4), round(high, 4)
    (0.0334, 0.0183)
    """
    one = (1 + confidence) / 2 if kind == "two-sided" else confidence
    low, high = (
        edgeworth_misses(n, skewness, excess_kurtosis, confidence=one, kind=side) for side in _SIDES
    )
    low, high = min(max(low, 0.0), 1.0), min(max(high, 0.0), 1.0)
    return (0.0 if kind == "lower-limit" else low), (0.0 if kind == "upper-limit" else high)


_SIDES: tuple[IntervalKind, IntervalKind] = ("upper-limit", "lower-limit")


def expanded_quantile(level: float, skewness_of_mean: float) -> float:
    """Give how many standard errors the mean lies from the truth at this level.

    Notes
    -----
    z + γ (z² − 1) / (6√n), first term of Cornish & Fisher (1937), Revue de l'Institut
    International de Statistique 5:307; ``skewness_of_mean`` is γ/√n.

    Examples
    --------
    >>> round(expanded_quantile(0.95, 0.1), 3)
    1.673
    """
    z = normal_quantile(level)
    return z + skewness_of_mean * (z * z - 1) / 6


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


def missed_altogether(n: int, share: float) -> float:
    """Give the share of campaigns that meet nothing of a rare part of the site.

    Parameters
    ----------
    n : int
        Results at random places, at least 1.
    share : float
        Of the population that the part takes up, inside (0, 1).

    Returns
    -------
    float

    Notes
    -----
    (1 − p)^n. No interval from such results knows of the part, whatever its method.

    Examples
    --------
    >>> round(missed_altogether(30, 0.05), 3)
    0.215
    """
    _rare(share)
    if n < 1:
        message = f"the number of results is {n!r}; it must be 1 or more."
        raise DesignError(message)
    return (1 - share) ** n


def units_missed(n: int, units: int, *, population: int) -> float:
    """Give the share of campaigns that draw none of some units of a list.

    Parameters
    ----------
    n : int
        Units drawn without replacement, from 0 to N.
    units : int
        How many are meant, from 0 to N.
    population : int
        N.

    Notes
    -----
    Hypergeometric, C(N − units, n) / C(N, n).

    Examples
    --------
    >>> round(units_missed(15, 1, population=22), 3)
    0.318
    """
    if not (0 <= n <= population and 0 <= units <= population):
        message = f"a list of {population} has no {n} drawn and {units} meant; give fewer."
        raise DesignError(message)
    return math.comb(population - units, n) / math.comb(population, n)


def n_to_meet(share: float, *, chance: float = 0.95) -> int:
    """Count the results that meet a rare part at least once with this chance.

    Notes
    -----
    Smallest n with (1 − p)^n ≤ 1 − chance.

    Examples
    --------
    >>> [n_to_meet(share) for share in (0.05, 0.10, 0.20)]
    [59, 29, 14]
    """
    _rare(share)
    if not 0 < chance < 1:
        message = f"the chance is {chance!r}; it must lie between 0 and 1, e.g. 0.95."
        raise DesignError(message)
    return whole(math.log1p(-chance) / math.log1p(-share))


def share_met(n: int, *, chance: float = 0.95) -> float:
    """Give the smallest part of a site that n results meet at least once with this chance.

    Examples
    --------
    >>> round(share_met(59), 3)
    0.05
    """
    if n < 1 or not 0 < chance < 1:
        message = f"{n!r} results and a chance of {chance!r}: give 1 or more, and 0 to 1."
        raise DesignError(message)
    return -math.expm1(math.log1p(-chance) / n)


def _rare(share: float) -> None:
    if not 0 < share < 1:
        message = (
            f"the rare part is {share!r} of the site; give a share between 0 and 1, such as "
            "0.05 for one twentieth."
        )
        raise DesignError(message)
