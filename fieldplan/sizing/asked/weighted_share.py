"""What strata out of proportion are worth for a share: as many results of one simple sample."""

import math

from fieldplan.base.errors import DesignError
from fieldplan.sizing.asked.counting_claims import EVEN, evenness
from fieldplan.sizing.asked.model import Asked
from fieldplan.stats.precision import MOST, smallest


def worth(asked: Asked, counts: tuple[int, ...]) -> int:
    """Count the results of one simple random sample that tell a share as well as these do.

    Parameters
    ----------
    asked : Asked
    counts : tuple of int
        Results by stratum, one at least in each.

    Returns
    -------
    int
        The total where the strata are sampled in proportion, fewer where they are not.

    Notes
    -----
    The weighted share has variance p (1 − p) Σ W² / n, where the share p is the same in every
    stratum; a list leaves the part (N − n) / (N − 1) of each. Cochran 1977, ch. 5 (from memory).
    """
    if len(counts) == 1:
        return counts[0]
    parts = asked.question.parts
    spread, units = 0.0, asked.population
    for n, part in zip(counts, parts, strict=True):
        size = part.population
        left = 1.0 if size is None else max(size - n, 0) / max(size - 1, 1)
        spread += part.weight**2 * left / n
    if units is None:
        return min(round(1 / spread), sum(counts))
    return min(round(units / (1 + (units - 1) * spread)), sum(counts))


def counts_worth(asked: Asked, total: int) -> tuple[int, ...]:
    """Share the smallest total that is worth so many results of one simple sample.

    Parameters
    ----------
    asked : Asked
    total : int
        Results of one simple random sample.

    Raises
    ------
    DesignError
        No campaign collects so many.
    """
    most = MOST if asked.population is None else asked.population
    ripple = 4 * len(asked.question.parts)

    def enough(number: int) -> bool:
        return worth(asked, asked.shared(number)) >= total

    counts = asked.shared(smallest(enough, min(total, most), most, back=ripple))
    if worth(asked, counts) < total:
        message = (
            f"strata sampled so far out of proportion take more than {most} results for what "
            f'{total} tell in proportion; write allocation = "proportional".'
        )
        raise DesignError(message)
    return counts


def weighting_words(asked: Asked, counts: tuple[int, ...]) -> tuple[str, ...]:
    """Say what strata out of proportion cost a share, and how its results must be put together."""
    if evenness(asked, counts) >= EVEN or math.isclose(worth(asked, counts), sum(counts)):
        return ()
    return (
        "The strata are not sampled in proportion to their size, so each stratum's share must be "
        f"weighted by that size: counted together these {sum(counts)} mislead. Weighted they tell "
        f"as much as {worth(asked, counts)} in proportion, if the share is alike in all strata.",
    )
