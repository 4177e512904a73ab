"""The arithmetic of a variance between random starts, step by step."""

from fieldplan.base.working import Quantity, Step
from fieldplan.estimate.error_step import standard_error_step
from fieldplan.estimate.means import Means

_STARTS = "Cochran 1977, Sampling Techniques, 3rd ed., sec. 8.11 (from memory)"
_SATTERTHWAITE = "Satterthwaite 1946, Biometrics Bulletin 2:110"


def start_steps(means: Means, unit: str) -> list[Step]:
    """Show how the standard error comes from the means of the starts.

    Parameters
    ----------
    means : Means
        Whose estimate holds ``start_variances``.
    unit : str

    Returns
    -------
    list of Step
        A variance a stratum, then the standard error.
    """
    several = len(means.values) > 1
    steps = []
    for entry, found in zip(means.half.start_variances, means.half.strata, strict=True):
        mark, of = (f" {entry.stratum}", f" in {entry.stratum}") if several else ("", "")
        inputs = [Quantity(f"mean{mark}", f"mean of the results{of}", found.mean, unit)]
        for number, (count, mean) in enumerate(zip(entry.counts, entry.means, strict=True), 1):
            inputs.append(Quantity(f"m {number}", f"results of start {number}{of}", count))
            inputs.append(Quantity(f"mean {number}", f"mean of start {number}{of}", mean, unit))
        inputs.append(Quantity("k", f"starts with results{of}", len(entry.counts)))
        inputs.append(Quantity("n", f"results{of}", found.n))
        steps.append(
            Step(
                symbol=f"V{mark}",
                meaning=f"Variance of the mean{of}, from how its starts differ",
                formula="V = Σ m·(mean of the start − mean)² / (n·(k − 1))",
                inputs=tuple(inputs),
                unrounded=entry.variance,
                rounded=entry.variance,
                unit=f"({unit})²",
                source=_STARTS,
            )
        )
    entries = means.half.start_variances
    return [*steps, standard_error_step(means, entries, unit=unit, source=_STARTS)]


def start_freedom_step(means: Means) -> Step:
    """Show the degrees of freedom: k − 1, or Satterthwaite's for strata."""
    entries, known = means.half.start_variances, means.half.degrees_of_freedom
    if len(entries) == 1:
        inputs: list[Quantity] = [Quantity("k", "starts with results", len(entries[0].counts))]
        return Step(
            "df", "Degrees of freedom", "df = k − 1", tuple(inputs), known, known, "", _STARTS
        )
    inputs = []
    for entry, found in zip(entries, means.half.strata, strict=True):
        part = found.weight**2 * entry.variance
        inputs.append(Quantity(f"part {entry.stratum}", "W²·V of the stratum", part))
        inputs.append(Quantity(f"k {entry.stratum}", "starts with results", len(entry.counts)))
    return Step(
        symbol="df",
        meaning="Degrees of freedom by Satterthwaite, from the parts W²·V of the variance",
        formula="df = (Σ part)² / Σ (part² / (k − 1))",
        inputs=tuple(inputs),
        unrounded=known,
        rounded=known,
        source=_SATTERTHWAITE,
    )
