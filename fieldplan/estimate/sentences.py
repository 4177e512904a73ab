"""The answer in words, most important first."""

from collections.abc import Sequence

from fieldplan.base.units import significant
from fieldplan.estimate.means import Means
from fieldplan.estimate.model import Change, Interval
from fieldplan.estimate.non_detect_words import bounds_words, method_sentence
from fieldplan.estimate.widened import widened_sentence
from fieldplan.plan.model import Plan


def interval_in_words(interval: Interval, unit: str) -> str:
    """Write an interval or limit with its confidence.

    Parameters
    ----------
    interval : Interval
    unit : str

    Examples
    --------
    >>> interval_in_words(Interval("two-sided", 0.95, 4.2142, 6.7608), "mg/L")
    '95 % interval 4.21 to 6.76 mg/L'
    """
    share = f"{100 * interval.confidence:g} %"
    if interval.low is None:
        return f"{share} upper limit {significant(interval.high or 0.0)} {unit}"
    if interval.high is None:
        return f"{share} lower limit {significant(interval.low)} {unit}"
    return f"{share} interval {significant(interval.low)} to {significant(interval.high)} {unit}"


def where(plan: Plan) -> str:
    """Name the site as the campaign does.

    Parameters
    ----------
    plan : Plan
    """
    return plan.campaign.plan.site or plan.campaign.plan.title


def analyte_name(plan: Plan, name: str) -> str:
    """Name an analyte as its author typed it.

    Parameters
    ----------
    plan : Plan
    name : str
        Its id.

    Examples
    --------
    >>> from tests.factories import make_plan
    >>> analyte_name(make_plan(), "lead")
    'Lead'
    """
    return plan.campaign.analyte_called(name).label


def answer_sentences(
    plan: Plan,
    means: Means,
    changes: Sequence[Change],
    *,
    level: str,
    population: str,
    rejected: str = "",
    standing: str = "",
) -> tuple[str, ...]:
    """Say the answer, then what bounds it.

    Parameters
    ----------
    plan : Plan
    means : Means
    changes : sequence of Change
    level, population, rejected, standing : str
        Sentences made elsewhere; empty ones are left out.

    Returns
    -------
    tuple of str
    """
    unit = plan.campaign.analyte_called(means.analyte).unit
    mean = means.reported
    error, most = mean.standard_error, means.upper_bound
    answer = (
        f"The mean of {analyte_name(plan, means.analyte)} over {where(plan)} is "
        f"{'at most ' if most else ''}{significant(mean.mean)} {unit}, "
        f"{interval_in_words(means.interval, unit)} "
        f"({mean.n} results, standard error {significant(error)} {unit})."
    )
    lines = [
        answer,
        _changed_sentence(changes, unit),
        widened_sentence(means),
        standing,
        method_sentence(means),
        _bracket_sentence(means, unit),
        rejected,
        level,
        population,
        mean.caution,
        _below_zero(means.interval),
        _no_width(means),
    ]
    return tuple(line for line in lines if line)


def _changed_sentence(changes: Sequence[Change], unit: str) -> str:
    if not changes:
        return ""
    rules = "; ".join(f"{c.rule} was {c.recorded}, is {c.used}" for c in changes)
    before = recorded_answer(changes[0], unit)
    return f"CHANGED AFTER RESULTS: {rules}. By the recorded rules: {before}."


def recorded_answer(change: Change, unit: str) -> str:
    """Give the answer of the recorded rules beside a change, or why they give none.

    Parameters
    ----------
    change : Change
    unit : str

    Examples
    --------
    >>> recorded_answer(Change("confidence", "0.95", "0.9",
    ...                        Interval("upper-limit", 0.95, None, 6.5), 5.49), "mg/L")
    'mean 5.49 mg/L, 95 % upper limit 6.50 mg/L'
    """
    if change.mean_recorded is None or change.interval_recorded is None:
        return f"no mean, since {change.refusal_recorded.rstrip('.')}"
    mean = significant(change.mean_recorded)
    return f"mean {mean} {unit}, {interval_in_words(change.interval_recorded, unit)}"


def _bracket_sentence(means: Means, unit: str) -> str:
    bracket = means.bracket
    if bracket is None:
        return ""
    low = interval_in_words(bracket.interval_low, unit)
    high = interval_in_words(bracket.interval_high, unit)
    if not means.as_bounds:
        return bounds_words(means, unit, low=low, high=high)
    verb = "holds a non-detect" if means.censored == 1 else "hold non-detects"
    return (
        f"{means.censored} of {means.half.n} values {verb}, put at half the limit above. At 0 "
        f"the mean is {significant(bracket.mean_low)} {unit} ({low}), at the limit "
        f"{significant(bracket.mean_high)} {unit} ({high})."
    )


def _below_zero(interval: Interval) -> str:
    if interval.low is None or interval.low >= 0:
        return ""
    return (
        "The low end is below 0, which no concentration can be: the results are too few or too "
        "skewed for a t interval to fit well."
    )


def _no_width(means: Means) -> str:
    whole = all(s.population == s.values.size for s in means.values)
    if means.half.standard_error > 0 or whole:
        return ""
    return (
        "The results do not differ at all inside their strata, so the interval has no width. "
        "Check that they are measurements and not one value copied."
    )
