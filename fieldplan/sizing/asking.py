"""From campaign, frame and spread to all that a question may look at."""

from dataclasses import replace
from typing import TYPE_CHECKING

from fieldplan.campaign.model import Objective
from fieldplan.campaign.questions import WITHOUT_SIGMA
from fieldplan.lab.model import StratumSpread
from fieldplan.sizing.asked.model import Asked, entries_of
from fieldplan.sizing.campaign_question import ask, expected_mean, parts_of, question_of
from fieldplan.sizing.visits import ABOUT_MEANS

if TYPE_CHECKING:
    from fieldplan.campaign.model import Campaign
    from fieldplan.frame.model import Frame
    from fieldplan.lab.model import Spread

NO_TARGET = Objective(question="mean", standard_error=1.0, assurance="plain")
"""Stands where a question has no precision target; its own target is never read."""


def asked_of(
    campaign: "Campaign",
    spread: "Spread",
    frame: "Frame",
    *,
    objective: Objective | None = None,
) -> Asked:
    """Gather what an objective may look at.

    Parameters
    ----------
    campaign : Campaign
    spread : Spread
        ``strata`` may be empty where the question needs no sigma.
    frame : Frame
    objective : Objective, optional
        The deciding one unless given.

    Returns
    -------
    Asked

    Raises
    ------
    CampaignError
        The objective lacks its target, mean or prices.
    DesignError
        A stratum has no sigma and the question needs one.
    """
    deciding = objective is None
    objective = objective or campaign.deciding_objective
    area = frame.population.net if frame.kind == "area" else None
    analyte = objective.analyte or campaign.deciding_analyte.id
    entries = entries_of(spread, analyte)
    known = bool(entries) or objective.question not in WITHOUT_SIGMA
    if objective.question == "mean" and deciding:
        question = question_of(campaign, spread, frame)
    else:
        asked = NO_TARGET.model_copy(
            update={"analyte": objective.analyte, "design": objective.design}
        )
        entries = entries if known else _no_sigma(analyte, frame)
        site = spread.site if analyte == spread.analyte else None
        mean = expected_mean(entries, frame, site=site)
        parts = parts_of(campaign, frame, entries, of_mean=objective.question in ABOUT_MEANS)
        question = ask(campaign, asked, parts=parts, mean=mean, targeted=len(frame.targeted))
        question = replace(question, assurance=None)
    return Asked(
        campaign, objective, question, frame, spread if known else None, area, sigma_known=known
    )


def _no_sigma(analyte: str, frame: "Frame") -> tuple[StratumSpread, ...]:
    """Stand in for a spread that nobody knows; its sigma is never read."""
    return tuple(
        StratumSpread(analyte, stratum.name, 0.0, None, None, "not known")
        for stratum in frame.strata
    )
