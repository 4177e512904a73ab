"""The arithmetic behind "how often the interval holds", step by step."""

import numpy as np

from fieldplan.base.working import Quantity, Step
from fieldplan.estimate.coverage import equivalent_sample
from fieldplan.estimate.means import Means
from fieldplan.estimate.widened import is_widened
from fieldplan.estimate.widened_steps import widened_held_steps
from fieldplan.stats.shape import t_coverage

SIMULATED = (
    "simulated for this tool from gamma and lognormal populations, 200,000 samples a cell "
    "(tests/reference/make_t_coverage.py); no published source"
)
_SKEWNESS = "Joanes & Gill 1998, The Statistician 47:183 (g1)"
_OF_MEAN = "third cumulants of independent means add: derived here, no published source"


def coverage_steps(means: Means, unit: str) -> list[Step]:
    """Show which skewness the coverage was looked up at, and where.

    Parameters
    ----------
    means : Means
    unit : str

    Returns
    -------
    list of Step
        Empty where no share is given: standard error 0, or a confidence beyond the table.
    """
    rules = means.rules
    if means.modelled is not None:
        return []
    if is_widened(rules):
        return widened_held_steps(means) if means.half.standard_error > 0 else []
    if means.half.standard_error == 0 or rules.confidence > 0.99:
        return []
    n, skewness = equivalent_sample(means)
    several = len(means.values) > 1
    share = t_coverage(n, skewness, confidence=rules.confidence, kind=rules.interval)
    steps = [_size_step(means, n)] if several else []
    steps.append(_skewness_step(means, n, skewness, unit=unit))
    steps.append(
        Step(
            symbol="held",
            meaning=f"Share of nominal {100 * rules.confidence:g} % "
            f"{rules.interval.replace('-', ' ')} t statements that hold the true mean",
            formula="table at n and G, between its cells; the lower of two families",
            inputs=(
                Quantity("n*" if several else "n", "results", n),
                Quantity("G", "skewness", skewness),
            ),
            unrounded=share,
            rounded=round(share, 2),
            source=SIMULATED,
        )
    )
    return steps


def _size_step(means: Means, n: int) -> Step:
    known = means.half.degrees_of_freedom
    inputs = (Quantity("df", "degrees of freedom", known),)
    meaning = "Results of the single sample that the strata are taken together as"
    return Step("n*", meaning, "n* = df + 1", inputs, known + 1, n, "results", _OF_MEAN)


def _skewness_step(means: Means, n: int, skewness: float, *, unit: str) -> Step:
    """Show g1 of one sample, or the skewness of the weighted mean set to n* results."""
    if len(means.values) == 1:
        second, third = _moments(means)[0]
        return Step(
            symbol="G",
            meaning="Skewness of the results",
            formula="G = m3 / m2^1.5",
            inputs=(
                Quantity("m2", "mean squared distance from the mean", second, f"({unit})²"),
                Quantity("m3", "mean cubed distance from the mean", third, f"({unit})³"),
            ),
            unrounded=skewness,
            rounded=skewness,
            source=_SKEWNESS,
        )
    inputs = [Quantity("n*", "results taken together", n)]
    pairs = zip(means.values, means.half.strata, _moments(means), strict=True)
    for values, found, (second, third) in pairs:
        name, borrowed = values.stratum, found.variance_borrowed
        inputs += [
            Quantity(f"W {name}", "share of the population", values.weight),
            Quantity(f"n {name}", "results", found.n),
            Quantity(
                f"m2 {name}",
                "s², borrowed" if borrowed else "mean squared distance from the mean",
                second,
                f"({unit})²",
            ),
            Quantity(f"m3 {name}", "mean cubed distance from the mean", third, f"({unit})³"),
        ]
    return Step(
        symbol="G",
        meaning="Skewness of the single sample whose mean leans as the weighted mean",
        formula="G = √n*·Σ (W³·m3/n²) / (Σ W²·m2/n)^1.5",
        inputs=tuple(inputs),
        unrounded=skewness,
        rounded=skewness,
        source=_OF_MEAN,
    )


def _moments(means: Means) -> list[tuple[float, float]]:
    """Give the second and third moment of each stratum about its mean, divisor n."""
    found = []
    for values, entry in zip(means.values, means.half.strata, strict=True):
        off = values.values - values.values.mean()
        second = entry.sd**2 if entry.variance_borrowed else float(np.mean(off**2))
        found.append((second, float(np.mean(off**3))))
    return found
