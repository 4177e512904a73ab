"""Which analyte decides the number where several do, and what its target costs."""

import math

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.model import Amount, Finding, Size
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.sizing.together import (
    CHOOSING,
    alone,
    everyone,
    exact_counts,
    holds_to,
    joint_balance,
)
from fieldplan.sizing.words import counted, figure, listed, percent, target_words, with_unit
from fieldplan.stats.several_analytes import Balance

TITLE = "Which analyte decides"
SOURCES = (
    "Bethel 1989, Survey Methodology 15:47: sample allocation in multivariate surveys (from "
    "memory)",
    "Chromy 1987, Proceedings of the Section on Survey Research Methods, American Statistical "
    "Association, 194: the multiplicative rule (from memory)",
)


def finding(asked: Asked, size: Size) -> Finding | None:
    """Name the analyte that decides; None where only one objective does.

    Parameters
    ----------
    asked : Asked
    size : Size
    """
    question = asked.question
    if not question.also or question.census or size.number_from != "target":
        return None
    members = everyone(question)
    names = [asked.campaign.analyte_called(member.analyte).label for member in members]
    needs = [sum(alone(member)) for member in members]
    counts = [entry.needed for entry in size.strata]
    errors = [Precision(member).standard_error(counts) for member in members]
    shared = joint_balance(question) if question.allocation in CHOOSING else None
    return Finding(
        topic="deciding-analytes",
        title=TITLE,
        answer=f"{_who(names, needs, shared)} {_alone(names, needs, sum(counts))}",
        amounts=(*_amounts(members, needs, shared), *_above_least(question)),
        columns=("analyte", "target", "alone", "share in deciding", "expected standard error"),
        rows=tuple(
            (
                name,
                target_words(member),
                counted(need, "result"),
                "" if shared is None else percent(shared.shares[j]),
                with_unit(figure(errors[j]), member.unit),
            )
            for j, (name, member, need) in enumerate(zip(names, members, needs, strict=True))
        ),
        steps=() if shared is None else tuple(_steps(question, members, shared)),
        assumptions=(
            "Every sample is analysed for all of these analytes; the shares between strata are "
            "the same for all.",
        ),
        sources=SOURCES,
    )


def _who(names: list[str], needs: list[int], shared: Balance | None) -> str:
    """Say who decides: by multiplier where shares follow the spread, else by the largest need."""
    if shared is None:
        most = max(needs)
        leading = [name for name, need in zip(names, needs, strict=True) if need == most]
        verb = "decides" if len(leading) == 1 else "decide"
        return f"{listed(leading)} {verb} the number; the shares are set by other rules."
    deciding = shared.controlling
    if not deciding:
        return "No analyte decides the number: the floors alone keep every target."
    first = names[deciding[0]]
    resting = [name for j, name in enumerate(names) if j not in deciding]
    spare = ""
    if resting:
        verb = "is" if len(resting) == 1 else "are"
        spare = f"; {listed(resting)} {verb} kept with room to spare"
    if len(deciding) == 1:
        return f"{first} alone decides the number and its shares{spare}."
    parts = [f"{names[j]} ({percent(shared.shares[j])})" for j in deciding]
    return f"{listed(parts)} decide the number and its shares together{spare}."


def _alone(names: list[str], needs: list[int], together: int) -> str:
    pairs = [f"{name} {need}" for name, need in zip(names, needs, strict=True)]
    return f"Alone, with shares of its own, {listed(pairs)} would be needed; together {together}."


def _amounts(
    members: tuple[Question, ...], needs: list[int], shared: Balance | None
) -> list[Amount]:
    found = []
    for j, (member, need) in enumerate(zip(members, needs, strict=True)):
        name = member.analyte
        found.append(Amount(f"alone_{name}", f"results that {name} alone needs", need, "results"))
        if shared is None:
            continue
        unit = _unit(member)
        found += [
            Amount(f"share_{name}", f"share of {name} in deciding", shared.shares[j]),
            Amount(
                f"saved_{name}",
                f"saved where {name} is allowed a standard error 1 % larger, before rounding",
                0.02 * shared.multipliers[j],
                unit,
            ),
        ]
    return found


def _unit(question: Question) -> str:
    priced = question.allocation == "cost-optimal" and question.prices is not None
    return question.prices.currency if priced and question.prices else "results"


def _above_least(question: Question) -> list[Amount]:
    """Say how far the whole counts may lie above the least, where that is known."""
    if question.allocation not in CHOOSING:
        return []
    members = everyone(question)
    if any(m.target != "standard_error" or holds_to(m) is not None for m in members):
        return []
    _, value, bound = exact_counts(question)
    meaning = "what other whole counts could save at most"
    return [Amount("above_least", meaning, max(value - bound, 0.0), _unit(question))]


def _steps(question: Question, members: tuple[Question, ...], shared: Balance) -> list[Step]:
    """Show the multiplier of every analyte."""
    least = "c·n" if question.allocation == "cost-optimal" else "n"
    found = []
    for j, member in enumerate(members):
        reached = math.fsum(
            (part.weight * part.sigma) ** 2
            * (1 / n - (1 / part.population if part.population else 0))
            for part, n in zip(member.parts, shared.counts, strict=True)
        )
        unit = f"({member.unit})²" if member.unit else ""
        found.append(
            Step(
                symbol=f"λ({member.analyte})",
                meaning=f"Multiplier of {member.analyte}: what its target costs, per share of V",
                formula=f"λ ≥ 0 that make the smallest Σ ({least} + Σ λ·W²·s²/(V·n)) − Σ λ largest",
                inputs=(
                    Quantity("Σ n", "results before rounding", math.fsum(shared.counts), "results"),
                    Quantity("variance", "of its mean at these, before rounding", reached, unit),
                ),
                unrounded=shared.multipliers[j],
                rounded=shared.multipliers[j],
                unit=_unit(question),
                source="Bethel 1989, Survey Methodology 15:47",
            )
        )
    return found
