"""The arithmetic of a variance from places that were spread over the ground, step by step."""

from fieldplan.base.working import Quantity, Step
from fieldplan.design.model import SpreadVariance, StratumEstimate
from fieldplan.estimate.error_step import standard_error_step
from fieldplan.estimate.means import Means

_NEIGHBOURS = "Stevens and Olsen 2003, Environmetrics 14:593 (from memory)"
_CURVES = "Matérn 1960, Spatial Variation, ch. 5 (from memory)"
_STRATA = "Cochran 1977, Sampling Techniques, 3rd ed., ch. 5"
_SMALL = "Satterthwaite 1946, Biometrics Bulletin 2:110; f + 2 and − 2 derived for this tool"


def spread_steps(means: Means, unit: str) -> list[Step]:
    """Show how the standard error comes from the places of the results.

    Parameters
    ----------
    means : Means
        Whose estimate holds ``spread_variances``.
    unit : str

    Returns
    -------
    list of Step
        A variance a stratum, then the standard error.
    """
    several = len(means.values) > 1
    steps = []
    for values, entry, found in zip(
        means.values, means.half.spread_variances, means.half.strata, strict=True
    ):
        mark, of = (f" {entry.stratum}", f" in {entry.stratum}") if several else ("", "")
        steps.append(_variance(entry, found, values.population, unit=unit, mark=mark, of=of))
    source = _STRATA if several else _NEIGHBOURS
    entries = means.half.spread_variances
    return [*steps, standard_error_step(means, entries, unit=unit, source=source)]


def _variance(
    entry: SpreadVariance,
    found: StratumEstimate,
    population: int | None,
    *,
    unit: str,
    mark: str,
    of: str,
) -> Step:
    inputs = [Quantity(f"n{mark}", f"results{of}", found.n)]
    formula, source = "V = s′²/n", _NEIGHBOURS
    if entry.rule == "covariance":
        formula, source = "V = σ²·(ν + (1 − ν)·(1 − c))/n, averaged over the curves", _CURVES
        inputs += [
            Quantity(f"σ{mark}", "standard deviation of single places", entry.sigma, unit),
            Quantity(f"ν{mark}", "share of the variance without structure", entry.nugget),
            Quantity(f"c{mark}", "likeness of two places of one square", entry.inside),
        ]
        meaning = f"Variance of the mean{of}, from how results fade with distance"
    else:
        inputs.append(
            Quantity(f"s′{mark}", "standard deviation among neighbours", entry.local, unit)
        )
        meaning = f"Variance of the mean{of}, from how results differ from their neighbours"
    if population is not None:
        formula += " · (1 − n/N)"
        inputs.append(Quantity(f"N{mark}", "units on the list", population))
    return Step(
        symbol=f"V{mark}",
        meaning=meaning,
        formula=formula,
        inputs=tuple(inputs),
        unrounded=entry.variance,
        rounded=entry.variance,
        unit=f"({unit})²",
        source=source,
    )


def spread_freedom_step(means: Means) -> Step:
    """Show the degrees of freedom of the strata, put together."""
    known = means.half.degrees_of_freedom
    inputs = []
    for entry, found in zip(means.half.spread_variances, means.half.strata, strict=True):
        mark = f" {entry.stratum}" if len(means.values) > 1 else ""
        if entry.rule == "census":
            continue
        part = found.weight**2 * entry.variance
        inputs.append(Quantity(f"v{mark}", "W²·V of the stratum", part))
        inputs.append(Quantity(f"f{mark}", "its degrees of freedom", entry.degrees_of_freedom))
    return Step(
        symbol="df",
        meaning="Degrees of freedom, from the parts of the variance",
        formula="df = (Σ v)² / Σ (v²/(f + 2)) − 2, at most Σ f",
        inputs=tuple(inputs),
        unrounded=known,
        rounded=known,
        source=_SMALL,
    )
