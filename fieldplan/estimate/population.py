"""For what the mean speaks once some places could not be reached."""

from collections import Counter
from collections.abc import Sequence

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
        return f"{statement} All {planned} random locations gave a result.".strip()
    reasons = listed([f"{entry.location_id} ({entry.reason})" for entry in returns.lost])
    replaced = sum(bool(entry.replaced_by) for entry in returns.lost)
    parts = [
        statement,
        f"{len(returns.lost)} of {planned} random locations gave no result: {reasons}; "
        f"{counted(replaced, 'alternate')} stood in.",
    ]
    missed = share_not_reached(plan, returns.lost)
    if missed > 0:
        parts.append(
            f"Places that could not be sampled stand for about {100 * missed:.2g} % of the "
            "population; the mean speaks for them only if they are like the rest."
        )
    parts.append(_clustered(plan, returns.lost))
    return " ".join(part for part in parts if part)


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
