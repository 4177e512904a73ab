"""From a question to the whole answer."""

from collections.abc import Sequence

from fieldplan.base.errors import DesignError
from fieldplan.sizing.conditions import conditions
from fieldplan.sizing.counting import Counts, assured_counts, control_counts, count, total_cost
from fieldplan.sizing.curve import curve
from fieldplan.sizing.model import AssuredSize, Size, StratumSize
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.sizing.sentences import sentences
from fieldplan.sizing.steps import steps
from fieldplan.sizing.together import CHOOSING, everyone, face_value, joint_balance
from fieldplan.sizing.words import target_words
from fieldplan.stats.allocation import unrounded_shares, unrounded_total
from fieldplan.stats.intervals import t_quantile

ASSURANCES = (0.67, 0.80, 0.90)
"""Shown for every n, beside the chosen one."""


def answer(question: Question) -> Size:
    """Say how many, with all that must be said beside it.

    Parameters
    ----------
    question : Question

    Returns
    -------
    Size

    Raises
    ------
    DesignError
        The target, budget or typed number cannot be had.

    Examples
    --------
    >>> from fieldplan.sizing.question import Part
    >>> size = answer(Question((Part("site", 1.0, 27.57, results=8),), "standard_error", 6.0))
    >>> size.needed, round(size.chance_needed, 3), [entry.n for entry in size.assured]
    (22, 0.459, [31, 39, 53])
    """
    counts = count(question)
    if question.widened:
        from fieldplan.sizing.widened import refuse_short_list

        refuse_short_list(question, counts.planned)
    plain, needed, planned = counts.plain or counts.needed, counts.needed, counts.planned
    precision = Precision(question)
    assured = _assured(question)
    if all(question.takes_all((entry.n,)) for entry in assured):
        assured = ()
    return Size(
        design=question.design,
        analyte=question.analyte,
        unit=question.unit,
        target=target_words(question),
        target_standard_error=_target_standard_error(question, plain),
        target_half_width=question.target_half_width,
        strata=_strata(question, counts),
        plain_n=sum(plain),
        needed=sum(needed),
        planned=sum(planned),
        standard_error=precision.standard_error(needed),
        half_width=precision.half_width(needed),
        confidence=question.confidence,
        interval=question.interval,
        assurance=question.assurance,
        assurance_chosen_by=question.assurance_chosen_by,
        chance_plain=_chance(question, counts.plain),
        chance_needed=_chance(question, counts.needed),
        assured=assured,
        steps=steps(question, counts),
        curve=curve(question, sum(plain), sum(needed)),
        qc=control_counts(question, planned),
        cost=total_cost(question, planned),
        currency=question.prices.currency if question.prices else "",
        sentences=sentences(question, counts, assured),
        conditions=conditions(question, needed),
        unrounded=_unrounded(question),
        number_from=question.number_from,
    )


def _chance(question: Question, counts: tuple[int, ...] | None) -> float | None:
    if counts is None or question.census:
        return None
    return Precision(question).chance(counts)


def _assured(question: Question) -> tuple[AssuredSize, ...]:
    """Count at the assurances that are always shown; none where no chance can be given."""
    if question.target == "budget" or question.pilots is None or question.census:
        return ()
    wanted = {*ASSURANCES} | ({question.assurance} if question.assurance is not None else set())
    found = []
    for assurance in sorted(wanted):
        try:
            counts = assured_counts(question, assurance)
        except DesignError:  # more than can be had; the chosen one has been counted before
            continue
        if counts is not None:
            found.append(AssuredSize(assurance, sum(counts), _least_chance(question, counts)))
    return tuple(found)


def _least_chance(question: Question, counts: Sequence[int]) -> float | None:
    """Give the chance that counts are enough; of several deciding analytes the least sure one's."""
    chances = [Precision(member).chance(counts) for member in everyone(question)]
    known = [chance for chance in chances if chance is not None]
    return min(known) if known else None


def _target_standard_error(question: Question, plain: tuple[int, ...]) -> float | None:
    """Give the target as a standard error: a half-width over t at the plain n."""
    if question.target_half_width is None:
        return question.target_standard_error
    if question.widened:
        precision = Precision(question)
        return question.target_half_width * (
            precision.standard_error(plain) / precision.half_width(plain)
        )
    known = Precision(question).degrees_of_freedom(plain)
    return question.target_half_width / t_quantile(
        known, confidence=question.confidence, kind=question.interval
    )


def _unrounded(question: Question) -> float | None:
    """Give the plain total before rounding, floors and t; None without a precision target."""
    if question.target == "budget" or question.census:
        return None
    target = question.value
    if question.target_half_width is not None:
        target = question.target_half_width / t_quantile(
            float("inf"), confidence=question.confidence, kind=question.interval
        )
    if question.also and question.allocation in CHOOSING:
        return float(sum(joint_balance(face_value(question)).counts))
    own = unrounded_total(question.strata, target**2, allocation=question.allocation)
    return max([own, *(_unrounded(other) or 0.0 for other in question.also)])


def _strata(question: Question, counts: Counts) -> tuple[StratumSize, ...]:
    total = sum(counts.needed)
    shares = unrounded_shares(question.sharing, total, allocation=question.allocation)
    floors = question.sharing.floors
    typed = question.locations is not None or question.census
    found = []
    for k, part in enumerate(question.parts):
        planned = counts.planned[k]
        left = None if part.population is None else part.population - planned
        found.append(
            StratumSize(
                stratum=part.name,
                weight=part.weight,
                sigma=part.sigma,
                needed=counts.needed[k],
                planned=planned,
                alternates=question.alternates if left is None else min(question.alternates, left),
                population=part.population,
                floor_applied=not typed and counts.needed[k] == floors[k] and shares[k] < floors[k],
            )
        )
    return tuple(found)
