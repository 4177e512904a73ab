"""Under what condition the number holds: never a bare "n is enough"."""

from fieldplan.sizing.question import Part, Question
from fieldplan.sizing.words import counted, figure, listed, percent, typed_percent
from fieldplan.stats.shape import n_for_one_sided, n_for_two_sided, t_coverage
from fieldplan.stats.summary import skewness_ceiling

LITTLE = 0.5
"""A skewness below this is called little: its rule would ask for a handful of results."""

RULE = (
    "For skewed data a two-sided 95 % interval needs n above 25·G1², with G1 the skewness of the "
    "population (Cochran 1977); an upper limit alone needs several times that, about 121·G1². At "
    "a skewness of 2 that is 100 and 484."
)


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
    if question.census:
        return (
            "Every unit is visited, so there is no error from choosing places; error in time and "
            "from the laboratory remains and is not in these numbers.",
            *question.notes,
        )
    lines = [_origin(question)] if _origin(question) else []
    lines += [_common_practice(sum(needed)), *_lean(question, needed)]
    if question.grid:
        lines.append(
            "The grid is sized as simple random and its interval computed as such: the grid gets "
            "no credit, and the interval is usually too wide."
        )
    if question.assurance is not None or question.pilots is not None:
        lines.append(
            "Chances take single results as near normal; with skewed results they are lower than "
            "stated."
        )
    return (*lines, *question.notes)


def _origin(question: Question) -> str:
    """Say where no chance can be given."""
    unknown = [part.name for part in question.parts if part.results is None]
    if not unknown:
        return ""
    where = "" if len(question.parts) == 1 else f" in {listed(unknown)}"
    assumed = any(part.assumed for part in question.parts)
    what = "was ASSUMED" if assumed else "was typed without the number of results behind it"
    return (
        f"Sigma{where} {what}, so no chance can be given that the number is enough. With a "
        "measured sigma the plain formula is enough in only about half of campaigns."
    )


def _common_practice(needed: int) -> str:
    return (
        f"A t interval from {counted(needed, 'result')} takes the mean as near normal. 30 or more "
        "is common practice for data that are not normal (no source); a normal population needs "
        "no minimum."
    )


def _lean(question: Question, needed: tuple[int, ...]) -> list[str]:
    """Say what skewness asks for: by the pilot where there is one, else as a rule."""
    known = [part for part in question.parts if part.skewness is not None]
    if not known:
        return [RULE]
    worst = max(known, key=lambda part: abs(part.skewness or 0.0))
    lean = worst.skewness or 0.0
    where = "" if len(question.parts) == 1 else f" in {worst.name}"
    shown = figure(lean, 2).replace("-", "−")
    if abs(lean) < LITTLE:
        little = f"The results behind sigma show little skewness{where} (G1 = {shown})."
        return [little, *_ceiling(worst), RULE]
    lines = [
        f"At a skewness G1 of {shown}{where} a two-sided 95 % interval needs about "
        f"{n_for_two_sided(lean)} results (n > 25·G1², Cochran 1977); an upper limit alone needs "
        f"several times that, about {n_for_one_sided(lean)}."
    ]
    lines += _ceiling(worst)
    if len(question.parts) == 1 and question.confidence <= 0.99:
        n = max(2, needed[0])
        share = t_coverage(n, lean, confidence=question.confidence, kind=question.interval)
        name = "interval" if question.interval == "two-sided" else question.interval
        lines.append(
            f"At that skewness a nominal {typed_percent(question.confidence)} "
            f"{name.replace('-', ' ')} from {n} results holds the true mean in about "
            f"{percent(share)} of campaigns."
        )
    return lines


def _ceiling(part: Part) -> list[str]:
    if part.results is None or not part.pilot:
        return []
    return [
        f"{part.results} results can show a skewness of {figure(skewness_ceiling(part.results))} "
        "at most, and usually show less than the population has: a small pilot never proves "
        "symmetry."
    ]
