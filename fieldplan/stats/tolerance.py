"""The largest of n results as a limit that a share of any population lies below."""

import math
from collections.abc import Callable

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import beta_share
from fieldplan.stats.precision import MOST, smallest

SLACK = 1e-12
"""Room for the last digits of a confidence that is met exactly."""


def check_share(value: float, name: str) -> None:
    """Refuse a share, confidence or chance that does not lie between 0 and 1.

    Examples
    --------
    >>> check_share(95, "confidence")
    Traceback (most recent call last):
        ...
    fieldplan.base.errors.DesignError: confidence is 95; it must lie between 0 and 1, e.g. 0.95.
    """
    if not 0 < value < 1:
        message = f"{name} is {value!r}; it must lie between 0 and 1, e.g. 0.95."
        raise DesignError(message)


def confidence_by_counting(n: int, share: float, *, rank: int = 1) -> float:
    """Give the confidence that at least a share of the population lies below a large result.

    Parameters
    ----------
    n : int
        Independent results.
    share : float
        Of the population, inside (0, 1).
    rank : int
        1 takes the largest result for the limit, 2 the second largest, and so on up to n.

    Notes
    -----
    P(at least ``rank`` of n lie above the ``share`` quantile), binomial, whatever the shape of the
    population: Wilks (1941), Annals of Mathematical Statistics 12:91. Never too large where
    results tie.

    Examples
    --------
    >>> round(confidence_by_counting(59, 0.95), 4)  # 1 − 0.95⁵⁹
    0.9515
    """
    check_share(share, "share")
    _check_rank(rank, n)
    return 1 - beta_share(share, n - rank + 1, rank)


def n_by_counting(share: float, confidence: float, *, rank: int = 1) -> int:
    """Count the results of which the largest holds a share of the population below it.

    Parameters
    ----------
    share, confidence : float
        Inside (0, 1).
    rank : int
        1 takes the largest result for the limit, 2 the second largest …: so many results less
        one may lie above a level, and the claim about that level still stands.

    Returns
    -------
    int
        The smallest n whose confidence is at least the one stated.

    Raises
    ------
    DesignError
        A share outside (0, 1), or one that asks for more results than any campaign collects.

    Notes
    -----
    Wilks (1941), Annals of Mathematical Statistics 12:91.

    Examples
    --------
    >>> n_by_counting(0.95, 0.95), n_by_counting(0.95, 0.95, rank=2)
    (59, 93)
    """
    check_share(share, "share")
    check_share(confidence, "confidence")
    _check_rank(rank, None)
    return first_that_fits(
        lambda n: confidence_by_counting(n, share, rank=rank) >= confidence - SLACK,
        rank,
        f"a share of {share:g} at a confidence of {confidence:g}",
    )


def share_by_counting(n: int, confidence: float, *, rank: int = 1) -> float:
    """Give the share of the population that lies below a large result with stated confidence.

    Parameters
    ----------
    n : int
    confidence : float
        Inside (0, 1).
    rank : int
        As in ``n_by_counting``.

    Examples
    --------
    >>> round(share_by_counting(20, 0.95), 3)  # 0.05^(1/20)
    0.861
    """
    check_share(confidence, "confidence")
    _check_rank(rank, n)
    low, high = 0.0, 1.0
    for _ in range(60):
        middle = (low + high) / 2
        reached = 1 - beta_share(middle, n - rank + 1, rank)
        low, high = (middle, high) if reached >= confidence else (low, middle)
    return low


def allowed_by_counting(n: int, share: float, confidence: float) -> int | None:
    """Give how many of n results may lie above a level while the claim still stands.

    Parameters
    ----------
    n : int
    share, confidence : float
        Claimed to lie below the level, and with what confidence; inside (0, 1).

    Returns
    -------
    int or None
        None where n results permit the claim in no case.

    Examples
    --------
    >>> [allowed_by_counting(n, 0.95, 0.95) for n in (58, 59, 92, 93)]
    [None, 0, 0, 1]
    """
    check_share(share, "share")
    check_share(confidence, "confidence")

    def too_many(rank: int) -> bool:
        return confidence_by_counting(n, share, rank=rank) < confidence - SLACK

    if n < 1 or too_many(1):
        return None
    return smallest(too_many, 1, n + 1, back=0) - 2


def chance_of_exceedances(n: int, share_above: float, *, allowed: int = 0) -> float:
    """Give the chance that at most so many of n results lie above a level.

    Parameters
    ----------
    n : int
    share_above : float
        True share of the population above the level, inside [0, 1].
    allowed : int
        Results that may lie above it.

    Notes
    -----
    Binomial: P(X ≤ allowed).

    Examples
    --------
    >>> round(chance_of_exceedances(59, 0.01), 3)  # 0.99⁵⁹
    0.553
    """
    if not 0 <= share_above <= 1:
        message = f"the share above is {share_above!r}; it must lie between 0 and 1, e.g. 0.01."
        raise DesignError(message)
    return 1.0 if allowed >= n else beta_share(1 - share_above, n - allowed, allowed + 1)


def n_and_allowed(
    share: float, confidence: float, *, share_above: float, power: float
) -> tuple[int, int]:
    """Count results, and exceedances they allow, so that the claim comes out where it should.

    Parameters
    ----------
    share, confidence : float
        What shall be claimed, inside (0, 1).
    share_above : float
        True share above the level at which the claim shall come out; below 1 − share.
    power : float
        How often it shall come out there.

    Returns
    -------
    n, allowed : int
        The fewest results, with the exceedances among them that still permit the claim.

    Raises
    ------
    DesignError
        ``share_above`` is not below 1 − share, or nothing up to the largest number will do.

    Notes
    -----
    For every number allowed, the smallest n that permits the claim; the first pair of enough
    chance is taken. Both chances are binomial.

    Examples
    --------
    >>> n_and_allowed(0.95, 0.95, share_above=0.01, power=0.8)
    (124, 2)
    """
    check_share(power, "power")
    if not 0 <= share_above < 1 - share:
        message = (
            f"a site with {share_above:g} above the level cannot be told from one with "
            f"{1 - share:g} above it; expect a smaller share above, or claim less."
        )
        raise DesignError(message)
    allowed = smallest(
        lambda k: (
            chance_of_exceedances(
                n_by_counting(share, confidence, rank=k + 1), share_above, allowed=k
            )
            >= power - SLACK
        ),
        0,
        MOST,
        back=20,
    )
    return n_by_counting(share, confidence, rank=allowed + 1), allowed


def first_that_fits(
    fits: Callable[[int], bool], low: int, asked: str, *, near: float = 0.0, most: int = MOST
) -> int:
    """Find the smallest number that fits, or say that there is none.

    Parameters
    ----------
    fits : callable
        Takes a number; true from some number on, give or take a few.
    low : int
        Where to begin.
    asked : str
        What is asked, for the message.
    near : float
        About where the number lies, to begin there.
    most : int
        Largest number that can be had.

    Raises
    ------
    DesignError
        Nothing up to ``most`` fits.

    Examples
    --------
    >>> first_that_fits(lambda n: n * n > 50, 1, "a square above 50")
    8
    """
    below = min(math.floor(0.9 * near), most)
    start = below if below > low and not fits(below) else low
    n = smallest(fits, start, most)
    if n == most and not fits(n):
        message = f"{asked} asks for more than {most} results; claim less."
        raise DesignError(message)
    return n


def _check_rank(rank: int, n: int | None) -> None:
    if rank < 1:
        message = f"the limit is result {rank} from the top; 1 is the largest, 2 the next."
        raise DesignError(message)
    if n is not None and rank > n:
        message = f"of {n} results none is number {rank} from the top; take more."
        raise DesignError(message)
