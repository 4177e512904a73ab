"""The mean and its variance from results in compact cells."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.design.model import (
    CellVariance,
    MeanEstimate,
    StratumEstimate,
    StratumValues,
)
from fieldplan.design.strata import needs_spread, weighted_mean
from fieldplan.stats.cell_variance import (
    VariancePart,
    can_weigh_curves,
    cells_joined,
    curve_variance,
    freedom_of_small_parts,
    neighbour_groups,
    pair_parts,
)

VarianceRule = Literal["pairs", "covariance"]

METHODS = {
    "pairs": (
        "Compact strata: cell means weighed by the cells' shares of the area. The variance comes "
        "from pairs: two results of one cell, or the results of two neighbouring cells with one "
        "each; degrees of freedom by Satterthwaite's formula for small parts."
    ),
    "covariance": (
        "Compact strata: cell means weighed by the cells' shares of the area. The variance is that "
        "inside the cells by how results fade with distance, averaged over 126 curves by how "
        "likely the results make each; n − 3 degrees of freedom a stratum."
    ),
}
BETWEEN = (
    "Pairs of neighbouring cells hold the difference between the cells too, so that this standard "
    "error is usually somewhat too large."
)
MODELLED = (
    "This standard error rests on a model: results near normal, alike all over a stratum but for a "
    "slope. Where results lean strongly it can be too small."
)
LONE = (
    "A stratum kept a single result, so that no stratum gets credit for its cells: mean and "
    "interval are computed by the formula for random places."
)
NO_CREDIT = (
    "For comparison only, no credit for the layout: the formula for simple random places gives a "
    "standard error {times:.2f} times as large."
)


def estimate_by_cells(
    strata: Sequence[StratumValues], *, rule: VarianceRule, single_result: str
) -> MeanEstimate:
    """Weigh cell means by the cells' shares, and estimate the variance by a rule fixed before.

    Parameters
    ----------
    strata : sequence of StratumValues
        With cells; an alternate counts in the cell in which it lies.
    rule : str
        ``pairs``, or ``covariance``, which falls back to pairs in a stratum of fewer than 20 or
        more than 400 results.
    single_result : str
        ``refuse``, or ``borrow-spread``: with a stratum of one result the whole estimate takes the
        formula for random places.

    Returns
    -------
    MeanEstimate

    Raises
    ------
    DesignError
        A stratum has no result, one result that the rule refuses, or no record of its cells.

    Notes
    -----
    A cell without a result is joined to the nearest cell that has one, from centre to centre, and
    both count with their joint share: the mean then rests on neighbouring ground.
    """
    plain = weighted_mean(
        strata, single_result=single_result, method=METHODS[rule], caution=""
    )  # refuses what has no answer
    if any(needs_spread(stratum) for stratum in strata):
        return replace(plain, caution=f"{LONE} {plain.caution}".strip())
    found = [_stratum(values, rule) for values in strata]
    parts = [
        (s.weight**2 * part.variance, part.degrees_of_freedom)
        for s, cut in zip(strata, found, strict=True)
        for part in cut.parts
    ]
    error = math.sqrt(math.fsum(variance for variance, _ in parts))
    entries = tuple(
        StratumEstimate(
            stratum=s.stratum,
            n=int(s.values.size),
            mean=cut.mean,
            sd=float(s.values.std(ddof=1)),
            weight=s.weight,
            variance_of_mean=math.fsum(part.variance for part in cut.parts),
        )
        for s, cut in zip(strata, found, strict=True)
    )
    return MeanEstimate(
        n=plain.n,
        mean=math.fsum(entry.weight * entry.mean for entry in entries),
        standard_error=error,
        degrees_of_freedom=freedom_of_small_parts(*zip(*parts, strict=True)),
        strata=entries,
        method=METHODS[rule],
        caution=_caution(strata, found, plain.standard_error, error),
        cell_variances=tuple(cut.shown for cut in found),
    )


@dataclass(frozen=True)
class _Found:
    """What one stratum's cells gave."""

    mean: float
    parts: tuple[VariancePart, ...]
    shown: CellVariance
    falls_back: bool


def _stratum(stratum: StratumValues, rule: VarianceRule) -> _Found:
    if stratum.cells is None or stratum.coordinates is None or not stratum.cut:
        message = (
            f"stratum '{stratum.stratum}' has no record of its cells; use the record of the packet "
            "by which the samples were taken."
        )
        raise DesignError(message)
    numbers = [cell.number for cell in stratum.cut]
    at = np.searchsorted(numbers, stratum.cells).astype(np.int64)
    centres = np.array([(cell.easting, cell.northing) for cell in stratum.cut])
    shares = np.array([cell.share for cell in stratum.cut])
    stands = cells_joined(np.bincount(at, minlength=len(numbers)).astype(np.int64), centres)
    kept = np.unique(stands)
    joint = np.bincount(stands, shares, minlength=len(numbers))[kept].astype(np.float64)
    cell_of = np.searchsorted(kept, at).astype(np.int64)
    held = np.bincount(cell_of).astype(np.int64)
    mean = float(joint @ (np.bincount(cell_of, stratum.values) / held))
    squares = float((joint**2 / held).sum())
    shown = CellVariance(
        stratum=stratum.stratum,
        rule="pairs",
        parts=(),
        sum_of_squares=squares,
        joined=tuple(
            (numbers[k], numbers[stands[k]])
            for k in np.flatnonzero(stands != np.arange(len(stands)))
        ),
    )
    if rule == "covariance" and can_weigh_curves(stratum.values):
        return _by_curves(stratum, cell_of, joint, mean=mean, shown=shown)
    groups = neighbour_groups(held, centres[kept])
    parts = pair_parts(stratum.values, cell_of, joint, groups)
    named = tuple(
        (
            " + ".join(str(numbers[kept[k]]) for k in part.cells),
            part.variance,
            part.degrees_of_freedom,
        )
        for part in parts
    )
    return _Found(mean, parts, replace(shown, parts=named), rule == "covariance")


def _by_curves(
    stratum: StratumValues,
    cell_of: NDArray[np.int64],
    shares: NDArray[np.float64],
    *,
    mean: float,
    shown: CellVariance,
) -> _Found:
    assert stratum.coordinates is not None  # checked by the caller
    found = curve_variance(
        stratum.values, stratum.coordinates, cell_of, shares, area=stratum.measure
    )
    part = VariancePart((), found.variance, found.degrees_of_freedom)
    shown = replace(
        shown,
        rule="covariance",
        parts=(("all", found.variance, found.degrees_of_freedom),),
        practical_range_m=found.practical_range,
        nugget=found.nugget,
        sigma=found.sigma,
        inside=found.inside,
    )
    return _Found(mean, (part,), shown, falls_back=False)


def _caution(
    strata: Sequence[StratumValues], found: Sequence[_Found], plain: float, error: float
) -> str:
    """Say where the standard error is known to be off, what was joined, and the contrast."""
    shown = [cut.shown for cut in found]
    lines = []
    if any(entry.rule == "pairs" and any(" + " in p[0] for p in entry.parts) for entry in shown):
        lines.append(BETWEEN)
    if any(entry.rule == "covariance" for entry in shown):
        lines.append(MODELLED)
    back = [f"'{s.stratum}'" for s, cut in zip(strata, found, strict=True) if cut.falls_back]
    if back:
        lines.append(
            f"Curves can be weighed for 20 to 400 results that differ; {', '.join(back)} took "
            "pairs instead."
        )
    joined = sum(len(entry.joined) for entry in shown)
    if joined:
        cells = "1 cell" if joined == 1 else f"{joined} cells"
        lines.append(
            f"{cells} without a result went with the nearest cell that has one, as if they were "
            "alike."
        )
    if error > 0:
        lines.append(NO_CREDIT.format(times=plain / error))
    return " ".join(lines)
