"""Composites: many increments in one jar, several jars, and what one jar can hide.

An increment is a scoop; the scoops of one composite make one result. Increments average the ground,
never the laboratory: one analysis of a jar has one laboratory error, however many scoops are in it.
So n is the number of composites, and no number of increments replaces a second one.
"""

import math
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.precision import n_for_half_width


@dataclass(frozen=True)
class ErrorParts:
    """Sigma split by where it arises, in the laboratory's unit.

    Parameters
    ----------
    between_locations : float
        Standard deviation from place to place.
    sampling : float
        From scoop to scoop at one place.
    analysis : float
        From analysis to analysis of one jar: laboratory and subsampling there.

    Raises
    ------
    DesignError
        A part is negative or no number, or all are 0.

    Examples
    --------
    >>> round(ErrorParts(24.0, 10.0, 5.0).total, 2)
    26.48
    """

    between_locations: float
    sampling: float = 0.0
    analysis: float = 0.0

    def __post_init__(self) -> None:
        """Refuse parts that no variance can have."""
        for name in ("between_locations", "sampling", "analysis"):
            value = getattr(self, name)
            if not (value >= 0 and math.isfinite(value)):
                message = (
                    f"sigma of {name.replace('_', ' ')} is {value!r}; a standard deviation is a "
                    "number of 0 or more."
                )
                raise DesignError(message)
        if self.total == 0:
            message = (
                "all parts of sigma are 0, so every result would be the same; give at least one "
                "part above 0."
            )
            raise DesignError(message)

    @property
    def total(self) -> float:
        """Standard deviation of a single scoop analysed once."""
        return math.hypot(self.between_locations, self.sampling, self.analysis)

    def averaged(self, *, one_place: bool) -> float:
        """Give the variance that increments average.

        All of the ground where every increment has its own place; the sampling part alone where
        the increments of a composite lie around one place.
        """
        ground = 0.0 if one_place else self.between_locations**2
        return ground + self.sampling**2

    def kept(self, *, one_place: bool, analyses: int = 1) -> float:
        """Give the variance that every composite keeps, however many increments it has."""
        ground = self.between_locations**2 if one_place else 0.0
        return ground + self.analysis**2 / analyses


def check_increments(increments: float) -> None:
    """Refuse a composite without an increment."""
    if not increments >= 1:
        message = f"increments is {increments!r}; a composite has at least 1 increment."
        raise DesignError(message)


def check_replicates(replicates: float, *, least: int = 1) -> None:
    """Refuse fewer composites than ``least``; an interval needs 2."""
    if not replicates >= least:
        why = ": one composite has a mean but shows no spread" if least > 1 else ""
        message = f"replicates is {replicates!r}; at least {least} must be taken{why}."
        raise DesignError(message)


def composite_sigma(
    parts: ErrorParts, increments: int, *, analyses: int = 1, one_place: bool = False
) -> float:
    """Give the standard deviation from one composite's result to the next.

    Parameters
    ----------
    parts : ErrorParts
    increments : int
        In each composite, at least 1.
    analyses : int
        Of each composite, averaged; at least 1.
    one_place : bool
        The increments of a composite lie around one place; otherwise each has its own, drawn
        from the whole population.

    Notes
    -----
    √((σ_b² + σ_s²)/k + σ_a²/m): Berthouex & Brown (2002), Statistics for Environmental Engineers,
    2nd ed., ch. 25. Around one place σ_b² is not divided by k.

    Examples
    --------
    >>> round(composite_sigma(ErrorParts(24.0, 10.0, 5.0), 30), 2)
    6.89
    >>> round(composite_sigma(ErrorParts(24.0, 10.0, 5.0), 30, one_place=True), 2)
    24.58
    """
    check_increments(increments)
    if analyses < 1:
        message = f"analyses is {analyses!r}; each composite is analysed at least once."
        raise DesignError(message)
    averaged = parts.averaged(one_place=one_place) / increments
    return math.sqrt(averaged + parts.kept(one_place=one_place, analyses=analyses))


def variance_of_mean(
    parts: ErrorParts,
    *,
    replicates: int,
    increments: int,
    analyses: int = 1,
    one_place: bool = False,
) -> float:
    """Give the variance of the mean of independent composites.

    Parameters
    ----------
    parts : ErrorParts
    replicates : int
        Composites, at least 1: this is n.
    increments, analyses : int
        Per composite, at least 1.
    one_place : bool
        See :func:`composite_sigma`.

    Examples
    --------
    >>> variance_of_mean(ErrorParts(4.0, 0.0, 1.5), replicates=3, increments=8)
    1.4166666666666667
    """
    check_replicates(replicates)
    sigma = composite_sigma(parts, increments, analyses=analyses, one_place=one_place)
    return sigma**2 / replicates


def replicates_for_half_width(
    parts: ErrorParts,
    target: float,
    *,
    increments: int,
    confidence: float,
    kind: IntervalKind = "two-sided",
    one_place: bool = False,
) -> int:
    """Count the composites whose Student interval is no wider than the target.

    Parameters
    ----------
    parts : ErrorParts
    target : float
        Tolerated half-width, above 0.
    increments : int
        In each composite.
    confidence : float
        Inside (0, 1).
    kind : str
        Two-sided interval, or a limit on one side.
    one_place : bool
        See :func:`composite_sigma`.

    Returns
    -------
    int
        At least 2. Degrees of freedom are composites − 1; increments give none.

    Examples
    --------
    >>> replicates_for_half_width(ErrorParts(24.0, 10.0, 5.0), 8.0, increments=30, confidence=0.95)
    6
    """
    sigma = composite_sigma(parts, increments, one_place=one_place)
    if not target > 0:
        message = f"the target half-width is {target!r}; it must be above 0."
        raise DesignError(message)
    return n_for_half_width(sigma, target, confidence=confidence, kind=kind)


def level_for_composite(level: float, increments: int) -> float:
    """Give the result below which no increment of a composite can be above the level.

    Parameters
    ----------
    level : float
        Action level, above 0.
    increments : int
        Of equal mass.

    Notes
    -----
    A composite is the mean of its increments, and none is below 0: one increment at the level
    among others that hold nothing gives level/k (ASTM D6051 states the same rule). The
    laboratory's error and its reporting limit come on top.

    Examples
    --------
    >>> level_for_composite(300.0, 5)
    60.0
    """
    check_increments(increments)
    if not level > 0:
        message = f"the action level is {level!r}; it must be above 0."
        raise DesignError(message)
    return level / increments


def highest_increment(result: float, increments: int, *, others: float = 0.0) -> float:
    """Give the highest value that one increment can have inside a composite of this result.

    Parameters
    ----------
    result : float
        Of the composite, not below ``others``.
    increments : int
        Of equal mass.
    others : float
        What every other increment holds at the least: 0, or a background that is known.

    Examples
    --------
    >>> highest_increment(100.0, 30), highest_increment(100.0, 30, others=80.0)
    (3000.0, 680.0)
    """
    check_increments(increments)
    if not 0 <= others <= result:
        message = (
            f"the other increments are said to hold at least {others!r}, the composite {result!r}; "
            "they cannot hold more than it, nor less than 0."
        )
        raise DesignError(message)
    return increments * result - (increments - 1) * others
