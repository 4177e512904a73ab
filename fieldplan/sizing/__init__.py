"""How many locations, with the working shown."""

from dataclasses import replace
from typing import TYPE_CHECKING

from fieldplan.sizing.answer import answer
from fieldplan.sizing.campaign_question import question_of
from fieldplan.sizing.model import Size
from fieldplan.sizing.question import Part, Question

if TYPE_CHECKING:
    from fieldplan.campaign.model import Campaign
    from fieldplan.frame.model import Frame
    from fieldplan.lab.model import Spread

__all__ = ["Part", "Question", "Size", "answer", "question_of", "size"]


def size(campaign: "Campaign", spread: "Spread", frame: "Frame") -> Size:
    """Say how many locations the deciding objective needs.

    Parameters
    ----------
    campaign : Campaign
    spread : Spread
        One sigma for every stratum of the frame.
    frame : Frame

    Returns
    -------
    Size
        Counts by stratum in the frame's order, with working, sentences and conditions; ``others``
        says what the same n buys for objectives and analytes that do not decide it.

    Raises
    ------
    CampaignError
        The objective lacks a mean or prices.
    DesignError
        The target, budget or typed number of locations cannot be had.

    Examples
    --------
    >>> from tests.factories import make_campaign, make_frame, make_spread
    >>> result = size(make_campaign(), make_spread(), make_frame())
    >>> result.needed, result.planned, [entry.needed for entry in result.strata]
    (9, 11, [4, 5])
    """
    from fieldplan.sizing.others import other_precisions

    asked = question_of(campaign, spread, frame)
    found = answer(asked)
    others = other_precisions(campaign, spread, frame, asked=asked, size=found)
    return replace(found, others=others)
