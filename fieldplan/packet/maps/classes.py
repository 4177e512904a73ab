"""Classes of values for a map: few, round, and parted at the action level where there is one."""

import math
from collections.abc import Sequence
from itertools import pairwise

import numpy as np

from fieldplan.packet.sheets.wording import number

_MOST = 5


def class_bounds(values: Sequence[float], action_level: float | None) -> tuple[float, ...]:
    """Choose up to four bounds between classes: quarters of the values, rounded, and the level.

    Parameters
    ----------
    values : sequence of float
        Detected results.
    action_level : float or None
        Always a bound when values lie on both sides of it.

    Returns
    -------
    tuple of float
        Rising; empty when all values share one class.

    Examples
    --------
    >>> class_bounds([12.0, 41.0, 55.0, 58.0, 120.0, 187.0], 150.0)
    (40.0, 60.0, 150.0)
    >>> class_bounds([3.0, 3.0], None)
    ()
    """
    if not len(values) or min(values) == max(values):
        return ()
    low, high = min(values), max(values)
    quarters = np.quantile(np.asarray(values, dtype=float), [0.25, 0.5, 0.75])
    bounds = {_rounded(float(q), high - low) for q in quarters}
    if action_level is not None and low <= action_level < high:
        near = min(bounds, key=lambda bound: abs(bound - action_level), default=None)
        if near is not None and len(bounds) >= _MOST - 2:
            bounds.discard(near)
        bounds.add(action_level)
    return tuple(sorted(bound for bound in bounds if low < bound <= high))


def class_of(value: float, bounds: Sequence[float]) -> int:
    """Give the class of a value: 0 up to and with the first bound, and so on.

    Examples
    --------
    >>> class_of(40.0, (40.0, 60.0)), class_of(40.1, (40.0, 60.0)), class_of(99.0, (40.0, 60.0))
    (0, 1, 2)
    """
    return int(np.searchsorted(np.asarray(bounds, dtype=float), value, side="left"))


def class_words(bounds: Sequence[float], unit: str, *, action_level: float | None) -> list[str]:
    """Name each class by its bounds.

    Examples
    --------
    >>> class_words((40.0, 150.0), "mg/kg", action_level=150.0)
    ['up to 40 mg/kg', 'above 40 to 150 mg/kg', 'above 150 mg/kg (action level)']
    """
    if not bounds:
        return [f"result, {unit}"]
    words = [f"up to {number(bounds[0])} {unit}"]
    words += [f"above {number(a)} to {number(b)} {unit}" for a, b in pairwise(bounds)]
    words.append(f"above {number(bounds[-1])} {unit}")
    for at, bound in enumerate(bounds, start=1):
        if bound == action_level:
            words[at] += " (action level)"
    return words


def _rounded(value: float, spread: float) -> float:
    """Round to one digit of the spread's size divided by ten, so that bounds read well."""
    step = 10.0 ** math.floor(math.log10(spread))
    step = step if spread / step >= 5 else step / 2 if spread / step >= 2 else step / 5
    return round(round(value / (step / 2)) * (step / 2), 12)
