"""Under what condition the number holds: never a bare "n is enough"."""

from fieldplan.sizing.lean import lean_sentences
from fieldplan.sizing.question import Question
from fieldplan.sizing.words import counted, named

NEAR_NORMAL = (
    "Chances take single results as near normal; with skewed ones they are lower. In simulated "
    "campaigns a stated 80 % was 58 to 71 % in truth for gamma populations with a coefficient of "
    "variation of 1 (skewness 2), and 42 to 66 % for lognormal ones (skewness 4)."
)
"""Measured by simulation; docs/methods.md has the figures by target."""

WIDENED_CHANCES = (
    "Chances take the pilot's s to err as that of near normal results does; with skewed ones they "
    "are lower. In simulated campaigns a stated 80 % was 84 to 90 % in truth for gamma populations "
    "with a coefficient of variation of 0.5 and 1, and 65 to 73 % for lognormal ones."
)
"""Measured by tests/evidence/widened_assurance.py; docs/evidence/intervals.md has the table."""

FEW = 5
"""Pilots of fewer results a stratum are named where the allocation follows them."""

FOLLOWED = {"neyman": "Neyman", "cost-optimal": "cost-optimal"}
"""Allocations whose chance is too high for small pilots; that of equal precision is too low."""


def conditions(question: Question, needed: tuple[int, ...]) -> tuple[str, ...]:
    """Say under what condition the interval and the number may be trusted.

    Parameters
    ----------
    question : Question
    needed : tuple of int
        Results by stratum.

    Returns
    -------
    tuple of str
        Sentences.
    """
    if question.takes_all(needed):
        return (
            "Every unit is visited, so there is no error from choosing places; error in time and "
            "from the laboratory remains and is not in these numbers.",
            *question.notes,
        )
    lines = [_origin(question)] if _origin(question) else []
    if question.widened:
        from fieldplan.sizing.widened_steps import widened_conditions

        lines += widened_conditions(question, needed)
    else:
        lines += [_common_practice(sum(needed)), *lean_sentences(question, needed)]
    if question.grid:
        lines.append(
            "The grid is sized as simple random and its interval computed as such: the grid gets "
            "no credit, and the interval is usually too wide."
        )
    if question.starts:
        from fieldplan.sizing.start_words import start_condition

        lines.append(start_condition(question, needed))
    if question.cells:
        lines.append(
            "A spread layout is sized as random places, without credit; the interval will take "
            "the credit that the results show. With 20 pilot results or more whose places are "
            "known, --more space says how many locations that would save."
        )
    chances = question.assurance is not None or question.pilots is not None
    if chances and question.target != "budget":
        lines += [_tails(question), *_few(question)]
    return (*lines, *question.notes)


def _tails(question: Question) -> str:
    """Say how the chances take the shape of single results."""
    if question.widened and question.target_half_width is not None:
        return WIDENED_CHANCES
    if not question.heavy_tails:
        return NEAR_NORMAL
    return (
        f"Chances take tails as heavy as declared, an excess kurtosis of {question.heavy_tails:g}, "
        "through fewer degrees of freedom; a tail heavier than declared makes them lower."
    )


def _few(question: Question) -> list[str]:
    """Say where a pilot is too small for the factor on counts that follow it."""
    if question.allocation not in FOLLOWED or len(question.parts) == 1 or question.pilots is None:
        return []
    few = [part for part in question.parts if (part.results or FEW) < FEW]
    if not few:
        return []
    where = named([f"{part.name} ({part.results})" for part in few])
    followed = FOLLOWED[question.allocation]
    return [
        f"Fewer than {FEW} results stand behind sigma in {where}, and {followed} allocation "
        "follows them: simulated pilots of 3 or 4 near normal results a stratum kept a stated 80 % "
        "in 72 to 80 % of campaigns."
    ]


def _origin(question: Question) -> str:
    """Say where no chance can be given."""
    unknown = [part.name for part in question.parts if part.results is None]
    if not unknown:
        return ""
    where = "" if len(question.parts) == 1 else f" in {named(unknown)}"
    assumed = any(part.assumed for part in question.parts)
    what = "was ASSUMED" if assumed else "was typed without the number of results behind it"
    return (
        f"Sigma{where} {what}, so no chance can be given that the number is enough. The "
        "plain formula takes sigma as exactly right; it falls short where the true one is larger."
    )


def _common_practice(needed: int) -> str:
    return (
        f"A t interval from {counted(needed, 'result')} takes the mean as near normal. 30 or more "
        "is common practice for data that are not normal (no source); simulated, 30 serve a "
        "two-sided 95 % interval up to a skewness of about 1, a limit up to about 0.5; a normal "
        "population needs no minimum."
    )
