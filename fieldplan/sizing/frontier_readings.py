"""Field readings beside results, priced along their own row."""

import math
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.sizing.field_readings import Reading
from fieldplan.sizing.frontier import PricedDesign, Wanted, levels
from fieldplan.sizing.question import Question
from fieldplan.sizing.words import counted
from fieldplan.stats.two_phase_split import Split, cheapest_split, most_precise_split

ROW = 25
"""Designs traced, each the cheapest of its precision."""


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

    def row(self, wanted: Wanted, points: int = ROW) -> list[PricedDesign]:
        """Trace the cheapest designs at precisions on either side."""
        found = (self.cheapest(level) for level in levels(wanted, points=points))
        return list({design.words: design for design in found if design}.values())
