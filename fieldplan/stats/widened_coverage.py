"""How often the skew-widened interval holds the mean, over simulated populations of its class."""

import math
from functools import cache
from itertools import pairwise
from typing import NamedTuple

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.skew_interval import PopulationClass
from fieldplan.stats.widened_table import POPULATIONS, TABLE


class Held(NamedTuple):
    """Share of campaigns that hold the mean: in the worst population of a class, and the middle."""

    worst: float
    middle: float


Cells = tuple[tuple[int, Held], ...]


@cache
def _cells() -> dict[tuple[str, str, float], Cells]:
    """Read the table: class, kind, confidence, n, worst and middle in 10⁻⁴."""
    found: dict[tuple[str, str, float], Cells] = {}
    for line in TABLE.splitlines():
        name, kind, confidence, n, worst, middle = line.split()
        cell = (int(n), Held(int(worst) / 1e4, int(middle) / 1e4))
        key = (name, kind, float(confidence))
        found[key] = (*found.get(key, ()), cell)
    return found


def widened_coverage(
    n: int, *, population_class: PopulationClass, confidence: float, kind: IntervalKind
) -> Held:
    """Look up the coverage that can be expected of the skew-widened interval.

    Parameters
    ----------
    n : int
        Results, at least 5.
    population_class : str
    confidence : float
        From 0.90 to 0.99.
    kind : str

    Returns
    -------
    Held
        Straight in 1/√n between the cells; above the last one as there. Between the simulated
        levels 0.90, 0.95 and 0.99 what is held short of nominal is taken as straight.

    Raises
    ------
    DesignError
        Outside the table.

    Notes
    -----
    Simulated for this tool with 60,000 samples a cell (tests/evidence/interval_coverage.py); no
    published source.

    Examples
    --------
    >>> found = widened_coverage(30, population_class="cv-up-to-1", confidence=0.95,
    ...                          kind="two-sided")
    >>> 0.93 < found.worst < found.middle < 1.0
    True
    """
    levels = sorted(level for name, of, level in _cells() if (name, of) == (population_class, kind))
    least = _cells()[population_class, kind, levels[0]][0][0]
    if n < least or not levels[0] <= confidence <= levels[-1]:
        message = (
            f"the coverage of a skew-widened {kind} interval is simulated for {least} results or "
            f"more and a confidence from {levels[0]:g} to {levels[-1]:g}, not for {n} at "
            f"{confidence:g}."
        )
        raise DesignError(message)
    low = max(level for level in levels if level <= confidence)
    high = min(level for level in levels if level >= confidence)
    share = 0.0 if high == low else (confidence - low) / (high - low)
    ends = [(_at(n, _cells()[population_class, kind, level]), level) for level in (low, high)]
    short = [
        (1 - share) * (ends[0][0][k] - ends[0][1]) + share * (ends[1][0][k] - ends[1][1])
        for k in (0, 1)
    ]
    return Held(*(min(1.0, confidence + one) for one in short))


def _at(n: int, cells: Cells) -> Held:
    for (one, before), (other, after) in pairwise(cells):
        if one <= n <= other:
            share = (one**-0.5 - 1 / math.sqrt(n)) / (one**-0.5 - other**-0.5)
            pairs = zip(before, after, strict=True)
            return Held(*((1 - share) * a + share * b for a, b in pairs))
    return cells[-1][1]


def populations_simulated(population_class: PopulationClass) -> int:
    """Give how many populations of a class stand behind the table.

    Examples
    --------
    >>> populations_simulated("cv-up-to-2") > 50
    True
    """
    return POPULATIONS[population_class]
