"""The working: numbered steps, each with all numbers it uses, before and after rounding."""

import math
from collections.abc import Iterator

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.chance_steps import chance_steps
from fieldplan.sizing.closing_steps import COCHRAN, closing_steps
from fieldplan.sizing.counting import Counts
from fieldplan.sizing.quantities import corrected_for_list, sigma_quantity, target_quantity
from fieldplan.sizing.question import Question
from fieldplan.sizing.strata_steps import strata_steps
from fieldplan.sizing.widened_steps import widened_n_steps
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.precision import (
    unrounded_for_half_width,
    unrounded_for_list,
    unrounded_for_standard_error,
    whole,
)


def steps(question: Question, counts: Counts) -> tuple[Step, ...]:
    """Write out the working of a question's counts.

    Parameters
    ----------
    question : Question
    counts : Counts

    Returns
    -------
    tuple of Step
        In the order of the arithmetic.
    """
    working: list[Step] = []
    if counts.plain is not None and not question.census:
        if question.target == "relative_half_width":
            working += _absolute(question)
        if len(question.parts) == 1 and not question.also:
            working += _single(question, counts.plain[0])
        else:
            working += strata_steps(question, counts.plain)
        working += chance_steps(question, counts)
    return (*working, *closing_steps(question, counts))


def _absolute(question: Question) -> Iterator[Step]:
    """Show where the expected mean comes from, and the half-width that is its share."""
    width, mean = question.target_half_width or 0.0, question.mean or 0.0
    behind = [part for part in question.parts if part.mean is not None]
    if len(behind) == len(question.parts) > 1:
        yield _weighted_mean(question, mean)
    single = question.parts[0].mean_from if len(question.parts) == 1 else ""
    origin = f" ({single})" if single else ""
    yield Step(
        symbol="h",
        meaning="Half-width as a share of the expected mean",
        formula="h = r · mean",
        inputs=(
            Quantity("r", "relative half-width", question.value),
            Quantity("mean", f"expected mean{origin}", mean, question.unit),
        ),
        unrounded=width,
        rounded=width,
        unit=question.unit,
        source="definition",
    )


def _weighted_mean(question: Question, mean: float) -> Step:
    inputs = []
    for part in question.parts:
        inputs += [
            Quantity(f"W({part.name})", "share of the population", part.weight),
            Quantity(f"mean({part.name})", part.mean_from, part.mean or 0.0, question.unit),
        ]
    return Step(
        symbol="mean",
        meaning="Mean to expect",
        formula="mean = Σ W · mean of each stratum",
        inputs=tuple(inputs),
        unrounded=mean,
        rounded=mean,
        unit=question.unit,
        source="definition",
    )


def _single(question: Question, plain: int) -> Iterator[Step]:
    """Show one population: first pass, list, t, floor."""
    size = question.parts[0].population
    first = _first_pass(question)
    yield first
    if size is not None:
        yield _listed(first.unrounded, size)
    if question.target_half_width is not None and question.widened:
        yield from widened_n_steps(question, plain)
    elif question.target_half_width is not None:
        yield _iterated(question, plain)
    elif plain > whole(corrected_for_list(question, first.unrounded)):
        yield _floored(question, plain)


def _first_pass(question: Question) -> Step:
    sigma = question.parts[0].sigma
    formula = "n0 = (s / SE)²"
    inputs: tuple[Quantity, ...] = (sigma_quantity(question), target_quantity(question))
    if question.target_half_width is None:
        first = unrounded_for_standard_error(sigma, question.value)
    else:
        confidence, kind = question.confidence, question.interval
        first = unrounded_for_half_width(
            sigma, question.target_half_width, confidence=confidence, kind=kind
        )
        z = t_quantile(math.inf, confidence=confidence, kind=kind)
        formula = "n0 = (z · s / h)²"
        inputs = (Quantity("z", f"normal quantile, {kind}, {confidence:g}", z), *inputs)
    return Step(
        symbol="n0",
        meaning="Results needed with sigma at face value, first pass",
        formula=formula,
        inputs=inputs,
        unrounded=first,
        rounded=float(whole(first)),
        unit="results",
        source=f"{COCHRAN}, sec. 4.6",
    )


def _listed(first: float, size: int) -> Step:
    corrected = unrounded_for_list(first, size)
    return Step(
        symbol="n",
        meaning="The same for a list of N units",
        formula="n = n0 / (1 + n0 / N)",
        inputs=(
            Quantity("n0", "results needed from an endless population, unrounded", first),
            Quantity("N", "units in the list", size, "units"),
        ),
        unrounded=corrected,
        rounded=float(min(whole(corrected), size)),
        unit="results",
        source=f"{COCHRAN}, sec. 4.6",
    )


def _iterated(question: Question, plain: int) -> Step:
    """Show the t iteration at its end: the last n that is too small would fail the same line."""
    part, width = question.parts[0], question.target_half_width or 0.0
    inputs = [sigma_quantity(question), target_quantity(question)]
    if plain == part.population:
        value, formula = float(plain), "n = N: every unit is visited"
    else:
        t = t_quantile(plain - 1, confidence=question.confidence, kind=question.interval)
        value = (t * part.sigma / width) ** 2
        formula = "smallest n that is at least (t · s / h)² with t at n − 1 degrees of freedom"
        if part.population is not None:
            value = unrounded_for_list(value, part.population)
            formula += "; for the list x / (1 + x / N)"
            inputs.append(Quantity("N", "units in the list", part.population, "units"))
        inputs.insert(0, Quantity("t", f"Student quantile at {plain - 1} degrees of freedom", t))
    return Step(
        symbol="n",
        meaning="Results needed with Student's t in place of z, iterated to its end",
        formula=formula,
        inputs=tuple(inputs),
        unrounded=value,
        rounded=float(plain),
        unit="results",
        source=f"{COCHRAN}, ch. 4",
    )


def _floored(question: Question, plain: int) -> Step:
    return Step(
        symbol="n",
        meaning="Raised to the floor: a variance needs 2 results",
        formula="n = max(n, floor)",
        inputs=(Quantity("floor", "fewest results", question.floor, "results"),),
        unrounded=float(plain),
        rounded=float(plain),
        unit="results",
        source="campaign choice",
    )
