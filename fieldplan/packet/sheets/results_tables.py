"""What the estimate says, set as rows and tables."""

from math import isinf

from fieldplan.base.document import Block, Facts, Heading, Paragraph, Table
from fieldplan.base.units import significant
from fieldplan.estimate.model import Change, Estimate
from fieldplan.estimate.planned import Planned, planned_for
from fieldplan.estimate.sentences import interval_in_words, recorded_answer
from fieldplan.lab.words import listed
from fieldplan.plan.model import Plan


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


AT_HALF = (
    "; means are by the method for non-detects, standard deviations found with them at half their "
    "limit"
)


def stratum_table(plan: Plan, estimate: Estimate) -> Table:
    """Set n, mean, s and weight of every stratum beside what was planned."""
    unit = estimate.unit
    needed = {entry.stratum: entry for entry in plan.size.strata}
    planned = planned_for(plan, estimate.analyte)
    sigmas = planned.sigmas
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
            significant(entry.mean),
            significant(entry.sd) + (" borrowed" if entry.variance_borrowed else ""),
            significant(sigmas[entry.stratum]) if entry.stratum in sigmas else "–",
        )
        for entry in estimate.mean.strata
    ]
    return Table(
        columns,
        tuple(rows),
        caption="Planned counts locations; expected is the standard deviation used for planning"
        + (_conventions(planned) if estimate.as_bounds else AT_HALF),
        numeric=columns[1:],
    )


def _conventions(planned: Planned) -> str:
    """Say that the two standard deviations put non-detects at different places, if they do."""
    if not planned.sigmas_at_half:
        return ""
    half = [f"{significant(s)} in {name}" for name, s in planned.sigmas_at_half.items()]
    return (
        ", the largest over non-detects at 0, at half and at their limit. Found is with them at "
        f"half, where the pilot had {listed(half)}"
    )


def change_blocks(estimate: Estimate) -> list[Block]:
    """Set every change made after results with both answers, or say that there was none."""
    if not estimate.changes:
        return [Paragraph("None. Every rule is the one on record.")]
    blocks: list[Block] = []
    for change in estimate.changes:
        blocks += one_change(estimate, change)
    return blocks


def one_change(estimate: Estimate, change: Change) -> list[Block]:
    """Set one change."""
    unit = estimate.unit
    new = significant(estimate.mean.mean)
    after = interval_in_words(estimate.interval, unit)
    return [
        Heading(f"CHANGED AFTER RESULTS: {change.rule}", level=2),
        Facts(
            (
                ("On record", change.recorded),
                ("Used instead", change.used),
                ("By the recorded rule", recorded_answer(change, unit)),
                ("As changed", f"mean {new} {unit}, {after}"),
            )
        ),
    ]
