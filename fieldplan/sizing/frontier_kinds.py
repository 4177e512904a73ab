"""The kinds of design that a campaign's data allow, each priced along its own row."""

import math
from dataclasses import dataclass, replace
from typing import Protocol

from fieldplan.base.errors import DesignError
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.field_readings import Reading, readings_of
from fieldplan.sizing.frontier import POINTS, PricedDesign, Wanted, levels
from fieldplan.sizing.frontier_composites import composites_of, single_results
from fieldplan.sizing.frontier_shared import Shared
from fieldplan.sizing.question import Part, Question
from fieldplan.sizing.words import counted
from fieldplan.stats.allocation import Allocation
from fieldplan.stats.two_phase_split import Split, cheapest_split, most_precise_split

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


@dataclass(frozen=True)
class WithReadings:
    """Many field readings, and results from some of the same places."""

    question: Question
    reading: Reading

    @property
    def label(self) -> str:
        """The results, and what is read."""
        return f"results with {self.reading.name}"

    def priced(self, split: Split | None) -> PricedDesign | None:
        """Price given numbers of readings and results."""
        if split is None:
            return None
        question, reading = self.question, self.reading
        error = math.sqrt(max(0.0, reading.population.variance(*split)))
        known = split.results - reading.population.strata - 1
        wanted = Wanted("half_width", 0.0, question.confidence, question.interval)
        visits = reading.visits(split)
        return PricedDesign(
            self.label,
            f"{counted(split.results, 'result')} and {counted(split.readings, 'reading')}",
            results=split.results,
            locations=visits,
            standard_error=error,
            half_width=error * wanted.quantile(known),
            cost=reading.price(*split),
            crew_days=reading.prices.crew_days(visits + question.targeted),
            readings=split.readings,
        )

    def cheapest(self, wanted: Wanted) -> PricedDesign | None:
        """Give the cheapest readings and results that reach a precision."""
        lost = self.reading.population.strata + 1
        try:
            split = cheapest_split(
                self.reading.population,
                target=lambda results: wanted.variance(results - lost),
                price=self.reading.price,
            )
        except DesignError:
            return None
        return self.priced(split)

    def most_precise(self, budget: float) -> PricedDesign | None:
        """Give the most precise readings and results within a budget."""
        population, price = self.reading.population, self.reading.price
        return self.priced(most_precise_split(population, budget=budget, price=price))

    def row(self, wanted: Wanted, points: int = POINTS) -> list[PricedDesign]:
        """Trace the cheapest designs at precisions on either side."""
        found = (self.cheapest(level) for level in levels(wanted, points=points))
        return list({design.words: design for design in found if design}.values())


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
        between strata, composites (where the parts of sigma are known), readings in the field.
        A layout that spreads out is not credited. Empty where a campaign of composites does not
        know what single samples would do.
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
    composites = composites_of(asked, question)
    if composites is not None:
        kinds.append(composites)
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
