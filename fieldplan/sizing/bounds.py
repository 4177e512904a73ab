"""Fewest and most results of every stratum, what one costs, and one clear line where they clash."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.sizing.words import named
from fieldplan.stats.strata import Strata

if TYPE_CHECKING:
    from fieldplan.sizing.question import Part, Question

WEIGHT_SLACK = 0.002
"""Weights typed with three digits may be off by so much in sum."""


def strata_of(question: "Question") -> Strata:
    """Give the parts as results are shared between them, with the sigmas of this analyte.

    Parameters
    ----------
    question : Question
    """
    parts, costs = question.parts, result_costs(question)
    relative = question.equal_in == "relative-standard-error"
    levelled = [part.sigma / (part.mean or 1.0) for part in parts] if relative else []
    least = [part.least for part in parts]
    return Strata(
        weights=tuple(part.weight for part in parts),
        sigmas=tuple(part.sigma for part in parts),
        populations=tuple(part.population for part in parts),
        floor=question.floor,
        least=tuple(least) if any(least) else (),
        ceilings=ceilings_of([result_cap(part) for part in parts]),
        costs=costs if costs and min(costs) > 0 else (),
        levelled=tuple(levelled),
    )


def ceilings_of(most: Sequence[int | None]) -> tuple[int | None, ...]:
    """Give ceilings, or none at all where no stratum has one."""
    return tuple(most) if any(ceiling is not None for ceiling in most) else ()


def result_cap(part: "Part") -> int | None:
    """Give the most results of a part: what its largest number of locations leaves after losses.

    Examples
    --------
    >>> from fieldplan.sizing.question import Part
    >>> result_cap(Part("bog", 0.2, 5.0, most=4, loss=0.1)), result_cap(Part("bog", 0.2, 5.0))
    (3, None)
    """
    return None if part.most is None else int(part.most * (1 - part.loss) + 1e-9)


def check_bounds(question: "Question") -> None:
    """Refuse weights that do not sum up, bounds that cross, shares that lack what they need.

    Raises
    ------
    DesignError
        Weights, a ``most`` below the floor, the cost of a result or a mean missing, several
        analytes that cannot decide together.
    """
    faults = [*_weights(question), *_together(question)]
    faults += [line for part in question.parts if (line := _crossed(part, question.floor))]
    if question.allocation == "cost-optimal":
        faults += _without_cost(question)
    if question.allocation == "equal-precision" and question.equal_in == "relative-standard-error":
        faults += _without_mean(question)
    if faults:
        raise DesignError(*faults)


def _weights(question: "Question") -> list[str]:
    total = sum(part.weight for part in question.parts)
    if not question.parts or abs(total - 1) <= WEIGHT_SLACK:
        return []
    return [
        f"the weights of {named([part.name for part in question.parts])} sum to {total:.4g}; they "
        "are shares of the population and must sum to 1."
    ]


def _together(question: "Question") -> list[str]:
    """Say what keeps several analytes from deciding together."""
    faults = []
    if question.also and any(q.target == "budget" for q in (question, *question.also)):
        faults.append("a budget decides n alone; give every analyte a precision, or one a budget.")
    own = [(part.name, part.weight) for part in question.parts]
    faults += [
        f"the strata of {other.analyte} differ from those of {question.analyte}; analytes that "
        "decide together have the same strata and weights."
        for other in question.also
        if [(part.name, part.weight) for part in other.parts] != own
    ]
    return faults


def _crossed(part: "Part", floor: int) -> str:
    fewest = max(floor, part.least)
    if part.population is not None:
        if part.least > part.population:
            return (
                f"{part.name} has {part.population} units, fewer than the {part.least} that "
                "[design.least] asks for; lower it."
            )
        fewest = min(fewest, part.population)
    cap = result_cap(part)
    if cap is None or cap >= fewest:
        return ""
    left = "" if cap == part.most else f", of which losses leave {cap}"
    return (
        f"{part.name} may have at most {part.most} locations{left}, but must have at least "
        f"{fewest} results; raise most, or lower the floor."
    )


def _without_cost(question: "Question") -> list[str]:
    if question.prices is None:
        return [
            'allocation "cost-optimal" weighs what results cost; add a [cost] table with '
            "per_location and per_analysis."
        ]
    free = [
        part.name
        for part, cost in zip(question.parts, result_costs(question), strict=True)
        if cost <= 0
    ]
    if not free:
        return []
    return [
        f'allocation "cost-optimal" needs the cost of a location in every stratum, and in '
        f"{free[0]} it is 0; type per_location or per_analysis in [cost]."
    ]


def _without_mean(question: "Question") -> list[str]:
    lacking = [part.name for part in question.parts if not (part.mean or 0.0) > 0]
    if not lacking:
        return []
    return [
        f'equal_in "relative-standard-error" needs a mean above 0 to expect in every stratum, and '
        f"{lacking[0]} has none; give a pilot or expected_mean there."
    ]


def result_costs(question: "Question") -> tuple[float, ...]:
    """Give the money that one more result costs in each part: losses and control samples in.

    Parameters
    ----------
    question : Question

    Returns
    -------
    tuple of float
        Visit, jar and analysis, plus the same share of control samples, over 1 − loss; empty
        without prices.

    Examples
    --------
    >>> from fieldplan.sizing.money import Prices
    >>> from fieldplan.sizing.question import Part, Question
    >>> parts = Part("meadow", 0.7, 18.0), Part("bog", 0.3, 9.0, loss=0.2, extra_cost=45.0)
    >>> prices = Prices("EUR", per_location=30.0, per_analysis=45.0)
    >>> result_costs(Question(parts, "standard_error", 3.0, prices=prices))
    (75.0, 150.0)
    """
    prices = question.prices
    if prices is None:
        return ()
    controls = sum(rate.share or 0.0 for rate in question.controls if rate.count is None)
    common = prices.of_a_visit + (1 + controls) * prices.of_a_result
    return tuple((common + part.extra_cost) / (1 - part.loss) for part in question.parts)
