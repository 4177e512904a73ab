"""How many locations, with the working shown."""

from collections.abc import Collection
from dataclasses import replace
from typing import TYPE_CHECKING, Literal

from fieldplan.sizing.answer import answer
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.campaign_question import question_of
from fieldplan.sizing.model import Size
from fieldplan.sizing.question import Part, Question

if TYPE_CHECKING:
    from fieldplan.campaign.model import Campaign
    from fieldplan.frame.model import Frame
    from fieldplan.lab.model import Spread

__all__ = ["Asked", "Part", "Question", "Size", "answer", "question_of", "size", "size_asked"]


def size(
    campaign: "Campaign",
    spread: "Spread",
    frame: "Frame",
    *,
    beside: Literal["quick", "all"] | Collection[str] = "quick",
) -> Size:
    """Say how many locations the deciding objective needs.

    Parameters
    ----------
    campaign : Campaign
    spread : Spread
        One sigma for every stratum of the frame; no stratum where the question needs none.
    frame : Frame
    beside : str or collection of str
        Which findings stand beside the number: the ``quick`` ones, ``all``, or topics by name.

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
    from fieldplan.sizing.asking import asked_of
    from fieldplan.sizing.composites import composited
    from fieldplan.sizing.others import other_precisions

    campaign, spread = composited(campaign, spread, put=lambda c, s: question_of(c, s, frame))
    asked = asked_of(campaign, spread, frame)
    found = size_asked(asked, beside=beside)
    others = other_precisions(campaign, spread, frame, asked=asked.question, size=found)
    return replace(found, others=others)


def size_asked(
    asked: Asked, *, beside: Literal["quick", "all"] | Collection[str] = "quick"
) -> Size:
    """Say how many locations one objective needs, and what stands beside the number.

    Parameters
    ----------
    asked : Asked
    beside : str or collection of str
        As in ``size``.

    Returns
    -------
    Size
    """
    from fieldplan.sizing.asked import count
    from fieldplan.sizing.asked.building import size_of
    from fieldplan.sizing.beside import findings_beside

    if asked.objective.question == "mean":
        found = answer(asked.question)
    else:
        found = size_of(asked, count(asked))
    more = findings_beside(asked, found, wanted=beside)
    increments = asked.question.increments
    return replace(
        found,
        findings=(*found.findings, *more),
        increments=increments,
        replicates=found.needed if increments > 1 else 1,
    )
