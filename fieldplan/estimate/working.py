"""The arithmetic of the estimate, step by step."""

import math

from fieldplan.base.working import Quantity, Step
from fieldplan.design.model import StratumEstimate, StratumValues
from fieldplan.estimate.cell_steps import cell_error_steps, cell_freedom_step, cell_mean_step
from fieldplan.estimate.means import Means
from fieldplan.estimate.modelled_steps import modelled_steps
from fieldplan.estimate.spread_steps import spread_freedom_step, spread_steps
from fieldplan.estimate.start_steps import start_freedom_step, start_steps
from fieldplan.estimate.widened import is_widened
from fieldplan.estimate.widened_steps import widened_steps
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.stratified import variance_parts

_RANDOM = "Cochran 1977, Sampling Techniques, 3rd ed., ch. 2"
_SATTERTHWAITE = "Satterthwaite 1946, Biometrics Bulletin 2:110"
_STRATA = "Cochran 1977, Sampling Techniques, 3rd ed., ch. 5"


def working(means: Means, unit: str) -> tuple[Step, ...]:
    """Show how the mean and its interval come from the results.

    Parameters
    ----------
    means : Means
    unit : str

    Returns
    -------
    tuple of Step
        Non-detects stand at half their limit throughout, unless a method for them is in force.
    """
    if means.modelled is not None:
        return modelled_steps(means.modelled, unit)
    several = len(means.values) > 1
    steps: list[Step] = []
    cells = {entry.stratum: entry for entry in means.half.cell_variances}
    for values, found in zip(means.values, means.half.strata, strict=True):
        label = values.stratum if several else ""
        if entry := cells.get(values.stratum):
            steps.append(cell_mean_step(values, found, entry, unit=unit, label=label))
        else:
            steps += _stratum_steps(means, values, found, unit=unit, label=label)
    if several:
        steps.append(_weighted_mean(means, unit))
    steps += _error_steps(means, unit)
    if means.half.standard_error > 0:
        widened = is_widened(means.rules)
        steps += widened_steps(means, unit) if widened else _interval_steps(means, unit)
    return tuple(steps)


def _error_steps(means: Means, unit: str) -> list[Step]:
    """Show the standard error by the rule of the layout."""
    if means.half.cell_variances:
        return cell_error_steps(means, unit)
    if means.half.spread_variances:
        return spread_steps(means, unit)
    between = bool(means.half.start_variances)
    return start_steps(means, unit) if between else [_standard_error(means, unit)]


def _stratum_steps(
    means: Means, values: StratumValues, found: StratumEstimate, *, unit: str, label: str
) -> list[Step]:
    mark = f" {label}" if label else ""
    of = f" in {label}" if label else ""
    total, n = float(values.values.sum()), int(values.values.size)
    steps = [
        Step(
            symbol=f"mean{mark}",
            meaning=f"Mean of the results{of}",
            formula="mean = Σ x / n",
            inputs=(
                Quantity("Σ x", f"sum of the results{of}", total, unit),
                Quantity("n", f"results{of}, one a location", n),
            ),
            unrounded=found.mean,
            rounded=found.mean,
            unit=unit,
            source=_RANDOM,
        )
    ]
    if n < 2:
        borrowed = found.variance_borrowed
        return [*steps, _borrowed_spread(means, found, unit)] if borrowed else steps
    squares = float(((values.values - found.mean) ** 2).sum())
    spread = Step(
        symbol=f"s{mark}",
        meaning=f"Standard deviation of the results{of}",
        formula="s = √(Σ (x − mean)² / (n − 1))",
        inputs=(
            Quantity("Σ (x − mean)²", "sum of squared distances", squares, f"({unit})²"),
            Quantity("n", f"results{of}", n),
        ),
        unrounded=found.sd,
        rounded=found.sd,
        unit=unit,
        source=_RANDOM,
    )
    return [*steps, spread]


def _borrowed_spread(means: Means, found: StratumEstimate, unit: str) -> Step:
    """Show the pooled s that a stratum with one result borrows."""
    inputs = tuple(
        quantity
        for entry in means.half.strata
        if entry.n > 1
        for quantity in (
            Quantity(f"s {entry.stratum}", "standard deviation", entry.sd, unit),
            Quantity(f"n {entry.stratum}", "results", entry.n),
        )
    )
    return Step(
        symbol=f"s {found.stratum}",
        meaning=f"Standard deviation in {found.stratum}, borrowed: pooled from the other strata",
        formula="s = √(Σ (n − 1)·s² / Σ (n − 1))",
        inputs=inputs,
        unrounded=found.sd,
        rounded=found.sd,
        unit=unit,
        source="the rule single_result = borrow-spread",
    )


def _weighted_mean(means: Means, unit: str) -> Step:
    inputs = [
        quantity
        for entry in means.half.strata
        for quantity in (
            Quantity(f"W {entry.stratum}", "share of the population", entry.weight),
            Quantity(f"mean {entry.stratum}", "mean of the stratum", entry.mean, unit),
        )
    ]
    mean = means.half.mean
    return Step(
        "mean",
        "Mean of the population",
        "mean = Σ W·(mean of the stratum)",
        tuple(inputs),
        mean,
        mean,
        unit,
        _STRATA,
    )


def _standard_error(means: Means, unit: str) -> Step:
    listed = any(values.population is not None for values in means.values)
    several = len(means.values) > 1
    inputs: list[Quantity] = []
    for values, entry in zip(means.values, means.half.strata, strict=True):
        mark = f" {entry.stratum}" if several else ""
        borrowed = ", borrowed from the other strata" if entry.variance_borrowed else ""
        inputs += [Quantity(f"W{mark}", "share of the population", entry.weight)] if several else []
        inputs.append(Quantity(f"s{mark}", f"standard deviation{borrowed}", entry.sd, unit))
        inputs.append(Quantity(f"n{mark}", "results", entry.n))
        if values.population is not None:
            inputs.append(Quantity(f"N{mark}", "units on the list", values.population))
    finite = "·(1 − n/N)" if listed else ""
    formula = f"SE = √(Σ W²·s²/n{finite})" if several else f"SE = √(s²/n{finite})"
    error = means.half.standard_error
    return Step(
        symbol="SE",
        meaning="Standard error of the mean",
        formula=formula,
        inputs=tuple(inputs),
        unrounded=error,
        rounded=error,
        unit=unit,
        source=_STRATA if several else _RANDOM,
    )


def _interval_steps(means: Means, unit: str) -> list[Step]:
    known, rules = means.half.degrees_of_freedom, means.rules
    t = t_quantile(known, confidence=rules.confidence, kind=rules.interval)
    mean, error = means.half.mean, means.half.standard_error
    level = (1 + rules.confidence) / 2 if rules.interval == "two-sided" else rules.confidence
    steps = [_freedom_step(means, unit)] if math.isfinite(known) else []
    steps.append(
        Step(
            symbol="t",
            meaning="Student's quantile",
            formula="t(p, df)",
            inputs=(
                Quantity("p", f"share for a confidence of {rules.confidence:g}", level),
                Quantity("df", "degrees of freedom", known),
            ),
            unrounded=t,
            rounded=t,
            source="Student 1908, Biometrika 6:1",
        )
    )
    inputs = (
        Quantity("mean", "estimated mean", mean, unit),
        Quantity("t", "Student's quantile", t),
        Quantity("SE", "standard error", error, unit),
    )
    interval = means.interval
    for end, sign, name in ((interval.low, "−", "Low"), (interval.high, "+", "High")):
        if end is not None:
            meaning = f"{name} end at {100 * rules.confidence:g} % confidence"
            formula = f"mean {sign} t·SE"
            steps.append(Step(name.lower(), meaning, formula, inputs, end, end, unit, _RANDOM))
    return steps


def _freedom_step(means: Means, unit: str) -> Step:
    """Show the degrees of freedom by the rule of the layout."""
    if means.half.spread_variances:
        return spread_freedom_step(means)
    if means.half.start_variances:
        return start_freedom_step(means)
    if means.half.cell_variances:
        return cell_freedom_step(means, unit)
    return _strata_freedom_step(means, unit)


def _strata_freedom_step(means: Means, unit: str) -> Step:
    strata, known = means.half.strata, means.half.degrees_of_freedom
    if len(strata) == 1:
        inputs: tuple[Quantity, ...] = (Quantity("n", "results", strata[0].n),)
        return Step("df", "Degrees of freedom", "df = n − 1", inputs, known, known, "", _RANDOM)
    parts = variance_parts(
        [entry.sd**2 for entry in strata],
        [entry.n for entry in strata],
        [entry.weight for entry in strata],
        [values.population for values in means.values],
    )
    borrows = any(entry.variance_borrowed for entry in strata)
    meaning = "part of the variance of the mean" + (", with what it lends" if borrows else "")
    inputs = tuple(
        quantity
        for entry, part in zip(strata, parts, strict=True)
        if part > 0
        for quantity in (
            Quantity(f"part {entry.stratum}", meaning, part, f"({unit})²"),
            Quantity(f"n {entry.stratum}", "results of the stratum", entry.n),
        )
    )
    rule, source = "from the parts W²·s²/n of the variance", _SATTERTHWAITE
    if borrows:
        source += "; what is lent: derived here, no published source"
        rule = (
            "over the strata with 2 results or more. Each part is s²·(W²/n + B·(n − 1)/Σ(n − 1)): "
            "its own, and its share of B, the sum of W²/n over the strata that borrow"
        )
    if any(values.population is not None for values in means.values):
        rule += "; for a list every W²/n is times (1 − n/N)"
    return Step(
        symbol="df",
        meaning=f"Degrees of freedom by Satterthwaite, {rule}",
        formula="df = (Σ part)² / Σ (part² / (n − 1))",
        inputs=inputs,
        unrounded=known,
        rounded=known,
        source=source,
    )
