"""What skewness asks for, set against the results that are planned."""

import math
from collections.abc import Sequence

from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Part, Question
from fieldplan.sizing.words import figure, listed, named, percent, typed, typed_percent
from fieldplan.stats.shape import (
    n_for_one_sided,
    n_for_two_sided,
    skewness_of_mean,
    t_coverage,
)
from fieldplan.stats.summary import skewness_ceiling

LITTLE = 0.5
"""A skewness below this is called little: its rule would ask for a handful of results."""

SHOWN = (2.0, 4.0)
"""Skewness for which the coverage is said whatever the results behind sigma show."""

LARGE = 10
"""A list of so many times the results is taken as a large population."""

RULE = (
    "For skewed data a two-sided 95 % interval needs n above 25·G1², with G1 the skewness of the "
    "population (Cochran 1977). A limit alone needs several times that, about 121·G1², where it "
    "lies on the side of the long tail: an upper limit at a skewness above 0, a lower one below. "
    "At a skewness of 2 that is 100 and 484."
)


def lean_sentences(question: Question, needed: tuple[int, ...]) -> list[str]:
    """Say what skewness asks for: by the results behind sigma where it can be, else as a rule.

    Parameters
    ----------
    question : Question
    needed : tuple of int
        Results by stratum.

    Returns
    -------
    list of str
    """
    n, lean = equivalent_sample(question, needed)
    held = [*_held(question, n, lean), *_short_list(question, needed)]
    known = [part for part in question.parts if part.skewness is not None]
    if lean is None:
        where = f"Skewness is known in {named([p.name for p in known])} only. " if known else ""
        return [where + RULE, *held]
    lines = [_together(question, n, lean)] if len(question.parts) > 1 else []
    if abs(lean) < LITTLE:
        little = f"The results behind sigma show little skewness (G1 = {_signed(lean)})."
        lines += [little, *_ceiling(known), RULE]
    else:
        lines += [_asked(n, lean), *_ceiling(known)]
    return [*lines, *held]


def equivalent_sample(question: Question, needed: Sequence[int]) -> tuple[int, float | None]:
    """Give the single sample whose mean leans as the planned one does.

    Parameters
    ----------
    question : Question
    needed : sequence of int
        Results by stratum.

    Returns
    -------
    n : int
        Results; for strata their degrees of freedom + 1, rounded.
    skewness : float or None
        For strata the skewness of the weighted mean, times √n; None where a stratum's is unknown.

    Notes
    -----
    To first order the studentised mean leans with the skewness of the mean alone, in strata as in
    one sample (Hall 1992, The Bootstrap and Edgeworth Expansion, sec. 2.6): there its covariance
    with the estimated variance is Σ W³ κ3/n² as well, κ3 a stratum's third cumulant.
    """
    parts = question.parts
    if len(parts) == 1:
        return max(2, needed[0]), parts[0].skewness
    known = Precision(question).degrees_of_freedom(needed)
    n = sum(needed) if math.isinf(known) else max(2, round(known + 1))
    leans = [part.skewness for part in parts if part.skewness is not None]
    if len(leans) < len(parts):
        return n, None
    of_mean = skewness_of_mean(
        [part.weight for part in parts], [part.sigma for part in parts], leans, counts=needed
    )
    return n, of_mean * math.sqrt(n)


def _together(question: Question, n: int, lean: float) -> str:
    own = named([f"{_signed(part.skewness or 0.0)} in {part.name}" for part in question.parts])
    return (
        f"The interval belongs to the weighted mean. It leans like that of one sample of {n} "
        f"results (degrees of freedom + 1) with a skewness G1 of {_signed(lean)}: the strata's own "
        f"are {own}, weighed as Σ W³·s³·G1/n² over SE³, times √{n}."
    )


def _asked(n: int, lean: float) -> str:
    """Set what a skewness asks for against n, and say which limit it harms."""
    short, careful = ("upper", "lower") if lean > 0 else ("lower", "upper")
    return (
        f"At a skewness G1 of {_signed(lean)} a two-sided 95 % interval needs about "
        f"{n_for_two_sided(lean)} results (n > 25·G1², Cochran 1977), against {n} here; "
        f"{_limit(short)} limit alone needs several times that, about {n_for_one_sided(lean)}, "
        f"while {_limit(careful)} limit errs on the careful side."
    )


def _limit(side: str) -> str:
    return f"{'an' if side == 'upper' else 'a'} {side}"


def _held(question: Question, n: int, lean: float | None) -> list[str]:
    """Say how often the interval holds the mean, at the lean of the pilot and at larger ones."""
    if question.confidence > 0.99:
        return []

    def share(skewness: float) -> str:
        kind, confidence = question.interval, question.confidence
        return percent(t_coverage(n, skewness, confidence=confidence, kind=kind))

    name = "interval" if question.interval == "two-sided" else question.interval.replace("-", " ")
    listed_units = any(part.population is not None for part in question.parts)
    large = " of a large population" if listed_units else ""
    shown = [f"{share(value)} at {typed(value)}" for value in SHOWN]
    if lean is not None and abs(lean) >= LITTLE:
        shown.insert(0, f"{share(lean)} at {_signed(lean)}")
    return [
        f"The share of campaigns in which a nominal {typed_percent(question.confidence)} {name} "
        f"from {n} results{large} holds the true mean depends on the skewness: about "
        f"{listed(shown)}."
    ]


def _short_list(question: Question, needed: Sequence[int]) -> list[str]:
    """Say what one unit far from all others does to the interval of a list.

    Where the other units are alike, an interval without that unit is a point beside the true mean.
    """
    pairs = [
        (results, part.population)
        for results, part in zip(needed, question.parts, strict=True)
        if part.population is not None and results < part.population < LARGE * results
    ]
    if not pairs:
        return []
    results, units = min(pairs, key=lambda pair: pair[0] / pair[1])
    side = {"upper-limit": "above", "lower-limit": "below"}.get(question.interval, "from")
    held = "limit" if question.interval != "two-sided" else "interval"
    return [
        f"A list can do worse: where one unit lies far {side} all others and those are alike, the "
        f"{held} holds the true mean only if that unit is drawn, in {percent(results / units)} of "
        f"campaigns ({results} of {units} units), whatever it claims."
    ]


def _signed(value: float) -> str:
    return figure(round(value, 9) + 0.0, 2).replace("-", "−")  # symmetric results err by 1e-16


def _ceiling(known: Sequence[Part]) -> list[str]:
    """Say what the smallest pilot could have shown at most."""
    counted = [part for part in known if part.results is not None and part.pilot]
    if not counted:
        return []
    least = min(part.results or 0 for part in counted)
    return [
        f"{least} results can show a skewness of {figure(skewness_ceiling(least))} at most, and "
        "usually show less than the population has: a small pilot never proves symmetry."
    ]
