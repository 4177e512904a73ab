"""Which method for non-detects the evidence speaks for, by share, number and declared shape."""

import math
from dataclasses import dataclass
from typing import Literal

from fieldplan.base.errors import DesignError
from fieldplan.stats.censored import CensoredMethod
from fieldplan.stats.censored_fit import Model

LIKELIHOOD_OF: dict[Model, CensoredMethod] = {
    "lognormal": "lognormal-likelihood",
    "gamma": "gamma-likelihood",
    "normal": "normal-likelihood",
}

MOST_WITHOUT_SHAPE, FEWEST_WITHOUT_SHAPE = 0.40, 30
"""Share of non-detects, and results, within which order statistics held without a shape."""
MOST_RESULTS_WITHOUT_SHAPE = 200
"""Beyond so many results a wrong shape is off by more than the narrow interval allows for."""
MOST_WITH_SHAPE, FEWEST_WITH_SHAPE = 0.60, 20
"""The same for a likelihood whose shape is declared, on populations of that shape."""
FEWEST_IN_STRATUM = 10
"""Results of each stratum, where those of all strata together are counted."""


@dataclass(frozen=True)
class Choice:
    """A method, or ``bounds`` where the evidence speaks for none, and why."""

    method: CensoredMethod | Literal["bounds"]
    reason: str


def choose_method(
    n: int, non_detects: int, *, shape: Model | None = None, together: int | None = None
) -> Choice:
    """Choose a method for the mean from what can be known before any value is looked at.

    Parameters
    ----------
    n, non_detects : int
        Results, and how many of them are non-detects.
    shape : str or None
        Of the population, declared before results: ``lognormal``, ``gamma`` or ``normal``.
    together : int or None
        Results of all strata, where n are those of one.

    Returns
    -------
    Choice

    Raises
    ------
    DesignError
        More non-detects than results, or no results.

    Notes
    -----
    From the simulations of docs/evidence/non-detects.md (tests/evidence/non_detects.py); no
    published source for the limits.

    Examples
    --------
    >>> choose_method(40, 10).method, choose_method(40, 20).method
    ('order-statistics', 'bounds')
    >>> choose_method(24, 12, shape="lognormal").method
    'lognormal-likelihood'
    """
    if n < 1 or not 0 <= non_detects <= n:
        message = (
            f"{non_detects} non-detects of {n} results; give 1 result or more, 0 to all of it."
        )
        raise DesignError(message)
    share, total = non_detects / n, n if together is None else together
    found = f"{non_detects} of {n} results are non-detects ({share:.0%})"
    most_results = math.inf
    if shape is not None:
        most, fewest, method = MOST_WITH_SHAPE, FEWEST_WITH_SHAPE, LIKELIHOOD_OF[shape]
        known = f"a {shape} shape was declared before results"
    else:
        most, fewest = MOST_WITHOUT_SHAPE, FEWEST_WITHOUT_SHAPE
        method, known = "order-statistics", "no shape was declared before results"
        most_results = MOST_RESULTS_WITHOUT_SHAPE
    numbers = f"from {fewest} results on" if shape else f"for {fewest} to {most_results} results"
    if together is not None:
        numbers += f" in all, {FEWEST_IN_STRATUM} in a stratum"
    held = f"{method} held in simulation up to {most:.0%} and {numbers}"
    alone = together is None or n >= FEWEST_IN_STRATUM
    if share <= most and fewest <= total <= most_results and alone:
        return Choice(method, f"{found} and {known}: {held}")
    return Choice("bounds", f"{found} and {known}, but {held}, so only the bounds are left")
