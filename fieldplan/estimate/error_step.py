"""The last step of every variance that stands by stratum: the standard error of the mean."""

from collections.abc import Sequence

from fieldplan.base.working import Quantity, Step
from fieldplan.design.model import SpreadVariance, StartVariance
from fieldplan.estimate.means import Means


def standard_error_step(
    means: Means,
    entries: Sequence[SpreadVariance | StartVariance],
    *,
    unit: str,
    source: str,
) -> Step:
    """Show how the standard error comes from the variances of the strata.

    Parameters
    ----------
    means : Means
    entries : sequence
        A variance a stratum, in the order of ``means``.
    unit : str
    source : str
        Author, year and section.

    Returns
    -------
    Step
    """
    several = len(means.values) > 1
    inputs = []
    for entry, found in zip(entries, means.half.strata, strict=True):
        mark = f" {entry.stratum}" if several else ""
        if several:
            inputs.append(Quantity(f"W{mark}", "share of the population", found.weight))
        inputs.append(Quantity(f"V{mark}", "variance of the mean", entry.variance, f"({unit})²"))
    error = means.half.standard_error
    return Step(
        symbol="SE",
        meaning="Standard error of the mean",
        formula="SE = √(Σ W²·V)" if several else "SE = √V",
        inputs=tuple(inputs),
        unrounded=error,
        rounded=error,
        unit=unit,
        source=source,
    )
