"""What is typed rightly and yet should stop a reader: printed by ``check`` and on the sheet."""

from fieldplan.campaign.model import Campaign


def alarms(campaign: Campaign) -> tuple[str, ...]:
    """Return sentences on what the campaign cannot answer as it stands.

    Parameters
    ----------
    campaign : Campaign
        A campaign as read.

    Returns
    -------
    tuple of str
        One sentence for each analyte whose reporting limit lies above its action level; empty
        when there is nothing to say.
    """
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
    return tuple(sentences)
