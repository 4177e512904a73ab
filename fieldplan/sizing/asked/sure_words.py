"""How sure a number is, sigma being an estimate: said every time, in one sentence."""

from fieldplan.sizing.question import Question
from fieldplan.sizing.sentences import chance_condition
from fieldplan.sizing.words import percent


def shape_words(question: Question) -> str:
    """Say of what single results the chance holds: near normal ones, or with the tails declared."""
    return (
        chance_condition(question) if question.heavy_tails else "if single results are near normal"
    )


def sure_words(question: Question, chance: float | None, more: str = "") -> str:
    """Say the chance that numbers are enough, and what stands behind it.

    Parameters
    ----------
    question : Question
    chance : float or None
        None where nobody said how many results stand behind sigma.
    more : str
        What follows, such as the numbers for other chances; without its full stop.

    Examples
    --------
    >>> from fieldplan.sizing.question import Part
    >>> asked = Question((Part("site", 1.0, 20.0, results=8),), "standard_error", 1.0)
    >>> print(sure_words(asked, 0.46).split(" if ")[0])
    The chance that these are enough is 46 %
    """
    if chance is None:
        return (
            "Nobody said how many results stand behind sigma, so no chance can be given that these "
            "are enough; they are if the true sigma is no larger."
        )
    known = sorted({part.results for part in question.parts if part.results is not None})
    behind = f"{known[0]}" if known[0] == known[-1] else f"{known[0]} to {known[-1]}"
    each = " a stratum" if len(question.parts) > 1 else ""
    line = (
        f"The chance that these are enough is {percent(chance)} {shape_words(question)}, sigma "
        f"being known from {behind} results{each} only"
    )
    return f"{line}; {more}." if more else f"{line}."
