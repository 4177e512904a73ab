"""The chance of hitting a patch that an objective declares beside a question of its own."""

from dataclasses import replace

from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.model import Finding, Size


def finding(asked: Asked, size: Size) -> Finding | None:
    """Say with what chance the chosen n hits the patch of an objective that does not decide n.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None where no other objective has a table for a patch beside its question, or where the
        deciding one has such a table: that is said as its own question.
    """
    if asked.objective.smallest_patch is not None:
        return None
    from fieldplan.sizing.asked import bought

    counts = tuple(entry.needed for entry in size.strata)
    for objective in asked.campaign.objective:
        if objective.smallest_patch is not None and objective.question != "smallest-patch":
            return bought(replace(asked, objective=objective), "smallest-patch", counts)
    return None
