"""What results above a level may be claimed to show, by counting them: any shape of population."""

import math

from fieldplan.base.errors import CampaignError, DesignError
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.words import typed, with_unit
from fieldplan.stats.lots import chance_of_at_most, chance_unseen
from fieldplan.stats.precision import MOST, smallest
from fieldplan.stats.tolerance import SLACK, chance_of_exceedances

WILKS = "Wilks 1941, Annals of Mathematical Statistics 12:91 (from memory)"
HYPERGEOMETRIC = "hypergeometric distribution; Cochran 1977, Sampling Techniques, 3rd ed., sec. 3.5"

EVEN = 0.9
"""Evenness from which strata count as sampled in proportion: common practice, no source."""


def table_missing(question: str) -> CampaignError:
    """Say that the objective has no table of its question."""
    message = f"[objective.{question}] is missing; write its keys below [[objective]]."
    return CampaignError(message)


def level_words(asked: Asked) -> str:
    """Name the level with its unit; ``the level`` where the campaign gives none."""
    return (
        "the level" if asked.level is None else with_unit(typed(asked.level), asked.question.unit)
    )


def claimed_share(share: float, *, up: bool) -> float:
    """Round a share that is claimed, away from claiming more than was shown.

    Parameters
    ----------
    share : float
        In [0, 1].
    up : bool
        Upwards, for a share that may be above the level; downwards for one that lies below it.

    Returns
    -------
    float
        To a tenth of a percent, or to two digits of a share, or of its rest, below 1 %.

    Examples
    --------
    >>> claimed_share(0.06441, up=True), claimed_share(0.91570, up=False)
    (0.065, 0.915)
    """
    rest = min(share, 1 - share)
    digits = 3 if rest >= 0.01 or rest <= 0 else 1 - math.floor(math.log10(rest))
    scale = 10.0**digits
    moved = math.ceil(share * scale - 1e-7) if up else math.floor(share * scale + 1e-7)
    return moved / scale


def exceeding_units(asked: Asked, share: float) -> int:
    """Count the units that a share of the list makes, the last one whole."""
    return max(1, math.ceil(share * (asked.population or 0) - 1e-9))


def chance_noticed(asked: Asked, counts: tuple[int, ...], share: float, *, allowed: int) -> float:
    """Give the chance that more than the allowed results exceed, if just that share does.

    Parameters
    ----------
    asked : Asked
    counts : tuple of int
        Results by stratum.
    share : float
        Of the population above the level, inside (0, 1); of a list whole units.
    allowed : int
        Results that may exceed.

    Notes
    -----
    One area: binomial. One list: hypergeometric. Strata: the worst way in which the share may lie
    among them, which for a binomial is bounded by the least thinly sampled stratum's share of the
    mean number of exceedances (Hoeffding 1956).
    """
    total = sum(counts)
    if asked.population is None:
        return 1 - chance_of_exceedances(total, share * evenness(asked, counts), allowed=allowed)
    units, exceeding = asked.population, exceeding_units(asked, share)
    if total >= units:
        return float(exceeding > allowed)
    if len(counts) == 1:
        return 1 - chance_of_at_most(allowed, n=total, exceeding=exceeding, units=units)
    if allowed == 0:
        populations = [part.population or 0 for part in asked.question.parts]
        return 1 - chance_unseen(counts, populations, exceeding)
    spread = exceeding / units * evenness(asked, counts)
    return 1 - chance_of_exceedances(total, spread, allowed=allowed)


def claim_holds(
    asked: Asked, counts: tuple[int, ...], share: float, *, allowed: int, confidence: float
) -> bool:
    """Tell whether counts notice a share with the confidence, wherever in the strata it lies.

    Parameters
    ----------
    asked : Asked
    counts : tuple of int
        Results by stratum.
    share : float
        Above the level, that must be noticed.
    allowed : int
        Results that may exceed.
    confidence : float

    Notes
    -----
    The bound for strata wants more exceedances on average than are allowed, by one at least
    (Hoeffding 1956); above a confidence of 0.63 that follows.
    """
    chance = chance_noticed(asked, counts, share, allowed=allowed)
    if chance < confidence - SLACK:
        return False
    exact = len(counts) == 1 or takes_all(asked, counts) or (asked.population and allowed == 0)
    return bool(exact) or allowed <= sum(counts) * share * evenness(asked, counts) - 1


def evenness(asked: Asked, counts: tuple[int, ...]) -> float:
    """Give how far the most thinly sampled stratum lies below an even share; 1 where none does."""
    total = sum(counts)
    parts = zip(counts, asked.question.parts, strict=True)
    return min(1.0, *(n / (total * part.weight) for n, part in parts), 1.0)


def counts_that_notice(
    asked: Asked, share: float, confidence: float, *, allowed: int, near: int
) -> tuple[int, ...]:
    """Share the smallest total that notices a share with the stated chance.

    Parameters
    ----------
    asked : Asked
    share : float
        Above the level.
    confidence : float
    allowed : int
        Results that may exceed.
    near : int
        The number for one stratum: never more than the answer.

    Raises
    ------
    DesignError
        Not even the whole list would do, or more results than any campaign collects.
    """
    floors = sum(asked.question.strata.floors)
    low = max(near, floors, 1)
    most = MOST if asked.population is None else asked.population
    if asked.population is not None and exceeding_units(asked, share) <= allowed:
        message = (
            f"{allowed} units may exceed, and no more than {exceeding_units(asked, share)} of "
            f"{most} shall: looking at all of them would show nothing. Allow fewer."
        )
        raise DesignError(message)

    def notices(total: int) -> bool:
        counts = asked.shared(total)
        return claim_holds(asked, counts, share, allowed=allowed, confidence=confidence)

    # Whole shares ripple: a total may fail where the one before it did.
    ripple = 4 * len(asked.question.parts) if len(asked.question.parts) > 1 else 0
    return asked.shared(smallest(notices, min(low, most), most, back=ripple))


def level_warning(asked: Asked) -> tuple[str, ...]:
    """Warn where a campaign file does not say which level results are compared with."""
    if asked.level is not None or asked.frame is None:
        return ()
    return (
        f"The level of {asked.analyte.label} is not written down, so nobody can say what results "
        "will be compared with. Write action_level and action_level_source in its [[analyte]] "
        "before any result is seen.",
    )


def found_warning(asked: Asked) -> tuple[str, ...]:
    """Say what counts where a campaign file names no level."""
    if asked.level is not None or asked.frame is None:
        return ()
    return (
        f"No level of {asked.analyte.label} is written down: what counts is that it is found at "
        "all. Write action_level in its [[analyte]] if a level is meant.",
    )


def limit_warning(asked: Asked) -> tuple[str, ...]:
    """Warn where a non-detect could hide an exceedance."""
    limit, level = asked.analyte.reporting_limit, asked.level
    if limit is None or level is None or limit <= level:
        return ()
    unit = asked.question.unit
    return (
        f"The reporting limit of {with_unit(typed(limit), unit)} lies above the level: a "
        "non-detect there is no result at or below it and cannot be counted.",
    )


def takes_all(asked: Asked, counts: tuple[int, ...]) -> bool:
    """Tell whether the counts look at every unit of a list."""
    return asked.population is not None and sum(counts) >= asked.population


def uneven_warning(asked: Asked, counts: tuple[int, ...], even: int) -> tuple[str, ...]:
    """Say what strata out of proportion cost; ``even`` is the number without strata."""
    if evenness(asked, counts) >= EVEN:
        return ()
    return (
        "The strata are not sampled in proportion to their size, so the most thinly sampled one "
        f"bounds the claim; in proportion about {even} results would carry it.",
    )


def population_words(asked: Asked) -> str:
    """Name what a share is a share of."""
    if asked.population is not None:
        return f"the {asked.population} units of the list"
    return "the site's possible samples"


def counting_assumptions(asked: Asked, *, allowed: int) -> tuple[str, ...]:
    """Say what counting takes for granted."""
    lines = [
        "Every place or unit is as likely to be drawn as any other of its stratum; targeted places "
        "and places moved at will do not count.",
        "A result stands for its place as the laboratory reports it: error of sampling and "
        "analysis is part of what exceeds or does not.",
        "The level, the claim and the number allowed are fixed before any result is seen.",
    ]
    if asked.question.grid:
        lines.append("A grid is counted like places drawn one by one; a pattern as regular as the "
                     "grid could hide between its points.")  # fmt: skip
    if len(asked.question.parts) > 1:
        by = "" if asked.population is not None and allowed == 0 else " (Hoeffding 1956)"
        lines.append(f"What exceeds may lie among the strata in whatever way hides it best{by}.")
    return tuple(lines)
