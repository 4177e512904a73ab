"""Two phases: many cheap readings, and laboratory results from some of the same places.

The readings are compared with the results by a straight line, and the mean of all readings then
moves the mean of the results to where the line puts it (regression estimate).
"""

import math
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.stats.precision import MOST, meets


@dataclass(frozen=True)
class Screened:
    """A population in which a cheap reading goes along with the laboratory's result.

    Parameters
    ----------
    sigma : float
        Standard deviation of single results, above 0. For strata Σ W σ (Neyman) or √(Σ W σ²)
        (proportional), both phases being shared out in that way.
    correlation : float
        Of reading and result over places (within strata), from -1 to 1; its sign does not matter.
    strata : int
        Each has a level of its own; the slope is common to all.
    finite : float
        What a list takes off the variance: Σ W² σ² / N; 0 for an area.
    most : int
        Most places that can be had: N of a list.
    least : int
        Fewest results that the design allows, where more than a line needs.

    Raises
    ------
    DesignError
        The correlation is no number from -1 to 1, or sigma is not above 0.
    """

    sigma: float
    correlation: float
    strata: int = 1
    finite: float = 0.0
    most: int = MOST
    least: int = 0

    def __post_init__(self) -> None:
        """Refuse what no population has."""
        check_correlation(self.correlation)
        if not 0 < self.sigma < math.inf:
            message = f"sigma is {self.sigma!r}; a standard deviation is a number above 0."
            raise DesignError(message)

    @property
    def fewest(self) -> int:
        """Fewest results with which the luck of the fitted line has a finite variance."""
        return max(self.strata + 3, self.least)

    def variance(self, readings: float, results: float) -> float:
        """Give the variance of the regression estimate of the mean.

        Parameters
        ----------
        readings, results : float
            n' ≥ n, and n ≥ L + 3 unless the two are equal.

        Raises
        ------
        DesignError
            More results than readings, or too few results for a line.

        Notes
        -----
        σ² (1 − ρ²) [1/n + (1/n − 1/n') / (n − L − 2)] + σ² ρ² / n' − Σ W² σ²/N for L strata:
        Cochran (1977), Sampling Techniques, 3rd ed., ch. 12. The term with n − L − 2 is what
        fitting the line costs; it is exact where readings are normal and the line is straight.

        Examples
        --------
        >>> round(Screened(20.0, 0.9).variance(60, 15), 2)
        10.78
        >>> Screened(20.0, 0.9).variance(25, 25)  # without more readings, σ² / n
        16.0
        """
        if readings < results:
            message = (
                f"{results:g} results need a reading each, and there are {readings:g}; "
                "every place with a result has a reading."
            )
            raise DesignError(message)
        straight, luck = self._parts(results, several=readings > results)
        shared = (self.sigma * self.correlation) ** 2
        return straight * (1 + luck) / results + (shared - straight * luck) / readings - self.finite

    def _parts(self, results: float, *, several: bool = True) -> tuple[float, float]:
        """Give the variance about the line, and the share that fitting the line adds to it."""
        about = self.sigma**2 * (1 - self.correlation**2)
        if not several:
            return about, 0.0
        if results < self.strata + 3:
            message = (
                f"{results:g} results are too few to fit a line to; take {self.strata + 3} or more."
            )
            raise DesignError(message)
        return about, 1 / (results - self.strata - 2)

    def readings_for(self, target_variance: float, results: int) -> int | None:
        """Count the fewest readings with which so many results keep a target variance.

        Parameters
        ----------
        target_variance : float
            Tolerated variance of the mean, above 0.
        results : int
            At least ``fewest``.

        Returns
        -------
        int or None
            At least ``results``; None where no number of readings does.

        Examples
        --------
        >>> Screened(20.0, 0.9).readings_for(16.0, 9)
        51
        >>> Screened(20.0, 0.9).readings_for(16.0, 4) is None
        True
        """
        if meets(self.variance(results, results), target_variance):
            return results
        about, luck = self._parts(results)
        falling = (self.sigma * self.correlation) ** 2 - about * luck
        room = target_variance + self.finite - about * (1 + luck) / results
        if falling <= 0 or room * self.most < falling * (1 - 1e-9):
            return None
        readings = math.ceil(falling / room * (1 - 1e-9))
        return min(max(readings, results), self.most)


def check_correlation(correlation: float) -> None:
    """Refuse a correlation outside -1 to 1."""
    if not -1 <= correlation <= 1:
        message = (
            f"correlation is {correlation!r}; it must lie from -1 to 1: how closely the cheap "
            "reading follows the laboratory's result."
        )
        raise DesignError(message)


def _check_costs(*costs: float) -> None:
    for cost in costs:
        if not 0 < cost < math.inf:
            message = (
                f"a unit cost is {cost!r}; the split needs what a reading and what a result adds "
                "to the bill, both above 0."
            )
            raise DesignError(message)


def readings_per_result(correlation: float, *, reading_cost: float, result_cost: float) -> float:
    """Give the number of readings per laboratory result that money is best spent on.

    Parameters
    ----------
    correlation : float
        From -1 to 1.
    reading_cost : float
        What one more place with a reading costs, visit included, above 0.
    result_cost : float
        What a result at a place already visited adds, above 0.

    Returns
    -------
    float
        n'/n, at least 1; infinite for a perfect reading.

    Notes
    -----
    ρ √c / √((1 − ρ²) c'): Cochran (1977), Sampling Techniques, 3rd ed., ch. 12, for large n.

    Examples
    --------
    >>> round(readings_per_result(0.8, reading_cost=10, result_cost=90), 6)
    4.0
    >>> readings_per_result(0.2, reading_cost=10, result_cost=90)
    1.0
    """
    check_correlation(correlation)
    _check_costs(reading_cost, result_cost)
    about = (1 - correlation**2) * reading_cost
    if about == 0:
        return math.inf
    return max(1.0, abs(correlation) * math.sqrt(result_cost / about))


def relative_variance(
    correlation: float,
    *,
    reading_cost: float,
    result_cost: float,
    single_cost: float | None = None,
) -> float:
    """Give the variance of the mean as a share of what results alone reach for the same money.

    Parameters
    ----------
    correlation : float
        From -1 to 1.
    reading_cost, result_cost : float
        As for ``readings_per_result``.
    single_cost : float, optional
        What one result costs where there are no readings, visit included; ``result_cost`` if
        left out, as in the book.

    Returns
    -------
    float
        Below 1 where two phases pay, at the best split and for large n.

    Notes
    -----
    (√((1 − ρ²) c) + |ρ| √c')² / c1: Cochran (1977), ch. 12. Where the best split would have fewer
    readings than results, (c + c') / c1.

    Examples
    --------
    >>> round(relative_variance(0.8, reading_cost=10, result_cost=90), 3)
    0.751
    """
    single = result_cost if single_cost is None else single_cost
    _check_costs(reading_cost, result_cost, single)
    check_correlation(correlation)
    if correlation**2 <= reading_cost / (reading_cost + result_cost):
        return (reading_cost + result_cost) / single
    root = math.sqrt((1 - correlation**2) * result_cost)
    return (root + abs(correlation) * math.sqrt(reading_cost)) ** 2 / single


def break_even_correlation(
    *, reading_cost: float, result_cost: float, single_cost: float | None = None
) -> float | None:
    """Give the correlation below which two phases stop paying.

    Parameters
    ----------
    reading_cost, result_cost, single_cost : float
        As for ``relative_variance``.

    Returns
    -------
    float or None
        0 where readings cost nothing extra; None where even a perfect reading would not pay.

    Notes
    -----
    Two phases pay where √((1 − ρ²) c) + ρ √c' < √c1. With ρ = sin θ and tan φ = √(c'/c) the left
    is √(c + c') cos(θ − φ), so the border is θ = φ + arccos √(c1 / (c + c')). For c1 = c that is
    ρ² = 4 c c' / (c + c')², as in Cochran (1977), ch. 12.

    Examples
    --------
    >>> round(break_even_correlation(reading_cost=10, result_cost=90), 6)
    0.6
    >>> break_even_correlation(reading_cost=100, result_cost=90) is None
    True
    """
    single = result_cost if single_cost is None else single_cost
    _check_costs(reading_cost, result_cost, single)
    if single >= reading_cost + result_cost:
        return 0.0
    if reading_cost >= single:
        return None
    lean = math.atan(math.sqrt(reading_cost / result_cost))
    return math.sin(lean + math.acos(math.sqrt(single / (reading_cost + result_cost))))
