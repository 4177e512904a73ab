"""For what the mean speaks once some places could not be reached."""

import math
from collections import Counter
from collections.abc import Mapping, Sequence

from fieldplan.base.units import significant
from fieldplan.design.model import MeanEstimate
from fieldplan.lab.words import counted, listed
from fieldplan.plan.model import Plan
from fieldplan.returns.model import LostLocation, Returns

OF_THE_PLACE = frozenset({"no-access", "obstructed", "unsafe", "dry", "frozen", "no-recovery"})
"""Reasons that lie in the ground or its owner, so that a part of the population is missed."""


def share_not_reached(plan: Plan, lost: Sequence[LostLocation]) -> float:
    """Estimate the share of the population whose places could not be sampled.

    Parameters
    ----------
    plan : Plan
    lost : sequence of LostLocation
        Only losses for reasons of the place count; a broken jar misses nothing.

    Returns
    -------
    float
        Σ weight × (lost / planned) over the strata. An alternate that stands in does not bring
        back the ground that was missed.
    """
    planned = Counter(place.stratum for place in plan.locations.of_class("random"))
    missed = Counter(entry.stratum for entry in lost if entry.reason in OF_THE_PLACE)
    return sum(
        stratum.weight * missed[stratum.name] / planned[stratum.name]
        for stratum in plan.frame.strata
        if planned[stratum.name]
    )


def share_outside(plan: Plan, lost: Sequence[LostLocation]) -> dict[str, float]:
    """Give the share of each stratum's planned places that the crew found outside the population.

    Parameters
    ----------
    plan : Plan
    lost : sequence of LostLocation

    Returns
    -------
    dict of str to float
        By stratum; strata without such a place are absent.
    """
    planned = Counter(place.stratum for place in plan.locations.of_class("random"))
    outside = Counter(entry.stratum for entry in lost if entry.reason == "outside")
    return {name: number / planned[name] for name, number in outside.items()}


def mean_without(mean: MeanEstimate, outside: Mapping[str, float]) -> float | None:
    """Give the mean with the weight of each stratum cut by the share found outside.

    Parameters
    ----------
    mean : MeanEstimate
    outside : mapping of str to float
        By stratum, as from ``share_outside``.

    Returns
    -------
    float or None
        Σ W (1 − share) mean / Σ W (1 − share); None where nothing is left.

    Notes
    -----
    The estimate for a domain whose size is not known: Cochran (1977), Sampling Techniques, 3rd
    ed., sec. 5A.14.
    """
    kept = [(s.weight * (1 - outside.get(s.stratum, 0.0)), s.mean) for s in mean.strata]
    total = math.fsum(weight for weight, _ in kept)
    if total <= 0:
        return None
    return math.fsum(weight * value for weight, value in kept) / total


def outside_sentence(plan: Plan, returns: Returns, mean: MeanEstimate) -> str:
    """Say that places lay outside the population, and what that leaves out of the answer.

    Parameters
    ----------
    plan : Plan
    returns : Returns
    mean : MeanEstimate

    Returns
    -------
    str
        Empty when no place was found outside.
    """
    outside = share_outside(plan, returns.lost)
    if not outside:
        return ""
    planned = Counter(place.stratum for place in plan.locations.of_class("random"))
    found = Counter(entry.stratum for entry in returns.lost if entry.reason == "outside")
    where = listed([f"{found[name]} of {planned[name]} places of {name}" for name in outside])
    weights = {stratum.name: stratum.weight for stratum in plan.frame.strata}
    share = sum(weights[name] * part for name, part in outside.items())
    said = (
        f"The crew found {where} outside the population: about {100 * share:.2g} % of what was "
        "mapped may not belong to it. Weights, size of the population and standard error take "
        "nothing to lie outside"
    )
    moved = mean_without(mean, outside)
    if moved is None:
        return f"{said}."
    if len(mean.strata) < 2:
        return f"{said}; the mean itself does not move by it, what it speaks for is smaller."
    unit = plan.campaign.analyte_called(returns.analyte).unit
    return (
        f"{said}; with weights cut by the shares found outside, the mean would be "
        f"{significant(moved)} {unit} instead of {significant(mean.mean)} {unit}. Map the "
        "population again before the mean is used."
    )


def population_sentence(plan: Plan, returns: Returns) -> str:
    """Say what the mean speaks for, and what was lost of it.

    Parameters
    ----------
    plan : Plan
    returns : Returns

    Returns
    -------
    str
    """
    planned = len(plan.locations.of_class("random"))
    statement = " ".join(plan.frame.population.sentences[:1])
    if not returns.lost:
        return f"{statement} All {planned} {places_word(plan)} gave a result.".strip()
    reasons = listed([f"{entry.location_id} ({entry.reason})" for entry in returns.lost])
    replaced = sum(bool(entry.replaced_by) for entry in returns.lost)
    parts = [
        statement,
        f"{len(returns.lost)} of {planned} {places_word(plan)} gave no result: {reasons}"
        + (f"; {counted(replaced, 'alternate')} stood in." if not is_census(plan) else "."),
    ]
    missed = share_not_reached(plan, returns.lost)
    if missed > 0:
        parts.append(
            f"Places that could not be sampled stand for about {100 * missed:.2g} % of the "
            "population; the mean speaks for them only if they are like the rest."
        )
    parts.append(_clustered(plan, returns.lost))
    return " ".join(part for part in parts if part)


def is_census(plan: Plan) -> bool:
    """Tell whether every unit was to be visited, so that chance chose none of them."""
    return plan.campaign.design[0].layout == "census"


def places_word(plan: Plan) -> str:
    """Name the planned places: units of a census are not drawn."""
    return "units" if is_census(plan) else "random locations"


def _clustered(plan: Plan, lost: Sequence[LostLocation]) -> str:
    """Say when several losses fall into one stratum of several."""
    if len(plan.frame.strata) < 2:
        return ""
    stratum, number = Counter(entry.stratum for entry in lost).most_common(1)[0]
    if number < 2 or number < len(lost):
        return ""
    return (
        f"All {number} lie in stratum {stratum}: if its missing places differ from those "
        "reached, the mean is off by more than the interval says."
    )
