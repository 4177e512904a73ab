"""What the estimate says, set as rows and tables."""

from math import isinf

from fieldplan.base.document import Block, Facts, Heading, Paragraph, Table
from fieldplan.estimate.model import Change, Estimate, Interval
from fieldplan.packet.sheets.amounts import decimals_for, fixed, percent, rounded
from fieldplan.packet.sheets.plan_words import mean_of
from fieldplan.plan.model import Plan


def interval_words(interval: Interval, unit: str, decimals: int) -> str:
    """Write an interval or a limit.

    Examples
    --------
    >>> interval_words(Interval("two-sided", 0.95, 4.206, 6.769), "µg/L", 2)
    '4.21 to 6.77 µg/L'
    >>> interval_words(Interval("upper-limit", 0.95, None, 6.5), "µg/L", 1)
    'at most 6.5 µg/L'
    """
    if interval.low is None and interval.high is None:
        return "none"
    if interval.low is None:
        return f"at most {fixed(interval.high or 0.0, decimals)} {unit}"
    if interval.high is None:
        return f"at least {fixed(interval.low, decimals)} {unit}"
    return f"{fixed(interval.low, decimals)} to {fixed(interval.high, decimals)} {unit}"


def interval_name(interval: Interval) -> str:
    """Name the kind of interval with its confidence.

    Examples
    --------
    >>> interval_name(Interval("two-sided", 0.95, 1.0, 2.0))
    '95 % interval, two-sided'
    """
    share = percent(interval.confidence)
    if interval.kind == "two-sided":
        return f"{share} interval, two-sided"
    return f"{share} {interval.kind.replace('-', ' ')}, one-sided"


def degrees_words(degrees_of_freedom: float) -> str:
    """Write degrees of freedom.

    Examples
    --------
    >>> degrees_words(7.0), degrees_words(11.234)
    ('7', '11.2')
    """
    if isinf(degrees_of_freedom):
        return "none needed: every unit was sampled"
    text = f"{degrees_of_freedom:.1f}"
    return text.removesuffix(".0")


def result_rows(plan: Plan, estimate: Estimate) -> tuple[tuple[str, str], ...]:
    """Set mean, standard error, degrees of freedom and the declared interval."""
    decimals = decimals_for(estimate.achieved_standard_error)
    unit = estimate.unit
    what = mean_of(plan.campaign)
    return (
        (what[0].upper() + what[1:], f"{fixed(estimate.mean.mean, decimals)} {unit}"),
        (interval_name(estimate.interval), interval_words(estimate.interval, unit, decimals)),
        ("Standard error", f"{fixed(estimate.mean.standard_error, decimals)} {unit}"),
        ("Results in the mean", str(estimate.mean.n)),
        ("Degrees of freedom", degrees_words(estimate.mean.degrees_of_freedom)),
    )


def bracket_table(estimate: Estimate) -> Table:
    """Set the whole answer with non-detects at 0, half and the limit."""
    bracket = estimate.bracket
    if bracket is None:
        message = f"the estimate of {estimate.analyte} has no non-detects, so it has no bracket"
        raise ValueError(message)
    decimals = decimals_for(estimate.achieved_standard_error)
    rows = (
        ("0", bracket.mean_low, bracket.interval_low),
        ("half their limit", bracket.mean_half, bracket.interval_half),
        ("their limit", bracket.mean_high, bracket.interval_high),
    )
    return Table(
        ("Non-detects set to", "Mean", interval_name(bracket.interval_half)),
        tuple(
            (
                name,
                f"{fixed(mean, decimals)} {estimate.unit}",
                interval_words(interval, estimate.unit, decimals),
            )
            for name, mean, interval in rows
        ),
        caption="How far non-detects can move the answer",
        numeric=("Mean",),
    )


def promise_table(estimate: Estimate) -> Table:
    """Set the planned beside the achieved standard error."""
    unit = estimate.unit
    return Table(
        ("", "Planned", "Achieved"),
        (
            (
                f"Standard error ({unit})",
                rounded(estimate.planned_standard_error),
                rounded(estimate.achieved_standard_error),
            ),
        ),
        numeric=("Planned", "Achieved"),
    )


def stratum_table(plan: Plan, estimate: Estimate) -> Table:
    """Set n, mean, s and weight of every stratum beside what was planned."""
    unit = estimate.unit
    needed = {entry.stratum: entry for entry in plan.size.strata}
    columns = (
        "Stratum",
        "Weight",
        "Planned",
        "Results",
        f"Mean ({unit})",
        f"Standard deviation ({unit})",
        "Expected",
    )
    rows = [
        (
            entry.stratum,
            f"{entry.weight:.3f}",
            str(needed[entry.stratum].planned) if entry.stratum in needed else "–",
            str(entry.n),
            rounded(entry.mean),
            rounded(entry.sd) + (" borrowed" if entry.variance_borrowed else ""),
            rounded(needed[entry.stratum].sigma) if entry.stratum in needed else "–",
        )
        for entry in estimate.mean.strata
    ]
    return Table(
        columns,
        tuple(rows),
        caption="Planned counts locations; expected is the standard deviation used for planning",
        numeric=columns[1:],
    )


def change_blocks(estimate: Estimate) -> list[Block]:
    """Set every change made after results with both answers, or say that there was none."""
    if not estimate.changes:
        return [Paragraph("None. Every rule is the one recorded before results.")]
    blocks: list[Block] = []
    for change in estimate.changes:
        blocks += one_change(estimate, change)
    return blocks


def one_change(estimate: Estimate, change: Change) -> list[Block]:
    """Set one change."""
    decimals = decimals_for(estimate.achieved_standard_error)
    unit = estimate.unit
    recorded = interval_words(change.interval_recorded, unit, decimals)
    used = interval_words(estimate.interval, unit, decimals)
    return [
        Heading(f"CHANGED AFTER RESULTS: {change.rule}", level=2),
        Facts(
            (
                ("Recorded before results", change.recorded),
                ("Used instead", change.used),
                (
                    "Answer by the recorded rule",
                    f"mean {fixed(change.mean_recorded, decimals)} {unit}, "
                    f"{interval_name(change.interval_recorded)}: {recorded}",
                ),
                (
                    "Answer as changed",
                    f"mean {fixed(estimate.mean.mean, decimals)} {unit}, "
                    f"{interval_name(estimate.interval)}: {used}",
                ),
            )
        ),
    ]
