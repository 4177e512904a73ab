"""Results shared between strata in one way, priced along their own row."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from fieldplan.base.errors import DesignError
from fieldplan.sizing.counting import affordable_counts, plain_counts, planned_counts, total_cost
from fieldplan.sizing.frontier import POINTS, PricedDesign, Wanted, levels
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.sizing.words import counted, listed
from fieldplan.stats.allocation import share_total, unrounded_total


@dataclass(frozen=True)
class Shared:
    """Results shared between strata in one way, or drawn from the whole without strata."""

    question: Question
    label: str

    def priced(self, counts: Sequence[int]) -> PricedDesign:
        """Price given results by stratum."""
        question, precision = self.question, Precision(self.question)
        planned = planned_counts(question, counts)
        words = counted(sum(counts), "result")
        if 1 < len(question.parts) <= 4:
            pairs = zip(counts, question.parts, strict=True)
            words += ": " + listed([f"{n} in {part.name}" for n, part in pairs])
        prices = question.prices
        return PricedDesign(
            self.label,
            words,
            results=sum(counts),
            locations=sum(planned),
            standard_error=precision.standard_error(counts),
            half_width=precision.half_width(counts),
            cost=total_cost(question, planned) or 0.0,
            crew_days=prices.crew_days(sum(planned) + question.targeted) if prices else 0,
        )

    def cheapest(self, wanted: Wanted) -> PricedDesign | None:
        """Give the fewest results that reach a precision."""
        asked = replace(self.question, target=wanted.measure, value=wanted.value)
        try:
            return self.priced(plain_counts(asked))
        except DesignError:
            return None

    def most_precise(self, budget: float) -> PricedDesign | None:
        """Give the most results that a budget buys."""
        asked = replace(self.question, target="budget", value=budget)
        try:
            return self.priced(affordable_counts(asked))
        except DesignError:
            return None

    def row(self, wanted: Wanted, points: int = POINTS) -> list[PricedDesign]:
        """Trace totals of results, whole numbers, each once."""
        strata, allocation = self.question.strata, self.question.allocation
        least, most = sum(strata.floors), strata.most
        totals = set()
        for level in levels(wanted, points=points):
            total = unrounded_total(strata, level.variance(math.inf), allocation=allocation)
            totals.add(min(max(math.ceil(min(total, most)), least), most))
        return [
            self.priced(share_total(strata, total, allocation=allocation))
            for total in sorted(totals)
        ]
