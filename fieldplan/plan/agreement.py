"""Does a record agree with itself: campaign with its text, weights with areas, places with n."""

from math import isclose
from pathlib import Path

from fieldplan.campaign.read import inspect_text
from fieldplan.frame.model import Stratum
from fieldplan.plan.model import Plan


def disagreements(plan: Plan) -> tuple[str, ...]:
    """Say where a recorded plan contradicts itself.

    A record is sealed against slips, not against somebody who seals it again: who changes one
    part must change all the parts that follow from it, and the sheets that were handed out.

    Parameters
    ----------
    plan : Plan
        Read from a record.

    Returns
    -------
    tuple of str
        A sentence each; empty when everything agrees.
    """
    return (*_campaign(plan), *_weights(plan), *_places(plan))


def _campaign(plan: Plan) -> list[str]:
    found = inspect_text(plan.campaign_text, Path("campaign.toml")).campaign
    if found is None:
        return ["the campaign text in the record can no longer be read"]
    read = found.campaign
    names = [
        name
        for name in type(read).model_fields
        if getattr(read, name) != getattr(plan.campaign, name)
    ]
    return [f"the recorded campaign differs from its own text in [{name}]" for name in names]


def _weights(plan: Plan) -> list[str]:
    found = []
    total = sum(stratum.measure for stratum in plan.frame.strata)
    for stratum, size in zip(plan.frame.strata, plan.size.strata, strict=False):
        found_again = _measured(stratum)
        if found_again is None or not isclose(found_again, stratum.measure, rel_tol=1e-6):
            found.append(f"stratum '{stratum.name}' is recorded with a measure it does not have")
        if not (
            isclose(stratum.weight, stratum.measure / total, rel_tol=1e-9)
            and isclose(size.weight, stratum.weight, rel_tol=1e-9)
        ):
            found.append(f"stratum '{stratum.name}' is recorded with a weight it does not have")
    if [s.name for s in plan.frame.strata] != [s.stratum for s in plan.size.strata]:
        found.append("strata of the frame and of the count are not the same")
    return found


def _measured(stratum: Stratum) -> float | None:
    """Measure a stratum again: units, metres of reaches, or square metres."""
    if stratum.reaches:
        drawn = sum(float(reach.geometry.length) for reach in stratum.reaches)
        told = sum(reach.length_m for reach in stratum.reaches)
        # Ends on the millimetre grid move a reach by two millimetres at most.
        return told if abs(drawn - told) <= 0.003 * len(stratum.reaches) else drawn
    return stratum.count if stratum.geometry is None else float(stratum.geometry.area)


def _places(plan: Plan) -> list[str]:
    random = plan.locations.of_class("random")
    found = []
    for stratum in plan.frame.strata:
        here = [place.weight for place in random if place.stratum == stratum.name]
        if not isclose(sum(here), stratum.weight, rel_tol=1e-9):
            found.append(f"the places of stratum '{stratum.name}' do not carry its weight")
    return found
