"""The counts themselves: plain, at an assurance, for a budget, typed; then losses and money."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from fieldplan.base.errors import DesignError
from fieldplan.sizing.model import QualityControlCount
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.sizing.together import most_for_money, refuse_unreachable, weighed_counts, weighs
from fieldplan.sizing.words import targeted_words
from fieldplan.stats.allocation import check_total, first_that, share_total, smallest_total
from fieldplan.stats.distributions import normal_quantile
from fieldplan.stats.precision import meets, smallest, whole

BACK = 61
"""So many totals below the one found are tried as well, at most: rounding makes chances uneven."""


@dataclass(frozen=True)
class Counts:
    """Results by stratum: by the plain formula, and those that the campaign goes for.

    ``planned`` are locations to visit. ``plain`` is None where there is no precision target.
    """

    plain: tuple[int, ...] | None
    needed: tuple[int, ...]
    planned: tuple[int, ...]


def count(question: Question) -> Counts:
    """Count results and locations for a question.

    Parameters
    ----------
    question : Question

    Returns
    -------
    Counts

    Raises
    ------
    DesignError
        The target, budget or typed number cannot be had.
    """
    if question.census:
        return _census(question)
    plain = None if question.target == "budget" else tuple(plain_counts(question))
    if question.locations is not None:
        return _typed(question, plain, question.locations)
    needed = tuple(affordable_counts(question) if plain is None else needed_counts(question))
    return Counts(plain, needed, planned_counts(question, needed))


def fixed_counts(question: Question) -> Counts:
    """Count where the design fixes the locations, or takes them all; no target is looked at."""
    if question.census:
        return replace(_census(question), plain=None)
    return _typed(question, None, question.locations or 0)


def _census(question: Question) -> Counts:
    everything = tuple(part.population or 0 for part in question.parts)
    if 0 in everything:
        message = (
            "a census visits every unit of a list, and this frame is an area without units; "
            'write kind = "list" with a list_file, or choose another layout.'
        )
        raise DesignError(message)
    return Counts(everything, everything, everything)


def _typed(question: Question, plain: tuple[int, ...] | None, locations: int) -> Counts:
    """Share a typed number of locations; the results expected are what losses leave."""
    strata = question.sharing_of_visits
    check_total(strata, locations)
    planned = share_total(strata, locations, allocation=question.allocation)
    needed = tuple(
        max(min(2, visits), int(visits * (1 - part.loss) + 1e-9))
        for visits, part in zip(planned, question.parts, strict=True)
    )
    return Counts(plain, needed, tuple(planned))


def needed_counts(question: Question) -> list[int]:
    """Count the results that meet the target with the assurance chosen, if any."""
    if weighs(question):
        return weighed_counts(question)
    return assured_counts(question, question.assurance) or plain_counts(question)


def plain_counts(question: Question) -> list[int]:
    """Count the results that meet the target with sigma taken at face value."""
    if question.widened and question.target_half_width is not None:
        from fieldplan.sizing.widened import widened_counts

        return widened_counts(question)
    refuse_unreachable(question)
    if weighs(question):
        return weighed_counts(question, plain=True)
    strata, allocation = question.strata, question.allocation
    if question.target_half_width is None:
        return smallest_total(strata, question.value**2, allocation=allocation)
    wanted = question.target_half_width
    confidence = question.confidence
    level = (1 + confidence) / 2 if question.interval == "two-sided" else confidence
    precision = Precision(question)
    # Every t is above the normal quantile, so no variance above this one can do.
    return first_that(
        strata,
        lambda counts: meets(precision.half_width(counts), wanted),
        never_above=(wanted / normal_quantile(level)) ** 2,
        allocation=allocation,
    )


def assured_counts(question: Question, assurance: float | None) -> list[int] | None:
    """Count the results that meet the target with the stated chance, for each deciding analyte.

    Parameters
    ----------
    question : Question
    assurance : float or None

    Returns
    -------
    list of int or None
        None when there is no assurance to hold to: none was chosen, the target is a budget, or
        nobody said how many results stand behind sigma. With a half-width target the last case
        still counts the luck of the coming results, sigma taken as exact (Kupper & Hafner 1989).
    """
    if assurance is None or question.target == "budget":
        return None
    if weighs(question):
        others = tuple(
            other if other.pilots is None else replace(other, assurance=assurance)
            for other in question.also
        )
        return weighed_counts(replace(question, assurance=assurance, also=others))
    known = question.pilots is None
    if known and question.target_half_width is None:
        return None
    precision, strata, wanted = Precision(question), question.strata, assurance

    def shared(total: int) -> list[int]:
        return share_total(strata, total, allocation=question.allocation)

    def fits(total: int) -> bool:
        return (precision.chance(shared(total), sigma_known=known) or 0.0) >= wanted

    low = sum(plain_counts(question))
    total = smallest(fits, low, strata.most, back=min(2 * len(question.parts) + 1, BACK))
    if question.total_population is None and not fits(total):
        limit = f"{strata.most} results" if not strata.ceilings else "the design's most allows"
        message = (
            f"an assurance of {assurance:g} asks for more than {limit}; "
            "choose a lower one, or learn sigma from a larger pilot."
        )
        raise DesignError(message)
    return shared(total)


def affordable_counts(question: Question) -> list[int]:
    """Count the most results that the budget buys, shared for the smallest standard error."""
    strata, prices = question.sharing, question.prices
    if prices is None or prices.of_a_visit + prices.of_a_result <= 0:
        message = (
            "a budget sets no number while per_location and per_analysis are both 0; "
            "type what a location and an analysis cost in the [cost] table."
        )
        raise DesignError(message)

    def cost(total: int) -> float:
        return _planned_cost(question, share_total(strata, total, allocation=question.allocation))

    least, most = sum(strata.floors), strata.most
    if not meets(cost(least), question.value):
        message = (
            f"a budget of {question.value:g} {prices.currency} is too small: the smallest design "
            f"({least} results{targeted_words(question, ', ')}) costs {cost(least):g} "
            f"{prices.currency}."
        )
        raise DesignError(message)
    if question.allocation == "cost-optimal":
        return most_for_money(question, lambda counts: _planned_cost(question, counts))
    if meets(cost(most), question.value):
        total = most
    else:
        total = smallest(lambda n: not meets(cost(n), question.value), least, most, back=0) - 1
    return share_total(strata, total, allocation=question.allocation)


def _planned_cost(question: Question, counts: Sequence[int]) -> float:
    return total_cost(question, planned_counts(question, counts)) or 0.0


def planned_counts(question: Question, needed: Sequence[int]) -> tuple[int, ...]:
    """Add the loss allowance n / (1 − share) to every stratum; a list gives no more than N."""
    planned = []
    for results, part in zip(needed, question.parts, strict=True):
        visits = whole(results / (1 - part.loss))
        planned.append(visits if part.population is None else min(visits, part.population))
    return tuple(planned)


def control_counts(question: Question, planned: Sequence[int]) -> tuple[QualityControlCount, ...]:
    """Count control samples apart from n: shares of the samples are rounded up."""
    return tuple(
        QualityControlCount(
            rate.kind,
            rate.count if rate.count is not None else whole((rate.share or 0.0) * sum(planned)),
            rate.source,
        )
        for rate in question.controls
    )


def total_cost(question: Question, planned: Sequence[int]) -> float | None:
    """Add up mobilisation, visits, crew-days, jars and analyses; targeted places and controls too.

    Parameters
    ----------
    question : Question
    planned : sequence of int
        Locations to visit by stratum; targeted places are added from the question.

    Returns
    -------
    float or None
        Money; None without prices.
    """
    prices = question.prices
    if prices is None:
        return None
    visits = sum(planned) + question.targeted
    controls = sum(entry.count for entry in control_counts(question, planned))
    extra = math.fsum(
        part.extra_cost * count for part, count in zip(question.parts, planned, strict=True)
    )
    return prices.bill(visits=visits, jars=visits + controls) + extra
