"""What the plan promised for one analyte, whether it decided n or not."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from fieldplan.lab.model import StratumSpread
from fieldplan.plan.model import Plan
from fieldplan.sizing.model import OtherPrecision, Size


@dataclass(frozen=True)
class Target:
    """A precision that was asked for: at most one of the two numbers is given, none for a budget.

    ``of_mean`` says that the campaign asked for a half-width as a share of an expected mean.
    """

    words: str
    standard_error: float | None
    half_width: float | None
    of_mean: bool = False


@dataclass(frozen=True)
class Planned:
    """What was planned for one analyte.

    Parameters
    ----------
    analyte, unit : str
    standard_error : float or None
        None where the campaign had no sigma for it.
    sigmas : mapping of str to float
        By stratum, as used for planning; empty where one was missing.
    targets : tuple of Target
        Its own, the deciding one first.
    decides : bool
        The number of locations was chosen for it.
    sigmas_at_half : mapping of str to float
        Of a pilot with non-detects at half their limit, where planning used another of the three.
    """

    analyte: str
    unit: str
    standard_error: float | None
    sigmas: Mapping[str, float]
    targets: tuple[Target, ...]
    decides: bool
    sigmas_at_half: Mapping[str, float]


def planned_for(plan: Plan, analyte: str) -> Planned:
    """Look up what the plan says of one analyte.

    Parameters
    ----------
    plan : Plan
    analyte : str
        Its id.

    Returns
    -------
    Planned

    Examples
    --------
    >>> from tests.factories import make_plan
    >>> planned = planned_for(make_plan(), "lead")
    >>> planned.standard_error, planned.sigmas, planned.decides
    (8.8, {'meadow': 18.0, 'yard': 45.0}, True)
    """
    unit = plan.campaign.analyte_called(analyte).unit
    entries = [other for other in plan.size.others if other.analyte == analyte]
    targets = [_target(plan, other) for other in entries if other.target]
    if analyte == plan.campaign.deciding_analyte.id:
        size = plan.size
        sigmas = {s.stratum: s.sigma for s in size.strata if s.sigma is not None}
        own = (_target(plan, size),) if size.question == "mean" else ()
        return Planned(
            analyte,
            unit,
            size.standard_error,
            sigmas,
            (*own, *targets),
            decides=True,
            sigmas_at_half=_at_half(plan.spread.strata),
        )
    spreads = [entry for entry in plan.spread.others if entry.analyte == analyte]
    known = {entry.stratum: entry.sigma for entry in spreads}
    complete = all(stratum.name in known for stratum in plan.frame.strata)
    error = next((other.standard_error for other in entries), None)
    return Planned(
        analyte,
        unit,
        error,
        known if complete else {},
        tuple(targets),
        decides=False,
        sigmas_at_half=_at_half(spreads),
    )


def _at_half(spreads: Iterable[StratumSpread]) -> dict[str, float]:
    """Give s at half the limit where another s, the largest of the three, sized the campaign."""
    return {
        entry.stratum: entry.sigma_at_half
        for entry in spreads
        if entry.sigma_at_half is not None and entry.sigma_at_half != entry.sigma
    }


def _target(plan: Plan, found: Size | OtherPrecision) -> Target:
    """Give a target as it was asked for: a half-width is not judged by a standard error.

    A plan holds the standard error that a half-width amounts to at its own n beside it.
    """
    if found.target_half_width is None:
        return Target(found.target, found.target_standard_error, None)
    deciding = plan.campaign.deciding_analyte.id
    of_mean = any(
        objective.relative_half_width is not None
        for objective in plan.campaign.objective
        if (objective.analyte or deciding) == found.analyte
    )
    return Target(found.target, None, found.target_half_width, of_mean)
