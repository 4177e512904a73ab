"""The chance that a number of results is enough, when sigma itself is only an estimate."""

import math

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import chi_square_quantile, chi_square_share, f_share
from fieldplan.stats.intervals import IntervalKind, t_quantile
from fieldplan.stats.precision import MOST, n_for_standard_error, smallest, standard_error, whole


def effective_degrees_of_freedom(results: float, excess_kurtosis: float = 0.0) -> float:
    """Give the degrees of freedom that a variance from heavy-tailed results is worth.

    Parameters
    ----------
    results : float
        Behind the variance, at least 2.
    excess_kurtosis : float
        Of single results, 0 for a normal population, 6 for an exponential one; at least 0.

    Returns
    -------
    float
        results − 1 at an excess kurtosis of 0, fewer above it.

    Raises
    ------
    DesignError
        The kurtosis is below 0 or not finite: light tails are taken as normal.

    Notes
    -----
    Var(s²) = σ⁴ (2/(n−1) + κ/n) for independent results of any shape (Cramér 1946, Mathematical
    Methods of Statistics, sec. 27.4, from memory), and a χ² with df has relative variance 2/df:
    hence df = 2 / (2/(n−1) + κ/n). The χ² shape is then an approximation; the tests hold it to
    simulated gamma populations.

    Examples
    --------
    >>> effective_degrees_of_freedom(20), round(effective_degrees_of_freedom(20, 6.0), 2)
    (19.0, 4.94)
    """
    if not (math.isfinite(excess_kurtosis) and excess_kurtosis >= 0):
        message = (
            f"excess kurtosis is {excess_kurtosis!r}; it must be 0 or above (6 for an exponential "
            "shape). Leave it out for tails lighter than normal."
        )
        raise DesignError(message)
    return 2 / (2 / (results - 1) + excess_kurtosis / results)


def chance_of_variance(predicted: float, target: float, degrees_of_freedom: float) -> float:
    """Give the chance that the true variance of a mean is within its target.

    Parameters
    ----------
    predicted : float
        Variance of the mean with the pilot's s² put in.
    target : float
        Tolerated variance, same unit, above 0.
    degrees_of_freedom : float
        Behind ``predicted``: n0 − 1 of the pilot, or Satterthwaite's for strata.

    Notes
    -----
    P(χ² ≥ df · predicted / target): the true σ² is distributed about the pilot's s² as
    df s² / χ² for normal results; Hahn & Meeker (1991), Statistical Intervals, ch. 4.

    Examples
    --------
    >>> round(chance_of_variance(27.57**2 / 22, 36.0, 7), 3)
    0.459
    """
    return 1 - chi_square_share(degrees_of_freedom * predicted / target, degrees_of_freedom)


def chance_of_half_width(
    predicted: float,
    target: float,
    *,
    main: float,
    pilot: float,
    confidence: float,
    kind: IntervalKind = "two-sided",
    luck: float | None = None,
) -> float:
    """Give the chance that the interval from a coming sample is no wider than its target.

    Parameters
    ----------
    predicted : float
        Variance of the mean with the pilot's s² put in.
    target : float
        Tolerated half-width, above 0.
    main, pilot : float
        Degrees of freedom that the coming sample and the pilot give; ``pilot`` infinite means
        that sigma is known.
    confidence : float
        Inside (0, 1).
    kind : str
        Two-sided interval, or a limit on one side.
    luck : float, optional
        Degrees of freedom that the coming variance is worth, where tails are heavy; ``main``
        unless given. Student's t keeps ``main``.

    Notes
    -----
    The ratio of two independent s² of one normal population is F(main, pilot), so the chance is
    P(F ≤ h² / (t² · predicted)): predictive F, see Hahn & Meeker (1991), Statistical Intervals.
    With sigma known it is Kupper & Hafner (1989), The American Statistician 43:101.

    Examples
    --------
    >>> round(chance_of_half_width(58**2 / 35, 20.0, main=34, pilot=7, confidence=0.95), 2)
    0.45
    """
    if predicted <= 0:
        return 1.0
    multiplier = t_quantile(main, confidence=confidence, kind=kind)
    return f_share((target / multiplier) ** 2 / predicted, luck or main, pilot)


def check_assurance(assurance: float) -> None:
    """Refuse an assurance that is no share from 0.5 up to, but not, 1."""
    if not 0.5 <= assurance < 1:
        message = (
            f"assurance is {assurance!r}; it must be at least 0.5 and below 1, e.g. 0.80: "
            "the chance that the number of results is enough."
        )
        raise DesignError(message)


def n_at_assurance(
    sigma: float,
    target: float,
    *,
    pilot_n: int,
    assurance: float,
    population: int | None = None,
) -> int:
    """Count the results that keep a target standard error with the stated chance.

    Parameters
    ----------
    sigma : float
        Standard deviation of ``pilot_n`` pilot results.
    target : float
        Tolerated standard error.
    pilot_n : int
        At least 2.
    assurance : float
        From 0.5 up to, but not, 1.
    population : int, optional
        N of a list.

    Notes
    -----
    The plain formula with the upper confidence limit of sigma, s √(df / χ²), put in.

    Examples
    --------
    >>> [n_at_assurance(27.57, 6.0, pilot_n=8, assurance=a) for a in (0.67, 0.80, 0.90)]
    [31, 39, 53]
    """
    check_assurance(assurance)
    known = pilot_n - 1
    upper = sigma * math.sqrt(known / chi_square_quantile(1 - assurance, known))
    return n_for_standard_error(upper, target, population=population)


def n_for_half_width_at_assurance(
    sigma: float,
    target: float,
    *,
    assurance: float,
    confidence: float,
    pilot_n: int | None = None,
    kind: IntervalKind = "two-sided",
    population: int | None = None,
) -> int:
    """Count the results whose interval is no wider than the target with the stated chance.

    Parameters
    ----------
    sigma : float
        Standard deviation of ``pilot_n`` pilot results, or the known one.
    target : float
        Tolerated half-width.
    assurance : float
        From 0.5 up to, but not, 1.
    confidence : float
        Of the interval, inside (0, 1).
    pilot_n : int, optional
        Without it sigma counts as known: Kupper & Hafner (1989).
    kind : str
        Two-sided interval, or a limit on one side.
    population : int, optional
        N of a list.

    Examples
    --------
    >>> n_for_half_width_at_assurance(58, 20, assurance=0.8, confidence=0.95, pilot_n=12)
    55
    >>> n_for_half_width_at_assurance(58, 20, assurance=0.8, confidence=0.95)
    41
    """
    check_assurance(assurance)
    pilot = math.inf if pilot_n is None else float(pilot_n - 1)
    top = MOST + 1 if population is None else population

    def fits(n: int) -> bool:
        predicted = standard_error(sigma, n, population=population) ** 2
        chance = chance_of_half_width(
            predicted, target, main=n - 1, pilot=pilot, confidence=confidence, kind=kind
        )
        return chance >= assurance

    n = smallest(fits, min(2, top), top)
    return n if population is not None else whole(n)
