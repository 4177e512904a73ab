"""From a question's counts to the whole ``Size``: losses, money, controls, what else n buys."""

from dataclasses import dataclass, replace

from fieldplan.sizing.asked.level_decision import decision_of
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.closing_steps import closing_steps
from fieldplan.sizing.conditions import conditions
from fieldplan.sizing.counting import (
    Counts,
    control_counts,
    fixed_counts,
    planned_counts,
    total_cost,
)
from fieldplan.sizing.curve import curve
from fieldplan.sizing.model import CurvePoint, Finding, Size, StratumSize
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.sentences import (
    expected_precision,
    increments_words,
    money_words,
    visit_words,
)
from fieldplan.sizing.words import figure, typed_percent, with_unit


def size_of(asked: Asked, answered: Answered) -> Size:
    """Build the size round the counts of a question.

    Parameters
    ----------
    asked : Asked
    answered : Answered

    Returns
    -------
    Size
        ``number_from`` is ``question`` (or ``locations``, where the design fixes them and the
        question only says what they buy); the finding comes first in ``findings``.
    """
    question = asked.question
    counts = _counts(asked, answered)
    finding = _finding(asked, answered, counts)
    typed = question.locations is not None or question.census
    known = Precision(question) if asked.sigma_known else None
    sure = _sureness(asked, answered)
    return Size(
        design=question.design,
        analyte=question.analyte,
        unit=question.unit,
        target=answered.target,
        target_standard_error=None,
        target_half_width=None,
        strata=_strata(asked, counts),
        plain_n=sure.plain_n,
        needed=sum(counts.needed),
        planned=sum(counts.planned),
        standard_error=known.standard_error(counts.needed) if known else None,
        half_width=known.half_width(counts.needed) if known else None,
        confidence=question.confidence,
        interval=question.interval,
        assurance=sure.assurance,
        assurance_chosen_by="",
        chance_plain=sure.chance_plain,
        chance_needed=_chance_enough(finding),
        assured=(),
        steps=(*finding.steps, *(closing_steps(question, counts) if known else ())),
        curve=_curve(asked, counts),
        qc=control_counts(question, counts.planned),
        cost=total_cost(question, counts.planned),
        currency=question.prices.currency if question.prices else "",
        sentences=_sentences(asked, counts, finding),
        conditions=(*finding.assumptions, *(conditions(question, counts.needed) if known else ())),
        unrounded=answered.unrounded,
        number_from=question.number_from if typed else "question",
        question=asked.objective.question,
        findings=(replace(finding, steps=()),),
    )


@dataclass(frozen=True)
class _Sureness:
    """The number with sigma at face value, the assurance that raised it, and the plain chance."""

    plain_n: int
    assurance: float | None = None
    chance_plain: float | None = None


def _sureness(asked: Asked, answered: Answered) -> _Sureness:
    """Ask once more without the assurance, where the question has one."""
    from fieldplan.sizing.asked import bought, count

    question = asked.objective.question
    name = question.replace("-", "_")
    table = getattr(asked.objective, name)
    assurance = getattr(table, "assurance", None)
    if not isinstance(assurance, float):
        return _Sureness(sum(answered.needed), None, _chance_enough(answered.finding))
    face = table.model_copy(update={"assurance": "plain"})
    asked = replace(asked, objective=asked.objective.model_copy(update={name: face}))
    plain = count(asked).needed
    return _Sureness(sum(plain), assurance, _chance_enough(bought(asked, question, plain)))


def _chance_enough(finding: Finding) -> float | None:
    """Give the chance that its number is enough, where a finding has one."""
    found = [amount.value for amount in finding.amounts if amount.name == "chance_enough"]
    return None if not found or found[0] is None else float(found[0])


def _finding(asked: Asked, answered: Answered, counts: Counts) -> Finding:
    """Give the question's own finding, or what typed locations buy and what it would take."""
    if asked.question.locations is None and not asked.question.census:
        return answered.finding
    from fieldplan.sizing.asked import bought

    would_take = f"The target ({answered.target}) would take {sum(answered.needed)} results."
    finding = bought(asked, asked.objective.question, counts.needed)
    return replace(finding, answer=f"{finding.answer} {would_take}")


def _counts(asked: Asked, answered: Answered) -> Counts:
    """Take typed locations where the design fixes them, else what the question needs."""
    question = asked.question
    if question.census or question.locations is not None:
        return fixed_counts(question)
    return Counts(None, answered.needed, planned_counts(question, answered.needed))


def _curve(asked: Asked, counts: Counts) -> tuple[CurvePoint, ...]:
    if not asked.sigma_known or asked.question.census:
        return ()
    total = sum(counts.needed)
    return tuple(replace(p, chance=None) for p in curve(asked.question, total, total))


def _strata(asked: Asked, counts: Counts) -> tuple[StratumSize, ...]:
    question = asked.question
    found = []
    for part, needed, planned in zip(question.parts, counts.needed, counts.planned, strict=True):
        left = None if part.population is None else part.population - planned
        found.append(
            StratumSize(
                stratum=part.name,
                weight=part.weight,
                sigma=part.sigma if asked.sigma_known else None,
                needed=needed,
                planned=planned,
                alternates=question.alternates if left is None else min(question.alternates, left),
                population=part.population,
            )
        )
    return tuple(found)


def _expected(asked: Asked, counts: Counts, finding: Finding) -> str:
    """Say what standard error to expect, and of the limits on one side the one that decides."""
    line = expected_precision(asked.question, counts)
    margins = [a.value for a in finding.amounts if a.name == "expected_margin" and a.value]
    if not margins or asked.question.interval == "two-sided":
        return line
    decision, unit = decision_of(asked), asked.question.unit
    error = with_unit(figure(Precision(asked.question).standard_error(counts.needed)), unit)
    sure = typed_percent(1 - float(f"{decision.risks[0]:.3g}"))
    which, side = ("upper", "above") if decision.side == "below" else ("lower", "below")
    return (
        f"If sigma is right, expect a standard error of {error} and the {sure} {which} limit on "
        f"average {with_unit(figure(float(margins[0])), unit)} {side} the mean."
    )


def _sentences(asked: Asked, counts: Counts, finding: Finding) -> tuple[str, ...]:
    lines = [finding.answer, increments_words(asked.question, counts)]
    lines += [visit_words(asked.question, counts), *finding.warnings]
    if asked.sigma_known:
        lines.append(_whose_mean(asked, _expected(asked, counts, finding)))
    lines.append(money_words(asked.question, counts))
    return tuple(line for line in lines if line)


def _whose_mean(asked: Asked, line: str) -> str:
    """Say which mean a precision belongs to, where the question has an interval of its own."""
    if asked.objective.question == "mean-and-level" or line.startswith("With every"):
        return line
    place = "list" if asked.population is not None else "site"
    whose = "one round" if asked.objective.question == "change" else f"the {place}"
    return f"For the mean of {whose}: {line[0].lower()}{line[1:]}"
