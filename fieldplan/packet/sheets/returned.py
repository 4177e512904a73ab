"""What came back: results by location, and what happened in the field."""

from fieldplan.base.document import Block, Bullets, Heading, Paragraph, Table
from fieldplan.estimate.population import is_census
from fieldplan.packet.sheets.amounts import counted, trimmed
from fieldplan.packet.sheets.plan_words import REASONS, several_strata
from fieldplan.plan.model import Plan
from fieldplan.returns.model import LocationResult, LostLocation, Returns

MOST_ROWS = 60
"""So many rows of no use are set; a report of many analytes may hold thousands."""


def match_sentence(returns: Returns) -> str:
    """Say how many samples came back."""
    line = f"{returns.matched} of {returns.planned_samples} planned samples were matched"
    if returns.extra:
        belong = "belongs" if returns.extra == 1 else "belong"
        return f"{line}; {counted(returns.extra, 'row')} of the file {belong} to none of them."
    return f"{line}; no row of the file was left over."


def location_table(plan: Plan, returns: Returns) -> Table:
    """Set every location: as reported, value, used or why not."""
    unit = plan.campaign.analyte_called(returns.analyte).unit
    kept = [True, several_strata(plan), True, True, True, True]
    columns = ("Location", "Stratum", "Class", "As reported", f"Value ({unit})", "In the mean")
    rows = [location_row(plan, result) for result in returns.results]
    return Table(
        tuple(c for c, keep in zip(columns, kept, strict=True) if keep),
        tuple(tuple(c for c, keep in zip(row, kept, strict=True) if keep) for row in rows),
        numeric=(f"Value ({unit})",),
    )


def location_row(plan: Plan, result: LocationResult) -> tuple[str, ...]:
    """Set one location; the units of a census were not drawn."""
    drawn = result.location_class != "random" or not is_census(plan)
    used = "Yes" if result.used else f"No. {result.why_not}".strip()
    if result.stands_in_for:
        used += f"; stands in for {result.stands_in_for}"
    return (
        result.location_id,
        result.stratum,
        result.location_class if drawn else "unit",
        ", ".join(cell.strip() for cell in result.as_reported),
        trimmed(result.half),
        used,
    )


def confirmed_blocks(plan: Plan, returns: Returns) -> list[Block]:
    """Set every id that a person, and no rule, matched with a sample of the plan."""
    if not returns.confirmed:
        return []
    places = {sample.sample_id: sample.location_id for sample in plan.samples.samples}
    rows = tuple(
        (str(entry.row), entry.as_written, entry.sample_id, places.get(entry.sample_id, "") or "–",
         entry.by or "nobody named")
        for entry in returns.confirmed
    )  # fmt: skip
    return [
        Heading("Ids that a person confirmed", level=2),
        Table(
            ("Row", "Id as written", "Taken for sample", "Location", "Confirmed by"),
            rows,
            caption="Answers in matches.csv; the file is among those hashed below",
        ),
    ]


def left_out_blocks(plan: Plan, returns: Returns) -> list[Block]:
    """Set every row of the laboratory's file that is in no mean, with its value and why."""
    if not returns.left_out:
        return []
    shown = returns.left_out[:MOST_ROWS]
    rest = len(returns.left_out) - len(shown)
    more = f"; {rest} more stand in the file" if rest else ""
    labels = {analyte.id: analyte.label for analyte in plan.campaign.analyte}
    rows = tuple(
        (str(entry.row), entry.written_id, labels.get(entry.analyte, entry.analyte),
         entry.as_reported, entry.why)
        for entry in shown
    )  # fmt: skip
    return [
        Heading("Rows of the laboratory's file that are in no mean", level=2),
        Table(
            ("Row", "Id as written", "Analyte", "As reported", "Why"),
            rows,
            caption=f"{counted(len(returns.left_out), 'row')}, values as the file has them{more}",
        ),
    ]


def field_blocks(plan: Plan, returns: Returns) -> list[Block]:
    """Set what was lost, what replaced it, what was moved, duplicates and other notes."""
    blocks: list[Block] = []
    if not returns.field_file:
        blocks.append(Paragraph("No field return was given: positions and losses are as planned."))
    blocks += [
        *lost_blocks(returns),
        *moved_blocks(plan, returns),
        *duplicate_blocks(plan, returns),
    ]
    if returns.notes:
        blocks += [Heading("Noted while matching", level=2), Bullets(returns.notes)]
    return blocks


def lost_blocks(returns: Returns) -> list[Block]:
    """Set the planned locations that have no result."""
    if not returns.lost:
        return [Paragraph("Every planned location has a result.")]
    return [
        Paragraph(f"{counted(len(returns.lost), 'planned location')} without a result:"),
        Table(
            ("Location", "Stratum", "Reason", "Replaced by"),
            tuple(lost_row(lost) for lost in returns.lost),
        ),
    ]


def lost_row(lost: LostLocation) -> tuple[str, ...]:
    """Set one lost location."""
    meaning = REASONS.get(lost.reason, "")
    reason = f"{lost.reason}: {meaning}" if meaning else lost.reason or "no reason given"
    return (lost.location_id, lost.stratum, reason, lost.replaced_by or "nothing")


def moved_blocks(plan: Plan, returns: Returns) -> list[Block]:
    """Set the locations sampled away from their planned position."""
    accuracy = plan.campaign.field.position_accuracy_m or 0.0
    moved = [r for r in returns.results if r.moved_m is not None and r.moved_m > accuracy]
    if not returns.field_file:
        return []
    if not moved:
        within = f" by more than the position accuracy of {accuracy:g} m" if accuracy else ""
        return [Paragraph(f"No location was moved{within}.")]
    return [
        Paragraph("Sampled away from the planned position:"),
        Table(
            ("Location", "Moved (m)", "Planned", "Actual"),
            tuple(moved_row(result) for result in moved),
            numeric=("Moved (m)",),
        ),
    ]


def moved_row(result: LocationResult) -> tuple[str, ...]:
    """Set one moved location."""
    actual = "–"
    if result.actual_latitude is not None and result.actual_longitude is not None:
        actual = f"{result.actual_latitude:.6f}, {result.actual_longitude:.6f}"
    planned = f"{result.latitude:.6f}, {result.longitude:.6f}"
    return (result.location_id, f"{result.moved_m or 0.0:.1f}", planned, actual)


def duplicate_blocks(plan: Plan, returns: Returns) -> list[Block]:
    """Set the duplicate pairs with their relative percent difference."""
    if not returns.duplicate_pairs:
        return []
    rows = tuple(
        (name, shown(first), shown(second), relative_difference(first, second))
        for name, first, second in returns.duplicate_pairs
    )
    numeric = ("First", "Second", "Relative difference")
    unit = plan.campaign.analyte_called(returns.analyte).unit
    return [
        Heading("Field duplicates", level=2),
        Table(("Location", *numeric), rows, caption=f"Results in {unit}", numeric=numeric),
    ]


def shown(value: float | None) -> str:
    """Write a result of a pair, or that it was a non-detect."""
    return "non-detect" if value is None else trimmed(value)


def relative_difference(first: float | None, second: float | None) -> str:
    """Write the difference of a pair relative to its mean, 100·|a − b| / ((a + b)/2).

    Examples
    --------
    >>> relative_difference(90.0, 110.0), relative_difference(None, 3.0)
    ('20 %', '–')
    """
    if first is None or second is None or first + second == 0:
        return "–"
    return f"{100 * abs(first - second) / ((first + second) / 2):.0f} %"
