"""The record: all that is needed to draw a plan again and to estimate from it, as JSON."""

import hashlib
import json
from collections.abc import Mapping
from datetime import date
from functools import cache
from pathlib import Path
from typing import Any

from pydantic import TypeAdapter, ValidationError

from fieldplan.base.document import Caution
from fieldplan.base.errors import RecordError
from fieldplan.campaign.model import Campaign
from fieldplan.design.model import Locations
from fieldplan.lab.model import Spread
from fieldplan.plan.frame_record import frame_from_record, frame_to_record
from fieldplan.plan.model import Plan
from fieldplan.samples.model import Samples
from fieldplan.sizing.model import Size

RECORD_FORMAT = 1
RECORD_PLACE = Path("office") / "record.json"
_PARTS: dict[str, Any] = {
    "spread": Spread,
    "size": Size,
    "locations": Locations,
    "samples": Samples,
    "cautions": tuple[Caution, ...],
}


@cache
def _adapter(part: str) -> TypeAdapter[Any]:
    return TypeAdapter(_PARTS[part])


def plan_to_record(plan: Plan) -> dict[str, Any]:
    """Turn a plan into plain JSON values, sealed with the SHA-256 of its content.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    dict
        ``record_format``, the parts of the plan, and ``seal``.
    """
    record: dict[str, Any] = {
        "record_format": RECORD_FORMAT,
        "fieldplan_version": plan.fieldplan_version,
        "revision": plan.revision,
        "revision_name": plan.revision_name,
        "made_on": plan.made_on.isoformat(),
        "issued_by": plan.issued_by,
        "issued_on": plan.issued_on.isoformat() if plan.issued_on else None,
        "inputs": dict(plan.inputs or {}),
        "campaign_text": plan.campaign_text,
        "campaign": plan.campaign.model_dump(mode="json"),
        "frame": frame_to_record(plan.frame),
    }
    for part in _PARTS:
        record[part] = _adapter(part).dump_python(getattr(plan, part), mode="json")
    record["seal"] = seal(record)
    return record


def seal(record: Mapping[str, Any]) -> str:
    """Hash a record's content, its own seal left out.

    Parameters
    ----------
    record : mapping
        As from ``plan_to_record``.

    Returns
    -------
    str
        SHA-256 in hexadecimal over the keys in sorted order.
    """
    content = {key: value for key, value in record.items() if key != "seal"}
    text = json.dumps(content, sort_keys=True, ensure_ascii=False, separators=(",", ":"))
    return hashlib.sha256(text.encode("utf-8", "surrogatepass")).hexdigest()


def plan_from_record(record: Mapping[str, Any], *, name: str = "record.json") -> Plan:
    """Build the plan that a record holds.

    Parameters
    ----------
    record : mapping
        As from ``plan_to_record``.
    name : str
        What to call the record in an error.

    Raises
    ------
    RecordError
        The record is of a later format, was changed by hand, or lacks a part.
    """
    if record.get("record_format") != RECORD_FORMAT:
        message = (
            f"{name} has record_format {record.get('record_format')!r}; this version reads "
            f"{RECORD_FORMAT}. Use the version of fieldplan that wrote it, or a later one."
        )
        raise RecordError(message)
    if record.get("seal") != seal(record):
        message = (
            f"{name} was changed after it was written: its seal does not fit its content. "
            "Restore it from a backup, or pack the campaign again."
        )
        raise RecordError(message)
    try:
        return _assemble(record)
    except (AttributeError, KeyError, TypeError, ValueError, ValidationError) as fault:
        message = f"{name} lacks a part of the plan ({type(fault).__name__}). Restore the packet."
        raise RecordError(message) from fault


def _assemble(record: Mapping[str, Any]) -> Plan:
    parts = {
        part: _adapter(part).validate_json(json.dumps(record[part]), strict=True) for part in _PARTS
    }
    issued_on = record["issued_on"]
    return Plan(
        campaign=Campaign.model_validate_json(json.dumps(record["campaign"])),
        campaign_text=record["campaign_text"],
        frame=frame_from_record(record["frame"]),
        revision=_whole(record["revision"]),
        made_on=date.fromisoformat(record["made_on"]),
        issued_by=record["issued_by"],
        issued_on=date.fromisoformat(issued_on) if issued_on else None,
        inputs=record["inputs"],
        fieldplan_version=record["fieldplan_version"],
        **parts,
    )


def _whole(value: object) -> int:
    """Take a whole number and nothing like one."""
    if not isinstance(value, int) or isinstance(value, bool):
        message = f"{value!r} is no revision"
        raise TypeError(message)
    return value


def read_plan(packet: Path) -> Plan:
    """Read the plan back from a packet's record.

    Parameters
    ----------
    packet : Path
        A packet folder, e.g. ``HL-r01``, or its ``record.json``.

    Returns
    -------
    Plan

    Raises
    ------
    RecordError
        There is no record there, or it is damaged.
    """
    path = packet if packet.is_file() else packet / RECORD_PLACE
    if not path.is_file():
        message = (
            f"{packet} is not a packet: it has no {RECORD_PLACE.as_posix()}. "
            "Name the folder that 'fieldplan pack' wrote, such as HL-r01."
        )
        raise RecordError(message)
    try:
        record = json.loads(path.read_text(encoding="utf-8"))
    except (OSError, ValueError, RecursionError) as fault:
        message = f"{path} cannot be read ({fault}). Restore it, or pack the campaign again."
        raise RecordError(message) from fault
    if not isinstance(record, dict):
        message = f"{path} holds no record. Restore it, or pack the campaign again."
        raise RecordError(message)
    return plan_from_record(record, name=str(path))
