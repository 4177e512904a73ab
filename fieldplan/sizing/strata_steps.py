"""The working of strata: the total before rounding, the smallest whole one, the share of each."""

import math
from collections.abc import Iterator

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.closing_steps import COCHRAN
from fieldplan.sizing.quantities import target_quantity
from fieldplan.sizing.question import Part, Question
from fieldplan.sizing.together import CHOOSING, demand_of, everyone, face_value, joint_balance
from fieldplan.stats.allocation import unrounded_shares, unrounded_total
from fieldplan.stats.intervals import t_quantile

WRIGHT = "Wright 2012, The American Statistician 66:217"
BETHEL = "Bethel 1989, Survey Methodology 15:47"

ABOVE = {
    "proportional": "Σ W·s²",
    "neyman": "(Σ W·s)²",
    "cost-optimal": "(Σ W·s·√c)·(Σ W·s/√c)",
    "equal-precision": "(Σ W²)·(Σ s²)",
}
"""What stands above the line of the unrounded total."""

SHARES = {
    "proportional": "n_h = n · W",
    "neyman": "n_h = n · W·s / Σ W·s",
    "cost-optimal": "n_h = n · (W·s/√c) / Σ (W·s/√c)",
    "equal-precision": "n_h = n · s² / Σ s²",
}

ROUNDED = {
    "proportional": "whole numbers of smallest standard error",
    "neyman": "whole numbers of smallest standard error",
    "cost-optimal": "whole numbers of least cost",
    "equal-precision": "whole numbers whose worst stratum is best",
}


def strata_steps(question: Question, plain: tuple[int, ...]) -> Iterator[Step]:
    """Write out how the plain number of results comes about and is shared.

    Parameters
    ----------
    question : Question
        With two strata or more.
    plain : tuple of int
        Results by stratum, sigma taken at face value.
    """
    if question.also:
        yield from _together(question, plain)
        return
    allocation = question.allocation
    relative = question.equal_in == "relative-standard-error"
    above = "(Σ W²·mean²)·(Σ (s/mean)²)" if relative else ABOVE[allocation]
    below = "SE²" if question.target_half_width is None else "(h / z)²"
    inputs, target = _target(question)
    listed = any(part.population is not None for part in question.parts)
    for k, part in enumerate(question.parts, start=1):
        inputs += _of_stratum(question, part, k)
    total = unrounded_total(question.strata, target**2, allocation=allocation)
    yield Step(
        symbol="n",
        meaning=f"Results needed with sigma at face value, {allocation.capitalize()} allocation",
        formula=f"n = {above} / ({below} + Σ W²·s²/N)" if listed else f"n = {above} / {below}",
        inputs=tuple(inputs),
        unrounded=total,
        rounded=float(sum(plain)),
        unit="results",
        source=f"{COCHRAN}, sec. 5.9; then the {_smallest(question)} that keeps the target with "
        f"{_bounds(question)}",
    )
    yield from _shares(question, plain, total)


def _smallest(question: Question) -> str:
    return (
        "least cost in whole numbers"
        if question.allocation == "cost-optimal"
        else "smallest whole total"
    )


def _bounds(question: Question) -> str:
    """Say within which bounds whole numbers were sought."""
    words = f"at least {question.floor} results in every stratum"
    if any(part.least for part in question.parts) or any(part.most for part in question.parts):
        words += " and the bounds of single strata"
    return words


def _target(question: Question) -> tuple[list[Quantity], float]:
    """Give the target as inputs and as a standard error."""
    inputs = [target_quantity(question)]
    if question.target_half_width is None:
        return inputs, question.target_standard_error or 0.0
    z = t_quantile(math.inf, confidence=question.confidence, kind=question.interval)
    inputs.append(Quantity("z", f"normal quantile, {question.interval}", z))
    return inputs, question.target_half_width / z


def _of_stratum(question: Question, part: Part, k: int) -> list[Quantity]:
    """Give all that the unrounded total takes from one stratum."""
    found = [
        Quantity(f"W{k}", f"share of {part.name}", part.weight),
        Quantity(f"s{k}", f"standard deviation in {part.name}", part.sigma, question.unit),
    ]
    if question.allocation == "cost-optimal" and question.prices:
        cost = question.strata.unit_costs[k - 1]
        currency = question.prices.currency
        found.append(
            Quantity(f"c{k}", f"cost of one result in {part.name}, losses in", cost, currency)
        )
    if question.strata.levelled:
        mean = part.mean or 0.0
        found.append(Quantity(f"mean{k}", f"mean to expect in {part.name}", mean, question.unit))
    if part.population is not None:
        found.append(Quantity(f"N{k}", f"units in {part.name}", part.population, "units"))
    return found


def _shares(question: Question, plain: tuple[int, ...], total: float) -> Iterator[Step]:
    allocation = question.allocation
    shares = unrounded_shares(question.strata, total, allocation=allocation)
    relative = bool(question.strata.levelled)
    formula = "n_h = n · (s/mean)² / Σ (s/mean)²" if relative else SHARES[allocation]
    sizes = unrounded_shares(question.strata, 1.0, allocation=allocation)
    for k, (part, share, count) in enumerate(zip(question.parts, shares, plain, strict=True)):
        inputs = [Quantity("n", "total before rounding", total, "results")]
        if allocation != "equal-precision":
            inputs.append(Quantity("W", f"share of {part.name}", part.weight))
        if allocation == "neyman":
            spreads = math.fsum(p.weight * p.sigma for p in question.parts)
            inputs += [
                Quantity("s", f"standard deviation in {part.name}", part.sigma, question.unit),
                Quantity("Σ W·s", "sum over strata", spreads, question.unit),
            ]
        elif allocation != "proportional":
            inputs.append(Quantity("share", f"of {part.name}, inputs as above", sizes[k]))
        yield Step(
            symbol=f"n({part.name})",
            meaning=f"Results in {part.name}; {ROUNDED[allocation]}",
            formula=formula,
            inputs=tuple(inputs),
            unrounded=share,
            rounded=float(count),
            unit="results",
            source=f"{COCHRAN}, ch. 5" if allocation == "proportional" else WRIGHT,
        )


def _together(question: Question, plain: tuple[int, ...]) -> Iterator[Step]:
    """Show several analytes: the tolerated variance of each, and the total that keeps them all."""
    question = face_value(question)
    members = everyone(question)
    demands = [demand_of(member) for member in members]
    tolerated = tuple(
        Quantity(
            f"V({member.analyte})",
            "tolerated variance of its mean",
            demand.target_variance,
            f"({member.unit})²" if member.unit else "",
        )
        for member, demand in zip(members, demands, strict=True)
    )
    unrounded, least, source = _unrounded_together(question, [d.target_variance for d in demands])
    yield Step(
        symbol="n",
        meaning=f"Results that keep all {len(members)} targets, sigma at face value",
        formula=f"smallest {least} with Σ W²·s²·(1/n − 1/N) ≤ V for every analyte",
        inputs=tolerated,
        unrounded=math.fsum(unrounded),
        rounded=float(sum(plain)),
        unit="results",
        source=source,
    )
    for k, part in enumerate(question.parts):
        sigmas = (
            Quantity(f"s({m.analyte})", "its standard deviation there", m.parts[k].sigma, m.unit)
            for m in members
        )
        yield Step(
            symbol=f"n({part.name})",
            meaning=f"Results in {part.name}; {ROUNDED[question.allocation]}",
            formula="part of the n above",
            inputs=(Quantity("W", f"share of {part.name}", part.weight), *sigmas),
            unrounded=unrounded[k],
            rounded=float(plain[k]),
            unit="results",
            source=source,
        )


def _unrounded_together(
    question: Question, tolerated: list[float]
) -> tuple[tuple[float, ...], str, str]:
    """Give the counts before rounding, what is made small, and the source."""
    if question.allocation in CHOOSING:
        least = "Σ c·n" if question.allocation == "cost-optimal" else "Σ n"
        source = f"{BETHEL}, with whole numbers sought round the unrounded optimum"
        return joint_balance(question).counts, least, source
    allocation = question.allocation
    totals = [
        unrounded_total(member.strata, variance, allocation=allocation)
        for member, variance in zip(everyone(question), tolerated, strict=True)
    ]
    shares = unrounded_shares(question.sharing, max(totals), allocation=allocation)
    return tuple(shares), "total", f"{COCHRAN}, ch. 5A"
