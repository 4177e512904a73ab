"""What the chosen n buys for objectives that ask another question than the mean."""

from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.sizing.asked import bought, count
from fieldplan.sizing.asking import asked_of
from fieldplan.sizing.model import OtherPrecision, Size

if TYPE_CHECKING:
    from fieldplan.campaign.model import Campaign, Objective
    from fieldplan.frame.model import Frame
    from fieldplan.lab.model import Spread


def other_question(
    campaign: "Campaign",
    spread: "Spread",
    frame: "Frame",
    *,
    objective: "Objective",
    size: Size,
) -> OtherPrecision:
    """Say what the counts of ``size`` buy for a question that does not decide them.

    Parameters
    ----------
    campaign : Campaign
    spread : Spread
    frame : Frame
    objective : Objective
        Asks another question than the mean.
    size : Size

    Returns
    -------
    OtherPrecision
        ``meets`` compares the counts with what the question would take alone; None where a sigma
        is missing.
    """
    analyte = campaign.analyte_called(objective.analyte or campaign.deciding_analyte.id)
    try:
        asked = asked_of(campaign, spread, frame, objective=objective)
        answered = count(asked)
        found = bought(asked, objective.question, [entry.needed for entry in size.strata])
    except DesignError as fault:
        sentence = f"{analyte.label}, {objective.question}: {fault}"
        return OtherPrecision(
            analyte.id, analyte.unit, sentence=sentence, question=objective.question
        )
    alone = sum(answered.needed)
    kept = alone <= size.needed
    words = f"{analyte.label}: {found.answer}"
    if not kept:
        words += f" Its own target ({answered.target}) would take {alone} results."
    return OtherPrecision(
        analyte.id,
        analyte.unit,
        target=answered.target,
        meets=kept,
        enough_n=None if kept else alone,
        sentence=words,
        question=objective.question,
    )
