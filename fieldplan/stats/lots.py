"""A list of units of which some may exceed: what looking at n of them can find, or leave hidden."""

import math
from collections.abc import Sequence
from heapq import heapify, heapreplace

from fieldplan.base.errors import DesignError
from fieldplan.stats.precision import smallest
from fieldplan.stats.tolerance import SLACK, check_share

MOST_UNITS = 10_000_000
"""Longest list that is reckoned with; beyond it a list is as good as endless."""


def chance_of_at_most(found: int, *, n: int, exceeding: int, units: int) -> float:
    """Give the chance that at most so many exceeding units are among n drawn from a list.

    Parameters
    ----------
    found : int
        From 0 up.
    n : int
        Units drawn at random without replacement.
    exceeding, units : int
        Units of the list that exceed, and all of them.

    Notes
    -----
    Hypergeometric; terms by logarithms of factorials.

    Examples
    --------
    >>> round(chance_of_at_most(0, n=45, exceeding=5, units=100), 4)
    0.0462
    """
    _check_list(n, exceeding, units)
    low, high = max(0, n - (units - exceeding)), min(found, n, exceeding)
    if found >= min(n, exceeding):
        return 1.0
    if high < low:
        return 0.0
    whole = _log_choose(units, n)
    terms = (
        _log_choose(exceeding, k) + _log_choose(units - exceeding, n - k) - whole
        for k in range(low, high + 1)
    )
    return min(math.fsum(math.exp(term) for term in terms), 1.0)


def chance_of_finding(n: int, exceeding: int, *, units: int) -> float:
    """Give the chance that n of a list hold at least one of those that exceed.

    Parameters
    ----------
    n : int
        Units drawn at random without replacement.
    exceeding, units : int
        Units of the list that exceed, and all of them.

    Examples
    --------
    >>> round(chance_of_finding(45, 5, units=100), 3)
    0.954
    """
    return 1 - chance_of_at_most(0, n=n, exceeding=exceeding, units=units)


def chance_unseen(counts: Sequence[int], populations: Sequence[int], exceeding: int) -> float:
    """Give the largest chance that a stratified list shows none of its exceeding units.

    Parameters
    ----------
    counts, populations : sequence of int
        Units drawn in each stratum, and all of them.
    exceeding : int
        Units that exceed, spread over the strata in the way that hides them best.

    Notes
    -----
    A stratum hides one more with chance (N − D − n) / (N − D), which falls with D, so the worst
    spread puts each unit where that chance is largest.

    Examples
    --------
    >>> round(chance_unseen([30, 15], [60, 40], 5), 4)
    0.0807
    """
    _check_list(0, exceeding, sum(populations))
    logs = 0.0
    waiting = [(-(1 - n / size), size, n) for n, size in zip(counts, populations, strict=True)]
    heapify(waiting)
    for _ in range(exceeding):
        hides, left, n = waiting[0]
        if left <= n:
            return 0.0
        logs += math.log(-hides)
        left -= 1
        heapreplace(waiting, (-(1 - n / left) if left else 0.0, left, n))
    return math.exp(logs)


def n_to_find(exceeding: int, confidence: float, *, units: int, allowed: int = 0) -> int:
    """Count the units to draw so that more than the allowed are found if so many exceed.

    Parameters
    ----------
    exceeding : int
        Fewest exceeding units that shall not go unseen, above ``allowed``.
    confidence : float
        Inside (0, 1).
    units : int
        Length of the list.
    allowed : int
        Units among those drawn that may exceed while the claim still stands.

    Returns
    -------
    int
        The smallest n, drawn at random without replacement; at most the whole list.

    Raises
    ------
    DesignError
        Bounds that do not fit together.

    Notes
    -----
    Hypergeometric, counted exactly; Cannon & Roe (1982), Livestock Disease Surveys, print the
    approximation of ``unrounded_to_find``.

    Examples
    --------
    >>> n_to_find(5, 0.95, units=100), n_to_find(1, 0.95, units=100)
    (45, 95)
    """
    check_share(confidence, "confidence")
    _check_list(0, exceeding, units)
    if not 0 <= allowed < exceeding:
        message = (
            f"{allowed} allowed of {exceeding} exceeding units: nothing could be claimed; "
            "allow fewer than the number that shall not go unseen."
        )
        raise DesignError(message)

    def finds(n: int) -> bool:
        hidden = chance_of_at_most(allowed, n=n, exceeding=exceeding, units=units)
        return 1 - hidden >= confidence - (SLACK + 1e-14 * units)

    return smallest(finds, allowed + 1, units, back=0)


def n_and_allowed_of_list(
    exceeding: int, confidence: float, *, units: int, expected: int, power: float
) -> tuple[int, int]:
    """Count units, and exceeding ones among them that are allowed, so that the claim comes out.

    Parameters
    ----------
    exceeding : int
        The claim is that fewer units than this exceed.
    confidence : float
        Inside (0, 1).
    units : int
        Length of the list.
    expected : int
        Units that exceed where the claim shall come out; below ``exceeding``.
    power : float
        How often it shall come out there.

    Returns
    -------
    n, allowed : int
        The fewest units to draw, with the exceeding ones among them that still permit the claim.

    Examples
    --------
    >>> n_and_allowed_of_list(20, 0.95, units=200, expected=4, power=0.8)
    (42, 1)
    """
    check_share(power, "power")
    _check_list(0, exceeding, units)
    if not 0 <= expected < exceeding:
        message = (
            f"a list with {expected} exceeding units cannot be told from one with {exceeding}; "
            "expect fewer, or claim less."
        )
        raise DesignError(message)

    def comes_out(allowed: int) -> bool:
        n = n_to_find(exceeding, confidence, units=units, allowed=allowed)
        chance = chance_of_at_most(allowed, n=n, exceeding=expected, units=units)
        return chance >= power - SLACK

    allowed = smallest(comes_out, 0, exceeding - 1, back=20)
    return n_to_find(exceeding, confidence, units=units, allowed=allowed), allowed


def unrounded_to_find(exceeding: int, confidence: float, *, units: int) -> float:
    """Give about how many units find at least one that exceeds: a closed form, unrounded.

    Notes
    -----
    (1 − (1 − confidence)^(1/D)) (N − (D − 1)/2): Cannon & Roe (1982), Livestock Disease Surveys.

    Examples
    --------
    >>> round(unrounded_to_find(5, 0.95, units=100), 2)
    44.17
    """
    check_share(confidence, "confidence")
    _check_list(0, exceeding, units)
    return float((1 - (1 - confidence) ** (1 / exceeding)) * (units - (exceeding - 1) / 2))


def most_hidden(n: int, confidence: float, *, units: int, found: int = 0) -> int:
    """Give the most units of the whole list that may exceed when so many of n drawn do.

    Parameters
    ----------
    n : int
        Units drawn at random without replacement.
    confidence : float
        Inside (0, 1).
    units : int
        Length of the list.
    found : int
        Exceeding units among those drawn.

    Returns
    -------
    int
        With the stated confidence no more units than this exceed, those found included.

    Examples
    --------
    >>> most_hidden(45, 0.95, units=100), most_hidden(100, 0.95, units=100)
    (4, 0)
    """
    check_share(confidence, "confidence")
    _check_list(n, found, units)
    if found > n:
        message = f"{found} exceeding units among {n} drawn: there cannot be more than {n}."
        raise DesignError(message)
    most = units - (n - found)
    if most == found:
        return found

    def seen(more: int) -> bool:
        """Tell whether so many would have shown more than ``found``."""
        hidden = chance_of_at_most(found, n=n, exceeding=more, units=units)
        return 1 - hidden >= confidence - (SLACK + 1e-14 * units)

    return smallest(seen, found + 1, most + 1, back=0) - 1


def _log_choose(n: int, k: int) -> float:
    return math.lgamma(n + 1) - math.lgamma(k + 1) - math.lgamma(n - k + 1)


def _check_list(n: int, exceeding: int, units: int) -> None:
    if not 1 <= units <= MOST_UNITS:
        message = f"a list of {units} units; it must have 1 to {MOST_UNITS}."
        raise DesignError(message)
    for count, what in ((n, "drawn"), (exceeding, "exceeding")):
        if not 0 <= count <= units:
            message = f"{count} units {what} of a list of {units}; it must be 0 to {units}."
            raise DesignError(message)
