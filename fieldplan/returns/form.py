"""The form that the crew fills in: one line a sample, nothing that tells which one is blind."""

import csv
import io
import re

from fieldplan.design.names import is_date_like
from fieldplan.lab.roles import IN_THE_MEAN
from fieldplan.plan.model import Plan
from fieldplan.returns.ids import plain_id
from fieldplan.samples.model import Sample

FIELD_COLUMNS = (
    "location_id", "short_name", "class", "sample_id", "taken", "collected_at", "utc_offset",
    "actual_latitude", "actual_longitude", "replaced_by", "reason", "initials", "note",
)  # fmt: skip
_ORDER = ("random", "targeted", "control", "alternate")


def field_return_blank(plan: Plan) -> str:
    """Write the crew's return, ready to fill in.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    str
        CSV with CRLF line ends: random locations first, then targeted ones, samples without a
        location, and the alternates last. The samples of one location stand in the order of
        their ids, so that the place in the list gives no duplicate away.
    """
    places = {place.location_id: place for place in plan.locations.places}
    rank = {place.location_id: number for number, place in enumerate(plan.locations.places)}

    def class_of(sample: Sample) -> str:
        return places[sample.location_id].location_class if sample.location_id else "control"

    text = io.StringIO(newline="")
    writer = csv.writer(text)
    writer.writerow(FIELD_COLUMNS)
    ordered = sorted(
        (s for s in plan.samples.samples if s.location_id in places or not s.location_id),
        key=lambda s: (_ORDER.index(class_of(s)), rank.get(s.location_id, 0), s.sample_id),
    )
    for sample in ordered:
        place = places.get(sample.location_id)
        note = "" if place or sample.role in IN_THE_MEAN else sample.role
        short_name = place.short_name if place else ""
        offset = told_offset(plan.campaign.field.utc_offset)
        cells = [sample.location_id, short_name, class_of(sample), sample.sample_id]
        cells += ["", "", offset, "", "", "", "", "", note]
        writer.writerow([as_text(cell) for cell in cells])
    return text.getvalue()


def told_offset(offset: str) -> str:
    """Open an offset with UTC, so that no spreadsheet takes it for a sum and nothing is quoted.

    Parameters
    ----------
    offset : str
        As in the campaign file.

    Examples
    --------
    >>> told_offset("+01:00"), told_offset("")
    ('UTC+01:00', '')
    """
    return f"UTC{offset}" if offset[:1] in {"+", "-", "−"} else offset


def plain_offset(written: str) -> str:
    """Read an offset with or without UTC before it.

    Parameters
    ----------
    written : str

    Examples
    --------
    >>> plain_offset("UTC+01:00"), plain_offset("'+01:00"), plain_offset("utc -3")
    ('+01:00', '+01:00', '-3')
    """
    plain = plain_id(written)
    found = re.fullmatch(r"(?:UTC|GMT)\s*([+−-].*)", plain, re.IGNORECASE)
    return found[1] if found else plain


def as_text(cell: str) -> str:
    """Put an apostrophe before what a spreadsheet would run, or turn into a date or a number.

    Parameters
    ----------
    cell : str

    Examples
    --------
    >>> as_text("=1+1"), as_text("007"), as_text("MAR-01"), as_text("MW-12")
    ("'=1+1", "'007", "'MAR-01", 'MW-12')
    """
    plain_number = re.fullmatch(r"0|[1-9]\d{0,9}", cell)
    if not cell or plain_number or (cell[0].isalpha() and not is_date_like(cell)):
        return cell
    return f"'{cell}"
