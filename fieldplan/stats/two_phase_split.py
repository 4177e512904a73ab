"""The whole numbers of readings and results that money is best spent on."""

from bisect import bisect_left
from collections.abc import Callable, Iterable
from typing import NamedTuple

from fieldplan.stats.precision import meets, smallest
from fieldplan.stats.two_phase import Screened

ALL = 400
"""So many numbers of results are all tried; of more, ever finer rows about the best."""


class Split(NamedTuple):
    """Places with a reading, and those among them with a laboratory result."""

    readings: int
    results: int


def cheapest_split(
    population: Screened,
    *,
    target: Callable[[int], float],
    price: Callable[[int, int], float],
) -> Split | None:
    """Find the cheapest whole numbers of readings and results that keep a target variance.

    Parameters
    ----------
    population : Screened
    target : callable
        Takes the number of results, gives the tolerated variance (a half-width has its t in it);
        must not fall with more results.
    price : callable
        Takes readings and results, gives money; must not fall with either.

    Returns
    -------
    Split or None
        Of equally cheap ones the most precise; None where no number does. Up to ``ALL`` numbers
        of results are all tried, beyond that ever finer rows about the best.

    Examples
    --------
    >>> cheapest_split(Screened(20.0, 0.9), target=lambda n: 16.0,
    ...                price=lambda readings, results: 10 * readings + 90 * results)
    Split(readings=51, results=9)
    """
    high = smallest(
        lambda n: meets(population.variance(n, n), target(n)),
        population.fewest,
        population.most,
        back=0,
    )

    def best(results: int) -> tuple[float, float, Split] | None:
        readings = population.readings_for(target(results), results)
        if readings is None:
            return None
        split = Split(readings, results)
        return price(*split), population.variance(*split), split

    return _searched(best, population.fewest, min(high, population.most))


def most_precise_split(
    population: Screened, *, budget: float, price: Callable[[int, int], float]
) -> Split | None:
    """Find the whole numbers of readings and results of smallest variance within a budget.

    Parameters
    ----------
    population : Screened
    budget : float
        Money.
    price : callable
        Takes readings and results, gives money; must not fall with either.

    Returns
    -------
    Split or None
        Of equally precise ones the cheapest; None where the fewest places cost more.

    Examples
    --------
    >>> most_precise_split(Screened(20.0, 0.9), budget=2000,
    ...                    price=lambda readings, results: 10 * readings + 90 * results)
    Split(readings=74, results=14)
    """
    fewest, most = population.fewest, population.most

    def affordable(number: Callable[[int], float], low: int) -> int:
        top = smallest(lambda n: not meets(number(n), budget), low, most + 1, back=0)
        return top - 1

    def best(results: int) -> tuple[float, float, Split] | None:
        readings = affordable(lambda n: price(n, results), results)
        if readings < results:
            return None
        # with very few results more readings can make the fitted line do harm
        splits = (Split(readings, results), Split(results, results))
        return min((population.variance(*split), price(*split), split) for split in splits)

    return _searched(best, fewest, affordable(lambda n: price(n, n), fewest))


def _searched(
    best: Callable[[int], tuple[float, float, Split] | None], low: int, high: int
) -> Split | None:
    """Try every number of results; of many a rising row, then a finer one about its best."""

    def first(numbers: Iterable[int]) -> tuple[float, float, Split] | None:
        return min((found for n in numbers if (found := best(n)) is not None), default=None)

    while high - low >= ALL:
        ratio = (high / low) ** (2 / ALL)
        row = sorted({round(low * ratio**k) for k in range(ALL // 2)} | {low, high})
        found = first(row)
        if found is None:
            return None
        place = bisect_left(row, found[2].results)
        low, high = row[max(0, place - 1)], row[min(len(row) - 1, place + 1)]
    found = first(range(low, high + 1))
    return found[2] if found else None
