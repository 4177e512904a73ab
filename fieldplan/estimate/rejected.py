"""What the laboratory rejected, and the answer with it counted all the same."""

from collections.abc import Sequence

from fieldplan.base.errors import DesignError
from fieldplan.base.units import significant
from fieldplan.estimate.level import against_level, place_words
from fieldplan.estimate.means import Means, means_by
from fieldplan.estimate.sentences import interval_in_words
from fieldplan.lab.words import listed
from fieldplan.plan.model import Plan
from fieldplan.returns.model import LocationResult, Returns


def rejected_sentence(plan: Plan, returns: Returns, means: Means) -> str:
    """Name the results that the laboratory rejected, with the answer if they counted.

    Parameters
    ----------
    plan : Plan
    returns : Returns
    means : Means
        Without them.

    Returns
    -------
    str
        Empty where none was rejected that would enter the mean.
    """
    again = returns.with_rejected
    back = _come_back(returns, again) if again else []
    if again is None or not back:
        return ""
    before = {result.location_id: result for result in returns.results}
    names = listed([_name(result, before.get(result.location_id)) for result in back])
    said = f"Left out, since the laboratory rejected it (qualifier R): {names}."
    if len(back) > 1:
        said = said.replace("it (", "them (")
    try:
        counted = means_by(plan, again, means.rules)
    except DesignError as fault:
        return f"{said} Counted all the same, there is no answer: {' '.join(fault.problems)}"
    unit = plan.campaign.analyte_called(returns.analyte).unit
    mean = significant(counted.reported.mean)
    return (
        f"{said} Counted all the same, the mean would be {mean} {unit}, "
        f"{interval_in_words(counted.interval, unit)}{_level(plan, means, counted)}."
    )


def _come_back(returns: Returns, again: Returns) -> list[LocationResult]:
    """List the locations whose value enters the mean, or changes, with rejected results."""
    before = {result.location_id: result for result in returns.results}
    return [
        result
        for result in again.results
        if result.used and _value(before.get(result.location_id)) != _value(result)
    ]


def _value(result: LocationResult | None) -> Sequence[float] | None:
    return (result.low, result.half, result.high) if result and result.used else None


def _name(result: LocationResult, before: LocationResult | None) -> str:
    """Name the cells and samples of a location that are there only with rejected results."""
    kept = list(before.as_reported) if before else []
    cells = []
    for cell in result.as_reported:
        if cell in kept:
            kept.remove(cell)
        else:
            cells.append(f"'{cell}'")
    known = before.sample_ids if before else ()
    samples = [name for name in result.sample_ids if name not in known] or list(result.sample_ids)
    return f"{listed(cells)} of {listed(samples)} at {result.location_id}"


def _level(plan: Plan, means: Means, counted: Means) -> str:
    """Say when the rejected results decide where the interval lies against the action level."""
    level = plan.campaign.analyte_called(means.analyte).action_level
    if level is None:
        return ""
    now, then = (
        place_words(level, against_level(m.interval, m.bracket, as_bounds=m.as_bounds))
        for m in (means, counted)
    )
    return "" if now == then else f", which then {then} the action level"
