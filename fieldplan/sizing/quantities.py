"""Inputs that several steps of the working share."""

from fieldplan.base.working import Quantity
from fieldplan.sizing.question import Question
from fieldplan.stats.precision import unrounded_for_list


def sigma_quantity(question: Question) -> Quantity:
    """Give the standard deviation of the only part, with its source."""
    part = question.parts[0]
    source = f" ({part.source})" if part.source else ""
    meaning = f"standard deviation of single results{source}"
    return Quantity("s", meaning, part.sigma, question.unit)


def target_quantity(question: Question) -> Quantity:
    """Give the target: a standard error SE, or a half-width h."""
    if question.target_half_width is None:
        return Quantity("SE", "target standard error of the mean", question.value, question.unit)
    width = question.target_half_width
    return Quantity("h", "target half-width of the interval", width, question.unit)


def corrected_for_list(question: Question, first: float) -> float:
    """Correct an unrounded number of results for the only part's list, if it is one."""
    size = question.parts[0].population
    return first if size is None else unrounded_for_list(first, size)
