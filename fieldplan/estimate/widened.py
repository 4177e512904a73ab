"""The interval for skewed results that the rules fix: its ends, and what contradicts its class."""

from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.base.units import significant
from fieldplan.campaign.interval_checks import SUITED, WIDENED
from fieldplan.campaign.model import Rules
from fieldplan.design.model import MeanEstimate, StratumValues
from fieldplan.lab.words import counted
from fieldplan.plan.model import Plan
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.skew_interval import (
    FEWEST,
    MOST_VARIATION,
    PopulationClass,
    sample_shape,
    skew_factors,
)

if TYPE_CHECKING:
    from fieldplan.estimate.means import Means

CLASS_WORDS: dict[PopulationClass, str] = {
    "cv-up-to-1": "no zeros and a standard deviation no larger than the mean",
    "cv-up-to-2": "at most half zeros and a standard deviation up to twice the mean",
}
"""Both are without a separate high part that the results may miss."""

FAR_ABOVE = 1.25
"""A sample's coefficient of variation so many times the class's end is said to contradict it
(house rule: samples of a population at the end scatter about it)."""

LARGE = 10
"""A list of so many units for each result is taken for a large population (house rule)."""


def is_widened(rules: Rules) -> bool:
    """Tell whether the rules fix the skew-widened interval."""
    return rules.mean_interval == WIDENED


def class_of(rules: Rules) -> PopulationClass:
    """Give the class that the rules declare.

    Raises
    ------
    DesignError
        They declare none.
    """
    if rules.promised_class is None:
        message = (
            f"mean_interval = {WIDENED} needs promised_class = cv-up-to-1 or cv-up-to-2: no "
            "interval keeps its confidence for every population."
        )
        raise DesignError(message)
    return rules.promised_class


def refuse_unsuited(plan: Plan, rules: Rules) -> None:
    """Refuse the skew-widened interval for designs and confidences that were not simulated.

    Parameters
    ----------
    plan : Plan
    rules : Rules

    Raises
    ------
    DesignError
        The layout is none of random places of one population, or the confidence lies outside
        0.90 to 0.99.
    """
    if not is_widened(rules):
        return
    class_of(rules)
    layout, strata = plan.campaign.design[0].layout, len(plan.frame.strata)
    if layout not in SUITED or strata > 1:
        what = f"{strata} strata" if strata > 1 else f"layout {layout}"
        message = (
            f"mean_interval = {WIDENED} was simulated for independent results of one population; "
            f"for {what} there is no evidence. Use student-t."
        )
        raise DesignError(message)
    if not 0.90 <= rules.confidence <= 0.99:
        message = (
            f"mean_interval = {WIDENED} was simulated for a confidence from 0.90 to 0.99, and "
            f"this one is {rules.confidence:g}. Use student-t."
        )
        raise DesignError(message)


def widened_ends(
    mean: MeanEstimate, values: StratumValues, rules: Rules, kind: IntervalKind
) -> tuple[float | None, float | None]:
    """Set the ends about a mean.

    Parameters
    ----------
    mean : MeanEstimate
    values : StratumValues
        The results behind it, non-detects at the same bound.
    rules : Rules
    kind : str

    Returns
    -------
    tuple of (float or None)
        Low and high end; None where it is open. The low end is never below 0.

    Raises
    ------
    DesignError
        Fewer than 3 results, one below 0, or a list of fewer than ten units a result.
    """
    below, above = reaches(values, rules, kind)
    error = mean.standard_error
    low = None if kind == "upper-limit" else max(0.0, mean.mean + below * error)
    high = None if kind == "lower-limit" else mean.mean + above * error
    return low, high


def reaches(values: StratumValues, rules: Rules, kind: IntervalKind) -> tuple[float, float]:
    """Give how many standard errors below and above the mean the ends lie.

    Parameters
    ----------
    values : StratumValues
    rules : Rules
    kind : str

    Returns
    -------
    below, above : float
        The lower one is negative.

    Raises
    ------
    DesignError
        Fewer than 3 results, one below 0, or a list of fewer than ten units a result.
    """
    n, population = values.values.size, values.population
    if population is not None and n < population < LARGE * n:
        message = (
            f"mean_interval = {WIDENED} was simulated for large populations, and {n} of "
            f"{population} units is more than a tenth of the list. Use student-t."
        )
        raise DesignError(message)
    skewness, variation = sample_shape(values.values)
    below, above = skew_factors(
        n, skewness, variation, population_class=class_of(rules), confidence=rules.confidence,
        kind=kind,
    )  # fmt: skip
    return float(below), float(above)


def recorded_reach(plan: Plan, means: "Means") -> float | None:
    """Give the half-width of the recorded interval, or the distance of its limit.

    Parameters
    ----------
    plan : Plan
    means : Means

    Returns
    -------
    float or None
        None where Student's t is recorded, or the recorded rules give no answer. Of two ends half
        the distance between them, the low one counted below 0 where it falls there.
    """
    rules = plan.campaign.rules
    if not is_widened(rules):
        return None
    try:
        refuse_unsuited(plan, rules)
        below, above = reaches(means.values[0], rules, rules.interval)
    except DesignError:
        return None
    error = means.half.standard_error
    of_limit = {"upper-limit": above, "lower-limit": -below}
    return of_limit.get(rules.interval, (above - below) / 2) * error


def widened_sentence(means: "Means") -> str:
    """Say what the interval is and its class, then what speaks against the class.

    Parameters
    ----------
    means : Means

    Returns
    -------
    str
        Empty for Student's t.
    """
    if not is_widened(means.rules):
        return ""
    name = class_of(means.rules)
    what = "interval" if means.rules.interval == "two-sided" else "limit"
    line = (
        f"The {what} is set wide for skewed results ({WIDENED}, promised for {name}: "
        f"{CLASS_WORDS[name]})."
    )
    against = contradictions(means)
    return f"{line} {against}" if against else line


def contradictions(means: "Means") -> str:
    """Say which results the class does not have; empty where none speaks against it.

    Parameters
    ----------
    means : Means
        By a skew-widened rule.

    Returns
    -------
    str
        Opens ``NOT KEPT`` where there are too few results.
    """
    name, values = class_of(means.rules), means.values[0].values
    n, end = int(values.size), MOST_VARIATION[name]
    lines = []
    if n < FEWEST[name]:
        lines.append(
            f"NOT KEPT: the promise for {name} needs {FEWEST[name]} results, and there are {n}."
        )
    variation = sample_shape(values)[1]
    zeros = int((means.values_low[0].values == 0).sum())
    at_zero = int((values == 0).sum())
    found = []
    if variation > FAR_ABOVE * end:
        found.append(
            f"the standard deviation is {significant(variation, 2)} times the mean, and the class "
            f"ends at {end:g}"
        )
    if name == "cv-up-to-1" and at_zero:
        found.append(f"{at_zero} of {n} results at 0, and the class has no zeros")
    elif name == "cv-up-to-1" and zeros:
        found.append(f"{counted(zeros, 'value')} may be 0, since not detected")
    elif zeros > n / 2:
        found.append(f"{zeros} of {n} may be 0, and the class has at most half zeros")
    if found:
        lines.append(
            f"What came lies outside that class: {'; '.join(found)}. The promise then has no "
            "evidence behind it."
        )
    return " ".join(lines)
