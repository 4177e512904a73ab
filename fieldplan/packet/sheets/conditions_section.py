"""Under what condition the number holds: in a few lines on the sheet, in full in the working."""

import re
from collections.abc import Sequence

from fieldplan.packet.sheets.amounts import percent, rounded
from fieldplan.packet.sheets.plan_words import every_unit
from fieldplan.plan.model import Plan

ROOM = 340
"""Characters of three printed lines; the fourth says where all conditions stand."""


_SENTENCE_END = re.compile(r"(?<!\bsec)(?<!\bsecs)(?<!\bch)(?<!\bed)\.\s+(?=[A-Z0-9])")


def condition_lines(plan: Plan) -> tuple[str, ...]:
    """List every condition, what was declared among them."""
    return (*plan.size.conditions, *declared_lines(plan))


def shortened(conditions: Sequence[str], declared: Sequence[str] = ()) -> str:
    """Put conditions into three printed lines: all of them, or how the weightiest open.

    Parameters
    ----------
    conditions : sequence of str
        The first says what the interval takes for granted; later ones concern this campaign
        more closely than those before them.
    declared : sequence of str
        What somebody declared; it comes second.

    Examples
    --------
    >>> shortened(["The mean is near normal. 30 is common.", "The pilot is small."])
    'The mean is near normal. 30 is common. The pilot is small.'
    >>> shortened([])
    ''
    """
    every = [*conditions, *declared]
    if len(whole := " ".join(every)) <= ROOM:
        return whole
    kept: list[str] = []
    for line in dict.fromkeys([*conditions[:1], *declared, *reversed(conditions[1:])]):
        opening = _SENTENCE_END.split(line)[0].removesuffix(".") + "."
        if len(" ".join([*kept, opening])) <= ROOM:
            kept.append(opening)
    return " ".join(kept)


def declared_lines(plan: Plan) -> list[str]:
    """Say which class the confidence was declared for, and what t holds at the end of it."""
    from fieldplan.estimate.coverage import declared_skewness
    from fieldplan.sizing.asking import asked_of
    from fieldplan.sizing.lean import equivalent_sample
    from fieldplan.stats.shape import t_coverage

    rules = plan.campaign.rules
    if not rules.promised_for or every_unit(plan):
        return []
    line = f"The {percent(rules.confidence)} is declared for {rules.promised_for.rstrip('. ')}"
    end = declared_skewness(rules.promised_for)
    if end is None or rules.confidence > 0.99 or rules.mean_interval != "student-t":
        return [f"{line}. Nothing here shows that the population belongs to that class."]
    asked = asked_of(plan.campaign, plan.spread, plan.frame)
    if not asked.sigma_known:
        return [f"{line}."]
    n, lean = equivalent_sample(asked.question, [entry.needed for entry in plan.size.strata])
    held = t_coverage(n, end, confidence=rules.confidence, kind=rules.interval)
    large = " of a large population" if plan.frame.kind == "list" else ""
    line += (
        f". At a skewness of {end:g}, which ends that class, t from {n} results{large} holds the "
        f"true mean in about {100 * held:.0f} % of campaigns."
    )
    if lean is not None and abs(lean) > end:
        line += f" The results behind sigma lie outside it: their skewness is {rounded(lean)}."
    return [line]
