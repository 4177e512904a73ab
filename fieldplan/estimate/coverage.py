"""How often an interval of this kind holds the true mean, at this n and skewness."""

import math
import re

import numpy as np

from fieldplan.base.units import significant
from fieldplan.design.model import StratumValues
from fieldplan.estimate.means import Means
from fieldplan.estimate.non_detect_words import held_sentence
from fieldplan.estimate.population import is_census
from fieldplan.estimate.widened import is_widened
from fieldplan.estimate.widened_steps import widened_coverage_sentence
from fieldplan.lab.words import listed
from fieldplan.plan.model import Plan
from fieldplan.stats.distributions import t_share
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.shape import t_coverage
from fieldplan.stats.summary import skewness_ceiling

SHOWN = (2.0, 4.0)
"""Skewness of populations for which the expected coverage is shown beside that of the sample."""

LARGE = 10
"""A list of so many units for each result is taken for a large population (house rule)."""


def equivalent_sample(means: Means) -> tuple[int, float]:
    """Give the single sample whose mean leans as much as the stratified one.

    Parameters
    ----------
    means : Means

    Returns
    -------
    n : int
        Degrees of freedom + 1, rounded; at least 2.
    skewness : float
        Of the estimated mean, times √n; for one stratum the sample skewness g1 itself.

    Notes
    -----
    Third cumulant of the mean over its variance to the power 1.5: Σ W³·m3/n² over
    (Σ W²·m2/n)^1.5, with moments of divisor n (Cochran 1977, Sampling Techniques, 3rd ed.,
    sec. 2.15 and 5.5, for the idea that the skewness of a mean shrinks with its sample). A
    stratum that borrows its spread adds variance and no lean.
    """
    third = second = 0.0
    for stratum, found in zip(means.values, means.half.strata, strict=True):
        off = stratum.values - stratum.values.mean()
        third += stratum.weight**3 * float(np.mean(off**3)) / stratum.values.size**2
        spread = found.sd**2 if found.variance_borrowed else float(np.mean(off**2))
        second += stratum.weight**2 * spread / stratum.values.size
    known = means.half.degrees_of_freedom
    n = means.half.n if math.isinf(known) else max(2, round(known + 1))
    if second <= 0:
        return n, 0.0
    return n, third / second**1.5 * math.sqrt(n)


def share_with_other_spread(means: Means, times: float) -> float:
    """Say how often the interval holds if what borrowed its spread has another one.

    Parameters
    ----------
    means : Means
    times : float
        True standard deviation of the strata that borrow, over the one they borrowed.

    Returns
    -------
    float
        The stated confidence at ``times`` = 1.

    Notes
    -----
    Student's statistic grows with the root of true over estimated variance of the mean; the
    shape of its distribution is taken to stay (normal results; derived here, no published source).

    """
    rules, mean = means.rules, means.half
    q = t_quantile(mean.degrees_of_freedom, confidence=rules.confidence, kind=rules.interval)
    lent = sum(s.weight**2 * s.variance_of_mean for s in mean.strata if s.variance_borrowed)
    variance = mean.standard_error**2
    reach = q * math.sqrt(variance / (variance + (times**2 - 1) * lent))
    share = t_share(reach, mean.degrees_of_freedom)
    return 2 * share - 1 if rules.interval == "two-sided" else share


def coverage_sentence(plan: Plan, means: Means) -> str:
    """Say what the interval delivers, and that few results cannot show their skewness.

    Parameters
    ----------
    plan : Plan
    means : Means

    Returns
    -------
    str
    """
    if means.modelled is not None:
        return held_sentence(means)
    if means.half.standard_error == 0:
        return (
            "The standard error is 0: no error comes from choosing places, or all results of a "
            "stratum are the same. Coverage cannot be judged."
        )
    if is_census(plan):
        return (
            "Nobody drew which units are missing, so no share of campaigns can be given in which "
            "such an interval holds the true mean."
        )
    if is_widened(means.rules):
        return widened_coverage_sentence(means)
    parts = (_by_skewness(means), _short_list(means), _borrowed(means), _promise(plan, means))
    return " ".join(part for part in parts if part)


def _share(means: Means, n: int, skewness: float) -> str:
    rules = means.rules
    held = t_coverage(n, skewness, confidence=rules.confidence, kind=rules.interval)
    return f"{100 * held:.0f} %"


def _by_skewness(means: Means) -> str:
    """Set the share at the skewness of the results beside those at larger ones."""
    rules = means.rules
    if rules.confidence > 0.99:
        return (
            f"How often a t interval of {100 * rules.confidence:g} % really holds the mean is not "
            "tabled here; few or skewed results make it less."
        )
    n, skewness = equivalent_sample(means)
    listed_units = any(values.population is not None for values in means.values)
    several = f" (strata taken together as {n} results)" if len(means.values) > 1 else ""
    what = "a large population" if listed_units else "the population"
    larger = (
        ""
        if any(map(_is_short, means.values))
        else f"; at a skewness of {SHOWN[0]:g} in {_share(means, n, SHOWN[0])}, of "
        f"{SHOWN[1]:g} in {_share(means, n, SHOWN[1])}"
    )
    return (
        f"This t {'interval' if rules.interval == 'two-sided' else 'limit'} claims "
        f"{100 * rules.confidence:g} %. If {what} were as skewed as these results, "
        f"{significant(skewness, 2)}{several}, it would hold the true mean in about "
        f"{_share(means, n, skewness)} of campaigns{larger}. {n} results can show no skewness "
        f"above {skewness_ceiling(n):.1f} and usually show less than there is."
    )


def _is_short(values: StratumValues) -> bool:
    """Whether a stratum is a list of which much was measured, but not all."""
    n, population = values.values.size, values.population
    return population is not None and n < population < LARGE * n


def _short_list(means: Means) -> str:
    """Say what one unit far from all others does to the interval of a short list.

    Where all other units are alike, the interval shrinks to a point beside the true mean when that
    unit was not drawn. When it was, the mean is off by √(1 − n/N) standard errors, less than t at
    usual confidence. So it holds in n/N of campaigns; a limit on the other side is not harmed.
    """
    short = [v for v in means.values if _is_short(v)]
    if not short:
        return ""
    worst = min(short, key=lambda v: v.values.size / (v.population or 1))
    n, population = worst.values.size, worst.population or 1
    rules, where = means.rules, f" of {worst.stratum}" if len(means.values) > 1 else ""
    side = {"upper-limit": "above", "lower-limit": "below"}.get(rules.interval, "from")
    return (
        f"But this list is short: one unit{where} that lies far {side} all others had a chance of "
        f"{100 * (1 - n / population):.0f} % (1 − {n}/{population}) not to be drawn, and then the "
        "interval knows nothing of it. Where the other units are alike, it holds in no more than "
        f"{100 * n / population:.0f} % of campaigns, whatever it claims."
    )


def _borrowed(means: Means) -> str:
    """Say what the interval is worth where a borrowed spread is not the true one."""
    lone = [found.stratum for found in means.half.strata if found.variance_borrowed]
    if not lone:
        return ""
    shares = [
        f"{100 * share_with_other_spread(means, times):.0f} % if it is {words}"
        for times, words in ((0.5, "half"), (2.0, "twice"), (4.0, "four times"))
    ]
    return (
        f"All this holds only if the spread borrowed for {listed(lone)} is its true one; of "
        f"symmetric results the claim would come to about {listed(shares)} the borrowed one."
    )


def declared_skewness(text: str) -> float | None:
    """Read the skewness that a declared class ends at, where the text holds one number.

    Parameters
    ----------
    text : str
        ``promised_for`` of the campaign.

    Examples
    --------
    >>> declared_skewness("a mean of wells whose skewness is no larger than 1")
    1.0
    >>> declared_skewness("soils like those of 2019"), declared_skewness("")
    (None, None)
    """
    numbers = re.findall(r"(?<![\w.])\d+(?:\.\d+)?(?![\w%])", text)
    if "skewness" not in text.casefold() or len(numbers) != 1:
        return None
    return float(numbers[0])


def _promise(plan: Plan, means: Means) -> str:
    """Say what class the confidence was declared for, what t holds there, and what came."""
    recorded = plan.campaign.rules
    if not recorded.promised_for:
        return ""
    claim = f"{100 * recorded.confidence:g} %"
    said = f"The plan declares its {claim} for {recorded.promised_for.rstrip('. ')}"
    end = declared_skewness(recorded.promised_for)
    if end is None or recorded.confidence > 0.99:
        return f"{said}; whether this population belongs to that class, these results cannot prove."
    n, skewness = equivalent_sample(means)
    held = t_coverage(n, end, confidence=recorded.confidence, kind=recorded.interval)
    place = (
        f"The results' own skewness, {significant(skewness, 2)}, lies outside that class."
        if abs(skewness) > end
        else "The results' own skewness lies inside it, which does not prove that the "
        "population's does."
    )
    return (
        f"{said}; at a skewness of {end:g}, t from {n} results holds the true mean in about "
        f"{100 * held:.0f} %. {place}"
    )
