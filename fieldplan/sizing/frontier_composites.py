"""Composites among the designs that are priced side by side, where the parts of sigma are known."""

from dataclasses import dataclass, replace

from fieldplan.lab.model import SplitSpread
from fieldplan.lab.parts import ANALYSIS, PLACES, SAMPLING, TOGETHER
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.composites import error_parts
from fieldplan.sizing.frontier import PricedDesign, Wanted, cheapest, most_precise
from fieldplan.sizing.frontier_shared import Shared
from fieldplan.sizing.question import Question
from fieldplan.sizing.words import counted
from fieldplan.stats.composites import composite_sigma

INCREMENTS = (2, 4, 7, 12, 20, 35, 60, 100)
"""Increments that are tried in each composite: near the best one cost is flat."""

ROW = 7
"""Designs traced for each number of increments."""


@dataclass(frozen=True)
class Composited:
    """Composites of so many increments, for every number tried; ``questions`` holds their sigma."""

    questions: tuple[Question, ...]
    label: str = "composites"

    def _named(self, question: Question, design: PricedDesign) -> PricedDesign:
        """Say composites in place of results, and how many places are visited."""
        each = question.increments
        words = f"{counted(design.results, 'composite')} of {each} increments"
        places = design.locations * (1 if question.one_place else each)
        return replace(design, words=words, locations=places)

    def cheapest(self, wanted: Wanted) -> PricedDesign | None:
        """Give the cheapest of all numbers of increments that reaches a precision."""
        found = (
            self._named(question, design)
            for question in self.questions
            if (design := Shared(question, self.label).cheapest(wanted)) is not None
        )
        return cheapest(found, wanted)

    def most_precise(self, budget: float) -> PricedDesign | None:
        """Give the most precise of all numbers of increments within a budget."""
        found = (
            self._named(question, design)
            for question in self.questions
            if (design := Shared(question, self.label).most_precise(budget)) is not None
        )
        return most_precise(found, budget)

    def row(self, wanted: Wanted, points: int = ROW) -> list[PricedDesign]:
        """Trace every number of increments on either side of a precision."""
        return [
            self._named(question, design)
            for question in self.questions
            for design in Shared(question, self.label).row(wanted, points)
        ]


def single_results(asked: Asked) -> Question | None:
    """Give the question about single samples, whatever the campaign takes.

    Parameters
    ----------
    asked : Asked

    Returns
    -------
    Question or None
        None where the campaign takes composites and a part of sigma is missing.
    """
    question = asked.question
    if question.increments == 1:
        return question
    splits = splits_of(asked)
    if not splits or asked.campaign.cost is None:
        return None
    paid = question.increments * asked.campaign.cost.per_increment
    parts = tuple(
        replace(part, sigma=error_parts(split).total, extra_cost=part.extra_cost - paid)
        for part, split in zip(question.parts, splits, strict=True)
    )
    return replace(question, parts=parts, increments=1)


def splits_of(asked: Asked) -> list[SplitSpread]:
    """List the parts of sigma by stratum; empty where what composites keep is not known."""
    spread = asked.spread
    if spread is None:
        return []
    needed = {SAMPLING} if asked.question.one_place else {ANALYSIS, TOGETHER}
    found = []
    for entry in asked.entries:
        split = spread.split(entry.analyte, entry.stratum)
        names = {part.part for part in split.parts} if split else set()
        if split is None or PLACES not in names or not names & needed:
            return []
        found.append(split)
    return found


def composites_of(asked: Asked, single: Question) -> Composited | None:
    """Give composites as a kind of design.

    Parameters
    ----------
    asked : Asked
    single : Question
        From ``single_results``.

    Returns
    -------
    Composited or None
        None where a part of sigma is not known, where an increment has no price, and for a list,
        whose units do not mix.
    """
    cost, splits = asked.campaign.cost, splits_of(asked)
    if cost is None or cost.per_increment <= 0 or not splits or asked.population is not None:
        return None
    tried = sorted({*INCREMENTS, *({asked.question.increments} - {1})})
    questions = []
    for increments in tried:
        parts = tuple(
            replace(
                part,
                sigma=composite_sigma(
                    error_parts(split), increments, one_place=asked.question.one_place
                ),
                extra_cost=part.extra_cost + increments * cost.per_increment,
            )
            for part, split in zip(single.parts, splits, strict=True)
        )
        questions.append(replace(single, parts=parts, increments=increments))
    return Composited(tuple(questions))
