"""A campaign that is not whole yet, as far as it is known: enough to look at its files."""

import json
from typing import Any

from pydantic import BaseModel, ValidationError

from fieldplan.campaign.model import Campaign, ReadCampaign
from fieldplan.campaign.read import Inspection
from fieldplan.campaign.screen import is_fill_in
from fieldplan.campaign.shape import shapes

_STAND_INS: dict[str, Any] = {
    "format": 1,
    "plan.id": "FILL-IN",
    "analyte.id": "FILL-IN",
    "frame.kind": "area",
    "design.layout": "stratified",
    "objective.question": "mean",
    "objective.upper_share.share": 0.95,
    "objective.mean_and_background.difference": 1.0,
    "objective.mean_and_background.assume": "at-background",
    "objective.mean_and_background.alpha": 0.05,
    "objective.mean_and_background.beta": 0.2,
    "qc.kind": "field duplicate",
    "clearance.given_on": "2000-01-01",
    "clearance.expires_on": "2000-01-01",
    "draw.seed": 0,
}
"""What stands for a value that is needed and open; none of it reaches a plan."""

_MEMBERS = {"frame.exclusion": ("file", "buffer_m"), "targeted": ("file",)}
"""Tables that are left out whole while one of these keys is open."""


def draft(inspection: Inspection) -> ReadCampaign | None:
    """Return what is known of a campaign that may be incomplete.

    Parameters
    ----------
    inspection : Inspection
        From ``inspect_campaign``.

    Returns
    -------
    ReadCampaign or None
        The campaign itself when it is whole. Else one whose open values are left out, or hold a
        stand-in where the models need one: good for reading the files that it names and for
        nothing else. None when something is typed wrong.
    """
    if inspection.campaign is not None or inspection.problems:
        return inspection.campaign
    known = _known(inspection.data, Campaign, "")
    try:
        campaign = Campaign.model_validate_json(json.dumps(known))
    except ValidationError:
        return None
    return ReadCampaign(campaign=campaign, path=inspection.path, text=inspection.text)


def _known(table: dict[str, Any], model: type[BaseModel], name: str) -> dict[str, Any]:
    """Copy a table without what is open."""
    known: dict[str, Any] = {}
    for key, shape in shapes(model).items():
        if key not in table:
            continue
        value, dotted = table[key], f"{name}.{key}".lstrip(".")
        if is_fill_in(value):
            if model.model_fields[key].is_required():
                known[key] = _STAND_INS.get(dotted, value)
        elif shape.model is not None and isinstance(value, list):
            members = [m for m in value if not _left_out(m, _MEMBERS.get(dotted, ()))]
            known[key] = [_known(member, shape.model, dotted) for member in members]
        elif shape.model is not None:
            known[key] = _known(value, shape.model, dotted)
        else:
            known[key] = _without_open(value)
    return known


def _left_out(member: dict[str, Any], keys: tuple[str, ...]) -> bool:
    return any(is_fill_in(member.get(key)) for key in keys)


def _without_open(value: Any) -> Any:
    """Drop the open members of a list or a mapping."""
    if isinstance(value, dict):
        return {key: item for key, item in value.items() if not is_fill_in(item)}
    if isinstance(value, list):
        return [item for item in value if not is_fill_in(item)]
    return value
