"""On which side of the level the mean lies: how many results show it, and what counts buy."""

import math
from collections.abc import Sequence

from fieldplan.sizing.asked.level_decision import LevelDecision, decision_of
from fieldplan.sizing.asked.level_picture import level_picture, lines_of
from fieldplan.sizing.asked.level_steps import (
    SOURCES,
    buying_steps,
    counting_steps,
    guidance_of,
    margin_of,
)
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.asked.sure_words import shape_words
from fieldplan.sizing.model import Amount, Finding
from fieldplan.sizing.words import counted, figure, percent, typed, typed_percent, with_unit
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.many_decisions import chance_of_any
from fieldplan.stats.precision import whole
from fieldplan.stats.shape import skewness_of_mean, t_coverage

TOPIC, TITLE = "mean-and-level", "The mean and the level"
SHOWN = (0.5, 0.8, 0.95)
"""Chances whose true means are listed."""


def count(asked: Asked) -> Answered:
    """Count the results that show on which side of the level the mean lies.

    Parameters
    ----------
    asked : Asked

    Returns
    -------
    Answered

    Raises
    ------
    CampaignError
        The table or the level is missing, or the gray region lies on the wrong side.
    DesignError
        The number is out of reach.
    """
    decision = decision_of(asked)
    sure = decision.table.assurance
    plain = decision.plain
    needed = plain
    if sure != "plain" and asked.question.pilots is not None:
        needed = decision.needed(sure)
    finding = _finding(decision, needed, plain=plain)
    single = len(asked.question.parts) == 1
    return Answered(
        needed=needed,
        target=_target(decision),
        finding=finding,
        unrounded=guidance_of(decision) if single else None,
    )


def bought(asked: Asked, counts: tuple[int, ...]) -> Finding:
    """Say at which true means given counts show the side.

    Parameters
    ----------
    asked : Asked
    counts : tuple of int
        Results by stratum.

    Returns
    -------
    Finding
    """
    return _finding(decision_of(asked), counts, plain=None)


def _finding(
    decision: LevelDecision, counts: tuple[int, ...], *, plain: tuple[int, ...] | None
) -> Finding:
    """Put together what counts buy; with ``plain`` as the answer to how many."""
    steps = list(buying_steps(decision, counts))
    if plain is not None:
        steps = [*counting_steps(decision, counts), *steps]
        opening = _needed_words(decision, counts)
    else:
        opening = _bought_words(decision, counts)
    return Finding(
        topic=TOPIC,
        title=TITLE,
        answer=f"{opening} {_limits_words(decision, counts)}".strip(),
        amounts=_amounts(decision, counts, plain),
        columns=(f"True mean, {decision.asked.question.unit}".rstrip(", "), _out(decision)),
        rows=lines_of(decision, counts),
        steps=tuple(steps),
        assumptions=_assumptions(decision),
        warnings=tuple(_warnings(decision, counts, plain)),
        sources=SOURCES[decision.table.test],
        picture=level_picture(decision, counts),
    )


def _as_typed(decision: LevelDecision, value: float) -> str:
    return with_unit(typed(value), decision.asked.question.unit)


def _out(decision: LevelDecision) -> str:
    return f"campaigns that come out {decision.side} the level"


def _target(decision: LevelDecision) -> str:
    edge, level = decision.table.gray_edge, _as_typed(decision, decision.level)
    return (
        f"a mean of {typed(edge)} shown to lie {decision.side} {level} with a chance of "
        f"{typed_percent(1 - decision.table.beta)}"
    )


def _needed_words(decision: LevelDecision, counts: Sequence[int]) -> str:
    table, side = decision.table, decision.side
    level, edge = _as_typed(decision, decision.level), _as_typed(decision, table.gray_edge)
    beyond = "more" if side == "below" else "less"
    results = counted(sum(counts), "result")
    verb = "is" if sum(counts) == 1 else "are"
    surely, wrongly = typed_percent(1 - table.beta), typed_percent(table.alpha)
    if table.decisions == 1:
        return (
            f"{results} {verb} needed: a true mean of {edge} then comes out {side} {level} in at "
            f"least {surely} of campaigns, and one of {level} or {beyond} in at most {wrongly}."
        )
    if table.together == "all-or-nothing":
        return (
            f"{results} {verb} needed for each: if all {table.decisions} true means are {edge}, "
            f"all then come out {side} {level} in at least {surely} of campaigns, and if any is "
            f"{level} or {beyond}, in at most {wrongly}."
        )
    return (
        f"{results} {verb} needed for each: if all {table.decisions} true means are {edge}, all "
        f"then come out {side} {level} in at least {surely} of campaigns, and any that is {level} "
        f"or {beyond} in at most {wrongly}."
    )


def _bought_words(decision: LevelDecision, counts: Sequence[int]) -> str:
    power = percent(decision.power(counts, decision.width))
    edge, level = decision.table.gray_edge, decision.level
    return (
        f"With {counted(sum(counts), 'result')}, a true mean of {_as_typed(decision, edge)} comes "
        f"out {decision.side} {_as_typed(decision, level)} in {power} of campaigns."
    )


def _limits_words(decision: LevelDecision, counts: Sequence[int]) -> str:
    """Say where so many results can show nothing, or leave no doubt; else nothing."""
    reach = decision.reach(counts, 0.8)
    if reach is None:
        return "So few results cannot show it, however far from the level the mean lies."
    if reach == 0:
        return "With every unit of the list analysed, its mean is known."
    if decision.mean_at(reach) <= 0:
        return "8 of 10 campaigns would come out below the level only at a mean below 0."
    return ""


def _amounts(
    decision: LevelDecision, counts: tuple[int, ...], plain: tuple[int, ...] | None
) -> tuple[Amount, ...]:
    unit, side = decision.asked.question.unit, decision.side
    power = decision.power(counts, decision.width)
    found = [Amount("power_at_gray_edge", f"Chance to come out {side} at the gray edge", power)]
    for chance in SHOWN:
        reach = decision.reach(counts, chance)
        mean = None if reach is None else decision.mean_at(reach)
        name = f"mean_at_{round(100 * chance)}_percent"
        words = f"True mean at which {percent(chance)} of campaigns come out {side}"
        found.append(Amount(name, words, mean, unit))
    if decision.table.test == "t":
        words = f"Expected distance from the mean to its {_limit_name(decision)} limit"
        words += " (s comes out a little below sigma)" if sum(counts) < 25 else ""
        found.append(Amount("expected_margin", words, margin_of(decision, counts), unit))
    enough = decision.chance_enough(counts)
    found.append(Amount("chance_enough", "Chance that these results are enough", enough))
    if plain is not None:
        found.append(Amount("plain_n", "Results with sigma at face value", sum(plain), "results"))
        if len(decision.asked.question.parts) == 1:
            formula = whole(guidance_of(decision))
            found.append(Amount("formula_n", "Results by the guidance formula", formula, "results"))
    return tuple(found)


def _limit_name(decision: LevelDecision) -> str:
    return "upper" if decision.side == "below" else "lower"


def _assumptions(decision: LevelDecision) -> tuple[str, ...]:
    level = _as_typed(decision, decision.level)
    edge = _as_typed(decision, decision.table.gray_edge)
    if decision.side == "below":
        start = (
            f"Until results show otherwise the mean is taken to lie at {level} or above; few or "
            "scattered results leave it so. Who starts from the other side writes "
            'assume = "below-level".'
        )
    else:
        start = (
            f"Until results show otherwise the mean is taken to lie at {level} or below; few or "
            "scattered results leave it so. Who starts from the other side writes "
            'assume = "above-level".'
        )
    gray = (
        f"Between {min(level, edge, key=_number)} and {max(level, edge, key=_number)}, the gray "
        "region, wrong decisions are tolerated more often than alpha and beta say."
    )
    shape = {
        "t": "The test is t: exact for near normal results, drawn independently.",
        "sign": "The sign test counts results on each side and needs no shape.",
        "signed-rank": "The signed rank test needs a symmetric shape, not a normal one.",
    }[decision.table.test]
    return start, gray, shape


def _number(text: str) -> float:
    return float(text.split()[0])


def _warnings(
    decision: LevelDecision, counts: tuple[int, ...], plain: tuple[int, ...] | None
) -> list[str]:
    found = [_sure(decision, counts, plain), _skewed(decision, counts), _other_mean(decision)]
    found += [_many(decision), _other_limit(decision)]
    return [line for line in found if line]


def _sure(decision: LevelDecision, counts: tuple[int, ...], plain: tuple[int, ...] | None) -> str:
    """Say how sure the number is, sigma being an estimate; this is said every time."""
    if decision.reach(counts, 0.8) == 0:
        return ""
    chance = decision.chance_enough(counts)
    if chance is None:
        line = (
            "Nobody said how many results stand behind sigma, so no chance can be given that these "
            "are enough; they are if the true sigma is no larger."
        )
        sure = decision.table.assurance
        if sure != "plain" and plain is not None:
            line += f" The assurance of {typed_percent(sure)} has nothing to hold to."
        return line
    purpose = ""
    if plain is None:
        surely = typed_percent(1 - decision.table.beta)
        purpose = f" to show it in {surely} of campaigns at the gray edge"
    line = (
        f"The chance that {sum(counts)} are enough{purpose} is {percent(chance)} "
        f"{shape_words(decision.asked.question)}, sigma being known from {_behind(decision)} only"
    )
    if plain is None:
        return line + "."
    if plain != counts:
        few = decision.chance_enough(plain) or 0.0
        return f"{line}; sigma at face value asks for {sum(plain)}, enough with {percent(few)}."
    more = [sum(decision.needed(share)) for share in (0.8, 0.9)]
    return f"{line}; for a chance of 80 % and 90 % it takes {more[0]} and {more[1]}."


def _behind(decision: LevelDecision) -> str:
    known = sorted({p.results for p in decision.asked.question.parts if p.results is not None})
    behind = str(known[0]) if known[0] == known[-1] else f"{known[0]} to {known[-1]}"
    return f"{behind} results" + (" a stratum" if len(decision.asked.question.parts) > 1 else "")


def _skewed(decision: LevelDecision, counts: Sequence[int]) -> str:
    """Say how often a mean at the level is claimed off it, where the skewness is known."""
    parts = decision.asked.question.parts
    skewnesses = [part.skewness for part in parts if part.skewness is not None]
    alpha, _ = decision.risks
    if decision.table.test != "t" or len(skewnesses) < len(parts) or not 0.01 <= alpha <= 0.5:
        return ""
    n = sum(counts)
    strata = decision.asked.question.strata
    of_mean = skewness_of_mean(strata.weights, strata.sigmas, skewnesses, counts=counts)
    skewness = of_mean * math.sqrt(n)
    kind: IntervalKind = "upper-limit" if decision.side == "below" else "lower-limit"
    wrong = 1 - t_coverage(n, skewness, confidence=1 - alpha, kind=kind)
    if abs(wrong - alpha) < 0.005:
        return ""
    return (
        f"With a skewness of {figure(skewness, 2)}, as behind sigma, a mean at the level would "
        f"come out {decision.side} it in about {percent(wrong)} of campaigns and not in "
        f"{percent(alpha)}."
    )


def _other_mean(decision: LevelDecision) -> str:
    if decision.table.test == "sign":
        return (
            "The sign test decides on the median; it speaks for the mean only where the two are "
            "alike, and in skewed ground the mean lies above the median."
        )
    if decision.table.test == "signed-rank":
        return (
            "The signed rank test speaks for the mean only where results scatter alike above and "
            "below it; in skewed ground it does not."
        )
    return ""


def _many(decision: LevelDecision) -> str:
    table = decision.table
    if table.decisions == 1:
        return ""
    alpha, beta = decision.risks
    if table.together == "all-or-nothing":
        return (
            f"One claim needs all {table.decisions} decisions, so alpha stays {typed(alpha)} for "
            f"each and beta falls to {_rounded(beta):g}; the gray region and sigma are those of "
            "the decision that is hardest to make."
        )
    _, alone, most = chance_of_any([table.alpha] * table.decisions)
    return (
        f"{table.decisions} decisions at {typed_percent(table.alpha)} each would go wrong "
        f"somewhere with a chance of {percent(alone)} if independent and at most {percent(most)}; "
        f"here each takes alpha {_rounded(alpha):g} and beta {_rounded(beta):g}, so that all "
        "together keep theirs."
    )


def _rounded(chance: float) -> float:
    return float(f"{chance:.3g}")


def _other_limit(decision: LevelDecision) -> str:
    """Tell where the campaign's own interval is not the one that the test stands for."""
    if decision.table.test != "t":
        return (
            f"The results will be reported with the interval that [rules] fixes; the "
            f"{decision.table.test.replace('-', ' ')} test itself is not run by estimate."
        )
    question = decision.asked.question
    if question.widened:
        return (
            f"These chances are of Student's t; [rules] fix {question.mean_interval}, whose ends "
            "lie farther out on the side of a long tail: expect fewer claims there."
        )
    alpha, _ = decision.risks
    kind = f"{_limit_name(decision)}-limit"
    if question.interval == "two-sided":
        tail = (1 - question.confidence) / 2
    elif question.interval == kind:
        tail = 1 - question.confidence
    else:
        tail = math.nan
    if math.isclose(tail, alpha, rel_tol=1e-6):
        return ""
    return (
        f"The test at alpha {_rounded(alpha)} sets a {typed_percent(1 - _rounded(alpha))} "
        f"{_limit_name(decision)} limit against the level, and [rules] fixes another "
        f"({typed_percent(question.confidence)} {question.interval.replace('-', ' ')}). Write "
        f'interval = "{kind}" and confidence = {typed(1 - _rounded(alpha))} there, or expect '
        "other chances."
    )
