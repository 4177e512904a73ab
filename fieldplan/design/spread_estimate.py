"""The mean and its variance from places that a layout has spread over the ground."""

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.design.model import (
    MeanEstimate,
    SpreadVariance,
    StratumEstimate,
    StratumValues,
)
from fieldplan.design.strata import needs_spread, weighted_mean
from fieldplan.stats.cell_variance import (
    can_weigh_curves,
    curve_variance,
    freedom_of_small_parts,
)
from fieldplan.stats.neighbour_variance import neighbour_variance

SpreadRule = Literal["neighbours", "covariance"]
SPREAD_LAYOUTS = ("balanced-list",)
MOST_RESULTS = 3_000
"""Above this many results of one stratum the table of neighbours grows too large."""

METHODS = {
    "neighbours": (
        "Balanced list: {means}. The variance comes from how each result differs from its "
        "neighbours (Stevens and Olsen 2003), with the degrees of freedom of that comparison."
    ),
    "covariance": (
        "Balanced list: {means}. The variance is that inside squares of one location's share of "
        "the area by how results fade with distance, averaged over 126 curves by how likely the "
        "results make each; n − 3 degrees of freedom a stratum."
    ),
}
MODELLED = (
    "This standard error rests on a model: results near normal, alike all over a stratum but for a "
    "slope. Where results lean strongly it can be too small."
)
WIDE = (
    "Neighbours differ by more than the mean can wander, so that this standard error is usually "
    "somewhat too large."
)
CAUTIONS = {"covariance": MODELLED, "neighbours": WIDE}
LONE = (
    "A stratum kept a single result, so that no stratum gets credit for the layout: mean and "
    "interval are computed by the formula for random places."
)
NO_CREDIT = (
    "For comparison only, no credit for the layout: the formula for simple random places gives a "
    "standard error {times:.2f} times as large."
)


def estimate_spread(
    strata: Sequence[StratumValues], *, layout: str, rule: SpreadRule, single_result: str
) -> MeanEstimate:
    """Weigh the stratum means, and estimate the variance by a rule fixed before results.

    Parameters
    ----------
    strata : sequence of StratumValues
        With coordinates.
    layout : str
        That drew the places; only one that spreads them may use their neighbours.
    rule : str
        ``neighbours``, or ``covariance``, which falls back to neighbours for a list and in a
        stratum of fewer than 20 or more than 400 results.
    single_result : str
        ``refuse``, or ``borrow-spread``: with a stratum of one result the whole estimate takes the
        formula for random places.

    Returns
    -------
    MeanEstimate

    Raises
    ------
    DesignError
        The layout does not spread its places, a stratum has no result, one result that the rule
        refuses, or no record of its places.
    """
    _refuse_chance(layout, rule)
    plain = weighted_mean(strata, single_result=single_result, method=_method(strata, rule))
    if any(needs_spread(stratum) for stratum in strata):
        return replace(plain, caution=f"{LONE} {plain.caution}".strip())
    found = [_stratum(values, rule) for values in strata]
    parts = [
        (s.weight**2 * f.variance, f.degrees_of_freedom) for s, f in zip(strata, found, strict=True)
    ]
    entries: tuple[StratumEstimate, ...] = tuple(
        replace(entry, variance_of_mean=f.variance)
        for entry, f in zip(plain.strata, found, strict=True)
    )
    error = math.sqrt(math.fsum(variance for variance, _ in parts))
    return replace(
        plain,
        standard_error=error,
        degrees_of_freedom=freedom_of_small_parts(*zip(*parts, strict=True)),
        strata=entries,
        spread_variances=tuple(found),
        caution=_caution(found, rule, times=_ratio(plain.standard_error, error)),
    )


def _refuse_chance(layout: str, rule: SpreadRule) -> None:
    """Refuse a layout that leaves its places to chance."""
    if layout not in SPREAD_LAYOUTS:
        message = (
            f'the variance from {rule} needs places that were spread, and layout "{layout}" leaves '
            "them to chance: the interval would be too narrow. Use the formula of that layout."
        )
        raise DesignError(message)


def _method(strata: Sequence[StratumValues], rule: SpreadRule) -> str:
    """Say how mean and variance come about, for the sheet."""
    means = (
        "the plain mean"
        if len(strata) == 1
        else "stratum means weighed by their shares of the population"
    )
    method = METHODS[rule].format(means=means)
    if any(stratum.population is not None for stratum in strata):
        method += " Each term is multiplied by (1 − n/N), since the list is finite."
    return method


def _ratio(plain: float, error: float) -> float:
    return plain / error if error > 0 else 0.0


def _stratum(stratum: StratumValues, rule: SpreadRule) -> SpreadVariance:
    n = stratum.values.size
    if stratum.population == n:
        return SpreadVariance(stratum.stratum, "census", 0.0, math.inf, 0.0)
    if stratum.coordinates is None:
        message = (
            f"stratum '{stratum.stratum}' has no record of its places; use the record of the "
            "packet by which the samples were taken."
        )
        raise DesignError(message)
    if n > MOST_RESULTS:
        message = (
            f"stratum '{stratum.stratum}' has {n:,} results; neighbours can be compared for "
            f"{MOST_RESULTS:,} at most. Divide the stratum."
        )
        raise DesignError(message)
    area = stratum.population is None
    if rule == "covariance" and area and can_weigh_curves(stratum.values):
        return _by_curves(stratum, stratum.coordinates)
    near = neighbour_variance(stratum.values, stratum.coordinates)
    left = 1.0 if stratum.population is None else 1.0 - n / stratum.population
    return SpreadVariance(
        stratum=stratum.stratum,
        rule="neighbours",
        variance=near.variance * left,
        degrees_of_freedom=near.degrees_of_freedom,
        local=math.sqrt(near.variance * n),
    )


def _by_curves(stratum: StratumValues, places: NDArray[np.float64]) -> SpreadVariance:
    n = stratum.values.size
    each = np.full(n, 1.0 / n)
    found = curve_variance(stratum.values, places, np.arange(n), each, area=stratum.measure)
    return SpreadVariance(
        stratum=stratum.stratum,
        rule="covariance",
        variance=found.variance,
        degrees_of_freedom=found.degrees_of_freedom,
        local=math.sqrt(found.variance * n),
        practical_range_m=found.practical_range,
        nugget=found.nugget,
        sigma=found.sigma,
        inside=found.inside,
    )


def _caution(found: Sequence[SpreadVariance], rule: SpreadRule, *, times: float) -> str:
    """Say where the standard error is known to be off, what fell back, and the contrast."""
    took = {entry.rule for entry in found}
    back = [f"'{f.stratum}'" for f in found if f.rule == "neighbours" and rule == "covariance"]
    lines = [words for name, words in CAUTIONS.items() if name in took]
    if back:
        lines.append(
            "Curves can be weighed for an area with 20 to 400 results that differ; "
            f"{', '.join(back)} took neighbours instead."
        )
    if times > 0:
        lines.append(NO_CREDIT.format(times=times))
    return " ".join(lines)
