"""Which method for non-detects the evidence speaks for, by share, number and declared shape."""

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
MOST_WITH_SHAPE, FEWEST_WITH_SHAPE = 0.60, 20
"""The same for a likelihood whose shape is declared, on populations of that shape."""


@dataclass(frozen=True)
class Choice:
    """A method, or ``bounds`` where the evidence speaks for none, and why."""

    method: CensoredMethod | Literal["bounds"]
    reason: str


def choose_method(n: int, non_detects: int, *, shape: Model | None = None) -> Choice:
    """Choose a method for the mean from what can be known before any value is looked at.

    Parameters
    ----------
    n, non_detects : int
        Results, and how many of them are non-detects.
    shape : str or None
        Of the population, declared before results: ``lognormal``, ``gamma`` or ``normal``.

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
    share = non_detects / n
    found = f"{non_detects} of {n} results are non-detects ({share:.0%})"
    if shape is not None:
        most, fewest, method = MOST_WITH_SHAPE, FEWEST_WITH_SHAPE, LIKELIHOOD_OF[shape]
        known = f"a {shape} shape was declared before results"
    else:
        most, fewest = MOST_WITHOUT_SHAPE, FEWEST_WITHOUT_SHAPE
        method, known = "order-statistics", "no shape was declared before results"
    held = f"{method} held in simulation up to {most:.0%} and from {fewest} results on"
    if share <= most and n >= fewest:
        return Choice(method, f"{found} and {known}: {held}")
    return Choice("bounds", f"{found} and {known}, but {held}, so only the bounds are left")
