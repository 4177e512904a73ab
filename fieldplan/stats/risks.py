"""The two chances of a wrong decision, checked in one place."""

import math

from fieldplan.base.errors import DesignError

LEAST_CHANCE = 1e-12
"""Chances nearer to 0 or 1 than this are lost in the last digits of the functions used."""

MOST_ALPHA = 0.5
"""A one-sided limit with a larger alpha lies beyond the mean, on the side it should bound."""


def check_risks(alpha: float, beta: float) -> None:
    """Refuse chances of a wrong decision that no number of results can be worked out from.

    Parameters
    ----------
    alpha, beta : float
        Chance of deciding against the starting assumption when it is true, and of keeping it at
        the far edge of the gray region. Each inside (0, 1), alpha at most
        one half, together below 1.

    Examples
    --------
    >>> check_risks(0.05, 0.2)
    """
    for name, chance in (("alpha", alpha), ("beta", beta)):
        _check_chance(name, chance)
    if alpha > MOST_ALPHA:
        message = (
            f"alpha is {alpha:g}; it may be {MOST_ALPHA:g} at most, for beyond that the limit lies "
            "on the wrong side of the mean. Write e.g. 0.05."
        )
        raise DesignError(message)
    if alpha + beta >= 1:
        message = (
            f"alpha {alpha:g} and beta {beta:g} sum to {alpha + beta:g}; together they must stay "
            "below 1: tossing a coin already does as well. Lower one of them."
        )
        raise DesignError(message)


def check_difference(difference: float, sigma: float) -> None:
    """Refuse a difference or a standard deviation that is not a number above 0.

    Examples
    --------
    >>> check_difference(2.5, 4.0)
    """
    if not (math.isfinite(difference) and difference > 0):
        message = (
            f"the difference to be found is {difference!r}; it must be a number above 0, "
            "the width of the gray region."
        )
        raise DesignError(message)
    if not (math.isfinite(sigma) and sigma > 0):
        message = f"a standard deviation is {sigma!r}; it must be a number above 0."
        raise DesignError(message)


def one_sided_level(alpha: float, sides: int) -> float:
    """Give the chance of a false claim on one side: alpha, or half of it for two sides.

    Examples
    --------
    >>> one_sided_level(0.05, 1), one_sided_level(0.05, 2)
    (0.05, 0.025)
    """
    _check_chance("alpha", alpha)
    if sides not in (1, 2):
        message = f"a test has 1 side or 2, not {sides!r}."
        raise DesignError(message)
    return alpha / sides


def _check_chance(name: str, chance: float) -> None:
    if not 0 < chance < 1:
        message = (
            f"{name} is {chance!r}; a chance of a wrong decision lies between 0 and 1, e.g. 0.05."
        )
        raise DesignError(message)
    if min(chance, 1 - chance) < LEAST_CHANCE:
        message = (
            f"{name} is {chance!r}, nearer to 0 or 1 than can be reckoned with, {LEAST_CHANCE:g}."
        )
        raise DesignError(message)
