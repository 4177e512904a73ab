"""Group testing: one test on a pool, single tests only where the pool answers yes."""

import math

from fieldplan.base.errors import DesignError

PAYS_BELOW = 1 - 3 ** (-1 / 3)
"""Share of positives above which no pool saves a test: pools of 3 hold out longest."""


def _check_share(share: float) -> None:
    if not 0 < share < 1:
        message = (
            f"the share of positives is {share!r}; it must lie between 0 and 1, e.g. 0.05. "
            "Where it is unknown take a high one: pools that are too large cost more."
        )
        raise DesignError(message)


def expected_tests(share: float, size: int) -> float:
    """Give the expected tests per unit in two stages; 1 without pools.

    Parameters
    ----------
    share : float
        Of units that are positive, inside (0, 1), independent of each other.
    size : int
        Units in a pool, at least 1.

    Notes
    -----
    1/m + 1 − (1 − p)^m: Dorfman (1943), Annals of Mathematical Statistics 14:436. The test of a
    pool is taken as never wrong; :func:`largest_pool` says where dilution spoils that.

    Examples
    --------
    >>> round(expected_tests(0.01, 11), 3)
    0.196
    """
    _check_share(share)
    if size < 1:
        message = f"pool size is {size!r}; a pool holds at least 1 unit."
        raise DesignError(message)
    if size == 1:
        return 1.0
    return 1 / size - math.expm1(size * math.log1p(-share))


def analyses_of_units(share: float, size: int, units: int) -> float:
    """Give the expected tests of a number of units: full pools, and one of those left over.

    Parameters
    ----------
    share : float
        Of units that are positive, inside (0, 1).
    size : int
        Units in a pool.
    units : int

    Examples
    --------
    >>> analyses_of_units(0.5, 2, 5)  # two pools of 1 + 2·0.75, and a single unit
    6.0
    """
    full, left = divmod(units, size)
    total = full * size * expected_tests(share, size)
    return total + (left * expected_tests(share, left) if left else 0.0)


def best_pool(share: float, *, largest: int | None = None) -> int:
    """Give the pool size with the fewest expected tests; 1 where pools do not pay.

    Parameters
    ----------
    share : float
        Of units that are positive, inside (0, 1).
    largest : int, optional
        Units that a pool may hold at most.

    Notes
    -----
    Every size up to 2/√p + 2 is tried; the best is 1 or 2 above the whole part of 1/√p (Samuels
    1978, Technometrics 20:497).

    Examples
    --------
    >>> best_pool(0.02), best_pool(0.02, largest=5), best_pool(0.4)
    (8, 5, 1)
    """
    _check_share(share)
    most = math.ceil(2 / math.sqrt(share)) + 2
    if largest is not None:
        if largest < 1:
            message = f"a pool may hold at most {largest!r} units; it holds at least 1."
            raise DesignError(message)
        most = min(most, largest)
    return min(range(1, most + 1), key=lambda size: expected_tests(share, size))


def largest_pool(level: float, reporting_limit: float) -> int:
    """Give the most units in a pool that still shows one unit at the level among units of nothing.

    Parameters
    ----------
    level, reporting_limit : float
        Action level and what the laboratory can report in the pool, same unit, above 0.

    Raises
    ------
    DesignError
        The reporting limit is above the level: not even a single unit would show.

    Examples
    --------
    >>> largest_pool(10.0, 1.2)
    8
    """
    if not (level > 0 and reporting_limit > 0):
        message = f"level {level!r} and reporting limit {reporting_limit!r} must both be above 0."
        raise DesignError(message)
    if reporting_limit > level:
        message = (
            f"a reporting limit of {reporting_limit:g} is above the level of {level:g}: no test, "
            "pooled or single, shows a unit at the level. Ask the laboratory for a lower one."
        )
        raise DesignError(message)
    return math.floor(level / reporting_limit * (1 + 1e-12))
