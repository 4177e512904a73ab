"""Sizing for the interval that the rules fix for skewed results, over shapes that fit the pilot."""

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.stats.allocation import check_total
from fieldplan.stats.assurance import chance_of_variance
from fieldplan.stats.precision import meets, smallest
from fieldplan.stats.skew_interval import FEWEST, MOST_VARIATION, PopulationClass

if TYPE_CHECKING:
    from fieldplan.sizing.precision import Precision
    from fieldplan.sizing.question import Question
    from fieldplan.stats.mean_shape import Shape
    from fieldplan.stats.widened_reach import Promise, Reach

LARGE = 10
"""A list of so many units for each result is taken for a large population (house rule)."""


def class_of(question: "Question") -> PopulationClass:
    """Give the class that the rules declare; ``question.widened`` must hold."""
    if question.promised_class is None:
        message = "the skew-widened interval needs promised_class in [rules]."
        raise DesignError(message)
    return question.promised_class


def promise_of(question: "Question") -> "Promise":
    """Give class, confidence and kind of the interval."""
    from fieldplan.stats.widened_reach import Promise

    return Promise(class_of(question), question.confidence, question.interval)


def coefficient(question: "Question") -> float:
    """Give the coefficient of variation to expect, on which the interval depends.

    Raises
    ------
    DesignError
        Nobody said what mean to expect.
    """
    part = question.parts[0]
    mean = part.mean or question.mean or 0.0
    if not mean > 0:
        message = (
            "the skew-widened interval depends on the coefficient of variation, and no mean above "
            "0 is known; write expected_mean in the [[sigma]] table, or name a pilot file there."
        )
        raise DesignError(message)
    return part.sigma / mean


def shapes_of(question: "Question") -> "tuple[Shape, ...]":
    """List the shapes that fit: gamma and lognormal; with zeros too where pilot and class have.

    Raises
    ------
    DesignError
        Strata, or no mean to expect.
    """
    from fieldplan.stats.mean_shape import fitting_shapes

    if len(question.parts) > 1:
        message = (
            "mean_interval = skew-widened was simulated for independent results of one "
            "population; for strata there is no evidence. Use student-t."
        )
        raise DesignError(message)
    allowed = 0.5 if class_of(question) == "cv-up-to-2" else 0.0
    zeros = min(question.parts[0].zeros, allowed)
    return fitting_shapes(coefficient(question), zeros=zeros)


def widest(question: "Question", n: int) -> "tuple[Shape, Reach]":
    """Give the shape whose interval is expected to reach farthest, with its reach."""
    from fieldplan.stats.widened_reach import widened_reach

    promise = promise_of(question)
    pairs = [(shape, widened_reach(shape, n, promise)) for shape in shapes_of(question)]
    return max(pairs, key=lambda pair: pair[1].mean)


def expected_half_width(precision: "Precision", counts: Sequence[float]) -> float:
    """Give the expected distance from the mean to the end, of two ends half their distance.

    Parameters
    ----------
    precision : Precision
    counts : sequence of float
        Of the one population.

    Returns
    -------
    float
        By the shape whose interval reaches farthest.
    """
    error = precision.standard_error(counts)
    return error * widest(precision.question, int(counts[0]))[1].mean


def chance_of_reach(
    precision: "Precision", counts: Sequence[float], wanted: float, *, pilot: float
) -> float:
    """Give the chance that the half-width to come is within what is wanted.

    Parameters
    ----------
    precision : Precision
    counts : sequence of float
    wanted : float
        The half-width.
    pilot : float
        Degrees of freedom behind sigma; infinite where it is exactly right.

    Returns
    -------
    float
        Under the shape that has the lowest.

    Notes
    -----
    A reach R of n results in standard errors of the true σ keeps the target where σ² ≤ n h²/R².
    The true σ² lies about the pilot's s² as df s²/χ²; the chance is averaged over the simulated
    reaches of the shape (derived here; the shape itself is taken as known).
    """
    from fieldplan.stats.widened_reach import widened_reach

    variance, promise = precision.variance(counts), promise_of(precision.question)
    chances = []
    for shape in shapes_of(precision.question):
        ranked = widened_reach(shape, int(counts[0]), promise).ranked
        kept = [_kept(variance, wanted / reach, pilot) for reach in ranked]
        chances.append(math.fsum(kept) / len(kept))
    return min(chances)


def _kept(variance: float, error: float, pilot: float) -> float:
    if error == 0:
        return 0.0
    if math.isinf(pilot):
        return float(meets(math.sqrt(variance), error))
    return chance_of_variance(variance, error**2, pilot)


def widened_counts(question: "Question") -> list[int]:
    """Count the results whose expected half-width meets the target; never fewer than the class has.

    Raises
    ------
    DesignError
        Not even the largest number meets it, or a list is too short for the class.
    """
    from fieldplan.sizing.precision import Precision

    shapes_of(question)
    precision, wanted = Precision(question), question.target_half_width or 0.0
    most = question.strata.most
    least = max(FEWEST[class_of(question)], sum(question.strata.floors))
    check_total(question.strata, least)
    n = smallest(lambda total: meets(precision.half_width([total]), wanted), least, most, back=0)
    if not meets(precision.half_width([n]), wanted):
        message = (
            f"the target asks for more than {n} results; allow a larger error, or look at the "
            "standard deviation again."
        )
        raise DesignError(message)
    return [n]


def by_student(question: "Question") -> "Question":
    """Ask the same of Student's t."""
    return replace(question, mean_interval="student-t", promised_class=None)


def refuse_short_list(question: "Question", counts: Sequence[int]) -> None:
    """Refuse a list of which the results are more than a tenth; a list taken whole passes.

    Raises
    ------
    DesignError
        Coverage is simulated for large populations only.
    """
    if not question.widened:
        return
    population, n = question.total_population, sum(counts)
    if population is not None and n < population < LARGE * n:
        message = (
            f"mean_interval = skew-widened was simulated for large populations, and {n} of "
            f"{population} units is more than a tenth of the list. Use student-t."
        )
        raise DesignError(message)


def outside_class(question: "Question") -> str:
    """Say where sigma and mean lie outside the declared class; empty where they do not."""
    name, cv = class_of(question), coefficient(question)
    end, zeros = MOST_VARIATION[name], question.parts[0].zeros
    found = []
    if cv > end:
        found.append(f"a coefficient of variation of {cv:.2g}, and the class ends at {end:g}")
    if name == "cv-up-to-1" and zeros:
        found.append(
            f"{100 * zeros:.0f} % zeros or non-detects, and the class has no zeros (non-detects "
            "may be none)"
        )
    elif zeros > 0.5:
        found.append(f"{100 * zeros:.0f} % zeros or non-detects, and the class has half at most")
    if not found:
        return ""
    return f"What is known lies outside {name}: {'; '.join(found)}. Declare another class or none."
