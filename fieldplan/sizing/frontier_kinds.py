"""The kinds of design that a campaign's data allow, each priced along its own row."""

import math
from dataclasses import replace
from typing import Protocol

from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.field_readings import readings_of
from fieldplan.sizing.frontier import POINTS, PricedDesign, Wanted
from fieldplan.sizing.frontier_composites import composites_of, single_results
from fieldplan.sizing.frontier_readings import WithReadings
from fieldplan.sizing.frontier_shared import Shared
from fieldplan.sizing.frontier_spread import spread_out
from fieldplan.sizing.question import Part, Question
from fieldplan.stats.allocation import Allocation

ALLOCATIONS: dict[Allocation, str] = {
    "proportional": "strata, proportional",
    "neyman": "strata, Neyman",
    "cost-optimal": "strata, least cost",
}


class Kind(Protocol):
    """One kind of design."""

    @property
    def label(self) -> str:
        """What it is called in picture, table and sentence."""

    def cheapest(self, wanted: Wanted) -> PricedDesign | None:
        """Give the cheapest design of its kind that reaches a precision."""

    def most_precise(self, budget: float) -> PricedDesign | None:
        """Give the most precise design of its kind within a budget."""

    def row(self, wanted: Wanted, points: int = POINTS) -> list[PricedDesign]:
        """Trace designs on either side of a precision."""


def kinds_of(asked: Asked) -> list[Kind]:
    """List the kinds of design that the campaign's data allow.

    Parameters
    ----------
    asked : Asked
        With prices and known sigmas.

    Returns
    -------
    list of Kind
        The whole without strata (where every stratum's mean is known), the ways to share results
        between strata, places spread over the site (where the positions of a pilot predict what
        that saves), composites (where the parts of sigma are known), readings in the field. Empty
        where a campaign of composites does not know what single samples would do.
    """
    single = single_results(asked)
    if single is None:
        return []
    question = replace(single, locations=None, assurance=None, also=())
    kinds: list[Kind] = []
    if len(question.parts) == 1:
        kinds.append(Shared(question, "simple random"))
    else:
        whole = without_strata(question)
        if whole is not None:
            kinds.append(Shared(whole, "no strata"))
        alike = len(set(question.strata.costs)) < 2
        for allocation, label in ALLOCATIONS.items():
            if not (alike and allocation == "cost-optimal"):
                kinds.append(Shared(replace(question, allocation=allocation), label))
    more = (spread_out(asked, question), composites_of(asked, question))
    kinds += [kind for kind in more if kind is not None]
    alone = replace(asked, question=question)
    kinds += [WithReadings(question, reading) for reading in readings_of(alone)]
    return kinds


def without_strata(question: Question) -> Question | None:
    """Give the same population as one part; None where a stratum's mean is not known.

    Notes
    -----
    σ² = Σ W (σ_h² + (μ_h − μ)²): Cochran (1977), Sampling Techniques, 3rd ed., sec. 5.6, for
    large strata.

    Examples
    --------
    >>> low, high = Part("low", 0.5, 3.0, mean=10.0), Part("high", 0.5, 5.0, mean=24.0)
    >>> whole = without_strata(Question((low, high), "standard_error", 2.0))
    >>> round(whole.parts[0].sigma, 3)  # √(½ (9 + 49) + ½ (25 + 49))
    8.124
    """
    parts = question.parts
    means = [part.mean for part in parts if part.mean is not None]
    if len(means) < len(parts):
        return None
    mean = math.fsum(part.weight * m for part, m in zip(parts, means, strict=True))
    variance = math.fsum(
        part.weight * (part.sigma**2 + (m - mean) ** 2)
        for part, m in zip(parts, means, strict=True)
    )
    loss = math.fsum(part.weight * part.loss for part in parts)
    whole = Part("the whole", 1.0, math.sqrt(variance), None, question.total_population, loss)
    return replace(question, parts=(whole,))
