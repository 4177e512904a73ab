"""A rare part of a site that all results may miss."""

import math

from fieldplan.base.errors import DesignError
from fieldplan.stats.precision import whole


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
