"""Planned against achieved standard error, split into parts that multiply to their ratio."""

import math
from dataclasses import dataclass

import numpy as np

from fieldplan.base.units import significant
from fieldplan.design.model import MeanEstimate
from fieldplan.estimate.planned import Planned, Target
from fieldplan.lab.words import counted, listed
from fieldplan.plan.model import Plan
from fieldplan.stats.intervals import IntervalKind, t_quantile
from fieldplan.stats.stratified import predicted_variance


@dataclass(frozen=True)
class DifferenceParts:
    """Factors whose product is achieved / planned standard error.

    Parameters
    ----------
    number : float
        From the total number of results, their shares among strata kept.
    sharing : float
        From how the results are shared among strata, with the weights these have.
    spread : float
        From the standard deviations found instead of those assumed.
    rest : float
        What the formula of the plan does not hold, such as a borrowed spread.
    """

    number: float
    sharing: float
    spread: float
    rest: float

    @property
    def ratio(self) -> float:
        """Achieved / planned standard error."""
        return self.number * self.sharing * self.spread * self.rest


def split_difference(plan: Plan, mean: MeanEstimate, *, planned: Planned) -> DifferenceParts | None:
    """Split achieved / planned standard error into number, sharing, spread and rest.

    Parameters
    ----------
    plan : Plan
    mean : MeanEstimate
    planned : Planned
        What the plan says of the same analyte.

    Returns
    -------
    DifferenceParts or None
        None where either standard error is 0, as for a census, or no precision was planned.

    Notes
    -----
    The plan's variance formula is evaluated four times, each time with one more of its inputs
    replaced by what came back: the total n, the n of each stratum, the s of each stratum. Each
    factor is the square root of the ratio of two neighbours, so that the product telescopes.
    """
    promised = planned.standard_error
    if not (promised and planned.sigmas and mean.standard_error > 0):
        return None
    sizes = {entry.stratum: entry for entry in plan.size.strata}
    found = {entry.stratum: entry for entry in mean.strata}
    names = [stratum.name for stratum in plan.frame.strata]
    weights = np.array([stratum.weight for stratum in plan.frame.strata])
    populations = [stratum.count for stratum in plan.frame.strata]
    sigmas = np.array([planned.sigmas[name] for name in names])
    achieved_sigmas = np.array([found[name].sd for name in names])
    needed = np.array([float(sizes[name].needed) for name in names])
    came = np.array([float(found[name].n) for name in names])
    scaled = needed * came.sum() / needed.sum()
    if any(n is not None and count > n for count, n in zip(scaled, populations, strict=True)):
        scaled = came

    def error(spread: np.ndarray, counts: np.ndarray) -> float:
        return math.sqrt(predicted_variance(weights, spread, counts, populations))

    ladder = [
        error(sigmas, needed),
        error(sigmas, scaled),
        error(sigmas, came),
        error(achieved_sigmas, came),
    ]
    if min(ladder) <= 0:
        return None
    return DifferenceParts(
        number=ladder[1] / ladder[0],
        sharing=ladder[2] / ladder[1],
        spread=ladder[3] / ladder[2],
        rest=ladder[0] / promised * (mean.standard_error / ladder[3]),
    )


def difference_sentences(
    plan: Plan, mean: MeanEstimate, *, planned: Planned, reach: float | None = None
) -> tuple[str, ...]:
    """Say in sentences whether the campaign kept its promise, and why not.

    Parameters
    ----------
    plan : Plan
    mean : MeanEstimate
    planned : Planned
    reach : float or None
        Half-width of the recorded interval where that is none of Student's t.

    Returns
    -------
    tuple of str
    """
    lines = [_promise(plan, mean, planned=planned)]
    lines += [
        _kept(plan, mean, target=target, unit=planned.unit, reach=reach)
        for target in planned.targets
    ]
    parts = split_difference(plan, mean, planned=planned)
    if parts is None:
        return tuple(line for line in lines if line)
    by_layout = mean.cell_variances or mean.start_variances or mean.spread_variances
    rest = "what the layout made of it" if by_layout else "a spread borrowed or planned otherwise"
    lines.append(
        f"Achieved is {_times(parts.ratio)} times planned: {_times(parts.number)} from the number "
        f"of results, times {_times(parts.sharing)} from their sharing among strata and its "
        f"weights, times {_times(parts.spread)} from the spread found"
        + (f", times {_times(parts.rest)} from {rest}." if _says(parts.rest) else ".")
    )
    lines.append(_spread_found(mean, planned))
    return tuple(line for line in lines if line)


def _times(factor: float) -> str:
    return f"{factor:.2f}" if factor < 1000 else significant(factor)


def _promise(plan: Plan, mean: MeanEstimate, *, planned: Planned) -> str:
    achieved = f"Achieved: {significant(mean.standard_error)} {planned.unit} from {mean.n}."
    results = counted(plan.size.needed, "result")
    if planned.standard_error is None:
        return (
            "No precision was planned for it, since no sigma was known; the number of "
            f"{results} was chosen for {plan.campaign.deciding_analyte.label}. {achieved}"
        )
    chosen = f", a number chosen for {plan.campaign.deciding_analyte.label}"
    return (
        f"Planned: a standard error of {significant(planned.standard_error)} {planned.unit} from "
        f"{results}{'' if planned.decides else chosen}. {achieved}"
    )


def _kept(plan: Plan, mean: MeanEstimate, *, target: Target, unit: str, reach: float | None) -> str:
    """Say whether a target was kept, by the confidence that it was set at."""
    if target.standard_error is not None:
        asked, reached = target.standard_error, mean.standard_error
    elif target.half_width is not None:
        kind: IntervalKind = plan.campaign.rules.interval
        t = t_quantile(mean.degrees_of_freedom, confidence=plan.size.confidence, kind=kind)
        asked, reached = target.half_width, t * mean.standard_error if reach is None else reach
    else:
        return ""
    kept = "kept" if reached <= asked * (1 + 1e-9) else "missed"
    share = ""
    if target.of_mean and mean.mean > 0:
        share = f", {100 * reached / mean.mean:.3g} % of the mean found"
    came = _told_apart(reached, asked)
    return f"The target, {target.words}, was {kept}: it came to {came} {unit}{share}."


def _told_apart(reached: float, asked: float) -> str:
    """Write a number with so many digits that it is not taken for the one asked for.

    Examples
    --------
    >>> _told_apart(1.4026, 1.4), _told_apart(1.098, 1.4)
    ('1.403', '1.10')
    """
    for digits in range(3, 8):
        words = significant(reached, digits)
        if words != significant(asked, digits):
            break
    return words


def _says(factor: float) -> bool:
    return abs(factor - 1) > 0.005


def _spread_found(mean: MeanEstimate, planned: Planned) -> str:
    """Name the strata whose s is a tenth or more off what was assumed, like set against like."""
    halves = planned.sigmas_at_half
    assumed = {**planned.sigmas, **halves}
    off = [entry for entry in mean.strata if entry.n > 1 and _off(entry.sd, assumed[entry.stratum])]
    if not off:
        return ""
    words = [
        f"{significant(entry.sd)} instead of {significant(assumed[entry.stratum])}"
        + (f" in {entry.stratum}" if len(mean.strata) > 1 else "")
        for entry in off
    ]
    largest = [
        f"{significant(planned.sigmas[entry.stratum])}"
        + (f" in {entry.stratum}" if len(mean.strata) > 1 else "")
        for entry in off
        if entry.stratum in halves
    ]
    said = f"The standard deviation was {listed(words)} ({planned.unit})"
    if largest:
        said += (
            "; both with non-detects at half, where planning used the largest of the pilot's "
            f"three, {listed(largest)}"
        )
    return f"{said}."


def _off(found: float, assumed: float) -> bool:
    return abs(found / assumed - 1) > 0.1
