"""What is typed rightly and yet should stop a reader: printed by ``check`` and on the sheet."""

from collections.abc import Iterator
from datetime import date

from fieldplan.campaign.model import Campaign


def alarms(
    campaign: Campaign, *, made_on: date | None = None, issued_on: date | None = None
) -> tuple[str, ...]:
    """Return sentences on what the campaign cannot answer, or cannot claim, as it stands.

    Parameters
    ----------
    campaign : Campaign
        A campaign as read.
    made_on, issued_on : date or None
        When its plan is made and was issued.

    Returns
    -------
    tuple of str
        One sentence for each analyte whose reporting limit lies above its action level, then for
        dates after the first day of field work; empty when there is nothing to say.
    """
    late = _after_field_work(campaign, made_on=made_on, issued_on=issued_on)
    return (*_limits(campaign), *late)


def _after_field_work(
    campaign: Campaign, *, made_on: date | None, issued_on: date | None
) -> Iterator[str]:
    """Name what is dated after the first day of field work, when results may have been known."""
    first, fixed_on = campaign.plan.fieldwork_from, campaign.rules.fixed_on
    if first is None:
        return
    if fixed_on is not None and fixed_on > first:
        yield (
            f"The rules are stated to have been fixed on {fixed_on}, after the first day of field "
            f"work, {first}: results may have been known by then. Say so in the report, or correct "
            "the date that is wrong."
        )
    for on, what in ((made_on, "made"), (issued_on, "issued")):
        if on is not None and on > first:
            yield (
                f"A plan {what} on {on} comes after the first day of field work, {first}: it "
                "cannot show that anything in it was decided before. Correct the date of field "
                "work if it is wrong."
            )
            return


def _limits(campaign: Campaign) -> list[str]:
    """Name analytes whose reporting limit lies above their action level."""
    sentences = []
    for analyte in campaign.analyte:
        limit, level = analyte.reporting_limit, analyte.action_level
        if limit is not None and level is not None and limit > level:
            sentences.append(
                f"{analyte.name or analyte.id}: the reporting limit of {limit:g} {analyte.unit} "
                f"lies above the action level of {level:g} {analyte.unit}, so a result below the "
                "limit does not tell on which side of the level it lies. "
                "Ask the laboratory for a method with a lower limit."
            )
    return sentences
