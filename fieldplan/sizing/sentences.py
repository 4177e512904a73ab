"""The answer first, then how sure it is, then what it buys."""

from dataclasses import replace

from fieldplan.sizing.counting import Counts, assured_counts, needed_counts, total_cost
from fieldplan.sizing.model import AssuredSize
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.sizing.words import (
    counted,
    figure,
    in_strata,
    listed,
    percent,
    target_words,
    targeted_words,
    typed_percent,
    with_unit,
)

NEAR_NORMAL = "if single results are near normal (lower if they are skewed)"
"""The condition of every chance, said beside it."""


def chance_condition(question: Question) -> str:
    """Say under what condition a chance holds."""
    if question.widened and question.target_half_width is not None:
        from fieldplan.sizing.widened_steps import widened_condition

        return widened_condition(question)
    if not question.heavy_tails:
        return NEAR_NORMAL
    return f"with the heavy tails declared (excess kurtosis {question.heavy_tails:g})"


def sentences(
    question: Question, counts: Counts, assured: tuple[AssuredSize, ...]
) -> tuple[str, ...]:
    """Say the answer in words, most important first.

    Parameters
    ----------
    question : Question
    counts : Counts
    assured : tuple of AssuredSize

    Returns
    -------
    tuple of str
    """
    lines = [_answer(question, counts), increments_words(question, counts)]
    lines += _widened(question, counts)
    lines.append(_chance(question, counts, assured))
    lines += [
        expected_precision(question, counts),
        _floor(question, counts),
        _ceiling(question, counts),
        money_words(question, counts),
    ]
    lines += _short_lists(question, counts)
    return tuple(line for line in lines if line)


def _widened(question: Question, counts: Counts) -> list[str]:
    if not question.widened:
        return []
    from fieldplan.sizing.widened_steps import widened_sentences

    return widened_sentences(question, counts)


def _answer(question: Question, counts: Counts) -> str:
    needed, planned = sum(counts.needed), sum(counts.planned)
    taken = question.taken
    where = ""
    if len(question.parts) > 1:
        where = ": " + in_strata(counts.planned, [part.name for part in question.parts])
    if question.census:
        return f"All {planned} units of the list are visited{where}."
    if question.locations is not None:
        return f"The campaign file fixes {counted(planned, taken)}{where}{_left(counts)}."
    if question.target == "budget":
        buys = f"A budget of {_money_words(question, question.value)} buys "
        return f"{buys}{counted(planned, taken)}{where}{_left(counts)}."
    if question.takes_all(counts.needed):
        target = target_words(question)
        return f"All {needed} units of the list are visited{where}: a {target} takes every one."
    if planned == needed:
        return f"{counted(needed, 'result')} are needed for a {target_words(question)}{where}."
    return (
        f"{_go_for(question, planned)}{where}. {counted(needed, 'result')} are needed for "
        f"a {target_words(question)}; {_spare(planned - needed)} for losses."
    )


def visit_words(question: Question, counts: Counts) -> str:
    """Say where the locations lie, and what is added for losses."""
    needed, planned = sum(counts.needed), sum(counts.planned)
    where = ""
    if len(question.parts) > 1:
        where = ": " + in_strata(counts.planned, [part.name for part in question.parts])
    if planned == needed and not where:
        return ""
    spare = "" if planned == needed else f"; {_spare(planned - needed)} for losses"
    return f"{_go_for(question, planned)}{where}{spare}."


def _go_for(question: Question, planned: int) -> str:
    verb = "Visit" if question.taken == "location" else "Take"
    return f"{verb} {counted(planned, question.taken)}"


def increments_words(question: Question, counts: Counts) -> str:
    """Say what a result is where it comes from a composite; empty where it does not."""
    k, planned = question.increments, sum(counts.planned)
    if k == 1:
        return ""
    where = "all round one location" if question.one_place else "each at its own random place"
    return (
        f"Each result comes from one composite of {k} increments, {where}: "
        f"{counted(planned, 'composite')} and {k * planned} increments in all. Increments never "
        f"count as results: n is {sum(counts.needed)}."
    )


def _spare(count: int) -> str:
    return f"{count} more {'allows' if count == 1 else 'allow'}"


def _left(counts: Counts) -> str:
    needed, planned = sum(counts.needed), sum(counts.planned)
    return "" if needed == planned else f"; after losses about {counted(needed, 'result')} remain"


def _chance(question: Question, counts: Counts, assured: tuple[AssuredSize, ...]) -> str:
    """Say how sure the number is; that the plain formula fails often is said every time."""
    if question.takes_all(counts.needed) or counts.plain is None:
        return ""
    plain, needed = sum(counts.plain), sum(counts.needed)
    precision = Precision(question)
    chance = precision.chance(counts.needed)
    if chance is None:
        return _no_chance(question, counts)
    if question.locations is not None:
        own = target_words(replace(question, also=()))
        whose = f" for {question.analyte}" if question.also else ""
        return (
            f"The chance that this meets the target{whose} ({own}) is "
            f"{percent(chance)} {chance_condition(question)}."
        )
    known = sorted({part.results for part in question.parts if part.results is not None})
    behind = " to ".join(str(n) for n in {known[0]: 0, known[-1]: 0}) + " results"
    if len(question.parts) > 1:
        behind += " a stratum"
    condition = chance_condition(question)
    subject = f" for {question.analyte}" if question.also else ""
    opening = f"The chance that {needed} are enough{subject} is {percent(chance)} {condition}"
    if question.also:
        plain_chance = precision.chance(counts.plain) or 0.0
        return (
            f"{opening}, sigma being known from {behind} only; with every sigma at face value "
            f"{plain} would do, enough for {question.analyte} in {percent(plain_chance)}."
        )
    if needed != plain or question.assurance is not None:
        plain_chance = precision.chance(counts.plain) or 0.0
        return (
            f"{opening}, sigma being known from {behind} only; the plain formula ({plain}) would "
            f"be enough in {percent(plain_chance)} of campaigns."
        )
    line = f"{opening}, sigma being known from {behind} only. "
    if not assured:
        return f"{line}Any chance above two in three takes every unit of the list."
    more = listed([str(entry.n) for entry in assured])
    shares = listed([percent(entry.assurance) for entry in assured])
    return f"{line}For a chance of {shares} it takes {more}."


def _face_value(question: Question, counts: Counts) -> str:
    """Say how a plain number does where sigma is exactly right, and where it is not."""
    if question.target_half_width is None or question.widened:
        return (
            "the plain formula takes sigma as exactly right, and falls short where the true one is "
            "larger"
        )
    kept = Precision(question).chance(counts.needed, sigma_known=True) or 0.0
    return (
        f"with sigma exactly right {percent(kept)} of campaigns keep the half-width, with a larger "
        "one fewer"
    )


def _no_chance(question: Question, counts: Counts) -> str:
    line = (
        "Nobody said how many results stand behind sigma, so no chance can be given that this is "
        f"enough: {_face_value(question, counts)}."
    )
    if question.assurance is None or question.locations is not None:
        return line
    if question.target_half_width is None:
        return (
            f"{line} The assurance of {typed_percent(question.assurance)} has nothing to hold "
            "to; give from_results beside sigma, or a pilot."
        )
    return (
        f"{line} The {sum(counts.needed)} results keep the half-width in "
        f"{typed_percent(question.assurance)} of campaigns only if sigma is exactly right; the "
        f"plain formula asks for {sum(counts.plain or ())}."
    )


def expected_precision(question: Question, counts: Counts) -> str:
    """Say what standard error and interval these counts buy, if sigma is right."""
    if question.takes_all(counts.needed):
        return "With every unit taken, the mean of the list has no error from choosing units."
    precision = Precision(question)
    error = with_unit(figure(precision.standard_error(counts.needed)), question.unit)
    reach = with_unit(figure(precision.half_width(counts.needed)), question.unit)
    share = typed_percent(question.confidence)
    if question.interval == "two-sided" and question.widened:
        from fieldplan.sizing.widened_steps import expected_words

        width = expected_words(question, precision.half_width(counts.needed))
    elif question.interval == "two-sided":
        width = f"a {share} interval of ±{reach}"
    else:
        side = "above" if question.interval == "upper-limit" else "below"
        width = f"a {share} {question.interval.replace('-', ' ')} {reach} {side} the mean"
    whose = f" for {question.analyte}" if question.also else ""
    line = f"If sigma is right, expect{whose} a standard error of {error} and {width}."
    if question.locations is not None and counts.plain is not None:
        line += _would_take(question, counts.plain)
    return line


def _would_take(question: Question, plain: tuple[int, ...]) -> str:
    """Say what the target would take where locations are typed."""
    line = f" The target ({target_words(question)}) would take {sum(plain)} results"
    assured = assured_counts(question, question.assurance)
    if assured is None or question.assurance is None:
        return f"{line} by the plain formula."
    share = typed_percent(question.assurance)
    return f"{line} by the plain formula, and {sum(assured)} at the assurance of {share}."


def _floor(question: Question, counts: Counts) -> str:
    """Say what the floor costs, where it decided the number."""
    if question.takes_all(counts.needed) or question.floor <= 2 or counts.plain is None:
        return ""
    if question.locations is not None or question.target == "budget":
        return ""
    free = replace(question, floor=2)
    without = sum(needed_counts(free))
    extra = sum(counts.needed) - without
    if extra <= 0:
        return ""
    return f"The floor of {question.floor} in every stratum costs {extra} more than {without}."


def _ceiling(question: Question, counts: Counts) -> str:
    """Say which strata are held at their most, and what that costs."""
    held = [
        f"{part.name} at {part.most}"
        for part, planned in zip(question.parts, counts.planned, strict=True)
        if part.most is not None and planned >= part.most
    ]
    if not held or question.census or question.locations is not None:
        return ""
    line = f"[design.most] holds {listed(held)} locations"
    if question.target == "budget":
        return f"{line}."

    def free(one: Question) -> Question:
        return replace(one, parts=tuple(replace(part, most=None) for part in one.parts))

    without = sum(
        needed_counts(replace(free(question), also=tuple(free(o) for o in question.also)))
    )
    extra = sum(counts.needed) - without
    return f"{line}; without it {without} results would do." if extra > 0 else ""


def _money_words(question: Question, amount: float) -> str:
    currency = question.prices.currency if question.prices else ""
    return f"{amount:.0f} {currency}" if amount == round(amount) else f"{amount:.2f} {currency}"


def money_words(question: Question, counts: Counts) -> str:
    """Say what the campaign costs; empty without prices."""
    cost = total_cost(question, counts.planned)
    if cost is None:
        return ""
    included = f"control samples{targeted_words(question, ' and ')} included"
    days = (
        question.prices.crew_days(sum(counts.planned) + question.targeted) if question.prices else 0
    )
    included += f"; {counted(days, 'crew-day')}" if days else ""
    line = f"Expected cost: {_money_words(question, cost)}, {included}."
    if question.target == "budget" and question.locations is not None:
        side = "within" if cost <= question.value else "above"
        line += f" That is {side} the budget of {_money_words(question, question.value)}."
    return line


def _short_lists(question: Question, counts: Counts) -> list[str]:
    """Say where a list is too short for its loss allowance."""
    lines = []
    for results, visits, part in zip(counts.needed, counts.planned, question.parts, strict=True):
        asked = results / (1 - part.loss)
        if part.population == visits and asked > visits + 1e-9 and not question.census:
            lines.append(
                f"{part.name} has only {visits} units: all are visited, and a loss of "
                f"{typed_percent(part.loss)} would leave fewer than the {results} results needed."
            )
    return lines
