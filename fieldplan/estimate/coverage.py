"""How often an interval of this kind holds the true mean, at this n and skewness."""

import math

import numpy as np

from fieldplan.base.units import significant
from fieldplan.estimate.means import Means
from fieldplan.plan.model import Plan
from fieldplan.stats.shape import t_coverage
from fieldplan.stats.summary import skewness_ceiling

SHOWN = (2.0, 4.0)
"""Skewness of populations for which the expected coverage is shown beside that of the sample."""


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
    sec. 2.15 and 5.5, for the idea that the skewness of a mean shrinks with its sample).
    """
    third = second = 0.0
    for stratum in means.values:
        off = stratum.values - stratum.values.mean()
        third += stratum.weight**3 * float(np.mean(off**3)) / stratum.values.size**2
        second += stratum.weight**2 * float(np.mean(off**2)) / stratum.values.size
    known = means.half.degrees_of_freedom
    n = means.half.n if math.isinf(known) else max(2, round(known + 1))
    if second <= 0:
        return n, 0.0
    return n, third / second**1.5 * math.sqrt(n)


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
    if means.half.standard_error == 0:
        return (
            "The standard error is 0: no error comes from choosing places, or all results of a "
            "stratum are the same. Coverage cannot be judged."
        )
    confidence, kind = means.rules.confidence, means.rules.interval
    promised = f" The plan promises it for {plan.campaign.rules.promised_for}."
    promised = promised if plan.campaign.rules.promised_for else ""
    if confidence > 0.99:
        return (
            f"How often a t interval of {100 * confidence:g} % really holds the mean is not "
            f"tabled here; few or skewed results make it less.{promised}"
        )
    n, skewness = equivalent_sample(means)

    def share(lean: float) -> str:
        return f"{100 * t_coverage(n, lean, confidence=confidence, kind=kind):.0f} %"

    several = f" (strata taken together as {n} results)" if len(means.values) > 1 else ""
    return (
        f"This t {'interval' if kind == 'two-sided' else 'limit'} claims {100 * confidence:g} %. "
        f"If the population were as skewed as these results, {significant(skewness, 2)}{several}, "
        f"it would hold the true mean in about {share(skewness)} of campaigns; at a skewness of "
        f"{SHOWN[0]:g} in {share(SHOWN[0])}, of {SHOWN[1]:g} in {share(SHOWN[1])}. "
        f"{n} results can show no skewness above {skewness_ceiling(n):.1f} and usually show less "
        f"than there is.{promised}"
    )
