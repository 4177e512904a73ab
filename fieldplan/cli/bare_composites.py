"""Bare numbers for composites: parts of sigma beside the whole, and the question they make."""

from dataclasses import replace
from typing import TYPE_CHECKING

from fieldplan.cli.size_options import BadOption

if TYPE_CHECKING:
    from fieldplan.campaign.model import Campaign
    from fieldplan.lab.model import Spread
    from fieldplan.sizing.question import Question


def with_splits(campaign: "Campaign", spread: "Spread") -> "Spread":
    """Split every stratum's sigma by the parts that were typed beside it.

    Parameters
    ----------
    campaign : Campaign
    spread : Spread

    Returns
    -------
    Spread
        As it was where no part was typed.
    """
    from fieldplan.base.errors import LabError
    from fieldplan.lab.parts import gather_parts, split_of

    sigmas = campaign.sigma
    if all(sigma.part == "total" for sigma in sigmas):
        return spread
    parts = gather_parts([None] * len(sigmas), sigmas, spread.analyte)
    try:
        found = [split_of(parts, entry) for entry in spread.strata]
    except LabError as fault:
        raise BadOption(str(fault)) from fault
    return replace(spread, splits=tuple(split for split in found if split is not None))


def composites_of_numbers(
    question: "Question", campaign: "Campaign", spread: "Spread"
) -> "tuple[Question, Campaign, Spread]":
    """Let bare numbers speak of composites, where the design takes them.

    Parameters
    ----------
    question : Question
        Of single samples.
    campaign : Campaign
    spread : Spread
    """
    from fieldplan.sizing.composites import composited

    if not campaign.design[0].takes_composites:
        return question, campaign, spread

    def put(campaign: "Campaign", spread: "Spread") -> "Question":
        return _of_composites(question, campaign, spread)

    campaign, spread = composited(campaign, spread, put=put)
    return put(campaign, spread), campaign, spread


def _of_composites(question: "Question", campaign: "Campaign", spread: "Spread") -> "Question":
    design, cost = campaign.design[0], campaign.cost
    increments = int(design.increments)
    more = increments * cost.per_increment if cost is not None else 0.0
    parts = tuple(
        replace(
            part,
            sigma=entry.sigma,
            results=entry.results,
            source=entry.source,
            skewness=entry.skewness,
            excess_kurtosis=entry.excess_kurtosis,
            extra_cost=more,
        )
        for part, entry in zip(question.parts, spread.strata, strict=True)
    )
    return replace(
        question,
        parts=parts,
        locations=design.locations,
        increments=increments,
        one_place=design.increments_at == "one-place",
    )
