"""The interval against the action level: below, spanning or above, and who decides."""

from collections.abc import Sequence

from fieldplan.base.units import significant
from fieldplan.estimate.means import Means
from fieldplan.estimate.model import Bracket, Interval
from fieldplan.plan.model import Plan

OPEN_ENDS = {"upper-limit": "upper limit", "lower-limit": "lower limit"}


def envelope(interval: Interval, bracket: Bracket | None) -> Interval:
    """Give the interval that holds those at 0, half and the limit.

    Parameters
    ----------
    interval : Interval
        With non-detects at half.
    bracket : Bracket or None

    Returns
    -------
    Interval
        ``interval`` itself when there is no bracket.
    """
    if bracket is None:
        return interval
    all_three = (bracket.interval_low, bracket.interval_half, bracket.interval_high)
    lows = [entry.low for entry in all_three if entry.low is not None]
    highs = [entry.high for entry in all_three if entry.high is not None]
    return Interval(
        interval.kind,
        interval.confidence,
        min(lows) if lows else None,
        max(highs) if highs else None,
    )


def against_level(interval: Interval, bracket: Bracket | None, *, as_bounds: bool) -> Interval:
    """Give the interval that is set against a level.

    Parameters
    ----------
    interval : Interval
    bracket : Bracket or None
    as_bounds : bool
        Non-detects stand as bounds: the widest of the three; else the answer's own interval.

    Returns
    -------
    Interval
    """
    return envelope(interval, bracket) if as_bounds else interval


def side_of(level: float, interval: Interval) -> str:
    """Say where an interval or limit lies against a level.

    Parameters
    ----------
    level : float
    interval : Interval

    Returns
    -------
    str
        ``below``, ``above`` or ``spans``; touching counts as spanning.

    Examples
    --------
    >>> side_of(150.0, Interval("two-sided", 0.95, 29.0, 96.0))
    'below'
    >>> side_of(150.0, Interval("upper-limit", 0.95, None, 160.0))
    'spans'
    """
    if interval.high is not None and interval.high < level:
        return "below"
    if interval.low is not None and interval.low > level:
        return "above"
    return "spans"


def level_sentence(plan: Plan, means: Means) -> str:
    """Compare with the action level in words that decide nothing.

    Parameters
    ----------
    plan : Plan
    means : Means

    Returns
    -------
    str
        Empty without an action level.
    """
    analyte = plan.campaign.analyte_called(means.analyte)
    if analyte.action_level is None:
        return ""
    level, unit = analyte.action_level, analyte.unit
    outer = against_level(means.interval, means.bracket, as_bounds=means.as_bounds)
    source = f" ({analyte.action_level_source})" if analyte.action_level_source else ""
    which = f"{100 * outer.confidence:g} % {OPEN_ENDS.get(outer.kind, 'interval')}"
    if means.bracket is not None and means.as_bounds:
        which += ", widest over non-detects at 0, half and the limit,"
    decides = plan.campaign.plan.decides
    who = f"{decides} decides" if decides else "the plan names nobody who decides"
    return (
        f"The {which} {place_words(level, outer)} the action level of {significant(level)} "
        f"{unit}{source}{_dependence(level, means)}. It speaks of the mean over the population "
        f"described here, not of single places; {who} what follows."
    )


def place_words(level: float, outer: Interval) -> str:
    """Say where an interval or limit lies, as the verb of a sentence.

    Parameters
    ----------
    level : float
    outer : Interval

    Examples
    --------
    >>> place_words(150.0, Interval("upper-limit", 0.95, None, 160.0))
    'does not lie below'
    """
    side = side_of(level, outer)
    if outer.kind == "two-sided" or side != "spans":
        return "spans" if side == "spans" else f"lies {side}"
    return "does not lie below" if outer.kind == "upper-limit" else "does not lie above"


def _dependence(level: float, means: Means) -> str:
    """Say when the answer hangs on where the non-detects are put."""
    bracket = means.bracket
    if bracket is None:
        return ""
    all_three: Sequence[Interval] = (
        bracket.interval_low,
        bracket.interval_half,
        bracket.interval_high,
    )
    sides = {side_of(level, interval) for interval in all_three}
    if not means.as_bounds:
        own = side_of(level, means.interval)
        ends = (("at 0", bracket.interval_low), ("at their limit", bracket.interval_high))
        apart = [
            f"with non-detects {at} it {place_words(level, interval)}"
            for at, interval in ends
            if side_of(level, interval) != own
        ]
        return f"; {' and '.join(apart)} it" if apart else ""
    return "; where the non-detects are put decides this" if len(sides) > 1 else ""
