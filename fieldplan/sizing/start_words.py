"""What even spacing along lines makes of the number and the interval: said, not reckoned away."""

import math

from fieldplan.sizing.question import Question


def start_condition(question: Question, needed: tuple[int, ...]) -> str:
    """Say how wide the interval may come out, its variance being that between starts.

    Parameters
    ----------
    question : Question
        With ``starts`` of at least 1.
    needed : tuple of int
        Results by stratum.

    Returns
    -------
    str
    """
    if question.starts == 1:
        return (
            "Even spacing is sized as random places and its interval computed as such: the spacing "
            "gets no credit, and the interval is usually too wide."
        )
    times = width_between_starts(question, needed)
    said = (
        f"Even spacing is sized as random places, and its interval will come from how "
        f"{question.starts} starts differ"
    )
    if not math.isfinite(times):
        return f"{said}."
    return (
        f"{said}. Where the spacing brings nothing, that makes it about {times:.2g} times as wide "
        f"as said here, since {question.starts} starts leave few degrees of freedom; where results "
        "change slowly along the line it comes out narrower. No chance above counts this in."
    )


def width_between_starts(question: Question, needed: tuple[int, ...]) -> float:
    """Give the quantile of the planned interval between starts over that of random places.

    Notes
    -----
    Degrees of freedom by Satterthwaite from the parts W²σ²/n, with k − 1 a stratum and with n − 1.
    """
    from fieldplan.stats.intervals import t_quantile
    from fieldplan.stats.random_starts import freedom_of_parts

    known = [part.sigma for part in question.parts]
    if not any(known) or any(n < 2 for n in needed):
        return math.inf
    parts = [(p.weight * p.sigma) ** 2 / n for p, n in zip(question.parts, needed, strict=True)]
    between = freedom_of_parts(parts, [min(question.starts, n) - 1 for n in needed])
    random = freedom_of_parts(parts, [n - 1 for n in needed])
    ends = [
        t_quantile(df, confidence=question.confidence, kind=question.interval)
        for df in (between, random)
    ]
    return float(ends[0] / ends[1])
